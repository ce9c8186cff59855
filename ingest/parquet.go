package ingest

import (
	"context"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"time"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
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

// readParquet reads the wanted columns of a file.
func readParquet(ctx context.Context, f storedFile, name string, sh *parquetShape, wanted []int) (*rawTable, error) {
	var out *rawTable
	err := within(ctx, patience(f), func(ctx context.Context) error {
		what := "footer"
		return guard(&what, func() error {
			r, err := file.NewParquetReader(f)
			if err != nil {
				return fmt.Errorf("not a whole Parquet file: %w", err)
			}
			p := &parquetReader{ctx: ctx, r: r, sh: sh, what: &what, def: make([]int16, parquetBatch)}
			t, err := p.table(wanted)
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
	ctx  context.Context
	r    *file.Reader
	sh   *parquetShape
	what *string // where the reader is, for messages
	def  []int16
	text stampReader
	bad  badCell

	stampIs stampKind

	f64 []float64
	f32 []float32
	i64 []int64
	i32 []int32
	i96 []parquet.Int96
	bit []bool
	str []parquet.ByteArray
}

func (p *parquetReader) table(wanted []int) (*rawTable, error) {
	t := &rawTable{cols: make([][]float64, len(wanted)), unit: make([]string, len(wanted))}
	rows := int(p.r.NumRows())
	// Grow with what is read, not with what a footer promises.
	size := min(rows, 1<<20)
	p.text.order, p.stampIs = p.sh.order, p.sh.timeIs
	stamps, err := p.column(p.sh.timeCol, make([]float64, 0, size), p.stampValues)
	if err != nil {
		return nil, err
	}
	if p.text.slashed && p.sh.order == orderUnknown && p.text.order == dayFirst {
		// A later date settled the order: the earlier ones are to be read again.
		p.text = stampReader{order: dayFirst}
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
	var drop []bool
	t.ms = make([]int64, len(stamps))
	for i, v := range stamps {
		if v != v {
			if drop == nil {
				drop = make([]bool, len(stamps))
			}
			drop[i] = true
			t.skip(skipBadTime)
			continue
		}
		t.ms[i] = int64(v)
	}
	if p.text.started {
		if err := p.text.settle(t.ms); err != nil {
			return nil, err
		}
		t.zoned = p.text.zoned
	} else {
		t.zoned = p.sh.timeIs.zoned
	}
	for slot, c := range wanted {
		p.bad = badCell{}
		v, err := p.column(c, make([]float64, 0, len(stamps)), p.values)
		if err != nil {
			return nil, err
		}
		if len(v) != len(stamps) {
			return nil, fmt.Errorf("column %s has %d rows where the time column has %d", quote(p.sh.header[c]), len(v), len(stamps))
		}
		t.cols[slot] = compact(v, drop)
		if p.bad.count > 0 {
			t.notes.addCount(p.bad.count, "bad-cell", "", p.sh.header[c], 0, "%s is not a number; the cell is left out as %v", quote(p.bad.text), p.bad.why)
		}
	}
	if drop != nil {
		n := 0
		for i := range t.ms {
			if !drop[i] {
				t.ms[n] = t.ms[i]
				n++
			}
		}
		t.notes.addCount(len(t.ms)-n, "bad-time", "", p.sh.header[p.sh.timeCol], 0, "a row without a time is left out")
		t.ms = t.ms[:n]
	}
	t.rows = len(t.ms)
	return t, nil
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
	for g := range p.r.NumRowGroups() {
		*p.what = fmt.Sprintf("row group %d, column %s", g, quote(p.sh.header[c]))
		rg := p.r.RowGroup(g)
		cr, err := rg.Column(c)
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
	return p.batch(cr, dst, finite, func(b parquet.ByteArray) float64 {
		x := parseCell(b, '.')
		if x.val != x.val {
			if why := reasonOf(x.val); why == trend.NotNumeric || why == trend.BadQuality {
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
		ms, ok := p.text.read(trimBlank(b), nil)
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
