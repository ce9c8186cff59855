package ingest

import (
	"bytes"
	"context"
	"io"
	"slices"
	"strings"

	"dewledger/ingest/trend"
)

// csvReader reads the wanted columns of a delimited text in one pass over its
// bytes. A line is a record, unless a quoted cell runs on.
//
// Columns are filled by row number; a row that turns out bad is written over by
// the next.
type csvReader struct {
	lineReader
	wanted []want
	slot   []int32 // column -> slot, -1 not wanted
	last   int     // last column that must be looked at
	width  int
	tc, cc int      // columns of the time and of the time of day
	header []string // by column
	ms     []int64
	cols   [][]float64 // as long as there is room for rows
	absent []int       // slots that the header in force lacks
	flags  []statusFlag
	flagOf []int32 // column -> flag, -1
	marks  []badCell
	pend   []pending
	digits []bool // by slot: a quantity, for which a word is no value
}

// pending is a bad cell of a row that has not been accepted yet.
type pending struct {
	slot int
	text string
	why  trend.Reason
	unit string
}

// statusFlag is a column that says how good the readings of others are.
type statusFlag struct {
	col   int
	slots []int
	cell  []byte // of this row
	seen  string // last text
	why   trend.Reason
	known bool
}

type badCell struct {
	count, line int
	text        string
	why         trend.Reason
}

// readCSV reads the columns of r listed in wanted. rows is a guess of how many
// rows there are, to size the columns by.
func readCSV(ctx context.Context, r io.Reader, name string, sh *shape, wanted []want, rows int, abbr map[string]int64) (*rawTable, error) {
	t := &rawTable{unit: make([]string, len(wanted))}
	c := &csvReader{lineReader: lineReader{name: name, sh: sh, t: t}, wanted: wanted, marks: make([]badCell, len(wanted)), header: sh.header}
	c.stamps.order, c.stamps.abbr = sh.order, abbr
	c.place(sh.header, sh.timeCol, sh.clockCol, func(col int) int { return col })
	c.cols = make([][]float64, len(wanted))
	c.grow(max(rows, 16))
	if err := c.run(ctx, r, c); err != nil {
		return nil, err
	}
	swap, err := c.stamps.settle(c.ms)
	if err != nil {
		return nil, err
	}
	if swap {
		swapAll(c.ms)
	}
	t.zoned = c.stamps.zoned
	part := rawPart{ms: c.ms}
	t.rows = len(c.ms)
	for slot := range c.cols {
		part.slots = append(part.slots, slot)
		part.cols = append(part.cols, c.cols[slot][:t.rows])
	}
	t.parts = []rawPart{part}
	for slot, m := range c.marks {
		if m.count > 0 {
			t.notes.addCount(m.count, "bad-cell", name, sh.header[wanted[slot].col], m.line, "%s is not a reading; the cell is left out as %v", quote(m.text), m.why)
		}
	}
	return t, nil
}

// place sets where the wanted columns stand; at gives the place of a column of the
// file's first header, -1 where it is gone.
func (c *csvReader) place(header []string, timeCol, clockCol int, at func(col int) int) {
	n := len(header)
	c.width, c.tc, c.cc = n, timeCol, clockCol
	c.slot, c.flagOf = make([]int32, n), make([]int32, n)
	for i := range n {
		c.slot[i], c.flagOf[i] = -1, -1
	}
	c.flags = c.flags[:0]
	c.last = max(timeCol, clockCol)
	c.digits = make([]bool, len(c.wanted))
	for slot, w := range c.wanted {
		c.digits[slot] = w.quantity
		col := at(w.col)
		if col < 0 {
			continue
		}
		c.slot[col] = int32(slot)
		c.last = max(c.last, col)
		if w.status < 0 || at(w.status) < 0 {
			continue
		}
		st := at(w.status)
		if c.flagOf[st] < 0 {
			c.flagOf[st] = int32(len(c.flags))
			c.flags = append(c.flags, statusFlag{col: st})
		}
		f := &c.flags[c.flagOf[st]]
		f.slots = append(f.slots, slot)
		c.last = max(c.last, st)
	}
}

// grow makes room for rows.
func (c *csvReader) grow(rows int) {
	for i, v := range c.cols {
		w := make([]float64, rows)
		copy(w, v)
		c.cols[i] = w
	}
	ms := make([]int64, len(c.ms), rows)
	copy(ms, c.ms)
	c.ms = ms
}

// row reads one record; false where a quote in it does not close.
func (c *csvReader) row(line []byte) bool {
	delim, mark := c.sh.delim, c.sh.mark
	n := len(c.ms)
	if n == cap(c.ms) {
		c.grow(2 * n)
	}
	c.pend = c.pend[:0]
	var stamp, clock []byte
	col, i, ended := 0, 0, false
	slots, cols := c.slot[:c.last+1], c.cols
	for ; col < len(slots); col++ {
		start := i
		if slot := slots[col]; slot >= 0 {
			// The shape of nearly every cell, read where it stands.
			v, next := cellNumber(line, i, delim, mark)
			if next >= 0 {
				cols[slot][n] = v
				i = next
			} else {
				var body []byte
				if body, next = cellBytes(line, i, delim); next < 0 {
					return false
				}
				c.cols[slot][n] = c.slow(int(slot), body)
				i = next
			}
		} else {
			for i < len(line) && line[i] != delim && line[i] != '"' {
				i++
			}
			if i < len(line) && line[i] == '"' {
				_, i = cellBytes(line, start, delim)
				if i < 0 {
					return false
				}
			}
			switch col {
			case c.tc:
				stamp = line[start:i]
			case c.cc:
				clock = line[start:i]
			default:
				if f := c.flagOf[col]; f >= 0 {
					c.flags[f].cell = line[start:i]
				}
			}
		}
		if i >= len(line) {
			ended = true
			col++
			break
		}
		i++ // the delimiter
	}
	fields := col
	if !ended {
		fields += 1 + bytes.Count(line[i:], []byte{delim})
	}
	if fields != c.width {
		ok, open := c.tolerable(line, fields)
		switch {
		case open:
			return false
		case ok:
		case c.newHeader(line):
			return true
		default:
			c.ragged(fields, c.width)
			return true
		}
	}
	if col <= c.last { // a short row, allowed: the cells it leaves out are blank
		for ; col <= c.last; col++ {
			if slot := c.slot[col]; slot >= 0 {
				c.cols[slot][n] = missing(trend.Gap)
			}
			if f := c.flagOf[col]; f >= 0 {
				c.flags[f].cell = nil
			}
		}
	}
	ms, ok := c.stamp(stamp, clock, c.cc >= 0)
	if !ok {
		if !c.newHeader(line) {
			c.badTime(stamp, c.header[c.tc])
		}
		return true
	}
	if c.stamps.turned() {
		swapAll(c.ms)
	}
	for i := range c.flags {
		c.flag(&c.flags[i], n)
	}
	for _, p := range c.pend {
		c.accept(p)
	}
	for _, slot := range c.absent {
		c.cols[slot][n] = missing(trend.Gap)
	}
	c.ms = append(c.ms, ms)
	return true
}

// flag applies a row's status.
func (c *csvReader) flag(f *statusFlag, n int) {
	if string(f.cell) != f.seen || !f.known && f.seen == "" {
		f.seen = string(f.cell)
		text := toUTF8(unquote(f.cell))
		if f.why, f.known = quality(text); !f.known {
			c.t.notes.add("status-unknown", c.name, c.header[f.col], c.line, "what %s says of a reading is not known; the reading is taken for good", quote(text))
		}
	}
	if f.why == trend.Present {
		return
	}
	for _, slot := range f.slots {
		if f.why == trend.Overridden && c.wanted[slot].output {
			c.t.notes.add("overridden", c.name, c.sh.header[c.wanted[slot].col], c.line, "the command was set by hand; it is what the equipment got, and is used")
			continue
		}
		c.cols[slot][n] = missing(f.why)
		c.t.notes.add("status-"+f.why.String(), c.name, c.sh.header[c.wanted[slot].col], c.line, "the export marks readings %s; they are left out as %v", quote(toUTF8(unquote(f.cell))), f.why)
	}
}

// newHeader reports whether the row is a header: the file's own again, as where
// exports were put one behind another, or another one for the same points, by which
// the following rows are then read.
func (c *csvReader) newHeader(line []byte) bool {
	cells := splitLine(toUTF8(line), c.sh.delim)
	at := map[string]int{}
	for i, h := range cells {
		if _, twice := at[strings.ToLower(h)]; !twice {
			at[strings.ToLower(h)] = i
		}
	}
	timeAt, ok := at[strings.ToLower(c.sh.header[c.sh.timeCol])]
	if !ok || len(cells) < 2 || len(cells) > maxColumns {
		return false
	}
	clockAt := -1
	if c.sh.clockCol >= 0 {
		if clockAt, ok = at[strings.ToLower(c.sh.header[c.sh.clockCol])]; !ok {
			return false
		}
	}
	lost := 0
	find := func(col int) int {
		if i, ok := at[strings.ToLower(strings.TrimSuffix(c.sh.header[col], againMark))]; ok {
			return i
		}
		lost++
		return -1
	}
	same := len(cells) == c.width
	for i := range cells {
		same = same && strings.EqualFold(cells[i], strings.TrimSuffix(c.header[i], againMark))
	}
	c.t.skip(skipHeader)
	if same {
		c.t.notes.add("header-repeated", c.name, "", c.line, "the header stands again between the rows")
		return true
	}
	c.header = cells
	c.place(cells, timeAt, clockAt, find)
	c.absent = c.absent[:0]
	for slot := range c.cols {
		if !slices.Contains(c.slot, int32(slot)) {
			c.absent = append(c.absent, slot)
		}
	}
	c.t.notes.add("header-changed", c.name, "", c.line, "another header begins here (%d columns); rows after it are read by it, and %d of the points wanted are not in it", len(cells), lost)
	return true
}

// tolerable reports whether a row with another count of fields than the header
// may still be used: blank cells beyond the last column, quoted delimiters
// beyond the last wanted one, or blank cells left out where the file does that.
// open says that a quote in it does not close.
func (c *csvReader) tolerable(line []byte, fields int) (ok, open bool) {
	if bytes.IndexByte(line, '"') >= 0 {
		n, blankFrom, open := countCells(line, c.sh.delim)
		if open {
			return false, true
		}
		if n >= c.width {
			return n == c.width || blankFrom <= c.width, false
		}
		fields = n
	}
	if fields < c.width {
		return c.sh.shortOK && fields > max(c.tc, c.cc), false
	}
	cut := len(line)
	for range fields - c.width {
		i := bytes.LastIndexByte(line[:cut], c.sh.delim)
		if i < 0 || len(trimBlank(line[i+1:cut])) > 0 {
			return false, false
		}
		cut = i
	}
	return true, false
}

// slow reads a cell that is no plain number.
func (c *csvReader) slow(slot int, body []byte) float64 {
	x := parseCell(body, c.sh.mark)
	if x.word && c.digits[slot] {
		x.val = missing(trend.NotNumeric)
	}
	p := pending{slot: slot}
	if x.unit != nil && c.t.unit[slot] == "" {
		p.unit = toUTF8(x.unit)
	}
	if x.val != x.val && !isDisabledWord(x.val) {
		if why := reasonOf(x.val); why != trend.Gap {
			p.text, p.why = toUTF8(trimBlank(body)), why
		}
	}
	if p.unit != "" || p.why != trend.Present {
		c.pend = append(c.pend, p)
	}
	return x.val
}

func (c *csvReader) accept(p pending) {
	if p.unit != "" {
		c.t.unit[p.slot] = p.unit
	}
	if p.why == trend.Present {
		return
	}
	m := &c.marks[p.slot]
	if m.count == 0 {
		m.line, m.text, m.why = c.line, p.text, p.why
	}
	m.count++
}

// cellNumber reads a plain number from line[i:] up to the delimiter or the end
// of the line; next is negative where it is something else.
func cellNumber(line []byte, i int, delim, mark byte) (v float64, next int) {
	neg := false
	if i < len(line) && line[i] == '-' {
		neg = true
		i++
	}
	start := i
	var m uint64
	for i < len(line) {
		d := line[i] - '0'
		if d > 9 {
			break
		}
		m = m*10 + uint64(d)
		i++
	}
	digits := i - start
	v = float64(m)
	if i < len(line) && line[i] != delim {
		if line[i] != mark {
			return 0, -1
		}
		i++
		start = i
		for i < len(line) {
			d := line[i] - '0'
			if d > 9 {
				break
			}
			m = m*10 + uint64(d)
			i++
		}
		if i < len(line) && line[i] != delim {
			return 0, -1
		}
		digits += i - start
		v = float64(m) / pow10[(i-start)&15]
	}
	if digits == 0 || digits > 15 {
		return 0, -1
	}
	if neg {
		v = -v
	}
	return v, i
}

// cellBytes is the content of the cell at line[i:], without its quotes, and the
// index of the delimiter after it; next is negative where a quote does not
// close.
func cellBytes(line []byte, i int, delim byte) (body []byte, next int) {
	j := i
	for j < len(line) && line[j] == ' ' {
		j++
	}
	if j >= len(line) || line[j] != '"' {
		k := bytes.IndexByte(line[i:], delim)
		if k < 0 {
			return line[i:], len(line)
		}
		return line[i : i+k], i + k
	}
	j++
	start := j
	doubled := false
	for j < len(line) {
		if line[j] != '"' {
			j++
			continue
		}
		if j+1 < len(line) && line[j+1] == '"' {
			doubled = true
			j += 2
			continue
		}
		body = line[start:j]
		if doubled {
			body = bytes.ReplaceAll(body, []byte(`""`), []byte(`"`))
		}
		k := bytes.IndexByte(line[j:], delim)
		if k < 0 {
			return body, len(line)
		}
		return body, j + k
	}
	return nil, -1
}

func unquote(b []byte) []byte {
	b = trimBlank(b)
	if len(b) >= 2 && b[0] == '"' && b[len(b)-1] == '"' {
		return trimBlank(b[1 : len(b)-1])
	}
	return b
}
