package ingest

import (
	"errors"
	"fmt"
	"sort"
	"strings"

	"dewledger/ingest/trend"
)

// ConfigError says that the command line, site.toml or points.csv is wrong:
// nothing can be written until it is put right.
type ConfigError struct {
	File  string // empty for the command line
	Line  int    // 1-based; 0 where there is none
	Field string // key or column, "site.timezone"; may be empty
	Msg   string
	Hint  string // what to do
}

// Error is what and where, without the hint.
func (e *ConfigError) Error() string { return place(e.File, e.Line, e.Field) + e.Msg }

// UnitError says that one unit, or one file, cannot be analysed; others can.
type UnitError struct {
	Unit string
	File string
	Line int
	Msg  string
	Hint string
	Err  error // the cause, or nil
}

// Error is what and where, without the hint.
func (e *UnitError) Error() string {
	s := place(e.File, e.Line, "") + e.Msg
	if e.Err != nil {
		s += ": " + e.Err.Error()
	}
	return s
}

// Unwrap is the cause.
func (e *UnitError) Unwrap() error { return e.Err }

// Hint is what to do about an error of this package; empty where there is
// nothing to say.
func Hint(err error) string {
	var c *ConfigError
	if errors.As(err, &c) {
		return c.Hint
	}
	var u *UnitError
	if errors.As(err, &u) {
		return u.Hint
	}
	return ""
}

// ConfigErrors parts an error of Read into its configuration errors, in order;
// nil where it holds none.
func ConfigErrors(err error) []*ConfigError {
	if list, ok := err.(interface{ Unwrap() []error }); ok {
		var out []*ConfigError
		for _, e := range list.Unwrap() {
			out = append(out, ConfigErrors(e)...)
		}
		return out
	}
	var c *ConfigError
	if errors.As(err, &c) {
		return []*ConfigError{c}
	}
	return nil
}

func place(file string, line int, field string) string {
	var b strings.Builder
	if file != "" {
		b.WriteString(file)
		if line > 0 {
			fmt.Fprintf(&b, ":%d", line)
		}
		b.WriteString(": ")
	}
	if field != "" {
		b.WriteString(field + ": ")
	}
	return b.String()
}

// notebook gathers notes: one a code, file and column, counted, with the first
// place.
type notebook struct {
	at   map[noteKey]int
	list []trend.Note
}

type noteKey struct{ code, file, column string }

func (n *notebook) add(code, file, column string, line int, format string, args ...any) {
	n.addCount(1, code, file, column, line, format, args...)
}

func (n *notebook) addCount(count int, code, file, column string, line int, format string, args ...any) {
	k := noteKey{code, file, column}
	if i, ok := n.at[k]; ok {
		n.list[i].Count += count
		return
	}
	if n.at == nil {
		n.at = make(map[noteKey]int)
	}
	n.at[k] = len(n.list)
	n.list = append(n.list, trend.Note{Code: code, File: file, Column: column, Line: line, Count: count, Text: fmt.Sprintf(format, args...)})
}

func (n *notebook) merge(notes []trend.Note) {
	for _, x := range notes {
		n.addCount(x.Count, x.Code, x.File, x.Column, x.Line, "%s", x.Text)
	}
}

// near lists the names most like s, closest first, for messages: at most three,
// and none that is not like it.
func near(s string, names []string) []string {
	type cand struct {
		name string
		d    int
	}
	var cs []cand
	s = strings.ToLower(s)
	if len(s) > 64 {
		return nil
	}
	for _, n := range names {
		d := editDistance(s, strings.ToLower(n))
		if d <= max(2, len(s)/3) {
			cs = append(cs, cand{n, d})
		}
	}
	sort.SliceStable(cs, func(i, j int) bool { return cs[i].d < cs[j].d })
	var out []string
	for i := 0; i < len(cs) && i < 3; i++ {
		out = append(out, cs[i].name)
	}
	return out
}

// editDistance counts the letters to insert, drop or replace to get from a to
// b (Levenshtein).
func editDistance(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diag := row[0]
		row[0] = i
		for j := 1; j <= len(b); j++ {
			d := diag
			if a[i-1] != b[j-1] {
				d++
			}
			diag = row[j]
			row[j] = min(d, row[j]+1, row[j-1]+1)
		}
	}
	return row[len(b)]
}

func didYouMean(s string, names []string) string {
	if c := near(s, names); len(c) > 0 {
		return "did you mean " + strings.Join(c, ", ") + "?"
	}
	return ""
}
