package ingest

import (
	"context"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"slices"
	"sync"
	"time"

	"github.com/apache/arrow/go/v17/arrow/memory"
	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/metadata"
	"github.com/apache/arrow/go/v17/parquet/schema"

	"dewledger/ingest/trend"
)

// parquetBatch is how many values are read at a time.
const parquetBatch = 8 << 10

// guard runs f and turns a panic of the Parquet library on a corrupt file into
// an error. The library panics on the caller's goroutine.
func guard(what *string, f func() error) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = fmt.Errorf("%s: the file is corrupt (%v)", *what, p)
		}
	}()
	return f()
}

// within runs f on a goroutine of its own and gives it up at the deadline: one
// kind of corruption makes the library's level decoder loop for ever. What is
// given up ends with the process.
func within(ctx context.Context, limit time.Duration, f func(ctx context.Context) error) error {
	ctx, cancel := context.WithTimeout(ctx, limit)
	defer cancel()
	done := make(chan error, 1)
	go func() { done <- f(ctx) }()
	select {
	case err := <-done:
		return err
	case <-ctx.Done():
		select { // f may have ended with the context
		case err := <-done:
			return err
		case <-time.After(time.Second):
		}
		if ctx.Err() == context.DeadlineExceeded {
			return fmt.Errorf("reading it did not end within %v; the file is taken for corrupt", limit)
		}
		return ctx.Err()
	}
}

// patience is how long a file may take: 20 s, and a second for every megabyte,
// a hundredth of the usual speed.
func patience(f io.Seeker) time.Duration {
	size, err := f.Seek(0, io.SeekEnd)
	if err != nil {
		size = 0
	}
	return 20*time.Second + time.Duration(size>>20)*time.Second
}

// openParquet reads the footer. Columns are then read through a small buffer: else the
// library makes one as large as the footer says that the column is.
func openParquet(f storedFile) (*file.Reader, error) {
	props := parquet.NewReaderProperties(memory.DefaultAllocator)
	props.BufferedStreamEnabled, props.BufferSize = true, 16<<10
	return file.NewParquetReader(f, file.WithReadProps(props))
}

// readParquet reads the wanted columns of a file, or points of a long one, from row
// groups that may hold times from from to to (ms UTC).
func readParquet(ctx context.Context, f storedFile, name string, sh *parquetShape, wanted []want, abbr map[string]int64, from, to int64) (*rawTable, error) {
	var out *rawTable
	err := within(ctx, patience(f), func(ctx context.Context) error {
		what := "footer"
		return guard(&what, func() error {
			r, err := openParquet(f)
			if err != nil {
				return fmt.Errorf("not a whole Parquet file: %w", err)
			}
			p := newParquetReader(ctx, r, sh, &what)
			p.abbr = abbr
			p.prune(from, to)
			read := p.table
			if sh.long != nil {
				read = p.long
			}
			t, err := read(wanted)
			out = t
			return err
		})
	})
	if err != nil {
		return nil, err
	}
	return out, nil
}

type parquetReader struct {
	ctx    context.Context
	r      *file.Reader
	sh     *parquetShape
	what   *string // where the reader is, for messages
	groups []int   // row groups to read
	def    []int16
	text   stampReader
	abbr   map[string]int64
	bad    badCell
	digits bool // of the column at hand: words are no value of it
	pool   *sync.Pool

	stampIs stampKind

	f64 []float64
	f32 []float32
	i64 []int64
	i32 []int32
	i96 []parquet.Int96
	bit []bool
	str []parquet.ByteArray
}

func newParquetReader(ctx context.Context, r *file.Reader, sh *parquetShape, what *string) *parquetReader {
	p := &parquetReader{ctx: ctx, r: r, sh: sh, what: what, def: make([]int16, parquetBatch)}
	for g := range r.NumRowGroups() {
		p.groups = append(p.groups, g)
	}
	return p
}

// prune leaves out row groups whose statistics say that their times lie outside
// from to to.
func (p *parquetReader) prune(from, to int64) {
	k := p.sh.timeIs
	if from == minMS && to == maxMS || k.text || k.epoch || k.int96 || k.date || k.nothing {
		return
	}
	slack := int64(0)
	if !k.zoned {
		slack = 26 * 3_600_000 // zones are at most this far from UTC
	}
	kept := p.groups[:0]
	for _, g := range p.groups {
		if c, err := p.r.MetaData().RowGroup(g).ColumnChunk(p.sh.timeCol); err == nil {
			if st, err := c.Statistics(); err == nil && st != nil && st.HasMinMax() {
				if s, ok := st.(*metadata.Int64Statistics); ok && s.Min() <= s.Max() {
					lo, hi := int64(math.Floor(float64(s.Min())*k.scale)), int64(math.Floor(float64(s.Max())*k.scale))
					if hi < from-slack || lo >= to+slack {
						continue
					}
				}
			}
		}
		kept = append(kept, g)
	}
	p.groups = kept
}

// rows is how many rows the groups promise.
func (p *parquetReader) rows() int {
	n := int64(0)
	for _, g := range p.groups {
		n += p.r.RowGroup(g).NumRows()
	}
	return int(n)
}

// stamps reads the time of every row, NaN where there is none, with the time of day
// beside a date.
func (p *parquetReader) stamps() ([]float64, error) {
	// Grow with what is read, not with what a footer promises.
	size := min(p.rows(), 1<<20)
	p.text = stampReader{order: p.sh.order, abbr: p.abbr}
	p.stampIs = p.sh.timeIs
	stamps, err := p.column(p.sh.timeCol, make([]float64, 0, size), p.stampValues)
	if err != nil {
		return nil, err
	}
	if p.text.slashed && p.sh.order == orderUnknown && p.text.order == dayFirst {
		// A later date settled the order: the earlier ones are to be read again.
		p.text = stampReader{order: dayFirst, abbr: p.abbr}
		if stamps, err = p.column(p.sh.timeCol, stamps[:0], p.stampValues); err != nil {
			return nil, err
		}
	}
	if p.sh.clock >= 0 {
		p.stampIs = p.sh.clockIs
		ofDay, err := p.column(p.sh.clock, make([]float64, 0, size), p.stampValues)
		if err != nil {
			return nil, err
		}
		if len(ofDay) != len(stamps) {
			return nil, fmt.Errorf("columns %s and %s have different numbers of rows", quote(p.sh.header[p.sh.timeCol]), quote(p.sh.header[p.sh.clock]))
		}
		for i := range stamps {
			stamps[i] += ofDay[i]
		}
	}
	return stamps, nil
}

// settle brings text stamps to one order, and says whether all are UTC.
func (p *parquetReader) settle(ms []int64) (zoned bool, err error) {
	if !p.text.started {
		return p.sh.timeIs.zoned, nil
	}
	swap, err := p.text.settle(ms)
	if swap {
		swapAll(ms)
	}
	return p.text.zoned, err
}

func (p *parquetReader) table(wanted []want) (*rawTable, error) {
	t := &rawTable{unit: make([]string, len(wanted)), pruned: len(p.groups) == 0}
	stamps, err := p.stamps()
	if err != nil {
		return nil, err
	}
	var drop []bool
	part := rawPart{ms: make([]int64, len(stamps)), cols: make([][]float64, len(wanted))}
	for i, v := range stamps {
		if v != v {
			if drop == nil {
				drop = make([]bool, len(stamps))
			}
			drop[i] = true
			t.skip(skipBadTime)
			continue
		}
		part.ms[i] = int64(v)
	}
	for slot, w := range wanted {
		part.slots = append(part.slots, slot)
		p.bad, p.digits = badCell{}, w.quantity
		v, err := p.column(w.col, make([]float64, 0, len(stamps)+1), p.values)
		if err != nil {
			return nil, err
		}
		if len(v) != len(stamps) {
			return nil, fmt.Errorf("column %s has %d rows where the time column has %d", quote(p.sh.header[w.col]), len(v), len(stamps))
		}
		if w.status >= 0 {
			if err := p.judge(t, w, v); err != nil {
				return nil, err
			}
		}
		part.cols[slot] = compact(v, drop)
		p.reportBad(t, p.sh.header[w.col])
	}
	if drop != nil {
		n := 0
		for i := range part.ms {
			if !drop[i] {
				part.ms[n] = part.ms[i]
				n++
			}
		}
		t.notes.addCount(len(part.ms)-n, "bad-time", "", p.sh.header[p.sh.timeCol], 0, "a row without a time is left out")
		part.ms = part.ms[:n]
	}
	if t.zoned, err = p.settle(part.ms); err != nil {
		return nil, err
	}
	t.rows = len(part.ms)
	t.parts = []rawPart{part}
	return t, nil
}

func (p *parquetReader) reportBad(t *rawTable, column string) {
	if p.bad.count > 0 {
		t.notes.addCount(p.bad.count, "bad-cell", "", column, 0, "%s is not a reading; the cell is left out as %v", quote(p.bad.text), p.bad.why)
	}
}

// judge takes out the readings of v whose status says that they are none.
func (p *parquetReader) judge(t *rawTable, w want, v []float64) error {
	var texts interner
	idx, err := p.column(w.status, make([]float64, 0, len(v)), p.interned(&texts))
	if err != nil {
		return err
	}
	if len(idx) != len(v) {
		return fmt.Errorf("column %s has %d rows where %s has %d", quote(p.sh.header[w.status]), len(idx), quote(p.sh.header[w.col]), len(v))
	}
	texts.judge(t, w, p.sh.header[w.col], idx, v)
	return nil
}

// interner numbers the texts of a column.
type interner struct {
	index map[string]int
	list  []string
	why   []trend.Reason
	known []bool
	last  int
}

// number is the text's number.
func (n *interner) number(b []byte) int {
	if n.last < len(n.list) && n.list[n.last] == string(b) {
		return n.last
	}
	if next := n.last + 1; next < len(n.list) && n.list[next] == string(b) { // texts in turn
		n.last = next
		return next
	}
	i, ok := n.index[string(b)]
	if !ok {
		if n.index == nil {
			n.index = map[string]int{}
		}
		if len(n.list) >= maxPoints || len(b) > maxHeader {
			return -1
		}
		i = len(n.list)
		n.list = append(n.list, string(b))
		n.index[n.list[i]] = i
	}
	n.last = i
	return i
}

// judge takes out the readings of v whose status, by number, says that they are
// none.
func (n *interner) judge(t *rawTable, w want, name string, idx, v []float64) {
	for i, x := range idx {
		if x != x || x < 0 {
			continue
		}
		for k := len(n.why); k < len(n.list); k++ {
			why, known := quality(toUTF8([]byte(n.list[k])))
			n.why, n.known = append(n.why, why), append(n.known, known)
		}
		k := int(x)
		switch {
		case !n.known[k]:
			t.notes.add("status-unknown", "", name, 0, "what %s says of a reading is not known; the reading is taken for good", quote(n.list[k]))
		case n.why[k] == trend.Present:
		case n.why[k] == trend.Overridden && w.output:
			t.notes.add("overridden", "", name, 0, "the command was set by hand; it is what the equipment got, and is used")
		default:
			t.notes.add("status-"+n.why[k].String(), "", name, 0, "the export marks readings %s; they are left out as %v", quote(n.list[k]), n.why[k])
			v[i] = missing(n.why[k])
		}
	}
}

// interned reads a column of text as the numbers of its texts.
func (p *parquetReader) interned(n *interner) func(cr file.ColumnChunkReader, dst []float64) ([]float64, int64, error) {
	return func(cr file.ColumnChunkReader, dst []float64) ([]float64, int64, error) {
		return p.batch(cr, dst, func(float64) float64 { return -1 }, func(b parquet.ByteArray) float64 { return float64(n.number(b)) }, nil)
	}
}

func compact(v []float64, drop []bool) []float64 {
	if drop == nil {
		return v
	}
	n := 0
	for i := range v {
		if !drop[i] {
			v[n] = v[i]
			n++
		}
	}
	return v[:n]
}

// column appends all of a column, row group by row group, nulls as missing. get
// appends up to n values of a chunk with their definition levels.
func (p *parquetReader) column(c int, dst []float64, get func(cr file.ColumnChunkReader, dst []float64) ([]float64, int64, error)) ([]float64, error) {
	for _, g := range p.groups {
		*p.what = fmt.Sprintf("row group %d, column %s", g, quote(p.sh.header[c]))
		rg := p.r.RowGroup(g)
		cr, err := p.columnReader(rg, c)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", *p.what, err)
		}
		var got int64
		for cr.HasNext() {
			if err := p.ctx.Err(); err != nil {
				return nil, err
			}
			var n int64
			if dst, n, err = get(cr, dst); err != nil {
				return nil, fmt.Errorf("%s: %w", *p.what, err)
			}
			if n <= 0 {
				break
			}
			got += n
		}
		if err := cr.Err(); err != nil {
			return nil, fmt.Errorf("%s: %w", *p.what, err)
		}
		if got != rg.NumRows() {
			return nil, fmt.Errorf("%s: %d rows could be read of %d promised (cut short, or in an encoding that is not read)", *p.what, got, rg.NumRows())
		}
	}
	return dst, nil
}

// spread lays the values of one batch out over its rows: a row whose definition
// level is under the column's is null.
func spread[T any](p *parquetReader, cr file.ColumnChunkReader, dst []float64, vals []T, total int64, read int, as func(T) float64) []float64 {
	full := cr.Descriptor().MaxDefinitionLevel()
	if full == 0 || int64(read) == total {
		for _, v := range vals[:read] {
			dst = append(dst, as(v))
		}
		return dst
	}
	k := 0
	for _, d := range p.def[:total] {
		if d == full && k < read {
			dst = append(dst, as(vals[k]))
			k++
		} else {
			dst = append(dst, missing(trend.Gap))
		}
	}
	return dst
}

func sized[T any](b []T) []T {
	if b == nil {
		return make([]T, parquetBatch)
	}
	return b
}

// values reads one batch as readings.
func (p *parquetReader) values(cr file.ColumnChunkReader, dst []float64) ([]float64, int64, error) {
	if r, ok := cr.(*file.Float64ColumnChunkReader); ok && cr.Descriptor().MaxDefinitionLevel() == 0 {
		// Nearly every column: no nulls, and in the form in which it is kept. A NaN has
		// the bits of a gap, and what is infinite is out of every range.
		if len(dst) == cap(dst) {
			dst = slices.Grow(dst, parquetBatch)
		}
		at := len(dst)
		n, k, err := r.ReadBatch(int64(cap(dst)-at), dst[at:cap(dst)], nil, nil)
		return dst[:at+k], n, err
	}
	return p.batch(cr, dst, finite, func(b parquet.ByteArray) float64 {
		x := parseCell(b, '.')
		if x.word && p.digits {
			x.val = missing(trend.NotNumeric)
		}
		if x.val != x.val && !isDisabledWord(x.val) {
			if why := reasonOf(x.val); why != trend.Gap {
				if p.bad.count == 0 {
					p.bad.text, p.bad.why = toUTF8(b), why
				}
				p.bad.count++
			}
		}
		return x.val
	}, nil)
}

// stampValues reads one batch as ms since 1970.
func (p *parquetReader) stampValues(cr file.ColumnChunkReader, dst []float64) ([]float64, int64, error) {
	k := p.stampIs
	num := func(v float64) float64 { return math.Floor(v * k.scale) }
	if k.epoch {
		num = epochMS
	}
	return p.batch(cr, dst, num, func(b parquet.ByteArray) float64 {
		ms, ok := p.text.read(trimBlank(b))
		if !ok {
			return math.NaN()
		}
		return float64(ms)
	}, func(v parquet.Int96) float64 {
		// Nanoseconds of the day, then the Julian day; 2440588 is 1970-01-01.
		ns := binary.LittleEndian.Uint64(v[:8])
		day := binary.LittleEndian.Uint32(v[8:])
		return (float64(day)-2440588)*dayMS + float64(ns/1e6)
	})
}

func finite(v float64) float64 {
	switch {
	case math.IsNaN(v):
		return missing(trend.Gap)
	case math.IsInf(v, 0):
		return missing(trend.BadQuality)
	}
	return v
}

// epochMS reads plain numbers as seconds, milli-, micro- or nanoseconds by their
// size.
func epochMS(v float64) float64 {
	const from, to = 315_532_800, 4_102_444_800
	for _, scale := range [...]float64{1e3, 1, 1e-3, 1e-6} {
		if s := v * scale / 1e3; s >= from && s < to {
			return math.Floor(v * scale)
		}
	}
	return math.NaN()
}

func (p *parquetReader) batch(cr file.ColumnChunkReader, dst []float64, num func(float64) float64, text func(parquet.ByteArray) float64, int96 func(parquet.Int96) float64) ([]float64, int64, error) {
	switch r := cr.(type) {
	case *file.Float64ColumnChunkReader:
		p.f64 = sized(p.f64)
		n, k, err := r.ReadBatch(parquetBatch, p.f64, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		return spread(p, cr, dst, p.f64, n, k, num), n, nil
	case *file.Float32ColumnChunkReader:
		p.f32 = sized(p.f32)
		n, k, err := r.ReadBatch(parquetBatch, p.f32, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		return spread(p, cr, dst, p.f32, n, k, func(v float32) float64 { return num(float64(v)) }), n, nil
	case *file.Int64ColumnChunkReader:
		p.i64 = sized(p.i64)
		n, k, err := r.ReadBatch(parquetBatch, p.i64, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		unit := decimalScale(cr)
		return spread(p, cr, dst, p.i64, n, k, func(v int64) float64 { return num(float64(v) / unit) }), n, nil
	case *file.Int32ColumnChunkReader:
		p.i32 = sized(p.i32)
		n, k, err := r.ReadBatch(parquetBatch, p.i32, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		unit := decimalScale(cr)
		return spread(p, cr, dst, p.i32, n, k, func(v int32) float64 { return num(float64(v) / unit) }), n, nil
	case *file.BooleanColumnChunkReader:
		p.bit = sized(p.bit)
		n, k, err := r.ReadBatch(parquetBatch, p.bit, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		return spread(p, cr, dst, p.bit, n, k, func(v bool) float64 {
			if v {
				return 1
			}
			return 0
		}), n, nil
	case *file.ByteArrayColumnChunkReader:
		p.str = sized(p.str)
		n, k, err := r.ReadBatch(parquetBatch, p.str, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		return spread(p, cr, dst, p.str, n, k, text), n, nil
	case *file.Int96ColumnChunkReader:
		if int96 == nil {
			break
		}
		p.i96 = sized(p.i96)
		n, k, err := r.ReadBatch(parquetBatch, p.i96, p.def, nil)
		if err != nil {
			return dst, n, err
		}
		return spread(p, cr, dst, p.i96, n, k, int96), n, nil
	}
	return dst, 0, fmt.Errorf("columns of type %v are not read", cr.Type())
}

// decimalScale is the divisor of a DECIMAL column stored as integers, else 1.
func decimalScale(cr file.ColumnChunkReader) float64 {
	switch lt := cr.Descriptor().LogicalType().(type) {
	case schema.DecimalLogicalType:
		return math.Pow10(int(lt.Scale()))
	case *schema.DecimalLogicalType:
		return math.Pow10(int(lt.Scale()))
	}
	return 1
}
