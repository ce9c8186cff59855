package columnfile

import (
	"bytes"
	"errors"
	"math"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/parquet/file"
)

func TestWriteReadsBack(t *testing.T) {
	const n = rowGroup + 100 // two row groups
	v, text := make([]float64, n), make([]string, n)
	for i := range v {
		v[i], text[i] = float64(i)/7, "state"
		if i%5 == 0 {
			v[i] = math.NaN()
		}
	}
	start := time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC)
	var b bytes.Buffer
	err := Write(&b, "time", n, func(i int) time.Time { return start.Add(time.Duration(i) * time.Minute) },
		[]Column{{Name: "v", Meta: "K; a value", Val: v}, {Name: "s", Text: text}}, map[string]string{"key": "value"})
	if err != nil {
		t.Fatal(err)
	}
	r, err := file.NewParquetReader(bytes.NewReader(b.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	if r.NumRows() != n || r.NumRowGroups() != 2 {
		t.Fatalf("%d rows in %d groups", r.NumRows(), r.NumRowGroups())
	}
	kv := r.MetaData().KeyValueMetadata()
	if x := kv.FindValue("v"); x == nil || *x != "K; a value" {
		t.Errorf("the column's metadata is %v", x)
	}
	row := 0
	for g := range r.NumRowGroups() {
		rg := r.RowGroup(g)
		times, vals := make([]int64, rg.NumRows()), make([]float64, rg.NumRows())
		defs := make([]int16, rg.NumRows())
		col, err := rg.Column(0)
		if err != nil {
			t.Fatal(err)
		}
		if _, k, err := col.(*file.Int64ColumnChunkReader).ReadBatch(rg.NumRows(), times, nil, nil); err != nil || int64(k) != rg.NumRows() {
			t.Fatalf("times: %d, %v", k, err)
		}
		col, err = rg.Column(1)
		if err != nil {
			t.Fatal(err)
		}
		if _, _, err := col.(*file.Float64ColumnChunkReader).ReadBatch(rg.NumRows(), vals, defs, nil); err != nil {
			t.Fatal(err)
		}
		k := 0
		for i := range times {
			if want := start.Add(time.Duration(row) * time.Minute).UnixMicro(); times[i] != want {
				t.Fatalf("row %d is at %d, want %d", row, times[i], want)
			}
			switch {
			case defs[i] == 0:
				if !math.IsNaN(v[row]) {
					t.Fatalf("row %d is null, want %v", row, v[row])
				}
			default:
				if vals[k] != v[row] {
					t.Fatalf("row %d is %v, want %v", row, vals[k], v[row])
				}
				k++
			}
			row++
		}
	}
}

type failing struct{ after int }

func (f *failing) Write(p []byte) (int, error) {
	if f.after -= len(p); f.after < 0 {
		return 0, errors.New("disk full")
	}
	return len(p), nil
}

func TestWriteReportsAFullDisk(t *testing.T) {
	v := make([]float64, 50000)
	for i := range v {
		v[i] = math.Sin(float64(i))
	}
	err := Write(&failing{after: 1000}, "time", len(v), func(i int) time.Time { return time.Unix(int64(i), 0) }, []Column{{Name: "v", Val: v}}, nil)
	if err == nil {
		t.Error("a write that failed was not reported")
	}
}

func TestWriteNoRows(t *testing.T) {
	var b bytes.Buffer
	if err := Write(&b, "time", 0, nil, []Column{{Name: "v", Val: []float64{}}}, nil); err != nil {
		t.Fatal(err)
	}
	if r, err := file.NewParquetReader(bytes.NewReader(b.Bytes())); err != nil || r.NumRows() != 0 {
		t.Errorf("%v", err)
	}
}
