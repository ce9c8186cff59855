package ingest

import (
	"encoding/binary"
	"fmt"
	"math/bits"
	"sync"

	"github.com/apache/arrow/go/v17/arrow/memory"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// columnReader opens a column of a row group with its pages checked on the way.
func (p *parquetReader) columnReader(rg *file.RowGroupReader, c int) (file.ColumnChunkReader, error) {
	pages, err := rg.GetColumnPageReader(c)
	if err != nil {
		return nil, err
	}
	descr := p.r.MetaData().Schema.Column(c)
	if p.pool == nil {
		p.pool = &sync.Pool{New: func() any { return memory.NewResizableBuffer(memory.DefaultAllocator) }}
	}
	return file.NewColumnReader(descr, &checkedPages{PageReader: pages, descr: descr}, memory.DefaultAllocator, p.pool), nil
}

// checkedPages ends a column at a page whose dictionary indexes are wider than its
// dictionary: the library would make room for the largest index that it meets, up to
// 2^31 values.
type checkedPages struct {
	file.PageReader
	descr  *schema.Column
	values int32 // of the dictionary
	err    error
}

func (c *checkedPages) Next() bool {
	if c.err != nil || !c.PageReader.Next() {
		return false
	}
	page := c.Page()
	body := page.Data()
	switch d := page.(type) {
	case *file.DictionaryPage:
		c.values = d.NumValues()
		return true
	case *file.DataPageV1:
		if c.descr.MaxRepetitionLevel() > 0 {
			return true // nested columns are not read
		}
		if c.descr.MaxDefinitionLevel() > 0 { // levels come first, with their length
			if len(body) < 4 {
				return true
			}
			n := int64(binary.LittleEndian.Uint32(body)) + 4
			if n > int64(len(body)) {
				c.err = fmt.Errorf("a page is smaller than its levels say")
				return false
			}
			body = body[n:]
		}
	case *file.DataPageV2:
		n := int64(d.DefinitionLevelByteLen()) + int64(d.RepetitionLevelByteLen())
		if n < 0 || n > int64(len(body)) {
			c.err = fmt.Errorf("a page is smaller than its levels say")
			return false
		}
		body = body[n:]
	default:
		return true
	}
	switch page.Encoding().String() {
	case "PLAIN_DICTIONARY", "RLE_DICTIONARY":
		if len(body) > 0 && int(body[0]) > bits.Len32(uint32(max(c.values, 0)))+1 {
			c.err = fmt.Errorf("a page has indexes of %d bits into a dictionary of %d values", body[0], c.values)
			return false
		}
	}
	return true
}

func (c *checkedPages) Err() error {
	if c.err != nil {
		return c.err
	}
	return c.PageReader.Err()
}
