package ingest

import (
	"bytes"
	"context"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"
	"sync"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/arrow/memory"
	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/pqarrow"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// wideCSV is an invented month of one-minute trends: rows by cols, one decimal,
// a header, ISO times.
func wideCSV(rows, cols int) []byte {
	var b bytes.Buffer
	b.WriteString("time")
	for c := range cols - 1 {
		fmt.Fprintf(&b, ",point %d", c)
	}
	b.WriteByte('\n')
	t0 := time.Date(2026, 5, 1, 0, 0, 0, 0, time.UTC)
	var cell []byte
	for i := range rows {
		b.Write(t0.Add(time.Duration(i)*time.Minute).AppendFormat(cell[:0], "2006-01-02 15:04:05"))
		for c := range cols - 1 {
			v := 20 + 10*math.Sin(float64(i)/300+float64(c)) + float64((i*7+c*13)%11)/10
			b.WriteByte(',')
			b.Write(strconv.AppendFloat(cell[:0], v, 'f', 1, 64))
		}
		b.WriteByte('\n')
	}
	return b.Bytes()
}

func BenchmarkCSV(b *testing.B) {
	const rows, cols = 43_200, 24
	text := wideCSV(rows, cols)
	b.Run("single pass", func(b *testing.B) {
		b.SetBytes(int64(len(text)))
		sh, err := sniffText(text[:headBytes], false, "")
		if err != nil {
			b.Fatal(err)
		}
		var wanted []want
		for c := 1; c < cols; c++ {
			wanted = append(wanted, want{col: c, status: -1})
		}
		for b.Loop() {
			t, err := readCSV(context.Background(), bytes.NewReader(text), "x.csv", sh, wanted, rows, nil)
			if err != nil || t.rows != rows {
				b.Fatal(err, t.rows)
			}
		}
		b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
	b.Run("bare", func(b *testing.B) {
		b.SetBytes(int64(len(text)))
		for b.Loop() {
			if ms, _ := readBare(text, rows, cols); len(ms) != rows {
				b.Fatal(len(ms))
			}
		}
		b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
	b.Run("encoding csv and strconv", func(b *testing.B) {
		b.SetBytes(int64(len(text)))
		for b.Loop() {
			if n := readPlain(b, bytes.NewReader(text), cols); n != rows {
				b.Fatal(n)
			}
		}
		b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
}

// readBare is the least that reads the same numbers: one pass, one shape of cell, no
// check. It stands for what the machine can do.
func readBare(text []byte, rows, cols int) (ms []int64, vals [][]float64) {
	ms = make([]int64, 0, rows)
	vals = make([][]float64, cols-1)
	for c := range vals {
		vals[c] = make([]float64, 0, rows)
	}
	i := bytes.IndexByte(text, '\n') + 1
	two := func(i int) int64 { return int64(text[i]-'0')*10 + int64(text[i+1]-'0') }
	day, lastDay := int64(0), ""
	for i < len(text) {
		if d := text[i : i+10]; string(d) != lastDay {
			lastDay = string(d)
			day = daysFromCivil(int(two(i)*100+two(i+2)), int(two(i+5)), int(two(i+8))) * dayMS
		}
		ms = append(ms, day+(two(i+11)*3600+two(i+14)*60+two(i+17))*1000)
		i += 20
		for c := range vals {
			neg := text[i] == '-'
			if neg {
				i++
			}
			m := uint64(0)
			for text[i]-'0' <= 9 {
				m = m*10 + uint64(text[i]-'0')
				i++
			}
			v := float64(m)
			if text[i] == '.' {
				i++
				from := i
				for text[i]-'0' <= 9 {
					m = m*10 + uint64(text[i]-'0')
					i++
				}
				v = float64(m) / pow10[i-from]
			}
			if neg {
				v = -v
			}
			vals[c] = append(vals[c], v)
			i++
		}
	}
	return ms, vals
}

// readPlain reads the same with the standard library alone.
func readPlain(b testing.TB, r io.Reader, cols int) int {
	cr := csv.NewReader(r)
	cr.ReuseRecord = true
	if _, err := cr.Read(); err != nil {
		b.Fatal(err)
	}
	var ms []int64
	vals := make([][]float64, cols-1)
	for {
		rec, err := cr.Read()
		if err == io.EOF {
			return len(ms)
		}
		if err != nil {
			b.Fatal(err)
		}
		t, err := time.Parse("2006-01-02 15:04:05", rec[0])
		if err != nil {
			b.Fatal(err)
		}
		ms = append(ms, t.UnixMilli())
		for c := 1; c < cols; c++ {
			v, err := strconv.ParseFloat(rec[c], 64)
			if err != nil {
				v = math.NaN()
			}
			vals[c-1] = append(vals[c-1], v)
		}
	}
}

// longCSV is the same trends with one row a reading.
func longCSV(rows, points int) []byte {
	var b bytes.Buffer
	b.WriteString("time,point,value\n")
	t0 := time.Date(2026, 5, 1, 0, 0, 0, 0, time.UTC)
	var cell []byte
	for i := range rows {
		stamp := t0.Add(time.Duration(i) * time.Minute).Format("2006-01-02 15:04:05")
		for c := range points {
			b.WriteString(stamp)
			fmt.Fprintf(&b, ",AHU-1 point %d,", c)
			b.Write(strconv.AppendFloat(cell[:0], 20+10*math.Sin(float64(i)/300+float64(c))+float64((i*7+c*13)%11)/10, 'f', 1, 64))
			b.WriteByte('\n')
		}
	}
	return b.Bytes()
}

func BenchmarkLongCSV(b *testing.B) {
	const rows, points = 20_000, 24
	text := longCSV(rows, points)
	b.Run("single pass", func(b *testing.B) {
		sh, err := sniffText(text[:headBytes], false, "")
		if err != nil {
			b.Fatal(err)
		}
		if sh.long = isLong(sh); sh.long == nil {
			b.Fatal("not taken for a long file")
		}
		var notes notebook
		if _, _, err := scanLong(context.Background(), bytes.NewReader(text), "x.csv", sh, &notes); err != nil {
			b.Fatal(err)
		}
		var wanted []want
		for c := range sh.long.names {
			wanted = append(wanted, want{col: c, status: -1})
		}
		for b.Loop() {
			t, err := readLong(context.Background(), bytes.NewReader(text), "x.csv", sh, wanted, nil)
			if err != nil || t.rows != rows*points {
				b.Fatal(err, t.rows)
			}
		}
		b.ReportMetric(float64(rows*points)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
	b.Run("encoding csv and strconv", func(b *testing.B) {
		for b.Loop() {
			if n := readPlainLong(b, bytes.NewReader(text)); n != rows*points {
				b.Fatal(n)
			}
		}
		b.ReportMetric(float64(rows*points)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
}

// readPlainLong reads the same with the standard library alone.
func readPlainLong(b testing.TB, r io.Reader) (n int) {
	cr := csv.NewReader(r)
	cr.ReuseRecord = true
	if _, err := cr.Read(); err != nil {
		b.Fatal(err)
	}
	points := map[string]*series{}
	for {
		rec, err := cr.Read()
		if err == io.EOF {
			return n
		}
		if err != nil {
			b.Fatal(err)
		}
		t, err := time.Parse("2006-01-02 15:04:05", rec[0])
		if err != nil {
			b.Fatal(err)
		}
		v, err := strconv.ParseFloat(rec[2], 64)
		if err != nil {
			v = math.NaN()
		}
		s := points[rec[1]]
		if s == nil {
			s = &series{}
			points[string([]byte(rec[1]))] = s
		}
		s.ms, s.val = append(s.ms, t.UnixMilli()), append(s.val, v)
		n++
	}
}

func benchValue(i, c int) float64 {
	return math.Round(200+100*math.Sin(float64(i)/300+float64(c))+float64((i*7+c*13)%11)) / 10
}

// wideParquet is the trends of wideCSV as a Parquet file of two row groups.
func wideParquet(b testing.TB, rows, cols int) []byte {
	req := parquet.Repetitions.Required
	stamp, err := schema.NewPrimitiveNodeLogical("time", req, schema.NewTimestampLogicalType(true, schema.TimeUnitMillis), parquet.Types.Int64, -1, -1)
	if err != nil {
		b.Fatal(err)
	}
	fields := schema.FieldList{stamp}
	for c := range cols - 1 {
		fields = append(fields, schema.NewFloat64Node(fmt.Sprintf("point %d", c), req, -1))
	}
	root, err := schema.NewGroupNode("trends", req, fields, -1)
	if err != nil {
		b.Fatal(err)
	}
	var out bytes.Buffer
	w := file.NewParquetWriter(&out, root, file.WithWriterProps(parquet.NewWriterProperties(parquet.WithCompression(compress.Codecs.Snappy))))
	t0 := time.Date(2026, 5, 1, 0, 0, 0, 0, time.UTC)
	for g := range 2 {
		rg := w.AppendRowGroup()
		lo, hi := g*rows/2, (g+1)*rows/2
		for c := range cols {
			cw, err := rg.NextColumn()
			if err != nil {
				b.Fatal(err)
			}
			switch cw := cw.(type) {
			case *file.Int64ColumnChunkWriter:
				var v []int64
				for i := lo; i < hi; i++ {
					v = append(v, t0.Add(time.Duration(i)*time.Minute).UnixMilli())
				}
				_, err = cw.WriteBatch(v, nil, nil)
			case *file.Float64ColumnChunkWriter:
				var v []float64
				for i := lo; i < hi; i++ {
					v = append(v, benchValue(i, c))
				}
				_, err = cw.WriteBatch(v, nil, nil)
			}
			if err != nil {
				b.Fatal(err)
			}
		}
		if err := rg.Close(); err != nil {
			b.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		b.Fatal(err)
	}
	return out.Bytes()
}

type inMemory struct{ *bytes.Reader }

func (inMemory) Close() error { return nil }

func BenchmarkParquet(b *testing.B) {
	const rows, cols = 43_200, 24
	text := wideParquet(b, rows, cols)
	b.Run("column readers", func(b *testing.B) {
		sh, err := sniffParquet(context.Background(), inMemory{bytes.NewReader(text)}, "")
		if err != nil {
			b.Fatal(err)
		}
		var wanted []want
		for c := 1; c < cols; c++ {
			wanted = append(wanted, want{col: c, status: -1})
		}
		want := benchValue(rows-1, 23)
		for b.Loop() {
			t, err := readParquet(context.Background(), inMemory{bytes.NewReader(text)}, "x.parquet", sh, wanted, nil, minMS, maxMS)
			if err != nil || t.rows != rows || t.parts[0].cols[22][rows-1] != want {
				b.Fatal(err, t.rows)
			}
		}
		b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
	b.Run("whole table", func(b *testing.B) {
		for b.Loop() {
			r, err := file.NewParquetReader(bytes.NewReader(text))
			if err != nil {
				b.Fatal(err)
			}
			fr, err := pqarrow.NewFileReader(r, pqarrow.ArrowReadProperties{BatchSize: 64 << 10}, memory.DefaultAllocator)
			if err != nil {
				b.Fatal(err)
			}
			t, err := fr.ReadTable(context.Background())
			if err != nil || t.NumRows() != rows {
				b.Fatal(err)
			}
			t.Release()
		}
		b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
	})
}

// Two files, one after the other and at once.
func BenchmarkTwoFiles(b *testing.B) {
	text := wideCSV(200_000, 24)
	sh, err := sniffText(text[:headBytes], false, "")
	if err != nil {
		b.Fatal(err)
	}
	var wanted []want
	for c := 1; c < 24; c++ {
		wanted = append(wanted, want{col: c, status: -1})
	}
	read := func() {
		if t, err := readCSV(context.Background(), bytes.NewReader(text), "x.csv", sh, wanted, 200_000, nil); err != nil || t.rows != 200_000 {
			b.Error(err)
		}
	}
	b.Run("one core", func(b *testing.B) {
		for b.Loop() {
			read()
			read()
		}
	})
	b.Run("two cores", func(b *testing.B) {
		for b.Loop() {
			var wg sync.WaitGroup
			wg.Go(read)
			wg.Go(read)
			wg.Wait()
		}
	})
}
