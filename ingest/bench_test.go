package ingest

import (
	"bytes"
	"context"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"
	"testing"
	"time"
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
