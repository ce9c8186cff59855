package report

import (
	"embed"
	"fmt"
	"html/template"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

//go:embed html
var htmlFiles embed.FS

// SourceFile is an input file as the data section lists it.
type SourceFile struct {
	Name  string
	Bytes int64
	Rows  int
}

// UnitReport is everything that a unit's page tells.
type UnitReport struct {
	Set     *finding.Set
	Books   *balance.Books
	Sources []SourceFile
	Measure finding.Measure
	Version string
	Assumed []string     // what nobody stated, a sentence each
	Notes   []trend.Note // about the run as a whole; the unit has its own
}

// pages parses the templates; they are part of the program, so an error is a
// programmer's.
func pages() *template.Template {
	return template.Must(template.New("").Funcs(template.FuncMap{
		"css":   func() template.CSS { return template.CSS(readEmbedded("html/style.css")) },
		"lower": strings.ToLower,
		"inc":   func(i int) int { return i + 1 },
	}).ParseFS(htmlFiles, "html/*.tmpl"))
}

func readEmbedded(name string) string {
	b, err := htmlFiles.ReadFile(name)
	if err != nil {
		panic(err)
	}
	return string(b)
}

// unitPage is the view of a unit that the template prints: words, mostly.
type unitPage struct {
	Site, Unit, Serves string
	Period, Usable     string
	Lead               []string // the three sentences
	Firsts             []firstThing
	Findings           []findingView
	Causes             int
	Books              []bookRow
	BooksChart         *chart
	BooksMoist         string // unit labels
	BooksEnergy        string
	Psychro            *chart
	States             []stateRow
	Sensors            *sensorsView
	Fraction           *chart
	Tests              []testRow
	OneMore            []oneMore
	Points             []pointRow
	Notes              []noteRow
	Sources            []sourceRow
	Assumed            []string
	Rules              []ruleView
	Cautions           []string
	Zone, Factor       string
	Version            string
	Total              string
	Measure            string
}

type firstThing struct{ Check, Why, Anchor string }

type findingView struct {
	Anchor, Title, Rule, Priority string
	Statement                     string
	Effect, Matters               string
	Hours, Days, Confidence       string
	Energy, EnergyNote            string
	Suspects                      string
	Checks                        []string
	Lookalikes                    string
	What, Formula, Worked         string
	Cautions                      []string
	Evidence, Calendar            chart
}

type bookRow struct {
	Title, Hours                            string
	MoistIn, MoistOut, MoistRes, MoistClose string
	EnergyIn, EnergyOut, EnergyRes, EnClose string
	Open                                    bool
	Heat, Cool, Note                        string
}

type stateRow struct{ State, Hours, Share string }

type testRow struct {
	Rule, Title, Verdict, Hours, Seen string
	Parts                             []string
}

type oneMore struct {
	Role, Title string
	Rules       []string
}

type pointRow struct{ Role, Title, Column, File, Measure, By, Missing, Note string }

type noteRow struct{ Where, Text, Count string }

type sourceRow struct{ Name, Bytes, Rows string }

type ruleView struct {
	Name, Title, Text, Formula, Cannot string
	Params, Sources                    []string
}

// UnitPage writes one unit's report.
func UnitPage(w io.Writer, r UnitReport) error {
	return pages().ExecuteTemplate(w, "unit.tmpl", viewOf(r))
}

func viewOf(r UnitReport) unitPage {
	u, s, m := r.Books.Unit(), r.Set, r.Measure
	zone := u.Site.Zone
	v := unitPage{
		Site: u.Site.Name, Unit: u.Name, Serves: u.Plant.Serves, Version: r.Version,
		Period: fmt.Sprintf("%s to %s", u.Axis.Start.In(zone).Format("2 January 2006"), u.Axis.End().Add(-time.Second).In(zone).Format("2 January 2006")),
		Usable: finding.Significant(100*s.UsableShare, 3) + " %",
		Zone:   zone.String(), Factor: strconv.FormatFloat(s.Factor, 'g', -1, 64), Assumed: r.Assumed, Measure: m.String(),
		BooksMoist: m.Label("g/kg"), BooksEnergy: m.Label("kJ/kg"),
	}
	v.Lead = leadOf(s, m)
	v.Total = totalOf(s)
	cautions := map[finding.Caution]bool{}
	for i := range s.Findings {
		f := &s.Findings[i]
		v.Findings = append(v.Findings, findingOf(r, f, i))
		for _, c := range f.Cautions {
			cautions[c] = true
		}
		if len(v.Firsts) < 3 && f.ExplainedBy == "" && !slices.ContainsFunc(v.Firsts, func(x firstThing) bool { return x.Check == f.Check }) {
			v.Firsts = append(v.Firsts, firstThing{f.Check, titleOf(s, f.Rule), anchorOf(i)})
		}
	}
	for _, c := range []finding.Caution{finding.Isolate, finding.HotSurfaces, finding.Stagnant, finding.Ventilation, finding.Freezing} {
		if cautions[c] || c == finding.Isolate || c == finding.Ventilation {
			v.Cautions = append(v.Cautions, c.Text())
		}
	}
	rows := r.Books.Account()
	for _, row := range rows {
		v.Books = append(v.Books, bookOf(row, s.Factor, m))
	}
	if c, ok := booksChart("books", rows, s.Factor, m); ok {
		v.BooksChart = &c
	}
	if c, ok := psychroChart("psychro", r.Books, s.Factor, m); ok {
		v.Psychro = &c
	}
	if c, ok := fractionChart("fraction", r.Books, m); ok {
		v.Fraction = &c
	}
	v.States = statesOf(r.Books)
	v.Sensors = sensorsOf(r.Books, s.Factor, m)
	for _, c := range s.Coverage {
		v.Tests = append(v.Tests, testOf(s, c, m))
	}
	for _, o := range s.OneMore {
		x := oneMore{Role: o.Role, Rules: o.Rules}
		if role, ok := trend.ParseRole(o.Role); ok {
			x.Title = role.Title()
		}
		v.OneMore = append(v.OneMore, x)
	}
	v.Points = pointsOf(u)
	for _, n := range slices.Concat(r.Notes, u.Notes) {
		x := noteRow{Where: n.File, Text: n.Text}
		if n.Line > 0 {
			x.Where += fmt.Sprintf(", line %d", n.Line)
		}
		if n.Column != "" {
			x.Where += ", " + n.Column
		}
		x.Where = strings.TrimPrefix(x.Where, ", ")
		if n.Count > 1 {
			x.Count = fmt.Sprintf("%d times", n.Count)
		}
		v.Notes = append(v.Notes, x)
	}
	for _, f := range r.Sources {
		v.Sources = append(v.Sources, sourceRow{f.Name, finding.Grouped(float64(f.Bytes), 0), finding.Grouped(float64(f.Rows), 0)})
	}
	for _, d := range s.Rules {
		x := ruleView{Name: d.Name, Title: d.Title, Text: d.Text, Formula: d.Formula, Cannot: d.Cannot, Sources: d.Sources}
		for _, p := range d.Params {
			x.Params = append(x.Params, fmt.Sprintf("%s %s: %s", p.Name, quantity(m, p.Value, p.Unit), p.Why))
		}
		v.Rules = append(v.Rules, x)
	}
	return v
}

// quantity words a parameter in its unit.
func quantity(m finding.Measure, x float64, unit string) string {
	v, label := m.Convert(x, unit)
	return strings.TrimSpace(strconv.FormatFloat(v, 'g', 4, 64) + " " + label)
}

func anchorOf(i int) string { return fmt.Sprintf("f%d", i+1) }

func titleOf(s *finding.Set, rule string) string {
	for _, d := range s.Rules {
		if d.Name == rule {
			return d.Title
		}
	}
	return rule
}

// leadOf is the first screen in sentences: what is wrong, how sure, what it
// costs, and what could not be seen.
func leadOf(s *finding.Set, m finding.Measure) []string {
	var passed, untested int
	for _, c := range s.Coverage {
		switch c.Verdict {
		case finding.Pass:
			passed++
		case finding.NotTestable:
			untested++
		}
	}
	var out []string
	switch n := s.Open(); n {
	case 0:
		out = append(out, "Nothing was found wrong with this unit in what this period could show.")
	default:
		f := &s.Findings[0]
		out = append(out, fmt.Sprintf("%s %s to be looked at. The first: %s, by %s (priority %s, confidence %s).", capital(inWords(n)), plural(n, "thing needs", "things need"),
			lowerFirst(titleOf(s, f.Rule)), m.PlusMinus(f.Magnitude, f.Uncertainty, f.UnitOf), f.Priority, confidenceInWords(f.Confidence)))
	}
	if n := len(s.Findings) - s.Open(); n > 0 {
		out[0] += fmt.Sprintf(" It explains %s more %s.", inWords(n), plural(n, "finding", "findings"))
	}
	if t := totalOf(s); t != "" {
		out = append(out, t)
	} else if len(s.Findings) > 0 {
		out = append(out, "No waste can be put in kilowatt-hours for what was found: it is a matter of sensors, moisture or safety, or the air flow is not known.")
	}
	out = append(out, fmt.Sprintf("Of %d rules, %d passed and %d could not be tested on this period: see what was tested.", len(s.Coverage), passed, untested))
	return out
}

func totalOf(s *finding.Set) string {
	t := s.Total
	if math.IsNaN(t.KWh) || len(s.Findings) == 0 {
		return ""
	}
	text := fmt.Sprintf("If the suspected causes are the real ones, the waste in this period was %s kWh", finding.Range(t.KWh, t.Low, t.High))
	if !math.IsNaN(t.Cost) {
		text += fmt.Sprintf(", %s %s", finding.Range(t.Cost, t.CostLow, t.CostHigh), s.Currency)
	}
	return text + "; no kilowatt-hour is counted twice."
}

// confidenceInWords never claims certainty.
func confidenceInWords(p float64) string {
	switch {
	case p > 0.99:
		return "over 99 %"
	case p < 0.01:
		return "under 1 %"
	}
	return finding.Significant(100*p, 2) + " %"
}

func inWords(n int) string {
	words := []string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten"}
	if n < len(words) {
		return words[n]
	}
	return fmt.Sprint(n)
}

func plural(n int, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}

func capital(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}

func lowerFirst(s string) string {
	if len(s) > 1 && s[1] >= 'a' && s[1] <= 'z' {
		return strings.ToLower(s[:1]) + s[1:]
	}
	return s
}

func findingOf(r UnitReport, f *finding.Finding, i int) findingView {
	u, m := r.Books.Unit(), r.Measure
	v := findingView{
		Anchor: anchorOf(i), Title: titleOf(r.Set, f.Rule), Rule: f.Rule, Priority: f.Priority.String(), Statement: f.Statement,
		Effect: m.PlusMinus(f.Magnitude, f.Uncertainty, f.UnitOf), Matters: m.Value(f.Matters, f.UnitOf, 2),
		Hours:      fmt.Sprintf("%s of %s hours tested", finding.Significant(f.FaultHours, 3), finding.Significant(f.TestedHours, 3)),
		Days:       fmt.Sprintf("%s to %s", f.Start.In(u.Site.Zone).Format("2 January 15:04"), f.End.In(u.Site.Zone).Format("2 January 15:04")),
		Confidence: confidenceInWords(f.Confidence),
		Suspects:   suspectsInWords(f.Suspects), Checks: f.Checks, Lookalikes: f.Lookalikes,
		What: f.Trace.What, Formula: f.Trace.Formula, Worked: f.Trace.Worked,
	}
	if !math.IsNaN(f.Energy.KWh) {
		v.Energy = finding.Range(f.Energy.KWh, f.Energy.Low, f.Energy.High) + " kWh"
		if !math.IsNaN(f.Energy.Cost) {
			v.Energy += ", " + finding.Range(f.Energy.Cost, f.Energy.CostLow, f.Energy.CostHigh) + " " + r.Set.Currency
		}
		v.EnergyNote = f.Energy.Note
	}
	for _, c := range f.Cautions {
		v.Cautions = append(v.Cautions, c.Text())
	}
	inSpan := make([]bool, u.Axis.N)
	for _, s := range f.Spans {
		for k := s.I; k < s.J; k++ {
			inSpan[k] = true
		}
	}
	v.Evidence = evidenceChart(v.Anchor+"-e", u, f, m)
	v.Calendar = calendarChart(v.Anchor+"-c", u, f, func(i int) bool { return inSpan[i] })
	return v
}

func suspectsInWords(names []string) string {
	var out []string
	for _, n := range names {
		w := n
		if r, ok := trend.ParseRole(n); ok && r != trend.NoRole {
			w = "the " + r.Title() + " point"
		} else if slices.Contains(trend.Components(), trend.Component(n)) {
			w = "the " + trend.Component(n).Title()
		} else {
			w = "the " + strings.ReplaceAll(n, "-", " ")
		}
		out = append(out, w)
	}
	return strings.Join(out, "; ")
}

func rowTitle(r balance.Row) string {
	if r.Component != "" {
		return capital(r.Component.Title())
	}
	if len(r.Between) > 2 {
		return capital(r.From.Title()) + " to " + r.To.Title()
	}
	var parts []string
	for _, c := range r.Between {
		parts = append(parts, c.Title())
	}
	return capital(strings.Join(parts, ", "))
}

func bookOf(r balance.Row, k float64, m finding.Measure) bookRow {
	plain := func(x float64, unit string, d int) string {
		if math.IsNaN(x) {
			return "–"
		}
		y, _ := m.Convert(x, unit)
		return finding.Grouped(y, d)
	}
	res := func(x, u float64, unit string) string {
		if math.IsNaN(x) || math.IsNaN(u) {
			return "–"
		}
		s := m.PlusMinus(x, k*u, unit)
		return strings.TrimSuffix(s, " "+m.Label(unit))
	}
	b := bookRow{
		Title: rowTitle(r), Hours: finding.Significant(r.Hours, 3),
		MoistIn: plain(r.MoistureIn, "g/kg", 2), MoistOut: plain(r.MoistureOut, "g/kg", 2), MoistRes: res(r.MoistureResidual, r.MoistureU, "g/kg"), MoistClose: r.MoistureCloses.String(),
		EnergyIn: plain(r.EnergyIn, "kJ/kg", 1), EnergyOut: plain(r.EnergyOut, "kJ/kg", 1), EnergyRes: res(r.EnergyResidual, r.EnergyU, "kJ/kg"), EnClose: r.EnergyCloses.String(),
		Heat: plain(r.HeatKWh, "kWh", 0), Cool: plain(r.CoolKWh, "kWh", 0),
		Open: r.MoistureCloses == balance.Open || r.EnergyCloses == balance.Open, Note: r.Note,
	}
	if r.UseHours > 0 {
		verb, x := "took up", r.UseGain
		if x < 0 {
			verb, x = "lost", -x
		}
		b.Note = fmt.Sprintf("In use (%s h), the air %s %s of moisture.", finding.Significant(r.UseHours, 3), verb, m.PlusMinus(x, k*r.UseU, "g/kg"))
	}
	return b
}

func stateInWords(s balance.State) string {
	switch s {
	case balance.Heating:
		return "heating"
	case balance.FreeCooling:
		return "cooling with outdoor air alone"
	case balance.FreePlusMechanical:
		return "cooling with outdoor air and the coil"
	case balance.Mechanical:
		return "cooling with the coil at minimum outdoor air"
	case balance.Ventilating:
		return "ventilating with the coils shut"
	case balance.Recirculating:
		return "recirculating"
	case balance.HeatingAndCooling:
		return "heating and cooling at once"
	case balance.Off:
		return "off"
	}
	return "in no known state"
}

func statesOf(b *balance.Books) []stateRow {
	ax := b.Unit().Axis
	var n [balance.NumStates]int
	for _, s := range b.States() {
		n[s]++
	}
	var out []stateRow
	for s := balance.Unknown; s < balance.NumStates; s++ {
		if n[s] > 0 {
			out = append(out, stateRow{capital(stateInWords(s)), finding.Grouped(float64(n[s])*ax.Hours(), 0), finding.Significant(100*float64(n[s])/float64(ax.N), 2) + " %"})
		}
	}
	return out
}

func testOf(s *finding.Set, c finding.Coverage, m finding.Measure) testRow {
	t := testRow{Rule: c.Rule, Title: titleOf(s, c.Rule), Hours: finding.Significant(c.TestedHours, 3)}
	switch c.Verdict {
	case finding.Fault:
		t.Verdict = "fault"
		t.Seen = "See the findings above."
	case finding.Pass:
		t.Verdict = "pass"
		t.Seen = "An effect of " + m.Value(c.Detectable, c.UnitOf, 2) + " or more would have shown."
	default:
		t.Verdict = "not testable"
		t.Seen = reasonInWords(c.Reason)
	}
	if len(c.Parts) > 1 {
		for _, p := range c.Parts {
			if p.Verdict == c.Verdict && p.Verdict != finding.NotTestable {
				continue
			}
			name := p.Component
			if r, ok := trend.ParseRole(name); ok && r != trend.NoRole {
				name = r.Title()
			} else if name == "" {
				name = "the whole path"
			} else {
				name = trend.Component(name).Title()
			}
			x := capital(name) + ": " + p.Verdict.String()
			if p.Reason != "" {
				x += ", " + lowerFirst(strings.TrimSuffix(reasonInWords(p.Reason), "."))
			}
			t.Parts = append(t.Parts, x+".")
		}
	}
	return t
}

// reasonInWords turns a reason of coverage.csv into a sentence.
func reasonInWords(reason string) string {
	kind, rest, ok := strings.Cut(reason, ": ")
	if !ok {
		return reason
	}
	switch kind {
	case "missing":
		var out []string
		for _, n := range strings.Split(rest, ", ") {
			if r, ok := trend.ParseRole(n); ok {
				n = r.Title()
			}
			out = append(out, n)
		}
		return "Needs a point that is not trended: " + strings.Join(out, ", ") + "."
	case "disabled":
		if rest == "" {
			return "Switched off in site.toml."
		}
		return "Switched off in site.toml: " + rest + "."
	case "uncertainty":
		return "Too uncertain: " + rest + "."
	}
	return capital(rest) + "."
}

func shiftInWords(x float64) string {
	switch {
	case x > 0:
		return fmt.Sprintf(" plus %.6g", x)
	case x < 0:
		return fmt.Sprintf(" less %.6g", -x)
	}
	return ""
}

func pointsOf(u *trend.Unit) []pointRow {
	var out []pointRow
	for _, r := range u.Roles() {
		c := u.Cols[r]
		miss := 0
		for _, x := range c.Val {
			if math.IsNaN(x) {
				miss++
			}
		}
		p := pointRow{Role: r.String(), Title: r.Title(), Column: c.Source.Column, File: c.Source.File, Measure: c.Source.Measure, Note: c.Source.Note,
			Missing: finding.Significant(100*float64(miss)/float64(len(c.Val)), 2) + " %"}
		if c.Source.By == "guess" {
			p.By = "by name and unit: " + c.Source.Ground
		} else {
			p.By = "points schedule"
		}
		if c.Source.Scale != 0 && c.Source.Scale != 1 || c.Source.Shift != 0 {
			p.Note = strings.TrimSpace(fmt.Sprintf("In SI: %.6g times the value in the file%s. %s", c.Source.Scale, shiftInWords(c.Source.Shift), p.Note))
		}
		out = append(out, p)
	}
	return out
}
