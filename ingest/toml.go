package ingest

import (
	"errors"
	"fmt"
	"math"
	"sort"
	"strings"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// maxConfig bounds a site.toml or points.csv, bytes.
const maxConfig = 8 << 20

// document is a TOML file with the line of every key.
type document struct {
	file string
	root map[string]any
	line map[string]int // dotted path of raw names joined by NUL
	errs []error
}

const pathSep = "\x00"

// parseTOML reads a TOML document. Mistakes of syntax are returned as one
// ConfigError; mistakes of content are gathered in errs by the table methods.
func parseTOML(file string, text []byte) (*document, error) {
	d := &document{file: file, line: map[string]int{}}
	if err := toml.Unmarshal(text, &d.root); err != nil {
		e := &ConfigError{File: file, Msg: "is not valid TOML: " + strings.TrimPrefix(err.Error(), "toml: ")}
		var de *toml.DecodeError
		if errors.As(err, &de) {
			e.Line, _ = de.Position()
			e.Field = strings.Join(de.Key(), ".")
			if strings.Contains(e.Msg, "already exists") || strings.Contains(e.Msg, "redefine") || strings.Contains(e.Msg, "duplicate") {
				e.Hint = "each key and each table may stand only once"
			}
		}
		if e.Hint == "" {
			e.Hint = "text values need quotes, and a table begins with its name in brackets"
		}
		return nil, e
	}
	d.index(text)
	return d, nil
}

// index finds the line of every key.
func (d *document) index(text []byte) {
	starts := []int{0}
	for i, c := range text {
		if c == '\n' {
			starts = append(starts, i+1)
		}
	}
	lineOf := func(off int) int { return sort.SearchInts(starts, off+1) }
	var p unstable.Parser
	p.Reset(text)
	var table []string
	for p.NextExpression() {
		e := p.Expression()
		switch e.Kind {
		case unstable.Table, unstable.ArrayTable:
			table = table[:0]
			for it := e.Key(); it.Next(); {
				table = append(table, string(it.Node().Data))
				d.mark(table, lineOf(int(it.Node().Raw.Offset)))
			}
		case unstable.KeyValue:
			d.indexKeyValue(e, table, lineOf)
		}
	}
}

func (d *document) indexKeyValue(e *unstable.Node, under []string, lineOf func(int) int) {
	at := append([]string(nil), under...)
	for it := e.Key(); it.Next(); {
		at = append(at, string(it.Node().Data))
		d.mark(at, lineOf(int(it.Node().Raw.Offset)))
	}
	if v := e.Value(); v != nil && v.Kind == unstable.InlineTable {
		for it := v.Children(); it.Next(); {
			if it.Node().Kind == unstable.KeyValue {
				d.indexKeyValue(it.Node(), at, lineOf)
			}
		}
	}
}

func (d *document) mark(path []string, line int) {
	k := strings.Join(path, pathSep)
	if _, ok := d.line[k]; !ok {
		d.line[k] = line
	}
}

// table is one table of the document, with what has been asked of it.
type table struct {
	d    *document
	path []string
	m    map[string]any
	used map[string]bool
	know []string // keys that exist, for near misses
}

func (d *document) table(path []string, m map[string]any) *table {
	return &table{d: d, path: path, m: m, used: map[string]bool{}}
}

func (t *table) at(key string) []string {
	return append(append([]string(nil), t.path...), key)
}

func (t *table) lineOf(key string) int { return t.d.line[strings.Join(t.at(key), pathSep)] }

func (t *table) field(key string) string { return strings.Join(t.at(key), ".") }

func (t *table) fail(key, hint, format string, args ...any) {
	t.d.errs = append(t.d.errs, &ConfigError{File: t.d.file, Line: t.lineOf(key), Field: t.field(key), Msg: fmt.Sprintf(format, args...), Hint: hint})
}

func (t *table) get(key string) (any, bool) {
	t.know = append(t.know, key)
	v, ok := t.m[key]
	if ok {
		t.used[key] = true
	}
	return v, ok
}

func typeName(v any) string {
	switch v.(type) {
	case string:
		return "text"
	case int64, float64:
		return "a number"
	case bool:
		return "true or false"
	case []any:
		return "a list"
	case map[string]any:
		return "a table"
	}
	return "a date or time"
}

func (t *table) str(key string) (string, bool) {
	v, ok := t.get(key)
	if !ok {
		return "", false
	}
	s, ok := v.(string)
	if !ok {
		t.fail(key, `write it in quotes`, "must be text, not %s", typeName(v))
	}
	return s, ok
}

func (t *table) boolean(key string) (val, ok bool) {
	v, ok := t.get(key)
	if !ok {
		return false, false
	}
	b, ok := v.(bool)
	if !ok {
		t.fail(key, "", "must be true or false, not %s", typeName(v))
	}
	return b, ok
}

func (t *table) strs(key string) ([]string, bool) {
	v, ok := t.get(key)
	if !ok {
		return nil, false
	}
	list, ok := v.([]any)
	if !ok {
		t.fail(key, `write it as ["...", "..."]`, "must be a list of texts, not %s", typeName(v))
		return nil, false
	}
	out := make([]string, 0, len(list))
	for _, x := range list {
		s, ok := x.(string)
		if !ok {
			t.fail(key, `write it as ["...", "..."]`, "must hold texts only, not %s", typeName(x))
			return nil, false
		}
		out = append(out, s)
	}
	return out, true
}

func (t *table) sub(key string) (*table, bool) {
	v, ok := t.get(key)
	if !ok {
		return nil, false
	}
	m, ok := v.(map[string]any)
	if !ok {
		t.fail(key, "write it as a table: ["+t.field(key)+"]", "must be a table, not %s", typeName(v))
		return nil, false
	}
	return t.d.table(t.at(key), m), true
}

// quantity reads a number in the base unit of dim, or a text with a unit, and
// holds it to [lo, hi].
func (t *table) quantity(key string, dim Dimension, lo, hi float64) (float64, bool) {
	v, ok := t.get(key)
	if !ok {
		return math.NaN(), false
	}
	var x float64
	switch n := v.(type) {
	case int64:
		x = float64(n)
	case float64:
		x = n
	case string:
		var err error
		if x, err = ParseQuantity(n, dim); err != nil {
			t.fail(key, "", "%v", err)
			return math.NaN(), false
		}
	default:
		t.fail(key, "", "must be a number or a text with a unit, not %s", typeName(v))
		return math.NaN(), false
	}
	if !(x >= lo && x <= hi) {
		hint := ""
		if dim == Ratio && x > 1 {
			hint = `write a fraction, 0.15, or a percentage, "15 %"`
		}
		t.fail(key, hint, "%.6g %s is outside %.6g to %.6g", x, dim.Base(), lo, hi)
		return math.NaN(), false
	}
	return x, true
}

// done reports the keys that nobody asked for.
func (t *table) done() {
	var extra []string
	for k := range t.m {
		if !t.used[k] {
			extra = append(extra, k)
		}
	}
	sort.Strings(extra)
	for _, k := range extra {
		hint := didYouMean(k, t.know)
		if hint == "" {
			known := append([]string(nil), t.know...)
			sort.Strings(known)
			hint = "keys that may stand here: " + strings.Join(known, ", ")
		}
		t.fail(k, hint, "there is no such key")
	}
}

// keys lists a table's keys, sorted.
func (t *table) keys() []string {
	var out []string
	for k := range t.m {
		out = append(out, k)
	}
	sort.Strings(out)
	return out
}

// err is the mistakes found, in order of their lines.
func (d *document) err() error {
	if len(d.errs) == 0 {
		return nil
	}
	sort.SliceStable(d.errs, func(i, j int) bool {
		return d.errs[i].(*ConfigError).Line < d.errs[j].(*ConfigError).Line
	})
	if len(d.errs) == 1 {
		return d.errs[0]
	}
	return errors.Join(d.errs...)
}
