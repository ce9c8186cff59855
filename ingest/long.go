package ingest

import (
	"context"
	"io"
	"slices"
	"strings"

	"dewledger/ingest/trend"
)

// maxPoints bounds the points of one long file.
const maxPoints = 1 << 16

// longShape says how a narrow file, one row a reading, is laid out. Its points take
// the place of columns: header, units and samples of the source are by point.
type longShape struct {
	point, value            int // columns
	status, unit, equipment int // -1: none
	names                   []string
	rows                    []int // by point, as counted in a first pass
	index                   map[string]int32
}

var (
	pointHeads = headWords("point", "pointname", "point name", "pointid", "name", "tag", "tagname", "trend", "trendname", "sensor", "sensorid", "sensorname", "variable", "parameter", "object", "objectname", "series", "channel", "signal", "id", "metric", "label", "item", "datapoint", "history", "historyname", "log",
		"datenpunkt", "messstelle", "messpunkt", "punkt", "bezeichnung", "nom", "point de mesure", "punto", "nombre")
	valueHeads     = headWords("value", "val", "reading", "presentvalue", "pv", "data", "avg", "average", "mean", "wert", "messwert", "valeur", "valor", "medida")
	statusHeads    = headWords("status", "quality", "flag", "flags", "statusflags", "state", "reliability", "qualität", "statut", "état", "calidad", "estado")
	unitHeads      = headWords("unit", "units", "uom", "unitofmeasure", "measure", "einheit", "unité", "unités", "unidad", "unidades")
	equipmentHeads = headWords("equipment", "equip", "unitname", "unit", "device", "asset", "ahu", "controller", "system", "anlage", "gerät", "équipement", "equipo")
)

func headWords(words ...string) map[string]bool {
	m := map[string]bool{}
	for _, w := range words {
		m[foldHead(w)] = true
	}
	return m
}

func foldHead(s string) string {
	return strings.Map(func(r rune) rune {
		if strings.ContainsRune(" _-./()[]", r) {
			return -1
		}
		return r
	}, strings.ToLower(s))
}

// isLong reads from the sample of a file's rows whether it is a narrow one, nil
// where it is not: one column of names, one of values, and at most a status, a unit
// and the equipment beside them.
func isLong(sh *shape) *longShape {
	const most = 12 // columns
	if len(sh.header) < 3 || len(sh.header) > most || len(sh.rows) == 0 {
		return nil
	}
	l := &longShape{point: -1, value: -1, status: -1, unit: -1, equipment: -1}
	var texts, numbers []int
	for c := range sh.header {
		if c == sh.timeCol || c == sh.clockCol {
			continue
		}
		digits, known, filled, measures := 0, 0, 0, 0
		for _, row := range sh.rows {
			if row[c] == "" {
				continue
			}
			filled++
			x := parseCell([]byte(row[c]), sh.mark)
			if x.val == x.val && !x.word {
				digits++
			}
			if x.val == x.val || reasonOf(x.val) != trend.NotNumeric {
				known++
			}
			if knownUnit(row[c]) {
				measures++
			}
		}
		head := foldHead(sh.header[c])
		text := filled > 0 && known*5 < filled
		switch {
		case valueHeads[head] && known*2 >= filled && l.value < 0:
			l.value = c
		case unitHeads[head] && measures*2 > filled && filled > 0:
			l.unit = c
		case statusHeads[head] && digits*2 < max(filled, 1):
			l.status = c
		case equipmentHeads[head] && text && l.equipment < 0:
			l.equipment = c
		case pointHeads[head] && text && l.point < 0:
			l.point = c
		case text:
			texts = append(texts, c)
		case filled > 0 && digits*2 > filled:
			numbers = append(numbers, c)
		}
	}
	if l.point >= 0 && l.value >= 0 {
		return l
	}
	// Without such names, the rows must show it: several names at one time, or time
	// that begins anew with another name.
	if l.value < 0 {
		if len(numbers) != 1 {
			return nil
		}
		l.value = numbers[0]
	}
	if l.point < 0 {
		for _, c := range texts {
			if namesRows(sh, c) && (l.point < 0 || distinct(sh.rows, c) > distinct(sh.rows, l.point)) {
				l.point = c
			}
		}
	}
	if l.point < 0 {
		return nil
	}
	return l
}

func distinct(rows [][]string, c int) int {
	m := map[string]bool{}
	for _, r := range rows {
		m[r[c]] = true
	}
	return len(m)
}

func namesRows(sh *shape, c int) bool {
	if distinct(sh.rows, c) < 2 {
		return false
	}
	stamp := func(r []string) string {
		if sh.clockCol >= 0 {
			return r[sh.timeCol] + " " + r[sh.clockCol]
		}
		return r[sh.timeCol]
	}
	seen := map[string]string{} // time to name
	for _, r := range sh.rows {
		if name, ok := seen[stamp(r)]; ok && name != r[c] {
			return true
		}
		seen[stamp(r)] = r[c]
	}
	return false
}

// longCells is the cells of a row of a long file that matter.
type longCells struct {
	of    *shape
	last  int
	cell  [][]byte // by column
	guess [][]byte // by column: what this row probably holds, as the stamp of the row before
}

func newLongCells(sh *shape) longCells {
	l := sh.long
	last := max(sh.timeCol, sh.clockCol, l.point, l.value, l.status, l.unit, l.equipment)
	return longCells{of: sh, last: last, cell: make([][]byte, last+1), guess: make([][]byte, last+1)}
}

// split parts a record; ok is false where it has too few cells, open where a quote
// does not close.
func (c *longCells) split(line []byte) (ok, open bool) {
	i, delim := 0, c.of.delim
	for col := 0; ; col++ {
		var body []byte
		next := i
		if i < len(line) && (line[i] == '"' || line[i] == ' ') {
			if body, next = cellBytes(line, i, delim); next < 0 {
				return false, true
			}
		} else {
			// A guess that holds spares the search for the cell's end.
			if g := c.guess[col]; len(g) > 0 && i+len(g) < len(line) && line[i+len(g)] == delim && string(line[i:i+len(g)]) == string(g) {
				next = i + len(g)
			} else {
				for next < len(line) && line[next] != delim {
					next++
				}
			}
			body = line[i:next]
		}
		c.cell[col] = body
		if col == c.last {
			return true, false
		}
		if next >= len(line) {
			for col++; col <= c.last; col++ { // blank cells left out
				c.cell[col] = nil
			}
			return c.cell[c.of.long.point] != nil && c.cell[c.of.timeCol] != nil && c.cell[c.of.long.value] != nil, false
		}
		i = next + 1
	}
}

// key is the point's name, with its equipment's before it.
func (c *longCells) key(buf []byte) []byte {
	l := c.of.long
	name := trimBlank(c.cell[l.point])
	if l.equipment < 0 {
		return name
	}
	e := trimBlank(c.cell[l.equipment])
	if len(e) == 0 {
		return name
	}
	return append(append(append(buf[:0], e...), '.'), name...)
}

// longScanner finds the points of a long file.
type longScanner struct {
	lineReader
	longCells
	buf     []byte
	samples []sample
	units   []string
	last    int32
	over    int
}

// scanLong lists the points of a long file, in the order in which they come, with
// their units and a sample of their values.
func scanLong(ctx context.Context, r io.Reader, name string, sh *shape, notes *notebook) (units []string, samples []sample, err error) {
	sh.long.index = map[string]int32{}
	s := &longScanner{lineReader: lineReader{name: name, sh: sh, t: &rawTable{}}, longCells: newLongCells(sh), last: -1}
	if err := s.run(ctx, r, s); err != nil {
		return nil, nil, err
	}
	if s.over > 0 {
		notes.addCount(s.over, "points-left-out", name, "", 0, "the file names more than %d points; rows of those beyond are left out", maxPoints)
	}
	for i := range s.samples {
		if s.samples[i].n == 0 {
			s.samples[i].twoState = false
		}
	}
	return s.units, s.samples, nil
}

func (s *longScanner) row(line []byte) bool {
	ok, open := s.split(line)
	if open {
		return false
	}
	if !ok {
		return true // counted when it is read
	}
	key := s.key(s.buf)
	if s.sh.long.equipment >= 0 {
		s.buf = key
	}
	l := s.sh.long
	i := s.last
	if i < 0 || l.names[i] != string(key) {
		var known bool
		if i, known = l.index[string(key)]; !known {
			if len(key) == 0 || len(l.names) >= maxPoints || len(key) > maxHeader || s.isHeader() {
				s.over += b2i(len(l.names) >= maxPoints)
				return true
			}
			i = int32(len(l.names))
			l.names = append(l.names, string(key))
			l.index[l.names[i]] = i
			l.rows = append(l.rows, 0)
			s.samples = append(s.samples, sample{twoState: true})
			s.units = append(s.units, "")
		}
		s.last = i
	}
	l.rows[i]++
	if sm := &s.samples[i]; sm.n < headRows {
		sm.add(s.cell[l.value], s.sh.mark)
		if l.unit >= 0 && s.units[i] == "" {
			s.units[i] = strings.TrimSpace(toUTF8(s.cell[l.unit]))
		}
	}
	return true
}

// isHeader reports whether the row at hand is the header again.
func (c *longCells) isHeader() bool {
	for _, col := range []int{c.of.long.point, c.of.long.value, c.of.timeCol} {
		if !strings.EqualFold(string(trimBlank(c.cell[col])), c.of.header[col]) {
			return false
		}
	}
	return true
}

func b2i(b bool) int {
	if b {
		return 1
	}
	return 0
}

// longReader reads the wanted points of a long file.
type longReader struct {
	lineReader
	longCells
	buf    []byte
	wanted []want
	slot   []int32 // by point, -1 not wanted
	series []series
	next   []int32 // by point: the one that last came after it
	prev   int32
	marks  []badCell
	flag   statusFlag
}

// readLong reads the points of r listed in wanted, whose columns are indexes into
// the shape's names.
func readLong(ctx context.Context, r io.Reader, name string, sh *shape, wanted []want, abbr map[string]int64) (*rawTable, error) {
	t := &rawTable{unit: make([]string, len(wanted))}
	c := &longReader{lineReader: lineReader{name: name, sh: sh, t: t}, longCells: newLongCells(sh), wanted: wanted,
		slot: make([]int32, len(sh.long.names)), next: make([]int32, len(sh.long.names)), series: make([]series, len(wanted)), marks: make([]badCell, len(wanted)), prev: -1}
	c.stamps.order, c.stamps.abbr = sh.order, abbr
	for i := range c.slot {
		c.slot[i], c.next[i] = -1, -1
	}
	for s, w := range wanted {
		c.slot[w.col] = int32(s)
		n := sh.long.rows[w.col]
		c.series[s] = series{make([]int64, 0, n), make([]float64, 0, n)}
	}
	if err := c.run(ctx, r, c); err != nil {
		return nil, err
	}
	longest := 0
	for s := range c.series {
		if len(c.series[s].ms) > len(c.series[longest].ms) {
			longest = s
		}
	}
	swap, err := c.stamps.settle(c.series[longest].ms)
	if err != nil {
		return nil, err
	}
	t.zoned = c.stamps.zoned
	for s := range c.series {
		if swap {
			swapAll(c.series[s].ms)
		}
		t.parts = append(t.parts, rawPart{slots: []int{s}, ms: c.series[s].ms, cols: [][]float64{c.series[s].val}})
	}
	for s, m := range c.marks {
		if m.count > 0 {
			t.notes.addCount(m.count, "bad-cell", name, sh.long.names[wanted[s].col], m.line, "%s is not a reading; the cell is left out as %v", quote(m.text), m.why)
		}
	}
	return t, nil
}

func (c *longReader) row(line []byte) bool {
	ok, open := c.split(line)
	if open {
		return false
	}
	if !ok {
		n, _, _ := countCells(line, c.sh.delim)
		c.ragged(n, len(c.sh.header))
		return true
	}
	l := c.sh.long
	if at := c.sh.timeCol; string(c.guess[at]) != string(c.cell[at]) {
		c.guess[at] = append(c.guess[at][:0], c.cell[at]...)
	}
	key := c.key(c.buf)
	if l.equipment >= 0 {
		c.buf = key
	}
	i := int32(-1)
	if c.prev >= 0 { // exports list their points in turn, or one after another
		if n := c.next[c.prev]; n >= 0 && l.names[n] == string(key) {
			i = n
		}
	}
	if i < 0 {
		var known bool
		if i, known = l.index[string(key)]; !known {
			if c.isHeader() {
				c.t.skip(skipHeader)
				c.t.notes.add("header-repeated", c.name, "", c.line, "the header stands again between the rows")
			} else {
				c.t.skip(skipUnnamed)
			}
			return true
		}
		if c.prev >= 0 {
			c.next[c.prev] = i
		}
	}
	c.prev = i
	if n := c.next[i]; n >= 0 && l.equipment < 0 {
		c.guess[l.point] = append(c.guess[l.point][:0], l.names[n]...)
	}
	slot := c.slot[i]
	if slot < 0 {
		return true
	}
	var clock []byte
	if c.sh.clockCol >= 0 {
		clock = c.cell[c.sh.clockCol]
	}
	ms, ok := c.stamp(c.cell[c.sh.timeCol], clock, c.sh.clockCol >= 0)
	if !ok {
		c.badTime(c.cell[c.sh.timeCol], c.sh.header[c.sh.timeCol])
		return true
	}
	if c.stamps.turned() {
		for s := range c.series {
			swapAll(c.series[s].ms)
		}
	}
	body := c.cell[l.value]
	v, end := cellNumber(body, 0, 0, c.sh.mark)
	if end != len(body) {
		v = c.slow(int(slot), body)
	}
	if l.status >= 0 {
		v = c.judged(int(slot), v)
	}
	s := &c.series[slot]
	s.ms, s.val = append(s.ms, ms), append(s.val, v)
	c.t.rows++
	return true
}

func (c *longReader) slow(slot int, body []byte) float64 {
	x := parseCell(body, c.sh.mark)
	if x.word && c.wanted[slot].quantity {
		x.val = missing(trend.NotNumeric)
	}
	if x.unit != nil && c.t.unit[slot] == "" {
		c.t.unit[slot] = toUTF8(x.unit)
	}
	if x.val != x.val && !isDisabledWord(x.val) {
		if why := reasonOf(x.val); why != trend.Gap {
			m := &c.marks[slot]
			if m.count == 0 {
				m.line, m.text, m.why = c.line, toUTF8(trimBlank(body)), why
			}
			m.count++
		}
	}
	return x.val
}

// judged is the reading, or why its status says that it is none.
func (c *longReader) judged(slot int, v float64) float64 {
	text := c.cell[c.sh.long.status]
	name := c.sh.long.names[c.wanted[slot].col]
	if string(text) != c.flag.seen {
		c.flag.seen = string(text)
		c.flag.why, c.flag.known = quality(toUTF8(text))
		if !c.flag.known {
			c.t.notes.add("status-unknown", c.name, "", c.line, "what %s says of a reading is not known; the reading is taken for good", quote(c.flag.seen))
		}
	}
	switch {
	case c.flag.why == trend.Present:
		return v
	case c.flag.why == trend.Overridden && c.wanted[slot].output:
		c.t.notes.add("overridden", c.name, name, c.line, "the command was set by hand; it is what the equipment got, and is used")
		return v
	}
	c.t.notes.add("status-"+c.flag.why.String(), c.name, name, c.line, "the export marks readings %s; they are left out as %v", quote(toUTF8(text)), c.flag.why)
	return missing(c.flag.why)
}

// statusColumns pairs the columns of a wide file with those that say how good their
// readings are: "SAT" with "SAT Status". nil where there are none. Such a column has
// words in it and no numbers.
func statusColumns(header []string, rows [][]string, mark byte) []int {
	var out []int
	for c, h := range header {
		base, ok := statusBase(h)
		if !ok {
			continue
		}
		of := slices.IndexFunc(header, func(o string) bool {
			name, _ := splitHeaderUnit(o)
			return strings.EqualFold(o, base) || strings.EqualFold(name, base) || strings.EqualFold(strings.TrimRight(foldHead(o), "value"), foldHead(base)) && foldHead(o) == foldHead(base)+"value"
		})
		if of < 0 && (base == "" && c > 0) { // "Status" alone belongs to the column before it
			of = c - 1
		}
		if of < 0 || of == c {
			continue
		}
		known, filled := 0, 0
		for _, r := range rows {
			if r[c] == "" {
				continue
			}
			filled++
			x := parseCell([]byte(r[c]), mark)
			if _, k := quality(r[c]); k && !(x.val == x.val && !x.word) {
				known++
			}
		}
		if filled > 0 && known*2 <= filled {
			continue
		}
		if out == nil {
			out = make([]int, len(header))
			for i := range out {
				out[i] = -1
			}
		}
		out[of] = c
	}
	return out
}

// statusBase is the name of the column that a status column speaks of.
func statusBase(h string) (base string, ok bool) {
	low := strings.ToLower(strings.TrimRight(strings.TrimSpace(h), ")]"))
	for _, w := range []string{"status flags", "statusflags", "status", "quality", "flags", "flag", "reliability", "state", "qualität", "statut", "estado"} {
		if !strings.HasSuffix(low, w) {
			continue
		}
		rest := strings.TrimRight(h[:len(low)-len(w)], " ._-:([/,")
		if rest == h[:len(low)-len(w)] && rest != "" {
			return "", false // "runstatus" is a word of its own
		}
		return strings.TrimSpace(rest), true
	}
	return "", false
}
