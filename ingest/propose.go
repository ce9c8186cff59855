package ingest

import (
	"context"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"path"
	"slices"
	"sort"
	"strconv"
	"strings"
	"time"

	"dewledger/ingest/trend"
)

// Confidence classes of a proposal. A role under LeftOpen is not proposed: the row is
// left open, with what it could be.
const (
	Sure     = 0.9
	LeftOpen = 0.6
)

// Proposal is one row of a draft points schedule.
type Proposal struct {
	Unit       string
	File       string // glob under trends/, empty: any file
	Column     string
	Role       trend.Role   // NoRole: left open, or no point of an air handler
	Open       []trend.Role // what it could be, where that is open
	Measure    string
	Confidence float64 // that the role is right; 0 where there is none
	Ground     string
	Known      bool // "known, not used": the column is another kind of point
}

// Propose drafts a points schedule: the role of every column from its name, its unit
// and, where the unit can be loaded, from the data. Rows come by unit, then role, then
// column. Units that cannot be loaded are proposed from names alone.
func (r *Result) Propose(ctx context.Context) ([]Proposal, error) {
	type key struct{ unit, column string }
	byKey := map[key][]*Proposal{}
	var out []*Proposal
	globs := r.globs()
	for i := range r.Units {
		us := &r.Units[i]
		var found map[trend.Role]evidence
		u, _, err := r.Load(ctx, i)
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		if err == nil {
			found = dataEvidence(u)
		}
		for _, m := range us.Mapping {
			p := &Proposal{Unit: us.Name, Column: m.Column, Role: m.Role, Open: m.Open, Measure: m.Measure, Ground: m.Ground, File: globs[m.File]}
			if m.Shared {
				p.Unit = "*"
			}
			switch {
			case m.Role != trend.NoRole && m.By == "schedule":
				p.Confidence = 1
			case m.Role != trend.NoRole:
				p.Confidence = nameConfidence(m.score, m.Measure != "")
			case m.other:
				p.Known = true
			}
			if m.Role != trend.NoRole && u != nil {
				if c := u.Cols[m.Role]; c != nil && c.Source.Column == m.Column {
					p.Measure = c.Source.Measure
				}
				if e, ok := found[m.Role]; ok {
					p.Ground += "; " + e.text
					p.Confidence = e.weigh(p.Confidence)
				}
			}
			if p.Role != trend.NoRole && p.Confidence < LeftOpen {
				p.Open, p.Role, p.Confidence, p.Measure = []trend.Role{p.Role}, trend.NoRole, 0, ""
			}
			k := key{p.Unit, p.Column}
			twice := slices.ContainsFunc(byKey[k], func(q *Proposal) bool { return q.File == p.File })
			if twice { // the same column in another month's file, or shared with another unit
				continue
			}
			byKey[k] = append(byKey[k], p)
			out = append(out, p)
		}
	}
	r.dropGlobs(out)
	sort.SliceStable(out, func(i, j int) bool {
		a, b := out[i], out[j]
		switch {
		case a.Unit != b.Unit:
			return a.Unit != "*" && (b.Unit == "*" || lessName(a.Unit, b.Unit))
		case (a.Role == trend.NoRole) != (b.Role == trend.NoRole):
			return b.Role == trend.NoRole
		case a.Role != b.Role:
			return a.Role < b.Role
		case a.Known != b.Known:
			return b.Known
		}
		return a.Column < b.Column
	})
	list := make([]Proposal, len(out))
	for i, p := range out {
		list[i] = *p
	}
	return list, nil
}

// nameConfidence turns the score of a name into a confidence, set with caution: of the
// names of testdata/point-names.tsv that come out sure, none is wrong.
func nameConfidence(score int, measured bool) float64 {
	c := 0.95 - 0.045*float64(fullScore-score)
	if score >= exactScore {
		c = 0.99
	}
	if measured {
		c += 0.02
	}
	return math.Min(math.Max(c, 0.05), 0.99)
}

// globs gives each file of the run the pattern that stands for its unit's files: what
// their names have in common, where no other unit's file fits that.
func (r *Result) globs() map[string]string {
	out := map[string]string{}
	for _, f := range r.files {
		out[f.ref.name] = f.rel
	}
	for i := range r.plans {
		var own []string
		for _, fi := range r.plans[i].files {
			f := r.files[fi]
			if !f.single && !f.weather {
				own = append(own, f.rel)
			}
		}
		if len(own) < 2 {
			continue
		}
		pre := own[0]
		for _, f := range own[1:] {
			n := 0
			for n < len(pre) && n < len(f) && pre[n] == f[n] {
				n++
			}
			pre = pre[:n]
		}
		glob := pre + "*" + path.Ext(own[0])
		if strings.ContainsAny(pre, `*?[]\`) || len(path.Base(pre)) == 0 {
			continue
		}
		fits := true
		for _, f := range r.files {
			match, err := path.Match(glob, f.rel)
			fits = fits && err == nil && match == slices.Contains(own, f.rel)
		}
		if fits {
			for _, fi := range r.plans[i].files {
				out[r.files[fi].ref.name] = glob
			}
		}
	}
	return out
}

// dropGlobs leaves the file out of rows whose column names but one point in all files.
func (r *Result) dropGlobs(out []*Proposal) {
	rows := map[string]int{}
	for _, p := range out {
		rows[strings.ToLower(p.Column)]++
	}
	for _, p := range out {
		if rows[strings.ToLower(p.Column)] == 1 {
			p.File = ""
		}
	}
}

// evidence is what the data say of a role: factor over 1 speaks for it.
type evidence struct {
	factor float64
	text   string
}

// weigh brings a confidence up or down by the evidence, as odds.
func (e evidence) weigh(c float64) float64 {
	odds := c / (1 - c) * e.factor
	return math.Min(odds/(1+odds), 0.99)
}

// fewestHeld is how many intervals a test of the data needs.
const fewestHeld = 48

// dataEvidence holds the unit's points against each other. The bounds are common
// practice, no source: generous, since a fault must not cost a point its role.
func dataEvidence(u *trend.Unit) map[trend.Role]evidence {
	out := map[trend.Role]evidence{}
	speak := func(r trend.Role, factor float64, format string, args ...any) {
		out[r] = evidence{factor, fmt.Sprintf(format, args...)}
	}
	running := fanRuns(u)
	when := func(r trend.Role, ok func(i int) bool) []float64 {
		var v []float64
		for i, x := range u.Col(r) {
			if x == x && ok(i) {
				v = append(v, x)
			}
		}
		return v
	}

	// A mixture lies between its streams.
	if oa, ra, ma := u.Col(trend.OATemp), u.Col(trend.RATemp), u.Col(trend.MATemp); oa != nil && ra != nil && ma != nil {
		n, in := 0, 0
		for i := range ma {
			if running(i) && math.Abs(oa[i]-ra[i]) > 4 && ma[i] == ma[i] {
				n++
				if ma[i] >= math.Min(oa[i], ra[i])-1.5 && ma[i] <= math.Max(oa[i], ra[i])+1.5 {
					in++
				}
			}
		}
		if n >= fewestHeld {
			share := float64(in) / float64(n)
			switch {
			case share >= 0.9:
				speak(trend.MATemp, 3, "it lies between outdoor and return air %.0f %% of the time", 100*share)
			case share < 0.4:
				speak(trend.MATemp, 0.3, "but it lies outside outdoor and return air %.0f %% of the time", 100*(1-share))
			}
		}
	}
	for _, r := range []trend.Role{trend.RATemp, trend.ZoneTemp} {
		if v := when(r, running); len(v) >= fewestHeld {
			if mid := median(v); mid >= 15 && mid <= 30 {
				speak(r, 2, "it is %.0f degC, as rooms are", mid)
			} else {
				speak(r, 0.2, "but it is %.0f degC, as rooms are not", mid)
			}
		}
	}
	if v := when(trend.OATemp, func(int) bool { return true }); len(v) >= 4*fewestHeld {
		if s := scatter(v); s < 0.3 {
			speak(trend.OATemp, 0.3, "but it hardly moves")
		} else if rv := when(trend.RATemp, func(int) bool { return true }); len(rv) >= fewestHeld && s > 1.5*scatter(rv) {
			speak(trend.OATemp, 2, "it moves more than the return air")
		}
	}
	// Valves move the supply temperature the way that they should.
	base := u.Col(trend.MATemp)
	if base == nil {
		base = u.Col(trend.RATemp)
	}
	if sa := u.Col(trend.SATemp); sa != nil && base != nil {
		for _, v := range []struct {
			role trend.Role
			sign float64
			word string
		}{{trend.HeatValve, 1, "warmer"}, {trend.CoolValve, -1, "colder"}} {
			pos := u.Col(v.role)
			if pos == nil {
				continue
			}
			var open, shut []float64
			for i, p := range pos {
				d := sa[i] - base[i]
				switch {
				case d != d || !running(i):
				case p > 0.3:
					open = append(open, d)
				case p < 0.02:
					shut = append(shut, d)
				}
			}
			if len(open) < 12 || len(shut) < 12 {
				continue
			}
			d := v.sign * (median(open) - median(shut))
			switch {
			case d > 1:
				speak(v.role, 4, "supply air is %.0f K %s with it open", d, v.word)
			case d < -1:
				speak(v.role, 0.2, "but supply air is not %s with it open", v.word)
			}
		}
	}
	for r := trend.NoRole + 1; r < trend.NumRoles; r++ {
		if _, told := out[r]; told || r.Kind() != trend.Position || u.Cols[r] == nil || isStage(r) {
			continue
		}
		v := when(r, func(int) bool { return true })
		if len(v) < fewestHeld {
			continue
		}
		lo, hi := slices.Min(v), slices.Max(v)
		switch {
		case lo < -0.02 || hi > 1.06:
			speak(r, 0.4, "but it runs from %.0f to %.0f %%", 100*lo, 100*hi)
		case hi > 0.9 && lo < 0.1:
			speak(r, 1.5, "it runs from %.0f to %.0f %%", 100*lo, 100*hi)
		}
	}
	// A setpoint and what follows it.
	for _, p := range []struct {
		sp, of trend.Role
		near   float64
		unit   string
		scale  float64
	}{{trend.SATempSP, trend.SATemp, 4, "K", 1}, {trend.SAStaticSP, trend.SAStatic, 60, "Pa", 1}, {trend.RARHSP, trend.RARH, 0.15, "%", 100}, {trend.ZoneTempSP, trend.ZoneTemp, 3, "K", 1}} {
		sp, of := u.Col(p.sp), u.Col(p.of)
		if sp == nil || of == nil {
			continue
		}
		var d []float64
		for i := range sp {
			if x := math.Abs(sp[i] - of[i]); x == x && running(i) {
				d = append(d, x)
			}
		}
		if len(d) >= fewestHeld {
			if mid := median(d); mid <= p.near {
				speak(p.sp, 2, "%s stays within %.2g %s of it half of the time", p.of.Title(), mid*p.scale, p.unit)
			} else if mid > 4*p.near {
				speak(p.sp, 0.4, "but %s is %.2g %s away from it half of the time", p.of.Title(), mid*p.scale, p.unit)
			}
		}
	}
	for _, w := range []struct {
		role   trend.Role
		lo, hi float64
	}{{trend.CHWSupplyTemp, 1, 20}, {trend.CHWReturnTemp, 3, 26}, {trend.HWSupplyTemp, 24, 130}, {trend.HWReturnTemp, 18, 120}} {
		if v := when(w.role, running); len(v) >= fewestHeld {
			if mid := median(v); mid >= w.lo && mid <= w.hi {
				speak(w.role, 2, "it is %.0f degC", mid)
			} else {
				speak(w.role, 0.4, "but it is %.0f degC", mid)
			}
		}
	}
	// Fans and occupancy keep working hours, or at least agree with each other.
	status, cmd := u.Col(trend.SAFanStatus), u.Col(trend.SAFanCmd)
	if status != nil && cmd != nil {
		n, same := 0, 0
		for i := range status {
			if status[i] == status[i] && cmd[i] == cmd[i] {
				n++
				same += b2i(status[i] == cmd[i])
			}
		}
		if n >= fewestHeld {
			share := float64(same) / float64(n)
			f := 3.0
			if share < 0.5 {
				f = 0.3
			}
			speak(trend.SAFanStatus, f, "it agrees with the command %.0f %% of the time", 100*share)
			speak(trend.SAFanCmd, f, "the status agrees with it %.0f %% of the time", 100*share)
		}
	}
	if occ := u.Col(trend.Occupied); occ != nil {
		var day, night []float64
		for i, x := range occ {
			if x != x {
				continue
			}
			t := u.Axis.Start.Add(time.Duration(i) * u.Axis.Step).In(u.Site.Zone)
			switch h := t.Hour(); {
			case t.Weekday() != time.Saturday && t.Weekday() != time.Sunday && h >= 10 && h < 15:
				day = append(day, x)
			case h < 4:
				night = append(night, x)
			}
		}
		if len(day) >= fewestHeld/4 && len(night) >= fewestHeld/4 {
			if a, b := mean(day), mean(night); a > b+0.3 {
				speak(trend.Occupied, 3, "it is on %.0f %% of weekdays and %.0f %% of nights", 100*a, 100*b)
			} else if b > a+0.3 {
				speak(trend.Occupied, 0.3, "but it is on more by night than by day")
			}
		}
	}
	return out
}

// fanRuns says in which intervals the supply fan runs, as far as a point shows it.
func fanRuns(u *trend.Unit) func(i int) bool {
	for _, r := range []trend.Role{trend.SAFanStatus, trend.SAFanCmd, trend.SAFanSpeed} {
		if v := u.Col(r); v != nil {
			return func(i int) bool { return v[i] > 0.05 }
		}
	}
	return func(int) bool { return true }
}

func median(v []float64) float64 {
	s := slices.Clone(v)
	slices.Sort(s)
	return s[len(s)/2]
}

func mean(v []float64) float64 {
	s := 0.0
	for _, x := range v {
		s += x
	}
	return s / float64(len(v))
}

// scatter is half the distance between the 16th and 84th percentiles.
func scatter(v []float64) float64 {
	s := slices.Clone(v)
	slices.Sort(s)
	return (s[len(s)*84/100] - s[len(s)*16/100]) / 2
}

// WriteSchedule writes proposals as a points schedule that can be used as it stands:
// rows that are left open have the role ?, and other kinds of points the role -.
func WriteSchedule(w io.Writer, rows []Proposal) error {
	c := csv.NewWriter(w)
	if err := c.Write(pointColumns); err != nil {
		return err
	}
	for _, p := range rows {
		role, confidence, note := p.Role.String(), "", ""
		switch {
		case p.Role != trend.NoRole:
			confidence = strconv.FormatFloat(p.Confidence, 'f', 2, 64)
		case !p.Known:
			role = openRole
			var could []string
			for _, r := range p.Open {
				could = append(could, r.String())
			}
			if len(could) > 0 {
				note = "could be " + strings.Join(could, ", ")
			}
		}
		if err := c.Write([]string{p.Unit, p.File, p.Column, role, p.Measure, "", "", "", note, confidence, p.Ground}); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}
