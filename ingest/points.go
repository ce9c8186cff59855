package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"path"
	"strconv"
	"strings"

	"dewledger/ingest/trend"
)

// point is one row of a points schedule.
type point struct {
	line    int
	unit    string // "*": every unit
	file    string // glob under trends/; empty: any file
	column  string
	role    trend.Role
	measure Measure
	stated  bool // measure
	scale   float64
	offset  float64
	band    trend.Band
	note    string
	open    bool // the role is not settled
	lax     bool // file is where a model says the trend is stored: it need not be a file of ours
	matches int
}

// confidence and ground are a draft's own and are passed over.
var pointColumns = []string{"unit", "file", "column", "role", "measure", "scale", "offset", "accuracy", "note", "confidence", "ground"}

// openRole stands for a point whose role has not been settled: not used.
const openRole = "?"

// readPoints reads a points.csv, strictly. Comma, semicolon and tab are taken
// for separators, as spreadsheets write them.
func readPoints(file string, text []byte) ([]*point, error) {
	text = bytes.TrimPrefix(text, []byte{0xef, 0xbb, 0xbf})
	var errs []error
	fail := func(line int, field, hint, format string, args ...any) {
		errs = append(errs, &ConfigError{File: file, Line: line, Field: field, Msg: fmt.Sprintf(format, args...), Hint: hint})
	}
	lines := strings.Split(strings.ReplaceAll(toUTF8(text), "\r\n", "\n"), "\n")
	delim := byte(',')
	var at map[string]int
	var out []*point
	seen := map[string]int{}
	for i, l := range lines {
		if strings.TrimSpace(l) == "" || strings.HasPrefix(strings.TrimSpace(l), "#") {
			continue
		}
		if at == nil {
			for _, d := range []byte{';', '\t'} {
				if strings.Count(l, string(d)) > strings.Count(l, string(delim)) {
					delim = d
				}
			}
			at = map[string]int{}
			for c, h := range splitLine(l, delim) {
				name := strings.ToLower(strings.TrimSpace(h))
				if name == "" {
					continue
				}
				known := false
				for _, k := range pointColumns {
					known = known || k == name
				}
				_, twice := at[name]
				switch {
				case twice:
					fail(i+1, name, "", "the column stands twice")
				case !known:
					hint := didYouMean(name, pointColumns)
					if hint == "" {
						hint = "columns are: " + strings.Join(pointColumns, ", ")
					}
					fail(i+1, name, hint, "there is no such column")
				}
				at[name] = c
			}
			for _, need := range []string{"unit", "column", "role"} {
				if _, ok := at[need]; !ok {
					fail(i+1, need, "the first row names the columns: "+strings.Join(pointColumns, ","), "the column is missing")
				}
			}
			if len(errs) > 0 {
				return nil, errors.Join(errs...)
			}
			continue
		}
		cells := splitLine(l, delim)
		if onlyBlank(cells) {
			continue
		}
		if len(cells) > len(at) {
			last := 0
			for _, c := range at {
				last = max(last, c)
			}
			if last+1 < len(cells) && !onlyBlank(cells[last+1:]) {
				fail(i+1, "", "put a text that holds the separator in quotes", "the row has %d cells where the header has %d", len(cells), last+1)
				continue
			}
		}
		cell := func(name string) string {
			if c, ok := at[name]; ok && c < len(cells) {
				return strings.TrimSpace(cells[c])
			}
			return ""
		}
		p, ok := readPoint(i+1, cell, fail)
		if !ok {
			continue
		}
		if p.role != trend.NoRole && p.file == "" {
			key := p.unit + "\x00" + p.role.String()
			if first, twice := seen[key]; twice {
				fail(i+1, "role", "a unit has one point a role; give the other the role -", "%s of unit %s is mapped here and on line %d", p.role, quote(p.unit), first)
				continue
			}
			seen[key] = i + 1
		}
		out = append(out, p)
	}
	if at == nil {
		return nil, &ConfigError{File: file, Msg: "the file is empty", Hint: "the first row names the columns: " + strings.Join(pointColumns, ",")}
	}
	if len(errs) > 0 {
		return nil, errors.Join(errs...)
	}
	return out, nil
}

func readPoint(line int, cell func(string) string, fail func(line int, field, hint, format string, args ...any)) (*point, bool) {
	p := &point{line: line, unit: cell("unit"), file: cell("file"), column: strings.Join(strings.Fields(cell("column")), " "), scale: 1, note: cell("note")}
	ok := true
	bad := func(field, hint, format string, args ...any) {
		ok = false
		fail(line, field, hint, format, args...)
	}
	if p.column == "" {
		bad("column", "write the column's header as it stands in the file", "the cell is empty")
	}
	if p.file != "" {
		if _, err := path.Match(p.file, "x"); err != nil {
			bad("file", "use * and ? as in AHU-1*.csv", "%s is no valid pattern", quote(p.file))
		}
	}
	r, known := trend.ParseRole(cell("role"))
	if cell("role") == openRole {
		p.open, known = true, true
	}
	if !known {
		hint := didYouMean(cell("role"), trend.RoleNames())
		if hint == "" {
			hint = "roles are listed in the README; - stands for a point that is known and not used"
		}
		bad("role", hint, "%s is no role", quote(cell("role")))
	}
	p.role = r
	if p.unit == "" && r != trend.NoRole && known {
		bad("unit", "name the unit, or write * for a point that all units share", "the cell is empty")
	}
	if m := cell("measure"); m != "" && ok {
		u, found := LookupUnit(m)
		switch {
		case !found && r == trend.NoRole, strings.EqualFold(m, "on/off"), strings.EqualFold(m, "0/1"), strings.EqualFold(m, "bool"):
		case !found:
			bad("measure", "units of "+DimensionOf(r.Kind()).String()+": "+unitNames(DimensionOf(r.Kind())), "%s is not a known unit of measure", quote(m))
		case r != trend.NoRole:
			if _, _, fits := u.toKind(r.Kind()); !fits {
				bad("measure", "", "%s is a unit of %v, and %s is a %v", u.Name, u.Dim, r, r.Kind())
			}
			p.measure, p.stated = u, true
		}
	}
	num := func(field string, dst *float64) {
		s := cell(field)
		if s == "" {
			return
		}
		v, err := strconv.ParseFloat(strings.Replace(s, ",", ".", 1), 64)
		if err != nil || v-v != 0 || (field == "scale" && v == 0) {
			bad(field, "", "%s is not a number that a reading can be scaled by", quote(s))
			return
		}
		*dst = v
	}
	num("scale", &p.scale)
	num("offset", &p.offset)
	if a := cell("accuracy"); a != "" && r != trend.NoRole && ok {
		b, err := ParseAccuracy(a, r.Kind())
		if err != nil {
			bad("accuracy", `write the maker's half-width, "0.5 K" or "3 %"`, "%v", err)
		}
		p.band = b
	}
	return p, ok
}

// covers reports whether the row speaks of a column of a file. name is the
// file's, relative to trends/.
func (p *point) covers(name, header, bare string) bool {
	if !strings.EqualFold(p.column, header) && !strings.EqualFold(p.column, bare) {
		return false
	}
	if p.file == "" {
		return true
	}
	if p.lax && !strings.HasSuffix(p.file, path.Ext(name)) { // a database, say
		return true
	}
	if ok, _ := path.Match(p.file, name); ok {
		return true
	}
	ok, _ := path.Match(p.file, path.Base(name))
	return ok
}
