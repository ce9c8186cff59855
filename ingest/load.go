package ingest

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"
	"time"

	"dewledger/ingest/trend"
)

// Source is a file as it was read.
type Source struct {
	Name    string
	Bytes   int64
	SHA256  string
	Rows    int            // used
	Skipped map[string]int // rows left out, by reason
}

// loaded is points that share their stamps, in UTC, ascending.
type loaded struct {
	binds   []int // of the plan
	ms      []int64
	cols    [][]float64
	unit    []string // units that the cells carried
	step    time.Duration
	regular bool // logged at that step, not on change
}

// fileTable is a file of a unit as it was read.
type fileTable struct {
	file  *source
	binds []int // of the plan, by slot
	*rawTable
}

// Load reads the data of unit i: parses, converts, aligns. Its error is a
// *UnitError, or the context's. The sources are also given where it fails, as
// far as they were read.
func (r *Result) Load(ctx context.Context, i int) (*trend.Unit, []Source, error) {
	if i < 0 || i >= len(r.Units) {
		panic("ingest: Load: no such unit")
	}
	us, plan := &r.Units[i], &r.plans[i]
	if us.Err != nil {
		return nil, nil, us.Err
	}
	u := &trend.Unit{Name: us.Name, Site: r.cfg.site, Plant: us.Plant}
	var notes notebook
	notes.merge(us.Notes)
	var sources []Source
	var tables []fileTable
	var failed error
	for _, fi := range plan.files {
		t, src, err := r.readFile(ctx, fi, plan)
		if ctx.Err() != nil {
			return nil, sources, ctx.Err()
		}
		if src.Name != "" {
			sources = append(sources, src)
		}
		if err != nil {
			err = &UnitError{Unit: us.Name, File: r.files[fi].ref.name, Msg: "cannot be read", Err: err, Hint: hintFor(err)}
			if failed == nil {
				failed = err
			}
			notes.add("file-unreadable", r.files[fi].ref.name, "", 0, "the file is left out: %v", errors.Unwrap(err))
			continue
		}
		if t != nil {
			tables = append(tables, *t)
		}
	}
	files := r.inUTC(tables, &notes)
	if len(files) == 0 {
		switch {
		case failed != nil:
		case slices.ContainsFunc(tables, func(t fileTable) bool { return t.pruned }):
			failed = errPeriod(us.Name)
		default:
			failed = &UnitError{Unit: us.Name, Msg: "it has no data", Hint: "check the trend files"}
		}
		return nil, sources, failed
	}
	if err := r.axis(u, files, &notes); err != nil {
		return nil, sources, err
	}
	r.columns(u, plan, files, &notes)
	if len(u.Roles()) == 0 {
		return nil, sources, &UnitError{Unit: us.Name, File: us.Files[0].Name, Msg: "no column has a value that can be used",
			Hint: "the notes say why each was left out; state units of measure in points.csv"}
	}
	if u.Plant.TrainAssumed {
		u.Plant.Train = assumeTrain(u)
	}
	sortNotes(notes.list)
	u.Notes = notes.list
	return u, sources, nil
}

func errPeriod(unit string) error {
	return &UnitError{Unit: unit, Msg: "it has no data between --from and --to", Hint: "widen the period; the notes name the files"}
}

// readFile reads the columns of one file that the plan asks for; nil where it asks
// for none.
func (r *Result) readFile(ctx context.Context, fi int, plan *unitPlan) (*fileTable, Source, error) {
	f := r.files[fi]
	t := &fileTable{file: f}
	var wanted []want
	for k, b := range plan.binds {
		if b.file != fi {
			continue
		}
		w := want{col: b.col, status: -1}
		if f.status != nil {
			w.status = f.status[b.col]
		}
		switch b.role.Kind() {
		case trend.Switch:
			w.output = true
		case trend.Position:
			w.output = true
		default:
			w.quantity = true
			w.output = !b.role.Analogue() && b.role.Station() == trend.NoStation
		}
		t.binds = append(t.binds, k)
		wanted = append(wanted, w)
	}
	if len(wanted) == 0 {
		return nil, Source{}, nil
	}
	raw, src, err := f.read(ctx, wanted, r.cfg.abbr, r.from, r.to)
	if err != nil {
		return nil, src, err
	}
	t.rawTable = raw
	if raw.rows == 0 && !raw.pruned {
		return nil, src, errNoRows
	}
	return t, src, nil
}

// inUTC brings the tables' stamps to UTC and to order, and cuts them to the period.
func (r *Result) inUTC(tables []fileTable, notes *notebook) []loaded {
	for i := range tables {
		t := &tables[i]
		for _, n := range t.notes.list {
			n.File = t.file.ref.name
			notes.merge([]trend.Note{n})
		}
		turned := false
		for k := range t.parts {
			if p := &t.parts[k]; descending(p.ms) {
				p.reverse()
				turned = true
			}
		}
		if turned {
			notes.add("time-order", t.file.ref.name, "", 0, "the file has its newest row first; it was turned round")
		}
	}
	clock := r.clockOf(tables, notes)
	var out []loaded
	for i := range tables {
		t := &tables[i]
		name := t.file.ref.name
		unsorted, repeated := 0, 0
		for k := range t.parts {
			p := &t.parts[k]
			if len(p.ms) == 0 {
				continue
			}
			if !t.zoned {
				clock.utc(p.ms, name, notes)
			}
			ms, cols, u, n := sortSamples(p.ms, p.cols)
			unsorted, repeated = unsorted+u, repeated+n
			l := loaded{}
			// The step is the file's, not the period's.
			step, regular := stepOf(ms)
			l.step, l.regular = step, regular >= 0.6
			from, _ := slices.BinarySearch(ms, r.from)
			to, _ := slices.BinarySearch(ms, r.to)
			l.ms = ms[from:to]
			for j, c := range cols {
				l.cols = append(l.cols, c[from:to])
				l.binds = append(l.binds, t.binds[p.slots[j]])
				l.unit = append(l.unit, t.unit[p.slots[j]])
			}
			out = append(out, l)
		}
		t.parts = nil // memory: out alone holds the columns now
		if unsorted > 0 {
			notes.addCount(unsorted, "time-order", name, "", 0, "rows out of order of time were put in order")
		}
		if repeated > 0 {
			notes.addCount(repeated, "time-repeated", name, "", 0, "times stand more than once; the last row written for a time is used")
		}
	}
	return out
}

// read parses the file's wanted columns, with its hash.
// Row groups of Parquet that lie outside from to to are passed over.
func (s *source) read(ctx context.Context, wanted []want, abbr map[string]int64, from, to int64) (*rawTable, Source, error) {
	src := Source{Name: s.ref.name}
	if s.format == FormatParquet {
		// The hash is of the stored bytes, read once through.
		in, err := openStream(ctx, s.ref, true)
		if err != nil {
			return nil, src, err
		}
		if src.Bytes, src.SHA256, err = in.Finish(); err != nil {
			return nil, src, err
		}
		f, err := s.parquetFile(ctx)
		if err != nil {
			return nil, src, err
		}
		t, err := readParquet(ctx, f, s.ref.name, s.pq, wanted, abbr, from, to)
		if err != nil {
			return nil, src, err // an abandoned read may still hold the file
		}
		f.Close()
		src.Rows, src.Skipped = t.rows, t.skipped
		return t, src, nil
	}
	in, err := openStream(ctx, s.ref, true)
	if err != nil {
		return nil, src, err
	}
	var t *rawTable
	if s.text.long != nil {
		t, err = readLong(ctx, textReader(in), s.ref.name, s.text, wanted, abbr)
	} else {
		t, err = readCSV(ctx, textReader(in), s.ref.name, s.text, wanted, s.rowsGuess(), abbr)
	}
	if err != nil {
		in.Close()
		return nil, src, err
	}
	if src.Bytes, src.SHA256, err = in.Finish(); err != nil {
		return nil, src, err
	}
	src.Rows, src.Skipped = t.rows, t.skipped
	return t, src, nil
}

// rowsGuess sizes columns: about how many rows the file has, from its size and the
// length of its first lines, within reason.
func (s *source) rowsGuess() int {
	n := s.ref.size / int64(max(s.text.width, 2))
	return int(min(n+n/50, 1<<20)) + 16
}

// axis sets the unit's time axis: the step of the site, or the finest at which
// one of its own files is logged; from the first interval with a row to the
// last.
func (r *Result) axis(u *trend.Unit, files []loaded, notes *notebook) error {
	step := r.cfg.step
	lo, hi := int64(math.MaxInt64), int64(math.MinInt64)
	rows, regular := 0, false
	for _, f := range files {
		if len(f.ms) == 0 {
			continue
		}
		rows += len(f.ms)
		// What is logged on change has no step; it decides only where all is.
		if r.cfg.step == 0 && f.step > 0 && (step == 0 || f.regular && !regular || f.step < step && f.regular == regular) {
			step, regular = f.step, f.regular
		}
		lo, hi = min(lo, f.ms[0]), max(hi, f.ms[len(f.ms)-1])
	}
	if rows == 0 {
		return errPeriod(u.Name)
	}
	if step == 0 {
		step = 5 * time.Minute
		notes.add("step-assumed", "", "", 0, "the file has a single time; a step of 5 min is assumed")
	}
	if r.cfg.step == 0 && !regular && rows > 1 {
		step = max(step, time.Minute)
		notes.add("step-assumed", "", "", 0, "every point is logged on change; a step of %v is assumed (site.step)", step)
	}
	slack := min(step.Milliseconds()/10, 30_000)
	// Intervals begin at whole steps after the local midnight of the first day, so
	// that hours and days begin with one.
	first := time.UnixMilli(lo + slack).In(r.cfg.site.Zone)
	y, m, d := first.Date()
	midnight := time.Date(y, m, d, 0, 0, 0, 0, r.cfg.site.Zone)
	start := midnight.Add(first.Sub(midnight).Truncate(step))
	n := (hi+slack-start.UnixMilli())/step.Milliseconds() + 1
	if n > maxIntervals || n > 1<<20 && n/1000 > int64(rows) {
		return &UnitError{Unit: u.Name, Msg: fmt.Sprintf("its times run over %d intervals of %v, with %d rows in them", n, step, rows), Hint: "check the years in the files, or give --from and --to"}
	}
	u.Axis = trend.Axis{Start: start.UTC(), Step: step, N: int(n)}
	return nil
}

// columns converts and aligns every point of the unit.
func (r *Result) columns(u *trend.Unit, plan *unitPlan, files []loaded, notes *notebook) {
	type segment struct {
		bind binding
		ms   []int64
		val  []float64
		unit string
	}
	byRole := make([][]segment, trend.NumRoles)
	for _, f := range files {
		for k, bi := range f.binds {
			b := plan.binds[bi]
			byRole[b.role] = append(byRole[b.role], segment{b, f.ms, f.cols[k], f.unit[k]})
		}
	}
	var raws []*rawColumn
	for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
		segs := byRole[role]
		if len(segs) == 0 {
			continue
		}
		c := &rawColumn{role: role, bind: segs[0].bind, s: series{segs[0].ms, segs[0].val}, cellUnit: segs[0].unit}
		if len(segs) > 1 {
			sort.SliceStable(segs, func(i, j int) bool {
				a, b := segs[i].ms, segs[j].ms
				return len(a) > 0 && (len(b) == 0 || a[0] < b[0])
			})
			var ms []int64
			var val []float64
			for _, s := range segs {
				ms = append(ms, s.ms...)
				val = append(val, s.val...)
			}
			m, v, _, _ := sortSamples(ms, [][]float64{val})
			c.s = series{m, v[0]}
		}
		c.header = r.files[c.bind.file].header[c.bind.col]
		c.file = r.files[c.bind.file].ref.name
		raws = append(raws, c)
		byRole[role] = nil
	}
	for i := range files { // memory: the samples of a point are let go as soon as it is aligned
		files[i].cols = nil
	}
	decideMeasures(raws, r.cfg.site.Measure, notes)
	var room scratch
	for _, c := range raws {
		if col := c.align(u.Axis, notes, &room); col != nil {
			u.Cols[c.role] = col
		}
		c.s = series{}
	}
}

// scratch is memory that one point's alignment leaves to the next.
type scratch struct {
	val []float64
	ms  []int64
}

// rawColumn is one point's samples as logged.
type rawColumn struct {
	role     trend.Role
	bind     binding
	s        series
	cellUnit string // the unit that cells carry
	header   string
	file     string

	measure Measure // decided
	decided bool
	scale   float64 // to the canonical unit, without the schedule's own
	shift   float64
	how     string // why this unit, where it was not stated
	known   *valueStats
}

// align converts the samples and lays them on the axis.
func (c *rawColumn) align(ax trend.Axis, notes *notebook, room *scratch) *trend.Column {
	if !c.decided {
		return nil
	}
	k := c.role.Kind()
	b := &c.bind
	// canonical = (raw*scale + offset) * unit + shift
	scale, shift := b.scale*c.scale, b.offset*c.scale+c.shift
	lo, hi := instrumentRange(k)
	if cap(room.val) < len(c.s.val) {
		room.val, room.ms = make([]float64, len(c.s.val)), make([]int64, 0, len(c.s.val))
	}
	val, ms := room.val[:len(c.s.val)], room.ms[:0]
	n, out, sentinels := 0, 0, 0
	var example float64
	blanks := 0
	for i, raw := range c.s.val {
		v := raw
		if k == trend.Switch && isDisabledWord(raw) {
			v = 0
		} else if raw == raw {
			v = raw*scale + shift
			if v < lo || v > hi {
				if isSentinel(raw) {
					sentinels++
				} else {
					if out == 0 {
						example = raw
					}
					out++
				}
				v = missing(trend.OutOfRange)
			}
		} else if reasonOf(raw) == trend.Gap {
			blanks++
			continue // no sample at all
		}
		val[n] = v
		ms = append(ms, c.s.ms[i])
		n++
	}
	val = val[:n]
	if out > 0 {
		notes.addCount(out, "out-of-range", c.file, c.header, 0, "%.6g and the like cannot be a reading of %s; such values are left out", example, c.role.Title())
	}
	if sentinels > 0 {
		notes.addCount(sentinels, "marker", c.file, c.header, 0, "a number that stands for no reading (such as -9999 or 32767) is left out")
	}
	good := 0
	for _, v := range val {
		if v == v {
			good++
		}
	}
	if good == 0 {
		notes.add("empty-column", c.file, c.header, 0, "the column of %s holds no value that can be used", c.role.Title())
		return nil
	}
	if k == trend.Switch {
		odd := 0
		for i, v := range val {
			if v == v {
				if v != 0 && v != 1 {
					odd++
				}
				if v >= 0.5 {
					val[i] = 1
				} else {
					val[i] = 0
				}
			}
		}
		if odd > 0 {
			notes.addCount(odd, "switch-levels", c.file, c.header, 0, "values other than 0 and 1 are read as on from 0.5 up")
		}
	}
	h := holdOf(ms, ax.Step, k, c.role.Analogue())
	if h.changes {
		notes.add("held", c.file, c.header, 0, "the point is logged on change: a value stands until the next, for at most %v", h.age)
	} else if h.age > 0 {
		notes.add("held", c.file, c.header, 0, "the point is logged every %v: a value stands until the next", h.age)
	}
	col := &trend.Column{Role: c.role, Accuracy: b.band.HalfWidth, Relative: b.band.Relative}
	col.Val, col.Why = onAxis(ax, series{ms, val}, k, h, nil)
	usable := false
	for _, v := range col.Val {
		usable = usable || v == v
	}
	if !usable {
		notes.add("empty-column", c.file, c.header, 0, "the column of %s holds no value in the period", c.role.Title())
		return nil
	}
	if k != trend.Switch {
		col.Resolution = resolution(c.s.val) * math.Abs(scale)
	}
	ground := b.ground
	if c.how != "" {
		ground += "; " + c.how
	}
	col.Source = trend.Provenance{File: c.file, Column: c.header, Measure: c.measure.Name, Scale: scale, Shift: shift, By: b.by, Ground: ground, Note: b.note}
	return col
}

// instrumentRange is what an instrument of a kind can report, in the canonical
// unit: generous, since impossible readings are findings, but no marker for "no
// reading" lies within (common practice, no source).
func instrumentRange(k trend.Kind) (lo, hi float64) {
	switch k {
	case trend.Temperature, trend.DewPoint, trend.WetBulb:
		return -60, 90
	case trend.WaterTemp:
		return -40, 180
	case trend.RelHumidity:
		return -0.05, 1.5
	case trend.Enthalpy:
		return -60, 400
	case trend.HumRatio:
		return -0.001, 0.1
	case trend.AirFlow:
		return -5, 1000
	case trend.Velocity:
		return -5, 100
	case trend.Pressure:
		return -5000, 10000
	case trend.BaroPressure:
		return 45e3, 110e3
	case trend.Position:
		return -0.1, 1.5
	case trend.Switch:
		return -1, 200
	case trend.Power:
		return -10, 5000
	case trend.WaterFlow:
		return -10, 5000
	case trend.Concentration:
		return 0, 20000
	}
	return math.Inf(-1), math.Inf(1)
}

// isSentinel reports whether a number is one that exports write where there is
// no reading.
func isSentinel(v float64) bool {
	switch a := math.Abs(v); a {
	case 999, 9999, 99999, 999.9, 9999.9, 32767, 32768, 65535, 6553.5, 3276.7, 3276.8, 2147483647, 2147483648:
		return true
	default:
		return a > 1e30
	}
}
