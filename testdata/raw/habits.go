//go:build ignore

// Command habits writes the folder habits: one invented record of five hours of an
// air handler, once in every manner in which building systems export trends.
//
//	go run testdata/raw/habits.go testdata/raw/habits
package main

import (
	"archive/zip"
	"bytes"
	"encoding/binary"
	"fmt"
	"log"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"time"
	"unicode/utf16"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

const rows = 60

var begin = time.Date(2026, 5, 21, 13, 0, 0, 0, time.UTC)

// The record. Its values are repeated in ingest/habits_test.go.
func at(i int) time.Time { return begin.Add(time.Duration(i) * 5 * time.Minute) }
func sat(i int) float64  { return 13 + float64(i%7)/10 }
func rat(i int) float64  { return 22 + float64(i%5)/2 }
func oat(i int) float64  { return 9.5 + float64(i)/10 }
func chwv(i int) float64 { return float64(i * 100 / rows) }
func flow(i int) float64 { return 12000 + float64(i) }
func fan(i int) float64 {
	if i >= 10 {
		return 1
	}
	return 0
}

var names = []string{"SAT [degC]", "RAT [degC]", "OAT [degC]", "CHW Valve [%]", "SF Status"}

func values(i int) []float64 { return []float64{sat(i), rat(i), oat(i), chwv(i), fan(i)} }

// sheet is how a wide file is written.
type sheet struct {
	delim, mark, eol string
	time             string // layout
	head             []string
	stamp            func(i int) string
	cell             func(i, c int, v float64) string
	extra            func(i int) string // after the row's cells
	before, after    string
	between          map[int]string // lines before row i
}

func (s sheet) write() string {
	or := func(a *string, b string) {
		if *a == "" {
			*a = b
		}
	}
	or(&s.delim, ",")
	or(&s.mark, ".")
	or(&s.eol, "\n")
	or(&s.time, "2006-01-02 15:04:05")
	if s.head == nil {
		s.head = append([]string{"Time"}, names...)
	}
	var b strings.Builder
	b.WriteString(s.before)
	b.WriteString(strings.Join(s.head, s.delim) + s.eol)
	for i := range rows {
		b.WriteString(s.between[i])
		if s.stamp != nil {
			b.WriteString(s.stamp(i))
		} else {
			b.WriteString(at(i).Format(s.time))
		}
		for c, v := range values(i) {
			b.WriteString(s.delim)
			if s.cell != nil {
				b.WriteString(s.cell(i, c, v))
			} else {
				b.WriteString(strings.Replace(number(v), ".", s.mark, 1))
			}
		}
		if s.extra != nil {
			b.WriteString(s.extra(i))
		}
		b.WriteString(s.eol)
	}
	b.WriteString(s.after)
	return b.String()
}

func number(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

func main() {
	log.SetFlags(0)
	if len(os.Args) != 2 {
		log.Fatal("usage: habits DIR")
	}
	dir := os.Args[1]
	write := func(name, text string) {
		p := filepath.Join(dir, name)
		if err := os.MkdirAll(filepath.Dir(p), 0o755); err != nil {
			log.Fatal(err)
		}
		if err := os.WriteFile(p, []byte(text), 0o644); err != nil {
			log.Fatal(err)
		}
	}
	plain := sheet{}.write()

	// Separators, marks, letters, lines.
	write("comma.csv", plain)
	write("semicolon.csv", sheet{delim: ";", mark: ","}.write())
	write("tab.tsv", sheet{delim: "\t"}.write())
	write("pipe.txt", sheet{delim: "|"}.write())
	write("crlf.csv", sheet{eol: "\r\n"}.write())
	write("cr.csv", sheet{eol: "\r"}.write())
	write("bom.csv", "\ufeff"+plain)
	write("utf16le.csv", wide(plain, binary.LittleEndian, true))
	write("utf16be.csv", wide(plain, binary.BigEndian, true))
	write("utf16-no-mark.csv", wide(plain, binary.LittleEndian, false))
	degrees := []string{"Time", "SAT (°C)", "RAT (°C)", "OAT (°C)", "CHW Valve (%)", "SF Status"}
	write("latin1.csv", latin1(sheet{head: degrees}.write()))
	write("utf8.csv", sheet{head: degrees}.write())
	thousands := func(sep, mark string) func(i int) string {
		return func(i int) string {
			s := strconv.Itoa(int(flow(i)))
			return s[:len(s)-3] + sep + s[len(s)-3:] + mark + "0"
		}
	}
	with := func(name string) []string { return append(append([]string{"Time"}, names...), name) }
	write("thousands.csv", sheet{head: with("SA Flow [m3/h]"), extra: func(i int) string { return `,"` + thousands(",", ".")(i) + `"` }}.write())
	write("thousands-comma.csv", sheet{delim: ";", mark: ",", head: with("SA Flow [m3/h]"), extra: func(i int) string { return ";" + thousands(".", ",")(i) }}.write())

	// Headers and what stands around the rows.
	write("quoted.csv", sheet{cell: func(_, _ int, v float64) string { return `"` + number(v) + `"` }, stamp: func(i int) string { return `"` + at(i).Format("2006-01-02 15:04") + `"` }}.write())
	write("newlines.csv", sheet{head: append([]string{"Time", "\"SAT\n[degC]\""}, append(append([]string{}, names[1:]...), "Remark")...), extra: func(i int) string {
		if i%9 == 4 {
			return ",\"looked at,\nall \"\"well\"\"\""
		}
		return ","
	}}.write())
	write("preamble.csv", sheet{before: "Trend export\nSite: Quay House\nFrom, 2026-05-21, to, 2026-05-22\n\nInterval,5 min\n\n"}.write())
	write("units-row.csv", sheet{head: []string{"Time", "SAT", "RAT", "OAT", "CHW Valve", "SF Status\n,degC,degC,degC,%,on/off"}}.write())
	write("repeated-header.csv", sheet{between: map[int]string{20: "Time," + strings.Join(names, ",") + "\n", 40: "\nTime," + strings.Join(names, ",") + "\n"}}.write())
	changed := "Time," + strings.Join([]string{names[4], names[2], names[0], "Note", names[1], names[3]}, ",") + "\n"
	var later strings.Builder
	for i, l := range strings.SplitAfter(plain, "\n") {
		if i == 0 || i <= 30 {
			later.WriteString(l)
			continue
		}
		if i == 31 {
			later.WriteString(changed)
		}
		if c := strings.Split(strings.TrimSpace(l), ","); len(c) == 6 {
			later.WriteString(strings.Join([]string{c[0], c[5], c[3], c[1], "", c[2], c[4]}, ",") + "\n")
		}
	}
	write("changed-header.csv", later.String())
	write("trailing.csv", sheet{extra: func(int) string { return ",," }}.write())
	write("trailing-header.csv", sheet{head: with(","), extra: func(int) string { return ",," }}.write())
	write("stray-spaces.csv", sheet{head: []string{" Time ", "  SAT   [degC] ", "RAT [degC]  ", " OAT [degC]", "CHW  Valve [%] ", " SF Status "}, cell: func(_, _ int, v float64) string { return "  " + number(v) + " " }}.write())
	write("same-name.csv", sheet{head: with("SAT [degC]"), extra: func(int) string { return ",99" }}.write())
	write("footer.csv", sheet{after: "\nRows: 60\nEnd of export\n"}.write())
	write("no-header.csv", plain[strings.Index(plain, "\n")+1:])

	// Narrow files.
	long := func(head string, line func(i, c int) string, grouped bool) string {
		var b strings.Builder
		b.WriteString(head)
		if grouped {
			for c := range names {
				for i := range rows {
					b.WriteString(line(i, c) + "\n")
				}
			}
			return b.String()
		}
		for i := range rows {
			for c := range names {
				b.WriteString(line(i, c) + "\n")
			}
		}
		return b.String()
	}
	iso := func(i int) string { return at(i).Format("2006-01-02T15:04:05Z") }
	write("long.csv", long("time,point,value\n", func(i, c int) string { return iso(i) + "," + names[c] + "," + number(values(i)[c]) }, false))
	write("long-grouped.csv", long("Name;Zeit;Wert\n", func(i, c int) string {
		return names[c] + ";" + at(i).Format("02.01.2006 15:04") + ";" + strings.Replace(number(values(i)[c]), ".", ",", 1)
	}, true))
	write("long-bare.csv", long("", func(i, c int) string { return iso(i) + "," + names[c] + "," + number(values(i)[c]) }, false))
	write("long-status.csv", long("Timestamp,Trend,Value,Status\n", func(i, c int) string {
		v, st := number(values(i)[c]), "ok"
		switch {
		case c == 0 && i == 7:
			v, st = "99", "{fault}"
		case c == 1 && i == 8:
			v, st = "99", "{overridden}"
		case c == 2 && i == 9:
			v, st = "99", "stale"
		case c == 2 && i == 10:
			v, st = "99", "{down}"
		case c == 2 && i == 11:
			v, st = "", "{disabled}"
		case c == 3 && i == 30:
			st = "{overridden}"
		}
		return iso(i) + "," + names[c] + "," + v + "," + st
	}, false))
	bare := []string{"SAT", "RAT", "OAT", "CHW Valve", "SF Status"}
	unit := []string{"degF", "degF", "degC", "%", ""}
	write("long-unit.csv", long("time,point,unit,value\n", func(i, c int) string {
		v := values(i)[c]
		if unit[c] == "degF" {
			v = v*1.8 + 32
		}
		return iso(i) + "," + bare[c] + "," + unit[c] + "," + strconv.FormatFloat(v, 'f', 6, 64)
	}, false))
	write("long-equipment.csv", long("time,equipment,point,value\n", func(i, c int) string {
		return iso(i) + ",AHU-4," + names[c] + "," + number(values(i)[c]) + "\n" + iso(i) + ",AHU-5," + names[c] + "," + number(values(i)[c])
	}, false))
	write("fleet.csv", sheet{head: func() []string {
		h := []string{"Time"}
		for _, u := range []string{"AHU-4", "AHU-5"} {
			for _, n := range names {
				h = append(h, u+" "+n)
			}
		}
		return h
	}(), extra: func(i int) string {
		s := ""
		for _, v := range values(i) {
			s += "," + number(v)
		}
		return s
	}}.write())
	for c, n := range bare {
		var b strings.Builder
		b.WriteString("Date,Value\n")
		for i := range rows {
			fmt.Fprintf(&b, "%s,%s\n", at(i).Format("2006-01-02 15:04"), number(values(i)[c]))
		}
		write("one-a-point/AHU-4 "+n+".csv", b.String())
	}
	lines := strings.SplitAfter(plain, "\n")
	write("parts/AHU-4 2026-05 (1).csv", lines[0]+strings.Join(lines[1:37], ""))
	write("parts/AHU-4 2026-05 (2).csv", lines[0]+strings.Join(lines[31:], ""))
	var z bytes.Buffer
	zw := zip.NewWriter(&z)
	for _, f := range [][2]string{{"../AHU-4 2026-05 (1).csv", lines[0] + strings.Join(lines[1:37], "")}, {"more/readme.md", "hello"}, {"AHU-4 2026-05 (2).csv", lines[0] + strings.Join(lines[31:], "")}} {
		w, err := zw.Create(f[0])
		if err != nil {
			log.Fatal(err)
		}
		w.Write([]byte(f[1]))
	}
	zw.Close()
	write("parts.zip", z.String())

	// Values.
	write("value-words.csv", sheet{cell: func(i, c int, v float64) string {
		if c == 4 {
			return [][2]string{{"Off", "On"}, {"false", "TRUE"}, {"closed", "Open"}, {"Inactive", "Active"}, {"no", "yes"}, {"Stop", "Run"}, {"disabled", "enabled"}}[i%7][int(v)]
		}
		if c == 3 {
			return number(v) + " %"
		}
		if c == 1 {
			return number(v) + " °C"
		}
		return number(v)
	}}.write())
	write("value-missing.csv", sheet{cell: func(i, c int, v float64) string {
		if c == 0 && i < 12 {
			return []string{"", "NaN", "null", "-", "--", "n/a", "#N/A", "-9999", "32767", "No Data", "fault", "off"}[i]
		}
		if c == 2 {
			return strconv.FormatFloat(v, 'e', 3, 64)
		}
		return number(v)
	}}.write())
	write("status-column.csv", sheet{head: []string{"Time", "SAT [degC]", "RAT [degC]", "OAT [degC]", "CHW Valve [%]", "SF Status", "RAT Status", "CHW Valve Status"}, extra: func(i int) string {
		a, b := "ok", "normal"
		if i == 6 {
			a = `"{fault,down}"`
		}
		if i == 7 {
			a, b = "stale", "Overridden by operator"
		}
		return "," + a + "," + b
	}}.write())
	write("status-cell.csv", sheet{cell: func(i, c int, v float64) string {
		if c < 3 {
			st := "ok"
			if c == 1 && i == 6 {
				st = "fault"
			}
			if c == 1 && i == 7 {
				st = "stale"
			}
			return number(v) + " °C {" + st + "}"
		}
		return number(v)
	}}.write())
	write("torn.csv", sheet{between: map[int]string{5: "2026-05-21 13:2", 6: "\"never closed,1,2\n", 7: strings.Repeat("x", 300) + "\n", 8: "not a time,1,2,3,4,0\n"}}.write())

	// Times.
	write("time-iso-offset.csv", sheet{stamp: func(i int) string {
		return at(i).In(time.FixedZone("", 7200)).Format("2006-01-02T15:04:05-07:00")
	}}.write())
	write("time-day-first.csv", sheet{time: "02/01/2006 15:04"}.write())
	write("time-month-first.csv", sheet{time: "01/02/2006 03:04:05 PM"}.write())
	write("time-short-year.csv", sheet{time: "1/2/06 15:04"}.write())
	write("time-month-word.csv", sheet{time: "2-Jan-2006 15:04"}.write())
	write("time-seconds.csv", sheet{stamp: func(i int) string { return strconv.FormatInt(at(i).Unix(), 10) }}.write())
	write("time-millis.csv", sheet{stamp: func(i int) string { return strconv.FormatInt(at(i).UnixMilli(), 10) }}.write())
	write("time-serial.csv", sheet{stamp: func(i int) string {
		return strconv.FormatFloat(float64(at(i).Unix())/86400+25569, 'f', 6, 64)
	}}.write())
	write("time-beside.csv", sheet{head: append([]string{"Date", "Clock"}, names...), stamp: func(i int) string { return at(i).Format("2006-01-02,15:04") }}.write())
	write("time-ambiguous.csv", strings.ReplaceAll(sheet{time: "01/02/2006 15:04"}.write(), "05/21/2026", "05/06/2026"))
	ny, err := time.LoadLocation("America/New_York")
	if err != nil {
		log.Fatal(err)
	}
	// Hourly through an autumn night, told apart by the zone's word alone: newest first.
	var words strings.Builder
	words.WriteString("Time,SAT [degC],RAT [degC],SF Status\n")
	for i := 23; i >= 0; i-- {
		fmt.Fprintf(&words, "%s,%.1f,22,1\n", time.Date(2026, 10, 31, 20, 0, 0, 0, ny).Add(time.Duration(i)*time.Hour).Format("01/02/2006 3:04:05 PM MST"), sat(i))
	}
	write("time-zone-words.csv", words.String())
	standard := time.FixedZone("", 0)
	for name, zone := range map[string]*time.Location{"clock-standard.csv": standard, "clock-wall.csv": must(time.LoadLocation("Europe/Lisbon"))} {
		var b strings.Builder
		b.WriteString("Time,SAT [degC],RAT [degC],SF Status\n")
		for i := range 96 { // half-hourly over the spring change of Lisbon, 29 March 2026
			fmt.Fprintf(&b, "%s,%s,22,1\n", time.Date(2026, 3, 28, 12, 0, 0, 0, time.UTC).Add(time.Duration(i)*30*time.Minute).In(zone).Format("2006-01-02 15:04"), number(sat(i)))
		}
		write(name, b.String())
	}
	write("drifting.csv", sheet{stamp: func(i int) string { return at(i).Add(time.Duration(i%11) * time.Second).Format("2006-01-02 15:04:05") }}.write())

	// Parquet.
	for name, c := range map[string]compress.Compression{"snappy": compress.Codecs.Snappy, "zstd": compress.Codecs.Zstd, "gzip": compress.Codecs.Gzip, "plain": compress.Codecs.Uncompressed, "brotli": compress.Codecs.Brotli} {
		write(name+".parquet", columns(parquet.WithCompression(c), parquet.WithDictionaryDefault(name != "plain")))
	}
	write("delta.parquet", columns(parquet.WithDictionaryDefault(false), parquet.WithEncodingFor("time", parquet.Encodings.DeltaBinaryPacked)))
	write("pages-v2.parquet", columns(parquet.WithDataPageVersion(parquet.DataPageV2)))
	write("long.parquet", narrow())
	write("byte-stream-split.parquet", byteStreamSplit())
}

func must[T any](v T, err error) T {
	if err != nil {
		log.Fatal(err)
	}
	return v
}

func latin1(s string) string {
	var out []byte
	for _, r := range s {
		out = append(out, byte(r))
	}
	return string(out)
}

func wide(s string, o binary.AppendByteOrder, mark bool) string {
	var out []byte
	if mark {
		out = o.AppendUint16(out, 0xfeff)
	}
	for _, u := range utf16.Encode([]rune(s)) {
		out = o.AppendUint16(out, u)
	}
	return string(out)
}

// columns writes the record as a wide Parquet file of three row groups.
func columns(opts ...parquet.WriterProperty) string {
	req := parquet.Repetitions.Required
	fields := schema.FieldList{must(schema.NewPrimitiveNodeLogical("time", req, schema.NewTimestampLogicalType(true, schema.TimeUnitMillis), parquet.Types.Int64, -1, -1))}
	for _, n := range names {
		fields = append(fields, schema.NewFloat64Node(n, req, -1))
	}
	var out bytes.Buffer
	w := file.NewParquetWriter(&out, must(schema.NewGroupNode("trends", req, fields, -1)), file.WithWriterProps(parquet.NewWriterProperties(opts...)))
	for g := range 3 {
		rg := w.AppendRowGroup()
		lo, hi := g*rows/3, (g+1)*rows/3
		var ms []int64
		for i := lo; i < hi; i++ {
			ms = append(ms, at(i).UnixMilli())
		}
		must(must(rg.NextColumn()).(*file.Int64ColumnChunkWriter).WriteBatch(ms, nil, nil))
		for c := range names {
			var v []float64
			for i := lo; i < hi; i++ {
				v = append(v, values(i)[c])
			}
			must(must(rg.NextColumn()).(*file.Float64ColumnChunkWriter).WriteBatch(v, nil, nil))
		}
		if err := rg.Close(); err != nil {
			log.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		log.Fatal(err)
	}
	return out.String()
}

// byteStreamSplit is a file whose values say that they are in an encoding that the
// library does not read: the encoding's number in the page headers is changed from 0,
// plain, to 9.
func byteStreamSplit() string {
	plain := columns(parquet.WithCompression(compress.Codecs.Uncompressed), parquet.WithDictionaryDefault(false))
	// A data page's header: 20 values, encoding 0, levels in encoding 3 (zigzag).
	from := "\x2c\x15\x28\x15\x00\x15\x06\x15\x06"
	to := "\x2c\x15\x28\x15\x12\x15\x06\x15\x06"
	first := strings.Index(plain, from) + len(from) // the times stay as they are
	if n := strings.Count(plain[first:], from); n < 5 {
		log.Fatalf("%d pages", n)
	}
	return plain[:first] + strings.ReplaceAll(plain[first:], from, to)
}

// narrow writes the record as a Parquet file with one row a reading.
func narrow() string {
	req := parquet.Repetitions.Required
	text := func(n string) schema.Node {
		return must(schema.NewPrimitiveNodeLogical(n, req, schema.StringLogicalType{}, parquet.Types.ByteArray, -1, -1))
	}
	fields := schema.FieldList{must(schema.NewPrimitiveNodeLogical("ts", req, schema.NewTimestampLogicalType(true, schema.TimeUnitMicros), parquet.Types.Int64, -1, -1)), text("point"), schema.NewFloat64Node("value", req, -1), text("status")}
	var out bytes.Buffer
	w := file.NewParquetWriter(&out, must(schema.NewGroupNode("trends", req, fields, -1)))
	for g := range 2 {
		rg := w.AppendRowGroup()
		var ts []int64
		var point, status []parquet.ByteArray
		var val []float64
		for i := g * rows / 2; i < (g+1)*rows/2; i++ {
			for c, v := range values(i) {
				ts, point, val = append(ts, at(i).UnixMicro()), append(point, parquet.ByteArray(names[c])), append(val, v)
				st := "ok"
				if c == 1 && i == 8 {
					st = "fault"
				}
				status = append(status, parquet.ByteArray(st))
			}
		}
		must(must(rg.NextColumn()).(*file.Int64ColumnChunkWriter).WriteBatch(ts, nil, nil))
		must(must(rg.NextColumn()).(*file.ByteArrayColumnChunkWriter).WriteBatch(point, nil, nil))
		must(must(rg.NextColumn()).(*file.Float64ColumnChunkWriter).WriteBatch(val, nil, nil))
		must(must(rg.NextColumn()).(*file.ByteArrayColumnChunkWriter).WriteBatch(status, nil, nil))
		if err := rg.Close(); err != nil {
			log.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		log.Fatal(err)
	}
	return out.String()
}
