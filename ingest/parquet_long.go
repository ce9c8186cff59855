package ingest

import (
	"errors"
	"math"
)

var errUneven = errors.New("its columns have different numbers of rows")

// isLong reports whether the columns are those of a narrow file, one row a reading,
// and sets long: a text column of names and one column of values, by their names,
// or because there is nothing else beside the time.
func (sh *parquetShape) isLong() bool {
	const most = 12 // columns
	if len(sh.header) > most {
		return false
	}
	l := longShape{point: -1, value: -1, status: -1, unit: -1, equipment: -1}
	var texts, numbers []int
	for c, h := range sh.header {
		if c == sh.timeCol || c == sh.clock || !sh.usable[c] {
			continue
		}
		head := foldHead(h)
		switch {
		case valueHeads[head] && l.value < 0:
			l.value = c
		case sh.text[c] && head != "unit" && unitHeads[head]:
			l.unit = c
		case sh.text[c] && statusHeads[head]:
			l.status = c
		case sh.text[c] && equipmentHeads[head]:
			l.equipment = c
		case sh.text[c] && pointHeads[head]:
			l.point = c
		case sh.text[c]:
			texts = append(texts, c)
		default:
			numbers = append(numbers, c)
		}
	}
	if l.value < 0 && len(numbers) == 1 {
		l.value = numbers[0]
	}
	if l.point < 0 && len(texts) == 1 && len(numbers) <= 1 && l.value >= 0 {
		l.point = texts[0]
	}
	if l.point < 0 || l.value < 0 {
		return false
	}
	sh.long = &parquetLong{longShape: l}
	return true
}

// points reads, group by group, the number of each row's point in the shape's names;
// where grow is set, names that are new are added.
func (p *parquetReader) points(plain, equipment, keys *interner, grow bool) ([]float64, error) {
	l := p.sh.long
	size := min(p.rows(), 1<<20)
	idx, err := p.column(l.point, make([]float64, 0, size), p.interned(plain))
	if err != nil {
		return nil, err
	}
	var eq []float64
	if l.equipment >= 0 {
		if eq, err = p.column(l.equipment, make([]float64, 0, size), p.interned(equipment)); err != nil {
			return nil, err
		}
		if len(eq) != len(idx) {
			return nil, errUneven
		}
	}
	type pair struct{ e, n int }
	seen := map[pair]float64{}
	for i, x := range idx {
		if x != x || x < 0 {
			idx[i] = -1
			continue
		}
		k := pair{-1, int(x)}
		if eq != nil && eq[i] >= 0 {
			k.e = int(eq[i])
		}
		n, ok := seen[k]
		if !ok {
			key := plain.list[k.n]
			if k.e >= 0 && equipment.list[k.e] != "" {
				key = equipment.list[k.e] + "." + key
			}
			n = -1
			if at, known := keys.index[key]; known {
				n = float64(at)
			} else if grow && key != "" {
				n = float64(keys.number([]byte(key)))
			}
			seen[k] = n
		}
		idx[i] = n
	}
	return idx, nil
}

// scanLong lists the points of the file with a sample of their values.
func (p *parquetReader) scanLong() error {
	l := p.sh.long
	all := p.groups
	var plain, equipment, keys, units interner
	for _, g := range all {
		p.groups = []int{g}
		idx, err := p.points(&plain, &equipment, &keys, true)
		if err != nil {
			return err
		}
		p.bad = badCell{}
		v, err := p.column(l.value, make([]float64, 0, len(idx)), p.values)
		if err != nil {
			return err
		}
		var u []float64
		if l.unit >= 0 {
			if u, err = p.column(l.unit, make([]float64, 0, len(idx)), p.interned(&units)); err != nil {
				return err
			}
		}
		if len(v) != len(idx) || u != nil && len(u) != len(idx) {
			return errUneven
		}
		for len(l.samples) < len(keys.list) {
			l.samples, l.units = append(l.samples, sample{twoState: true}), append(l.units, "")
		}
		for i, x := range idx {
			if x < 0 {
				continue
			}
			sm := &l.samples[int(x)]
			if sm.n < headRows {
				sm.value(v[i])
			}
			if u != nil && u[i] >= 0 && l.units[int(x)] == "" {
				l.units[int(x)] = units.list[int(u[i])]
			}
		}
	}
	p.groups = all
	l.names = keys.list
	l.index = map[string]int32{}
	for i, n := range l.names {
		l.index[n] = int32(i)
		if l.samples[i].n == 0 {
			l.samples[i].twoState = false
		}
	}
	if len(l.names) == 0 {
		return errNoRows
	}
	return nil
}

// long reads the points of a narrow file listed in wanted, whose columns are indexes
// into the shape's names.
func (p *parquetReader) long(wanted []want) (*rawTable, error) {
	t := &rawTable{unit: make([]string, len(wanted)), pruned: len(p.groups) == 0}
	l := p.sh.long
	slot := make([]int32, len(l.names))
	for i := range slot {
		slot[i] = -1
	}
	for s, w := range wanted {
		slot[w.col] = int32(s)
	}
	keys := interner{index: map[string]int{}, list: l.names}
	for i, n := range l.names {
		keys.index[n] = i
	}
	parts := make([]rawPart, len(wanted))
	for s := range parts {
		parts[s] = rawPart{slots: []int{s}, cols: make([][]float64, 1)}
	}
	var plain, equipment, texts interner
	all := p.groups
	for _, g := range all {
		p.groups = []int{g}
		stamps, err := p.stamps()
		if err != nil {
			return nil, err
		}
		idx, err := p.points(&plain, &equipment, &keys, false)
		if err != nil {
			return nil, err
		}
		p.bad = badCell{}
		v, err := p.column(l.value, make([]float64, 0, len(idx)), p.values)
		if err != nil {
			return nil, err
		}
		p.reportBad(t, p.sh.header[l.value])
		var st []float64
		if l.status >= 0 {
			if st, err = p.column(l.status, make([]float64, 0, len(idx)), p.interned(&texts)); err != nil {
				return nil, err
			}
		}
		if len(v) != len(idx) || len(stamps) != len(idx) || st != nil && len(st) != len(idx) {
			return nil, errUneven
		}
		for i, x := range idx {
			switch {
			case x < 0:
				t.skip(skipUnnamed)
				continue
			case stamps[i] != stamps[i]:
				t.skip(skipBadTime)
				continue
			}
			s := slot[int(x)]
			if s < 0 {
				continue
			}
			if st != nil {
				texts.judge(t, wanted[s], l.names[int(x)], st[i:i+1], v[i:i+1])
			}
			parts[s].ms = append(parts[s].ms, int64(stamps[i]))
			parts[s].cols[0] = append(parts[s].cols[0], v[i])
			t.rows++
		}
		if t.zoned, err = p.settleGroup(parts); err != nil {
			return nil, err
		}
	}
	p.groups = all
	t.parts = parts
	return t, nil
}

// settleGroup says whether the stamps are UTC. Dates written as text that can be
// read two ways are refused in a long Parquet file: they are settled by the run of
// time, which a row group need not show.
func (p *parquetReader) settleGroup([]rawPart) (zoned bool, err error) {
	if !p.text.started {
		return p.sh.timeIs.zoned, nil
	}
	if p.text.slashed && p.text.order == orderUnknown {
		return false, errOrder
	}
	return p.text.zoned, nil
}

// value adds one reading to the sample.
func (sm *sample) value(v float64) {
	if math.IsNaN(v) {
		return
	}
	if sm.n == 0 || v < sm.lo {
		sm.lo = v
	}
	if sm.n == 0 || v > sm.hi {
		sm.hi = v
	}
	if v != 0 && v != 1 {
		sm.twoState = false
	}
	sm.n++
}
