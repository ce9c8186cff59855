package ingest

import (
	"bytes"
	"context"
	"fmt"
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
type csvReader struct {
	name   string
	sh     *shape
	want   []int32 // column -> slot, -1 not wanted
	last   int     // last column that must be looked at
	t      *rawTable
	stamps stampReader
	marks  []badCell
	clock  []byte // date and time of day joined
	fields [][]byte
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
	t := &rawTable{cols: make([][]float64, len(wanted)), unit: make([]string, len(wanted)), ms: make([]int64, 0, rows)}
	c := &csvReader{name: name, sh: sh, t: t, want: make([]int32, len(sh.header)), marks: make([]badCell, len(wanted))}
	for i := range c.want {
		c.want[i] = -1
	}
	c.last = max(sh.timeCol, sh.clockCol)
	for slot, col := range wanted {
		c.want[col] = int32(slot)
		t.cols[slot] = make([]float64, 0, rows)
		c.last = max(c.last, col)
	}
	c.stamps.order = sh.order
	if err := c.run(ctx, r); err != nil {
		return nil, err
	}
	if err := c.stamps.settle(t.ms); err != nil {
		return nil, err
	}
	t.zoned = c.stamps.zoned
	t.rows = len(t.ms)
	for slot, m := range c.marks {
		if m.count > 0 {
			t.notes.addCount(m.count, "bad-cell", name, sh.header[wanted[slot]], m.line, "%s is not a number; the cell is left out as %v", quote(m.text), m.why)
		}
	}
	return t, nil
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
	if n := len(line); n > 0 && line[n-1] == '\r' {
		line = line[:n-1]
	}
	if len(line) == 0 {
		return
	}
	delim, mark := c.sh.delim, c.sh.mark
	t := c.t
	have := len(t.ms)
	var stamp, clock []byte
	col, i, ended := 0, 0, false
	for ; col <= c.last; col++ {
		start := i
		if slot := c.want[col]; slot >= 0 {
			// The shape of nearly every cell, read where it stands.
			v, next, ok := cellNumber(line, i, delim, mark)
			if ok {
				t.cols[slot] = append(t.cols[slot], v)
				i = next
			} else {
				var body []byte
				if body, next = cellBytes(line, i, delim); next < 0 {
					c.undo(have)
					c.rejoin(line)
					return
				}
				t.cols[slot] = append(t.cols[slot], c.slow(int(slot), body))
				i = next
			}
		} else {
			for i < len(line) && line[i] != delim && line[i] != '"' {
				i++
			}
			if i < len(line) && line[i] == '"' {
				_, i = cellBytes(line, start, delim)
				if i < 0 {
					c.undo(have)
					c.rejoin(line)
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
		c.undo(have)
		c.ragged(fields)
		return
	}
	if col <= c.last { // a short row, allowed: the cells it leaves out are blank
		for ; col <= c.last; col++ {
			if slot := c.want[col]; slot >= 0 {
				t.cols[slot] = append(t.cols[slot], missing(trend.Gap))
			}
		}
	}
	c.time(have, stamp, clock)
}

// time adds the row's stamp, or takes the row back.
func (c *csvReader) time(have int, stamp, clock []byte) {
	stamp = unquote(stamp)
	if c.sh.clockCol >= 0 {
		c.clock = append(append(append(c.clock[:0], stamp...), ' '), unquote(clock)...)
		stamp = c.clock
	}
	ms, ok := c.stamps.read(stamp, c.t.ms)
	if !ok {
		c.undo(have)
		c.t.skip(skipBadTime)
		c.t.notes.add("bad-time", c.name, c.sh.header[c.sh.timeCol], c.line, "%s is not a time; the row is left out", quote(toUTF8(stamp)))
		return
	}
	c.t.ms = append(c.t.ms, ms)
}

func (c *csvReader) undo(rows int) {
	for s := range c.t.cols {
		c.t.cols[s] = c.t.cols[s][:rows]
	}
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

// rejoin deals with a line whose quotes do not close: it is torn.
func (c *csvReader) rejoin(line []byte) {
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

// stampReader reads a column of stamps. Stamps that follow each other mostly
// share all but their clock, so only that is read again.
type stampReader struct {
	order   order
	decided bool // a slashed date has settled the order
	slashed bool
	started bool
	zoned   bool

	text       []byte // last stamp read in full
	from, to   int    // its clock, as hh:mm or hh:mm:ss
	ms, ofDay  int64
	twelve     bool
	lastMS     int64
	fastUsable bool
}

// read reads one stamp; seen are the stamps before it, which are put right where
// this one settles that days come first.
func (s *stampReader) read(b []byte, seen []int64) (int64, bool) {
	if s.fastUsable && len(b) == len(s.text) && string(b[:s.from]) == string(s.text[:s.from]) && string(b[s.to:]) == string(s.text[s.to:]) {
		if ofDay, ok := shortClock(b[s.from:s.to], s.twelve); ok {
			return s.ms + ofDay - s.ofDay, true
		}
	}
	c, ok := parseStamp(b, s.order)
	if !ok || c.form == formTimeOnly {
		return 0, false
	}
	if !s.started {
		s.started, s.zoned = true, c.zoned
	} else if c.zoned != s.zoned {
		return 0, false
	}
	if c.form == formSlashed || c.form == formSlashOnly {
		s.slashed = true
		if s.order == orderUnknown && !s.decided {
			switch {
			case c.a > 12:
				s.order, s.decided = dayFirst, true
				for i, ms := range seen {
					seen[i] = swapDayMonth(ms)
				}
			case c.b > 12:
				s.order, s.decided = monthFirst, true
			}
		}
	}
	s.remember(b, c)
	return c.ms, true
}

func (s *stampReader) remember(b []byte, c civil) {
	s.fastUsable = false
	i := bytes.IndexByte(b, ':')
	if i < 2 || i+3 > len(b) || c.form == formEpoch {
		return
	}
	s.from, s.to = i-2, i+3
	if s.to+3 <= len(b) && b[s.to] == ':' {
		s.to += 3
	}
	tail := bytes.ToLower(b[s.to:])
	s.twelve = bytes.Contains(tail, []byte("am")) || bytes.Contains(tail, []byte("pm")) || bytes.Contains(tail, []byte("a.m")) || bytes.Contains(tail, []byte("p.m"))
	ofDay, ok := shortClock(b[s.from:s.to], s.twelve)
	if !ok {
		return
	}
	s.text = append(s.text[:0], b...)
	s.ms, s.ofDay, s.fastUsable = c.ms, ofDay, true
}

// shortClock reads hh:mm or hh:mm:ss, all digits there.
func shortClock(b []byte, twelve bool) (int64, bool) {
	if len(b) < 5 || b[2] != ':' {
		return 0, false
	}
	h1, h2, m1, m2 := b[0]-'0', b[1]-'0', b[3]-'0', b[4]-'0'
	if h1 > 2 || h2 > 9 || m1 > 5 || m2 > 9 {
		return 0, false
	}
	h := int64(h1)*10 + int64(h2)
	if h > 23 {
		return 0, false
	}
	if twelve {
		if h < 1 || h > 12 {
			return 0, false
		}
		h %= 12
	}
	ms := h*3_600_000 + (int64(m1)*10+int64(m2))*60_000
	if len(b) == 8 {
		s1, s2 := b[6]-'0', b[7]-'0'
		if b[5] != ':' || s1 > 5 || s2 > 9 {
			return 0, false
		}
		ms += (int64(s1)*10 + int64(s2)) * 1000
	}
	return ms, true
}

var errOrder = fmt.Errorf("its dates can be read day first or month first")

// settle decides, at the end of a file whose dates never went past 12, which
// order they are in: the one in which the record goes on from midnight to
// midnight while in the other it leaps by months.
func (s *stampReader) settle(ms []int64) error {
	if !s.slashed || s.order != orderUnknown || s.decided {
		return nil
	}
	leaps := func(of func(int64) int64) (n, days int) {
		for i := 1; i < len(ms); i++ {
			a, b := of(ms[i-1]), of(ms[i])
			if floorDiv(a, dayMS) == floorDiv(b, dayMS) {
				continue
			}
			days++
			if d := b - a; d > 20*dayMS || d < -20*dayMS {
				n++
			}
		}
		return n, days
	}
	asRead, days := leaps(func(x int64) int64 { return x })
	swapped, _ := leaps(swapDayMonth)
	switch {
	case days >= 2 && asRead == 0 && swapped == days:
		return nil
	case days >= 2 && swapped == 0 && asRead == days:
		for i := range ms {
			ms[i] = swapDayMonth(ms[i])
		}
		return nil
	}
	return errOrder
}

func floorDiv(a, b int64) int64 {
	q := a / b
	if a%b < 0 {
		q--
	}
	return q
}

// swapDayMonth reads a stamp the other way round. Both its day and its month are
// at most 12.
func swapDayMonth(ms int64) int64 {
	day := floorDiv(ms, dayMS)
	y, m, d := civilFromDays(day)
	return ms + (daysFromCivil(y, d, m)-day)*dayMS
}

// civilFromDays is the inverse of daysFromCivil.
func civilFromDays(z int64) (y, m, d int) {
	z += 719468
	era := floorDiv(z, 146097)
	doe := z - era*146097
	yoe := (doe - doe/1460 + doe/36524 - doe/146096) / 365
	doy := doe - (365*yoe + yoe/4 - yoe/100)
	mp := (5*doy + 2) / 153
	d = int(doy - (153*mp+2)/5 + 1)
	m = int(mp + 3)
	if m > 12 {
		m -= 12
	}
	y = int(yoe + era*400)
	if m <= 2 {
		y++
	}
	return y, m, d
}
