package ingest

import (
	"bytes"
	"context"
	"io"

	"dewledger/ingest/trend"
)

// rawTable is the wanted columns of one file, before units and alignment.
type rawTable struct {
	ms      []int64     // UTC where zoned, else what the local clock showed
	zoned   bool        // of all stamps
	cols    [][]float64 // one a wanted column; missing cells by missing(reason)
	unit    []string    // unit that the cells themselves carry, by column
	rows    int         // data rows used
	skipped map[string]int
	notes   notebook
}

// Reasons for which a row is left out.
const (
	skipRagged  = "ragged"
	skipBadTime = "bad time"
	skipTooLong = "line too long"
)

func (t *rawTable) skip(why string) {
	if t.skipped == nil {
		t.skipped = make(map[string]int)
	}
	t.skipped[why]++
}

// csvReader reads the wanted columns of a delimited text in one pass over its
// bytes. A line is a record.
//
// Columns are filled by row number; a row that turns out bad is written over by
// the next.
type csvReader struct {
	name   string
	sh     *shape
	want   []int32 // column -> slot, -1 not wanted
	last   int     // last column that must be looked at
	t      *rawTable
	n      int         // rows so far
	cols   [][]float64 // as long as there is room for rows
	stamps stampReader
	marks  []badCell
	clock  []byte // date and time of day joined
	line   int
}

type badCell struct {
	count, line int
	text        string
	why         trend.Reason
}

// readCSV reads the columns of r listed in wanted. rows is a guess of how many
// rows there are, to size the columns by.
func readCSV(ctx context.Context, r io.Reader, name string, sh *shape, wanted []int, rows int) (*rawTable, error) {
	t := &rawTable{cols: make([][]float64, len(wanted)), unit: make([]string, len(wanted))}
	c := &csvReader{name: name, sh: sh, t: t, want: make([]int32, len(sh.header)), marks: make([]badCell, len(wanted))}
	for i := range c.want {
		c.want[i] = -1
	}
	c.last = max(sh.timeCol, sh.clockCol)
	for slot, col := range wanted {
		c.want[col] = int32(slot)
		c.last = max(c.last, col)
	}
	c.stamps.order = sh.order
	c.cols = make([][]float64, len(wanted))
	c.grow(max(rows, 16))
	if err := c.run(ctx, r); err != nil {
		return nil, err
	}
	if err := c.stamps.settle(t.ms); err != nil {
		return nil, err
	}
	t.zoned = c.stamps.zoned
	t.rows = c.n
	for slot := range c.cols {
		t.cols[slot] = c.cols[slot][:c.n]
	}
	for slot, m := range c.marks {
		if m.count > 0 {
			t.notes.addCount(m.count, "bad-cell", name, sh.header[wanted[slot]], m.line, "%s is not a number; the cell is left out as %v", quote(m.text), m.why)
		}
	}
	return t, nil
}

// grow makes room for rows.
func (c *csvReader) grow(rows int) {
	for i, v := range c.cols {
		w := make([]float64, rows)
		copy(w, v)
		c.cols[i] = w
	}
	ms := make([]int64, len(c.t.ms), rows)
	copy(ms, c.t.ms)
	c.t.ms = ms
}

func (c *csvReader) run(ctx context.Context, r io.Reader) error {
	buf := make([]byte, 256<<10)
	eol := byte('\n')
	if c.sh.crOnly {
		eol = '\r'
	}
	have, skipping := 0, false
	for {
		if err := ctx.Err(); err != nil {
			return err
		}
		n, err := r.Read(buf[have:])
		have += n
		if err != nil && err != io.EOF {
			if len(c.t.ms) == 0 {
				return err
			}
			// What came before a file broke off is whole lines, and good.
			c.t.notes.add("truncated", c.name, "", c.line+1, "the file breaks off (%v); what comes before is used", err)
			return ctx.Err()
		}
		pos := 0
		for {
			i := bytes.IndexByte(buf[pos:have], eol)
			if i < 0 {
				break
			}
			if skipping {
				skipping = false
				c.line++
			} else {
				c.row(buf[pos : pos+i])
			}
			pos += i + 1
		}
		have = copy(buf, buf[pos:have])
		if err == io.EOF {
			if have > 0 && !skipping {
				c.row(buf[:have])
			}
			return nil
		}
		if skipping {
			have = 0
		} else if have == len(buf) {
			if len(buf) < maxLine {
				buf = append(buf, make([]byte, len(buf))...)
				continue
			}
			c.t.skip(skipTooLong)
			c.t.notes.add("line-too-long", c.name, "", c.line+1, "the line is longer than %d kB and is left out", maxLine>>10)
			skipping, have = true, 0
		}
	}
}

// row reads one line.
func (c *csvReader) row(line []byte) {
	c.line++
	if c.line < c.sh.dataLine {
		return
	}
	if k := len(line); k > 0 && line[k-1] == '\r' {
		line = line[:k-1]
	}
	if len(line) == 0 {
		return
	}
	delim, mark := c.sh.delim, c.sh.mark
	t, n := c.t, c.n
	if n == cap(t.ms) {
		c.grow(2 * n)
	}
	var stamp, clock []byte
	col, i, ended := 0, 0, false
	for ; col <= c.last; col++ {
		start := i
		if slot := c.want[col]; slot >= 0 {
			// The shape of nearly every cell, read where it stands.
			v, next, ok := cellNumber(line, i, delim, mark)
			if ok {
				c.cols[slot][n] = v
				i = next
			} else {
				var body []byte
				if body, next = cellBytes(line, i, delim); next < 0 {
					c.torn(line)
					return
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
					c.torn(line)
					return
				}
			}
			switch col {
			case c.sh.timeCol:
				stamp = line[start:i]
			case c.sh.clockCol:
				clock = line[start:i]
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
	if fields != len(c.sh.header) && !c.tolerable(line, fields) {
		c.ragged(fields)
		return
	}
	if col <= c.last { // a short row, allowed: the cells it leaves out are blank
		for ; col <= c.last; col++ {
			if slot := c.want[col]; slot >= 0 {
				c.cols[slot][n] = missing(trend.Gap)
			}
		}
	}
	c.time(stamp, clock)
}

// time reads the row's stamp; with it the row counts.
func (c *csvReader) time(stamp, clock []byte) {
	stamp = unquote(stamp)
	if c.sh.clockCol >= 0 {
		c.clock = append(append(append(c.clock[:0], stamp...), ' '), unquote(clock)...)
		stamp = c.clock
	}
	ms, ok := c.stamps.read(stamp, c.t.ms)
	if !ok {
		c.t.skip(skipBadTime)
		c.t.notes.add("bad-time", c.name, c.sh.header[c.sh.timeCol], c.line, "%s is not a time; the row is left out", quote(toUTF8(stamp)))
		return
	}
	c.t.ms = append(c.t.ms, ms)
	c.n++
}

func (c *csvReader) ragged(fields int) {
	c.t.skip(skipRagged)
	c.t.notes.add("ragged-row", c.name, "", c.line, "the row has %d cells where the header has %d; it is left out", fields, len(c.sh.header))
}

// tolerable reports whether a row with another count of fields than the header
// may still be used: blank cells beyond the last column, quoted delimiters
// beyond the last wanted one, or blank cells left out where the file does that.
func (c *csvReader) tolerable(line []byte, fields int) bool {
	if fields < len(c.sh.header) {
		return c.sh.shortOK && fields > max(c.sh.timeCol, c.sh.clockCol)
	}
	if bytes.IndexByte(line, '"') >= 0 {
		cells := splitLine(string(line), c.sh.delim)
		return len(cells) == len(c.sh.header) || onlyBlank(cells[len(c.sh.header):])
	}
	cut := len(line)
	for range fields - len(c.sh.header) {
		i := bytes.LastIndexByte(line[:cut], c.sh.delim)
		if i < 0 || len(trimBlank(line[i+1:cut])) > 0 {
			return false
		}
		cut = i
	}
	return true
}

func onlyBlank(cells []string) bool {
	for _, s := range cells {
		if s != "" {
			return false
		}
	}
	return true
}

// torn leaves out a line whose quotes do not close.
func (c *csvReader) torn(line []byte) {
	c.ragged(len(splitLine(string(line), c.sh.delim)))
}

// slow reads a cell that is no plain number.
func (c *csvReader) slow(slot int, body []byte) float64 {
	x := parseCell(body, c.sh.mark)
	if x.unit != nil && c.t.unit[slot] == "" {
		c.t.unit[slot] = toUTF8(x.unit)
	}
	if x.val != x.val {
		if why := reasonOf(x.val); why == trend.NotNumeric || why == trend.BadQuality {
			m := &c.marks[slot]
			if m.count == 0 {
				m.line, m.text, m.why = c.line, toUTF8(trimBlank(body)), why
			}
			m.count++
		}
	}
	return x.val
}

// cellNumber reads a plain number from line[i:] up to the delimiter or the end
// of the line.
func cellNumber(line []byte, i int, delim, mark byte) (v float64, next int, ok bool) {
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
	digits, frac := i-start, 0
	if i < len(line) && line[i] == mark && mark != delim {
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
		frac = i - start
		digits += frac
	}
	if (i < len(line) && line[i] != delim) || digits == 0 || digits > 15 {
		return 0, 0, false
	}
	v = float64(m)
	if frac > 0 {
		v /= pow10[frac]
	}
	if neg {
		v = -v
	}
	return v, i, true
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
