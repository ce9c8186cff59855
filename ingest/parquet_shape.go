package ingest

import (
	"context"
	"fmt"
	"strings"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// maxParquetRows bounds what a file's footer can make us allocate: 60 years of
// 1 s data would be more.
const maxParquetRows = 1 << 31

// parquetShape is what the footer of a Parquet file says.
type parquetShape struct {
	header  []string
	units   []string
	timeCol int
	timeIs  stampKind
	clock   int // TIME column beside a DATE; -1
	clockIs stampKind
	rows    int64
	order   order    // of dates written as text
	refused []string // columns that are nested or of a type that is no reading, with why
	usable  []bool
	text    []bool       // by column
	long    *parquetLong // of a narrow file; nil: a column a point
}

// parquetLong says how a narrow Parquet file is laid out.
type parquetLong struct {
	longShape
	samples []sample
	units   []string
}

// stampKind is how a Parquet column holds times.
type stampKind struct {
	scale   float64 // ms a unit; 0: text
	int96   bool
	date    bool // whole days
	zoned   bool
	text    bool
	epoch   bool // plain numbers since 1970
	nothing bool
}

// sniffParquet reads the footer.
func sniffParquet(ctx context.Context, f storedFile, timeColumn string) (*parquetShape, error) {
	var sh *parquetShape
	err := within(ctx, patience(f), func(ctx context.Context) error {
		what := "footer"
		return guard(&what, func() error {
			r, err := openParquet(f)
			if err != nil {
				return fmt.Errorf("not a whole Parquet file: %w", err)
			}
			s, err := shapeOf(r, timeColumn)
			if sh = s; err != nil {
				return err
			}
			if s.isLong() {
				return newParquetReader(ctx, r, s, &what).scanLong()
			}
			return nil
		})
	})
	if err != nil {
		return nil, err
	}
	return sh, nil
}

func shapeOf(r *file.Reader, timeColumn string) (*parquetShape, error) {
	sc := r.MetaData().Schema
	n := sc.NumColumns()
	if n > maxColumns {
		return nil, fmt.Errorf("it has %d columns; at most %d are read", n, maxColumns)
	}
	sh := &parquetShape{timeCol: -1, clock: -1, rows: r.NumRows(), header: make([]string, n), units: make([]string, n), usable: make([]bool, n), text: make([]bool, n)}
	if sh.rows < 0 || sh.rows > maxParquetRows {
		return nil, fmt.Errorf("its footer promises %d rows", sh.rows)
	}
	best := -1
	for i := range n {
		c := sc.Column(i)
		sh.header[i] = c.Path()
		if c.MaxRepetitionLevel() > 0 || len(c.ColumnPath()) > 1 {
			sh.refused = append(sh.refused, fmt.Sprintf("%s is nested", quote(sh.header[i])))
			continue
		}
		sh.usable[i] = c.PhysicalType() != parquet.Types.FixedLenByteArray
		if !sh.usable[i] {
			sh.refused = append(sh.refused, fmt.Sprintf("%s is of type %v", quote(sh.header[i]), c.PhysicalType()))
			continue
		}
		sh.text[i] = c.PhysicalType() == parquet.Types.ByteArray
		_, sh.units[i] = splitHeaderUnit(sh.header[i])
		k, score := stampKindOf(c)
		named := timeNamed(sh.header[i])
		if timeColumn != "" {
			if !strings.EqualFold(sh.header[i], timeColumn) {
				continue
			}
			score += 10
		} else if score > 0 && named {
			score += 2
		}
		if score == 1 && !named && timeColumn == "" { // a number or a text may be anything
			continue
		}
		if score > best && score > 0 {
			best, sh.timeCol, sh.timeIs = score, i, k
		}
	}
	if sh.timeCol >= 0 && sh.timeIs.date {
		for i := range n {
			if k, ok := clockKindOf(sc.Column(i)); ok && sh.usable[i] {
				sh.clock, sh.clockIs = i, k
				break
			}
		}
	}
	if sh.rows == 0 {
		return nil, errNoRows
	}
	if sh.timeCol < 0 {
		return nil, errNoTime
	}
	return sh, nil
}

// timeNamed reports whether a column's name says that it holds times.
func timeNamed(name string) bool {
	switch strings.Trim(strings.ToLower(strings.TrimSpace(name)), "_ ") {
	case "time", "timestamp", "date", "datetime", "date_time", "date time", "date/time", "ts", "utc", "time_utc", "utc_time", "local_time", "timestamp_utc", "__index_level_0__", "index", "zeit", "datum", "zeitstempel", "datum/zeit", "fecha", "fecha/hora", "fecha hora", "horodatage", "heure":
		return true
	}
	low := strings.ToLower(name)
	return strings.Contains(low, "timestamp") || strings.Contains(low, "datetime") || strings.HasPrefix(low, "date/time")
}

// stampKindOf is how a column would hold times, and how sure that is: 3 a
// timestamp, 2 a date, 1 text or a number.
func stampKindOf(c *schema.Column) (stampKind, int) {
	perUnit := func(u schema.TimeUnitType) float64 {
		switch u {
		case schema.TimeUnitMicros:
			return 1e-3
		case schema.TimeUnitNanos:
			return 1e-6
		}
		return 1
	}
	switch lt := c.LogicalType().(type) {
	case schema.TimestampLogicalType:
		return stampKind{scale: perUnit(lt.TimeUnit()), zoned: lt.IsAdjustedToUTC()}, 3
	case *schema.TimestampLogicalType:
		return stampKind{scale: perUnit(lt.TimeUnit()), zoned: lt.IsAdjustedToUTC()}, 3
	case schema.DateLogicalType, *schema.DateLogicalType:
		return stampKind{scale: dayMS, date: true}, 2
	}
	switch c.ConvertedType() {
	case schema.ConvertedTypes.TimestampMillis:
		return stampKind{scale: 1, zoned: true}, 3
	case schema.ConvertedTypes.TimestampMicros:
		return stampKind{scale: 1e-3, zoned: true}, 3
	case schema.ConvertedTypes.Date:
		return stampKind{scale: dayMS, date: true}, 2
	}
	switch c.PhysicalType() {
	case parquet.Types.Int96:
		return stampKind{int96: true, scale: 1, zoned: true}, 3
	case parquet.Types.ByteArray:
		return stampKind{text: true}, 1
	case parquet.Types.Int64, parquet.Types.Double, parquet.Types.Int32:
		return stampKind{epoch: true, zoned: true}, 1
	}
	return stampKind{nothing: true}, 0
}

// clockKindOf is how a column holds times of day, if it does.
func clockKindOf(c *schema.Column) (stampKind, bool) {
	unit := schema.TimeUnitUnknown
	switch lt := c.LogicalType().(type) {
	case schema.TimeLogicalType:
		unit = lt.TimeUnit()
	case *schema.TimeLogicalType:
		unit = lt.TimeUnit()
	}
	switch c.ConvertedType() {
	case schema.ConvertedTypes.TimeMillis:
		unit = schema.TimeUnitMillis
	case schema.ConvertedTypes.TimeMicros:
		unit = schema.TimeUnitMicros
	}
	switch unit {
	case schema.TimeUnitMillis:
		return stampKind{scale: 1}, true
	case schema.TimeUnitMicros:
		return stampKind{scale: 1e-3}, true
	case schema.TimeUnitNanos:
		return stampKind{scale: 1e-6}, true
	}
	return stampKind{}, false
}
