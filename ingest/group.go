package ingest

import (
	"regexp"
	"sort"
	"strings"

	"dewledger/ingest/trend"
)

// minGroup is how many points a group of columns must have to be a unit of its
// own among several in one file.
const minGroup = 3

// part is the columns of one file that belong to one unit.
type part struct {
	file  int
	name  string // from the columns' prefix; empty: from the file
	binds []binding
}

// group finds the units in files that the schedule does not speak of, and
// returns what they share.
func (r *Result) group(files []int, unit func(string) *unitPlan) (shared []binding) {
	var parts []part
	singles := map[string][]column{} // by folder
	var dirs []string
	for _, i := range files {
		f := r.files[i]
		cols := f.columns(i)
		if f.single {
			if singles[f.dir] == nil {
				dirs = append(dirs, f.dir)
			}
			singles[f.dir] = append(singles[f.dir], cols...)
			continue
		}
		ps, sh := r.parts(cols, f.stem)
		parts = append(parts, ps...)
		shared = append(shared, sh...)
	}
	for _, d := range dirs { // files of one point each are to a folder what columns are to a file
		stem := dirName(d)
		if stem == "trends" {
			stem = ""
		}
		ps, sh := r.parts(singles[d], stem)
		for k := range ps {
			if ps[k].name == "" {
				if ps[k].name = trimPrefix(commonPrefix(singles[d])); ps[k].name == "" && len(singles[d]) > 1 {
					ps[k].name = stem
				}
			}
		}
		parts = append(parts, ps...)
		shared = append(shared, sh...)
	}
	// Files of one name but for a date or a number of part, in one folder, are
	// one unit's months.
	type key struct{ dir, name string }
	groups := map[key][]part{}
	var order []key
	for _, p := range parts {
		f := r.files[p.file]
		k := key{f.dir, p.name}
		if p.name == "" {
			k.name = unitStem(f.stem)
		}
		if groups[k] == nil {
			order = append(order, k)
		}
		groups[k] = append(groups[k], p)
	}
	// What holds the weather alone is shared, if there is a unit to share it with.
	rolesOf := func(ps []part) map[trend.Role]bool {
		m := map[trend.Role]bool{}
		for _, p := range ps {
			for _, b := range p.binds {
				if b.role != trend.NoRole {
					m[b.role] = true
				}
			}
		}
		return m
	}
	weatherOnly := func(ps []part) bool {
		n := 0
		for role := range rolesOf(ps) {
			if role.Station() != trend.Weather && !(role.Station() == trend.Outdoor && role.Kind() != trend.Position && role.Kind() != trend.AirFlow) {
				return false
			}
			n++
		}
		return n > 0
	}
	units := 0
	for _, k := range order {
		if !weatherOnly(groups[k]) {
			units++
		}
	}
	// A folder whose files share no role is one unit, a file for some of its
	// points.
	byDir := map[string][]key{}
	for _, k := range order {
		byDir[k.dir] = append(byDir[k.dir], k)
	}
	merged := map[key]string{}
	for dir, keys := range byDir {
		name := dirName(dir)
		if name == "trends" || name == "" {
			name = r.cfg.site.Name
		}
		if len(keys) < 2 || name == "" {
			continue
		}
		seen, disjoint, whole := map[trend.Role]bool{}, true, 0
		for _, k := range keys {
			roles := rolesOf(groups[k])
			for role := range roles {
				disjoint = disjoint && !seen[role]
				seen[role] = true
			}
			if roles[trend.SATemp] || len(roles) >= 8 {
				whole++
			}
		}
		if disjoint && whole <= 1 && !anyWeather(keys2parts(groups, keys), weatherOnly) {
			for _, k := range keys {
				merged[k] = name
			}
		}
	}
	for _, k := range order {
		name := k.name
		if m, ok := merged[k]; ok {
			name = m
		} else if units > 0 && weatherOnly(groups[k]) {
			for _, p := range groups[k] {
				for _, b := range p.binds {
					b.shared = true
					b.ground += "; the file holds the weather alone, so all units share it"
					shared = append(shared, b)
				}
			}
			continue
		}
		if name == "" {
			name = "unit"
		}
		u := unit(name)
		for _, p := range groups[k] {
			u.binds = append(u.binds, p.binds...)
		}
	}
	return shared
}

func keys2parts[K comparable](groups map[K][]part, keys []K) [][]part {
	var out [][]part
	for _, k := range keys {
		out = append(out, groups[k])
	}
	return out
}

func anyWeather(groups [][]part, weatherOnly func([]part) bool) bool {
	for _, g := range groups {
		if weatherOnly(g) {
			return true
		}
	}
	return false
}

// column is a column of a file under the name that it is judged by.
type column struct {
	file, col int
	name      string
}

// columns lists the file's columns that may be points.
func (f *source) columns(file int) []column {
	var out []column
	for c := range f.header {
		if c != f.timeCol && c != f.clock && f.bare[c] != "" {
			out = append(out, column{file, c, f.bare[c]})
		}
	}
	return out
}

// parts finds the units among the columns of one file: by what comes before their own
// names, where that gives at least two of at least minGroup points each; else the
// file is one. stem is the file's name.
func (r *Result) parts(cols []column, stem string) (parts []part, shared []binding) {
	if len(cols) == 0 {
		return nil, nil
	}
	file := cols[0].file
	for _, w := range tokenize(stem) {
		if nameWords[w] == tWeather {
			return []part{{file: file, binds: r.guessFile(file, "weather ", true)}}, nil
		}
	}
	for depth := 1; depth <= 4; depth++ {
		groups := map[string][]int{}
		rest := map[int]string{}
		for k, c := range cols {
			pre, tail := splitPrefix(c.name, depth)
			if pre == "" || tail == "" {
				pre, tail = "", c.name
			}
			groups[pre] = append(groups[pre], k)
			rest[k] = tail
		}
		var names []string
		for g := range groups {
			if g != "" {
				names = append(names, g)
			}
		}
		sort.Slice(names, func(i, j int) bool { return lessName(names[i], names[j]) })
		var found []part
		loose := append([]int(nil), groups[""]...)
		for _, g := range names {
			binds := make([]binding, 0, len(groups[g]))
			for _, k := range groups[g] {
				binds = append(binds, r.guessColumn(cols[k].file, cols[k].col, rest[k], false))
			}
			kept, _ := r.settle(append([]binding(nil), binds...))
			if len(kept) < minGroup {
				loose = append(loose, groups[g]...)
				continue
			}
			found = append(found, part{file: file, name: trimPrefix(g), binds: binds})
		}
		if len(found) < 2 {
			continue
		}
		sort.Ints(loose)
		for _, k := range loose {
			b := r.guessColumn(cols[k].file, cols[k].col, cols[k].name, false)
			b.shared = true
			shared = append(shared, b)
		}
		return found, shared
	}
	pre := commonPrefix(cols)
	p := part{file: file}
	for _, c := range cols {
		b := r.guessColumn(c.file, c.col, strings.TrimPrefix(c.name, pre), false)
		if pre != "" {
			if full := r.guessColumn(c.file, c.col, c.name, false); full.score > b.score {
				b = full
			}
		}
		p.binds = append(p.binds, b)
	}
	if genericStem(stem) && trimPrefix(pre) != "" {
		p.name = trimPrefix(pre)
	}
	return []part{p}, nil
}

const separators = "._:/\\|- "

// splitPrefix parts a name after its depth-th separator.
func splitPrefix(name string, depth int) (pre, tail string) {
	at := 0
	for range depth {
		i := strings.IndexAny(name[at:], separators)
		if i < 0 {
			return "", name
		}
		at += i + 1
		for at < len(name) && strings.IndexByte(separators, name[at]) >= 0 {
			at++
		}
	}
	return name[:at], name[at:]
}

func trimPrefix(p string) string { return strings.Trim(p, separators) }

// commonPrefix is what all columns begin with, up to a separator.
func commonPrefix(cols []column) string {
	if len(cols) < 2 {
		return ""
	}
	p := cols[0].name
	for _, c := range cols[1:] {
		n := 0
		for n < len(p) && n < len(c.name) && p[n] == c.name[n] {
			n++
		}
		p = p[:n]
	}
	i := strings.LastIndexAny(p, separators)
	if i < 0 {
		return ""
	}
	// A prefix that is itself a word of points ("SA ") is no unit's name.
	pre := p[:i+1]
	for _, w := range tokenize(pre) {
		if t, ok := nameWords[w]; ok && t&^(tUnit|tAir|tSensor|tBuilding) != 0 {
			return ""
		}
	}
	return pre
}

var (
	datePart  = regexp.MustCompile(`(?i)(^|[_\-. ])((19|20)\d{2}([_\-.]?(0[1-9]|1[0-2])([_\-.]?[0-3]\d)?)?|(jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*([_\-. ]?(19|20)?\d{2})?|w(eek)?[0-5]\d|part[_\- ]?\d+|\(\d+\)|\d{8}[t_]?\d{4,6}|to)($|[_\-. ])`)
	justDigit = regexp.MustCompile(`^[\d_\-. ]*$`)
)

// unitStem is a file's stem without the dates and part numbers that tell the
// months of one unit's export apart.
func unitStem(stem string) string {
	s := stem
	for range 6 {
		loc := datePart.FindStringSubmatchIndex(s)
		if loc == nil {
			break
		}
		sep := ""
		if loc[0] > 0 && loc[1] < len(s) {
			sep = s[loc[0] : loc[0]+1]
		}
		s = s[:loc[0]] + sep + s[loc[1]:]
	}
	s = strings.Trim(s, "_-. ")
	if s == "" || justDigit.MatchString(s) {
		return stem
	}
	return s
}

// genericStem reports whether a file's name says nothing of a unit.
func genericStem(stem string) bool {
	switch strings.ToLower(strings.Trim(unitStem(stem), "_-. ()0123456789")) {
	case "", "trend", "trends", "data", "export", "log", "logs", "trendlog", "trend log", "report", "history", "histories", "download", "table", "sheet", "book", "output", "timeseries", "values":
		return true
	}
	return false
}
