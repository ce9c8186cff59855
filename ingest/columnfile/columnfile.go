// Package columnfile writes columns on a time axis as a Parquet file that other
// tools read without being told anything: one timestamp column, then doubles
// and texts, units in the schema's metadata. It knows nothing of trends.
package columnfile

import (
	"fmt"
	"io"
	"maps"
	"math"
	"slices"
	"time"

	"github.com/apache/arrow/go/v17/arrow/memory"
	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/metadata"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// Column is one column: Val, where NaN is written as null, or Text. Both have a
// value a row.
type Column struct {
	Name string
	Meta string // kept in the file's metadata under the column's name; may be empty
	Val  []float64
	Text []string
}

// rowGroup is the number of rows in a group: about a month of five-minute data.
const rowGroup = 16384

// Write writes the columns under a leading timestamp column, in microseconds
// UTC, with snappy compression. at gives the time of row i; n is the number of
// rows. A column of another length panics.
func Write(w io.Writer, timeName string, n int, at func(i int) time.Time, cols []Column, meta map[string]string) (err error) {
	fields := schema.FieldList{schema.MustPrimitive(schema.NewPrimitiveNodeLogical(timeName, parquet.Repetitions.Required,
		schema.NewTimestampLogicalType(true, schema.TimeUnitMicros), parquet.Types.Int64, -1, -1))}
	kv := metadata.NewKeyValueMetadata()
	for _, k := range slices.Sorted(maps.Keys(meta)) {
		if err := kv.Append(k, meta[k]); err != nil {
			return err
		}
	}
	for _, c := range cols {
		if len(c.Val) != n && len(c.Text) != n {
			panic(fmt.Sprintf("columnfile: column %s has %d rows, want %d", c.Name, len(c.Val)+len(c.Text), n))
		}
		if c.Text != nil {
			fields = append(fields, schema.MustPrimitive(schema.NewPrimitiveNodeLogical(c.Name, parquet.Repetitions.Optional,
				schema.StringLogicalType{}, parquet.Types.ByteArray, -1, -1)))
		} else {
			fields = append(fields, schema.NewFloat64Node(c.Name, parquet.Repetitions.Optional, -1))
		}
		if c.Meta != "" {
			if err := kv.Append(c.Name, c.Meta); err != nil {
				return err
			}
		}
	}
	root, err := schema.NewGroupNode("rows", parquet.Repetitions.Required, fields, -1)
	if err != nil {
		return err
	}
	props := parquet.NewWriterProperties(parquet.WithCompression(compress.Codecs.Snappy), parquet.WithAllocator(memory.DefaultAllocator), parquet.WithCreatedBy("dewledger"))
	// The writer would close what it writes to, which is the caller's.
	fw := file.NewParquetWriter(struct{ io.Writer }{w}, root, file.WithWriterProps(props), file.WithWriteMetadata(kv))
	defer func() {
		if cerr := fw.Close(); err == nil {
			err = cerr
		}
	}()
	times := make([]int64, 0, rowGroup)
	vals := make([]float64, 0, rowGroup)
	text := make([]parquet.ByteArray, 0, rowGroup)
	defs := make([]int16, 0, rowGroup)
	for from := 0; from < n || from == 0; from += rowGroup {
		to := min(from+rowGroup, n)
		rg := fw.AppendRowGroup()
		times = times[:0]
		for i := from; i < to; i++ {
			times = append(times, at(i).UnixMicro())
		}
		if err := writeChunk(rg, func(cw file.ColumnChunkWriter) error {
			_, err := cw.(*file.Int64ColumnChunkWriter).WriteBatch(times, nil, nil)
			return err
		}); err != nil {
			return err
		}
		for _, c := range cols {
			vals, text, defs = vals[:0], text[:0], defs[:0]
			for i := from; i < to; i++ {
				switch {
				case c.Text != nil:
					text, defs = append(text, parquet.ByteArray(c.Text[i])), append(defs, 1)
				case math.IsNaN(c.Val[i]):
					defs = append(defs, 0)
				default:
					vals, defs = append(vals, c.Val[i]), append(defs, 1)
				}
			}
			if err := writeChunk(rg, func(cw file.ColumnChunkWriter) error {
				var err error
				switch x := cw.(type) {
				case *file.ByteArrayColumnChunkWriter:
					_, err = x.WriteBatch(text, defs, nil)
				case *file.Float64ColumnChunkWriter:
					_, err = x.WriteBatch(vals, defs, nil)
				}
				return err
			}); err != nil {
				return err
			}
		}
		if err := rg.Close(); err != nil {
			return err
		}
		if n == 0 {
			break
		}
	}
	return nil
}

func writeChunk(rg file.SerialRowGroupWriter, write func(file.ColumnChunkWriter) error) error {
	cw, err := rg.NextColumn()
	if err != nil {
		return err
	}
	if err := write(cw); err != nil {
		return err
	}
	return cw.Close()
}
