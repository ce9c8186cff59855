package ingest

import (
	"bytes"
	"context"
	"io"
)

// lineReader walks over the records of a delimited text: what wide and long files
// share.
type lineReader struct {
	name   string
	sh     *shape
	t      *rawTable
	stamps stampReader
	line   int    // of the record at hand, 1-based
	joined []byte // date and time of day
}

// rowReader takes one record. It answers false, and has changed nothing, where a
// quote in the record does not close.
type rowReader interface {
	row(record []byte) bool
}

// A quoted cell may run over this many lines; beyond, its quote is taken for torn.
const maxRunOn = 50

// run hands every record of r from the shape's first data row on to rows.
func (c *lineReader) run(ctx context.Context, r io.Reader, rows rowReader) error {
	buf := make([]byte, 256<<10)
	eol := byte('\n')
	if c.sh.crOnly {
		eol = '\r'
	}
	have, skipping, lines, any := 0, false, 0, false
	for {
		if err := ctx.Err(); err != nil {
			return err
		}
		n, err := r.Read(buf[have:])
		have += n
		if err != nil && err != io.EOF {
			if !any {
				return err
			}
			// What came before a file broke off is whole lines, and good.
			c.t.notes.add("truncated", c.name, "", lines+1, "the file breaks off (%v); what comes before is used", err)
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
				lines++
				pos += i + 1
				continue
			}
			c.line = lines + 1
			if rec := trimCR(buf[pos : pos+i]); c.line < c.sh.dataLine || len(rec) == 0 || rows.row(rec) {
				any = any || c.line >= c.sh.dataLine
				lines++
				pos += i + 1
				continue
			}
			end, more, hungry := c.runOn(buf[pos:have], i, eol, err == io.EOF, rows)
			if hungry && have-pos < maxLine {
				break // the rest of the record is not here yet
			}
			if end < 0 {
				c.torn()
				end, more = i, 0
			}
			lines += 1 + more
			pos += min(end+1, have-pos)
		}
		have = copy(buf, buf[pos:have])
		if err == io.EOF {
			if have > 0 && !skipping {
				rec := trimCR(buf[:have])
				if c.line = lines + 1; c.line >= c.sh.dataLine && len(rec) > 0 && !rows.row(rec) {
					c.torn()
				}
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
			c.t.notes.add("line-too-long", c.name, "", lines+1, "the line is longer than %d kB and is left out", maxLine>>10)
			skipping, have = true, 0
		}
	}
}

// runOn reads the record at the start of b, whose first line ends at first inside a
// quoted cell, to the line on which it is whole. end is where that line ends, -1
// where no line makes it so; more counts the lines after the first; hungry says that
// b ends too early to tell.
func (c *lineReader) runOn(b []byte, first int, eol byte, last bool, rows rowReader) (end, more int, hungry bool) {
	end = first
	for more = 1; more <= maxRunOn; more++ {
		i := bytes.IndexByte(b[min(end+1, len(b)):], eol)
		switch {
		case i >= 0:
			end += 1 + i
		case !last:
			return -1, 0, true
		case end+1 < len(b):
			end = len(b)
		default:
			return -1, 0, false
		}
		n, _, open := countCells(trimCR(b[:end]), c.sh.delim)
		if open {
			continue
		}
		if n != len(c.sh.header) || !rows.row(trimCR(b[:end])) {
			return -1, 0, false
		}
		return end, more, false
	}
	return -1, 0, false
}

func trimCR(b []byte) []byte {
	if n := len(b); n > 0 && b[n-1] == '\r' {
		return b[:n-1]
	}
	return b
}

// stamp reads a row's time.
func (c *lineReader) stamp(date, clock []byte, parted bool) (int64, bool) {
	date = unquote(date)
	if parted {
		c.joined = append(append(append(c.joined[:0], date...), ' '), unquote(clock)...)
		date = c.joined
	}
	return c.stamps.read(date)
}

func (c *lineReader) badTime(stamp []byte, column string) {
	c.t.skip(skipBadTime)
	c.t.notes.add("bad-time", c.name, column, c.line, "%s is not a time; the row is left out", quote(toUTF8(unquote(stamp))))
}

func (c *lineReader) ragged(fields, width int) {
	c.t.skip(skipRagged)
	c.t.notes.add("ragged-row", c.name, "", c.line, "the row has %d cells where the header has %d; it is left out", fields, width)
}

// torn leaves out a line whose quotes do not close.
func (c *lineReader) torn() {
	c.t.skip(skipRagged)
	c.t.notes.add("ragged-row", c.name, "", c.line, "a quote in the row does not close; the line is left out")
}

// countCells counts the cells of a record, and says from which on all are blank and
// whether a quote does not close.
func countCells(line []byte, delim byte) (n, blankFrom int, open bool) {
	i := 0
	for {
		body, next := cellBytes(line, i, delim)
		if next < 0 {
			return n + 1, n + 1, true
		}
		n++
		if len(trimBlank(body)) > 0 {
			blankFrom = n
		}
		if next >= len(line) {
			return n, blankFrom, false
		}
		i = next + 1
	}
}

func swapAll(ms []int64) {
	for i := range ms {
		ms[i] = swapDayMonth(ms[i])
	}
}

func onlyBlank(cells []string) bool {
	for _, s := range cells {
		if s != "" {
			return false
		}
	}
	return true
}
