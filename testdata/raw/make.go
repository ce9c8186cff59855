//go:build ignore

// Command make writes the binary fixtures of this folder: packed, transcoded and
// Parquet files. The text fixtures are written by hand. All data are invented.
//
//	go run testdata/raw/make.go testdata/raw
package main

import (
	"bytes"
	"compress/gzip"
	"encoding/binary"
	"fmt"
	"log"
	"os"
	"path/filepath"
	"time"
	"unicode/utf16"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
	"github.com/klauspost/compress/zstd"
)

func main() {
	log.SetFlags(0)
	if len(os.Args) != 2 {
		log.Fatal("usage: make DIR")
	}
	dir := os.Args[1]
	write := func(name string, data []byte) {
		if err := os.WriteFile(filepath.Join(dir, name), data, 0o644); err != nil {
			log.Fatal(err)
		}
	}
	text := plainText()
	write("packed.csv.gz", gz(text))
	write("packed.csv.zst", zst(text))
	write("latin1.csv", latin1("Time;Zuluft Temp (°C);Abluft Temp (°C);Außenluft Temp (°C)\r\n01.05.2026 00:00;18,5;22,1;11,0\r\n01.05.2026 00:05;18,6;22,1;11,0\r\n01.05.2026 00:10;18,4;22,2;11,1\r\n"))
	write("utf16.csv", wide("Time\tSAT (°F)\tRAT (°F)\tOAT (°F)\r\n2026-05-01 00:00\t55.1\t72.0\t60.3\r\n2026-05-01 00:05\t55.2\t72.1\t60.3\r\n2026-05-01 00:10\t55.0\t72.1\t60.4\r\n"))

	for name, kind := range map[string]stamps{
		"micros.parquet": {node: schema.NewTimestampLogicalType(true, schema.TimeUnitMicros), of: func(t time.Time) int64 { return t.UnixMicro() }},
		"millis.parquet": {node: schema.NewTimestampLogicalType(true, schema.TimeUnitMillis), of: func(t time.Time) int64 { return t.UnixMilli() }},
		"nanos-local.parquet": {node: schema.NewTimestampLogicalType(false, schema.TimeUnitNanos), of: func(t time.Time) int64 {
			_, off := t.Zone()
			return t.UnixNano() + int64(off)*1e9
		}},
		"epoch.parquet":      {of: func(t time.Time) int64 { return t.Unix() }},
		"int96.parquet":      {int96: true},
		"text.parquet":       {text: "02/01/2006 15:04"},
		"date-clock.parquet": {split: true},
	} {
		write(name, kind.write())
	}
	whole := stamps{node: schema.NewTimestampLogicalType(true, schema.TimeUnitMicros), of: func(t time.Time) int64 { return t.UnixMicro() }}.write()
	write("truncated.parquet", whole[:len(whole)/2])
	torn := bytes.Clone(whole)
	for i := 60; i < 120; i++ {
		torn[i] ^= 0x5a
	}
	write("corrupt.parquet", torn)
	write("packed.parquet.gz", gz(whole))
	write("nested.parquet", nested())
}

const rows = 60

var begin = time.Date(2026, 5, 12, 23, 0, 0, 0, time.FixedZone("", 3600))

func sa(i int) float64 { return 13 + float64(i%7)*0.1 }
func ra(i int) float64 { return 22 + float64(i%5)*0.5 }
func cv(i int) int32   { return int32(i * 100 / rows) }
func fan(i int) bool   { return i >= 10 }

func plainText() []byte {
	var b bytes.Buffer
	b.WriteString("time,SAT [degC],RAT [degC],CHWV [%],SF Status\n")
	for i := range rows {
		on := "off"
		if fan(i) {
			on = "on"
		}
		fmt.Fprintf(&b, "%s,%.1f,%.1f,%d,%s\n", begin.Add(time.Duration(i)*5*time.Minute).Format(time.RFC3339), sa(i), ra(i), cv(i), on)
	}
	return b.Bytes()
}

func gz(b []byte) []byte {
	var out bytes.Buffer
	w := gzip.NewWriter(&out)
	w.Write(b)
	w.Close()
	return out.Bytes()
}

func zst(b []byte) []byte {
	w, err := zstd.NewWriter(nil)
	if err != nil {
		log.Fatal(err)
	}
	return w.EncodeAll(b, nil)
}

func latin1(s string) []byte {
	var out []byte
	for _, r := range s {
		out = append(out, byte(r))
	}
	return out
}

func wide(s string) []byte {
	out := []byte{0xff, 0xfe}
	for _, u := range utf16.Encode([]rune(s)) {
		out = binary.LittleEndian.AppendUint16(out, u)
	}
	return out
}

// stamps is one way in which Parquet files hold times.
type stamps struct {
	node  schema.LogicalType
	of    func(time.Time) int64
	int96 bool
	text  string
	split bool // a DATE and a TIME column
}

func must[T any](v T, err error) T {
	if err != nil {
		log.Fatal(err)
	}
	return v
}

// write makes a file of two row groups; every tenth return temperature is null.
func (s stamps) write() []byte {
	req, opt := parquet.Repetitions.Required, parquet.Repetitions.Optional
	var fields schema.FieldList
	switch {
	case s.int96:
		fields = append(fields, schema.NewInt96Node("time", req, -1))
	case s.text != "":
		fields = append(fields, must(schema.NewPrimitiveNodeLogical("time", req, schema.StringLogicalType{}, parquet.Types.ByteArray, -1, -1)))
	case s.split:
		fields = append(fields, must(schema.NewPrimitiveNodeLogical("date", req, schema.DateLogicalType{}, parquet.Types.Int32, -1, -1)),
			must(schema.NewPrimitiveNodeLogical("clock", req, schema.NewTimeLogicalType(false, schema.TimeUnitMillis), parquet.Types.Int32, -1, -1)))
	case s.node != nil:
		fields = append(fields, must(schema.NewPrimitiveNodeLogical("time", req, s.node, parquet.Types.Int64, -1, -1)))
	default:
		fields = append(fields, schema.NewInt64Node("time", req, -1))
	}
	fields = append(fields,
		schema.NewFloat64Node("SAT [degC]", req, -1),
		schema.NewFloat32Node("RAT [degC]", opt, -1),
		schema.NewInt32Node("CHWV [%]", req, -1),
		schema.NewBooleanNode("SF Status", req, -1))
	root := must(schema.NewGroupNode("trends", req, fields, -1))
	var out bytes.Buffer
	w := file.NewParquetWriter(&out, root)
	for g := range 2 {
		rg := w.AppendRowGroup()
		next := func() file.ColumnChunkWriter { return must(rg.NextColumn()) }
		lo, hi := g*rows/2, (g+1)*rows/2
		var i64, ofDay []int64
		var i96 []parquet.Int96
		var texts []parquet.ByteArray
		var f64 []float64
		var f32 []float32
		var def []int16
		var i32, days []int32
		var bit []bool
		for i := lo; i < hi; i++ {
			t := begin.Add(time.Duration(i) * 5 * time.Minute)
			switch {
			case s.int96:
				var v parquet.Int96
				u := t.UTC()
				binary.LittleEndian.PutUint64(v[:8], uint64(u.Sub(u.Truncate(24*time.Hour))))
				binary.LittleEndian.PutUint32(v[8:], uint32(u.Unix()/86400+2440588))
				i96 = append(i96, v)
			case s.text != "":
				texts = append(texts, parquet.ByteArray(t.UTC().Format(s.text)))
			case s.split:
				days = append(days, int32(t.Unix()/86400))
				ofDay = append(ofDay, t.Unix()%86400*1000)
			default:
				i64 = append(i64, s.of(t))
			}
			f64 = append(f64, sa(i))
			if i%10 == 9 {
				def = append(def, 0)
			} else {
				def = append(def, 1)
				f32 = append(f32, float32(ra(i)))
			}
			i32 = append(i32, cv(i))
			bit = append(bit, fan(i))
		}
		switch {
		case s.int96:
			must(next().(*file.Int96ColumnChunkWriter).WriteBatch(i96, nil, nil))
		case s.text != "":
			must(next().(*file.ByteArrayColumnChunkWriter).WriteBatch(texts, nil, nil))
		case s.split:
			must(next().(*file.Int32ColumnChunkWriter).WriteBatch(days, nil, nil))
			clock := make([]int32, len(ofDay))
			for i, v := range ofDay {
				clock[i] = int32(v)
			}
			must(next().(*file.Int32ColumnChunkWriter).WriteBatch(clock, nil, nil))
		default:
			must(next().(*file.Int64ColumnChunkWriter).WriteBatch(i64, nil, nil))
		}
		must(next().(*file.Float64ColumnChunkWriter).WriteBatch(f64, nil, nil))
		must(next().(*file.Float32ColumnChunkWriter).WriteBatch(f32, def, nil))
		must(next().(*file.Int32ColumnChunkWriter).WriteBatch(i32, nil, nil))
		must(next().(*file.BooleanColumnChunkWriter).WriteBatch(bit, nil, nil))
		if err := rg.Close(); err != nil {
			log.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		log.Fatal(err)
	}
	return out.Bytes()
}

// nested makes a file with a list column beside a plain one.
func nested() []byte {
	req := parquet.Repetitions.Required
	list := must(schema.NewGroupNode("points", req, schema.FieldList{schema.NewFloat64Node("element", parquet.Repetitions.Repeated, -1)}, -1))
	root := must(schema.NewGroupNode("trends", req, schema.FieldList{
		must(schema.NewPrimitiveNodeLogical("time", req, schema.NewTimestampLogicalType(true, schema.TimeUnitMillis), parquet.Types.Int64, -1, -1)),
		schema.NewFloat64Node("SAT [degC]", req, -1), list}, -1))
	var out bytes.Buffer
	w := file.NewParquetWriter(&out, root)
	rg := w.AppendRowGroup()
	must(must(rg.NextColumn()).(*file.Int64ColumnChunkWriter).WriteBatch([]int64{begin.UnixMilli(), begin.UnixMilli() + 300_000, begin.UnixMilli() + 600_000}, nil, nil))
	must(must(rg.NextColumn()).(*file.Float64ColumnChunkWriter).WriteBatch([]float64{13, 13.1, 13.2}, nil, nil))
	must(must(rg.NextColumn()).(*file.Float64ColumnChunkWriter).WriteBatch([]float64{1, 2, 3}, []int16{1, 1, 1}, []int16{0, 0, 0}))
	if err := rg.Close(); err != nil {
		log.Fatal(err)
	}
	if err := w.Close(); err != nil {
		log.Fatal(err)
	}
	return out.Bytes()
}
