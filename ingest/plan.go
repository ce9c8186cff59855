package ingest

import (
	"errors"
	"fmt"
	"path"
	"sort"
	"strings"

	"dewledger/ingest/trend"
)

// binding ties one column of one file to a role of a unit.
type binding struct {
	file    int // index of Result.files
	col     int
	role    trend.Role
	measure Measure // where stated
	stated  bool
	label   bool    // stated by the file, not by points.csv
	scale   float64 // of points.csv
	offset  float64
	band    trend.Band
	by      string
	ground  string
	note    string
	line    int
	score   int
	pos     bool
	shared  bool
	other   bool // another kind of point
	open    []trend.Role
}

// unitPlan is one unit to load.
type unitPlan struct {
	name  string
	binds []binding
	files []int // all its files, in order
	loose []binding
}

// plan decides which columns are which points of which units. It fails where the
// schedule gives one role of a unit to two columns of a file.
func (r *Result) plan(points []*point, notes *notebook) error {
	units := map[string]*unitPlan{}
	unit := func(name string) *unitPlan {
		u := units[name]
		if u == nil {
			u = &unitPlan{name: name}
			units[name] = u
		}
		return u
	}
	var shared, unused []binding
	byFile := make([]bool, len(r.files)) // the schedule speaks of the file
	type claim struct {
		unit string
		role trend.Role
		file int
	}
	claims := map[claim]*point{}
	var errs []error
	for i, f := range r.files {
		if f.err != nil {
			continue
		}
		for c := range f.header {
			if c == f.timeCol || c == f.clock {
				continue
			}
			for _, p := range points {
				if !p.covers(f.rel, f.header[c], f.bare[c]) {
					continue
				}
				p.matches++
				byFile[i] = true
				if p.role != trend.NoRole {
					k := claim{p.unit, p.role, i}
					if first, twice := claims[k]; twice {
						errs = append(errs, &ConfigError{File: r.PointsFile, Line: p.line, Field: "role", Hint: "a unit has one point a role; give the other the role -",
							Msg: fmt.Sprintf("%s of unit %s is mapped here and on line %d, and %s has both columns", p.role, quote(p.unit), first.line, quote(f.ref.name))})
						continue
					}
					claims[k] = p
				}
				b := r.scheduled(i, c, p)
				switch {
				case p.role == trend.NoRole:
					unused = append(unused, b)
				case p.unit == "*":
					b.shared = true
					shared = append(shared, b)
				default:
					u := unit(p.unit)
					u.binds = append(u.binds, b)
				}
			}
		}
	}
	if len(errs) > 0 {
		return errors.Join(errs...)
	}
	var free []int
	for i, f := range r.files {
		switch {
		case f.err != nil:
		case f.weather && !byFile[i]:
			shared = append(shared, r.guessFile(i, "weather ", true)...)
		case !byFile[i]:
			free = append(free, i)
		}
	}
	if len(points) > 0 && len(free) > 0 {
		notes.addCount(len(free), "file-not-in-schedule", r.files[free[0]].ref.name, "", 0, "points.csv says nothing of the columns of %s; they are mapped by name", quote(r.files[free[0]].ref.name))
	}
	open := 0
	for _, p := range points {
		if p.open {
			open++
		}
	}
	if open > 0 {
		notes.addCount(open, "point-open", r.PointsFile, "", 0, "rows of the points schedule have the role ?: they are not used")
	}
	more := r.group(free, unit)
	shared = append(shared, more...)
	for _, p := range points {
		if p.matches == 0 {
			notes.add("point-unmatched", r.PointsFile, "", p.line, "the row for column %s of unit %s matches no column of the trend files", quote(p.column), quote(p.unit))
		}
	}
	r.finish(units, shared, unused)
	return nil
}

func (r *Result) scheduled(file, col int, p *point) binding {
	f := r.files[file]
	b := binding{file: file, col: col, role: p.role, measure: p.measure, stated: p.stated, scale: p.scale, offset: p.offset, band: p.band,
		by: "schedule", ground: fmt.Sprintf("%s:%d", r.PointsFile, p.line), note: p.note, line: p.line, score: 2 * exactScore, other: p.role == trend.NoRole && !p.open}
	if !b.stated && b.role != trend.NoRole {
		r.labelled(&b, f)
	}
	return b
}

// labelled takes the unit of measure from the header where it is one that the
// role can have.
func (r *Result) labelled(b *binding, f *source) {
	if u, ok := LookupUnit(f.units[b.col]); ok {
		if _, _, fits := u.toKind(b.role.Kind()); fits {
			b.measure, b.stated, b.label = u, true, true
		}
	}
}

// guessFile maps the columns of a file by name. prefix is put before each name;
// wx turns what is outdoor into the site's weather.
func (r *Result) guessFile(file int, prefix string, wx bool) []binding {
	f := r.files[file]
	var out []binding
	for c := range f.header {
		if c == f.timeCol || c == f.clock || f.bare[c] == "" {
			continue
		}
		out = append(out, r.guessColumn(file, c, prefix+f.bare[c], wx))
	}
	return out
}

func (r *Result) guessColumn(file, col int, name string, wx bool) binding {
	f := r.files[file]
	g := guessRole(name, f.units[col], f.samples[col])
	if wx {
		if alt := guessRole(f.bare[col], f.units[col], f.samples[col]); alt.score > g.score {
			g = alt
		}
		switch g.role {
		case trend.OATemp:
			g.role = trend.WXTemp
		case trend.OARH:
			g.role = trend.WXRH
		case trend.OADewPoint:
			g.role = trend.WXDewPoint
		}
	}
	b := binding{file: file, col: col, role: g.role, scale: 1, by: "guess", ground: g.ground, score: g.score, pos: g.pos, other: g.other, open: g.open, shared: wx}
	if b.role != trend.NoRole {
		r.labelled(&b, f)
	}
	return b
}

// settle leaves one column a role in a unit: the surest. Columns of the same
// name in several files are one point. Where two are as sure, both are left open.
func (r *Result) settle(binds []binding) (kept, open []binding) {
	header := func(b *binding) string { return strings.ToLower(r.files[b.file].bare[b.col]) }
	// A "position" beside a command is the measured position.
	for i := range binds {
		b := &binds[i]
		fb, ok := trend.ParseRole(b.role.String() + "_fb")
		if !b.pos || !ok {
			continue
		}
		for j := range binds {
			if o := &binds[j]; i != j && o.role == b.role && !o.pos && o.score >= minScore && header(o) != header(b) {
				b.role, b.ground = fb, b.ground+"; a command stands beside it, so this is the measured position"
				break
			}
		}
	}
	byRole := map[trend.Role][]int{}
	for i := range binds {
		if binds[i].role == trend.NoRole {
			open = append(open, binds[i])
			continue
		}
		byRole[binds[i].role] = append(byRole[binds[i].role], i)
	}
	for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
		idx := byRole[role]
		best, names := 0, map[string]bool{}
		for _, i := range idx {
			best = max(best, binds[i].score)
		}
		for _, i := range idx {
			if binds[i].score == best {
				names[header(&binds[i])] = true
			}
		}
		for _, i := range idx {
			b := binds[i]
			switch {
			case b.score < best:
				b.open, b.role = []trend.Role{role}, trend.NoRole
				b.ground += "; another column says " + role.String() + " more surely"
				open = append(open, b)
			case len(names) > 1 && b.by == "guess":
				b.open, b.role = []trend.Role{role}, trend.NoRole
				b.ground += fmt.Sprintf("; %d columns say %s as surely as each other", len(names), role)
				open = append(open, b)
			default:
				kept = append(kept, b)
			}
		}
	}
	return kept, open
}

// finish shares the shared points out and writes the units down.
func (r *Result) finish(units map[string]*unitPlan, shared, unused []binding) {
	shared, loose := r.settle(shared)
	var names []string
	for n := range units {
		names = append(names, n)
	}
	sort.Strings(names)
	inUse := map[int]bool{}
	for _, n := range names {
		u := units[n]
		u.binds, u.loose = r.settle(u.binds)
		have := map[trend.Role]bool{}
		files := map[int]bool{}
		for _, b := range u.binds {
			have[b.role] = true
			files[b.file] = true
		}
		for _, b := range u.loose {
			files[b.file] = true
		}
		for _, b := range shared {
			if !have[b.role] {
				b.shared = true
				u.binds = append(u.binds, b)
				files[b.file] = true
			}
		}
		sort.SliceStable(u.binds, func(i, j int) bool { return u.binds[i].role < u.binds[j].role })
		for i := range r.files {
			if files[i] {
				u.files = append(u.files, i)
				inUse[i] = true
			}
		}
		r.plans = append(r.plans, *u)
		r.Units = append(r.Units, r.describe(u, unused, loose))
	}
	for i, f := range r.files { // files that are no unit's
		if f.err == nil || inUse[i] {
			continue
		}
		name := f.stem
		if name == "" {
			name = "stdin"
		}
		r.plans = append(r.plans, unitPlan{name: name, files: []int{i}})
		r.Units = append(r.Units, UnitSource{Name: name, Files: []SourceFile{{f.ref.name, f.format, f.ref.size}}, Err: f.err, Plant: r.plant(name)})
	}
	order := make([]int, len(r.Units))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return lessName(r.Units[order[a]].Name, r.Units[order[b]].Name) })
	us, ps := make([]UnitSource, len(order)), make([]unitPlan, len(order))
	for i, j := range order {
		us[i], ps[i] = r.Units[j], r.plans[j]
	}
	r.Units, r.plans = us, ps
}

func (r *Result) plant(name string) trend.Plant {
	if p, ok := r.cfg.plants[name]; ok {
		return p
	}
	return r.cfg.defaults
}

// describe is what a reader sees of a unit's plan.
func (r *Result) describe(u *unitPlan, unused, loose []binding) UnitSource {
	s := UnitSource{Name: u.name, Plant: r.plant(u.name)}
	files := map[int]bool{}
	for _, i := range u.files {
		f := r.files[i]
		files[i] = true
		s.Files = append(s.Files, SourceFile{f.ref.name, f.format, f.ref.size})
		s.Notes = append(s.Notes, f.notes.list...)
	}
	all := append([]binding(nil), u.binds...)
	all = append(all, u.loose...)
	for _, b := range append(append([]binding(nil), unused...), loose...) {
		if files[b.file] {
			all = append(all, b)
		}
	}
	mapped := 0
	for _, b := range all {
		f := r.files[b.file]
		m := Mapped{Column: f.header[b.col], File: f.ref.name, Role: b.role, By: b.by, Ground: b.ground, Open: b.open, Line: b.line, Shared: b.shared, score: b.score, other: b.other}
		if b.stated {
			m.Measure = b.measure.Name
		}
		if b.role == trend.NoRole && b.by != "schedule" {
			m.By = ""
		}
		if b.role != trend.NoRole && !b.shared {
			mapped++
		}
		s.Mapping = append(s.Mapping, m)
	}
	sort.SliceStable(s.Mapping, func(i, j int) bool {
		a, b := s.Mapping[i], s.Mapping[j]
		if (a.Role == trend.NoRole) != (b.Role == trend.NoRole) {
			return b.Role == trend.NoRole
		}
		if a.Role != b.Role {
			return a.Role < b.Role
		}
		if a.File != b.File {
			return a.File < b.File
		}
		return a.Column < b.Column
	})
	if mapped == 0 {
		file := ""
		if len(s.Files) > 0 {
			file = s.Files[0].Name
		}
		s.Err = &UnitError{Unit: u.name, File: file, Msg: "no column could be told to be a point of an air-handling unit",
			Hint: "name the columns in points.csv; `dewledger points` writes a draft of it"}
	}
	return s
}

// lessName orders names with the numbers in them as numbers: AHU-2 before
// AHU-10.
func lessName(a, b string) bool {
	i, j := 0, 0
	for i < len(a) && j < len(b) {
		if isDigit(a[i]) && isDigit(b[j]) {
			si, sj := i, j
			for i < len(a) && isDigit(a[i]) {
				i++
			}
			for j < len(b) && isDigit(b[j]) {
				j++
			}
			x, y := strings.TrimLeft(a[si:i], "0"), strings.TrimLeft(b[sj:j], "0")
			if len(x) != len(y) {
				return len(x) < len(y)
			}
			if x != y {
				return x < y
			}
			continue
		}
		if a[i] != b[j] {
			return a[i] < b[j]
		}
		i++
		j++
	}
	if len(a)-i != len(b)-j {
		return len(a)-i < len(b)-j
	}
	return a < b
}

func dirName(p string) string {
	if b := path.Base(p); b != "." && b != "/" {
		return b
	}
	return ""
}
