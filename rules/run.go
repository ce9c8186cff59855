package rules

import (
	"context"
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"
	"time"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// Run asks every rule (or opt.Only) of one unit's books. It stops early, with
// what it has, when ctx ends; the caller looks at ctx.
func Run(ctx context.Context, b *balance.Books, opt Options) finding.Set {
	if opt.Factor == 0 {
		opt.Factor = 2
	}
	u := b.Unit()
	set := finding.Set{
		Unit:        u.Name,
		Factor:      opt.Factor,
		PeriodHours: float64(u.Axis.N) * u.Axis.Hours(),
		Currency:    u.Site.Currency,
	}
	if b.FanKnownBy() != trend.NoRole {
		set.FanHours = hours(b.FanOn(), u.Axis)
	} else {
		set.FanHours = math.NaN()
	}
	var fixed *balance.Books
	var accused []trend.Role
	if off := u.Plant.Rules[sensorOffset.Name].Disabled; !off && (len(opt.Only) == 0 || slices.Contains(opt.Only, sensorOffset.Name)) {
		fixed, accused = corrected(b, newPass(sensorOffset, b, opt))
	}
	tally := newTally(b)
	usable := make([]bool, u.Axis.N)
	opens := map[trend.Role][]string{}
	for _, r := range All() {
		if len(opt.Only) > 0 && !slices.Contains(opt.Only, r.Name) {
			continue
		}
		if ctx.Err() != nil {
			return set
		}
		p := newPass(r, b, opt)
		set.Rules = append(set.Rules, r.Describe(p.params))
		cov, rulings := ask(p)
		cov.Unit, cov.PeriodHours = u.Name, set.PeriodHours
		set.Coverage = append(set.Coverage, cov)
		if len(cov.Missing) == 1 { // more than one missing role is not one sensor away
			if role, ok := trend.ParseRole(cov.Missing[0]); ok {
				opens[role] = append(opens[role], r.Name)
			}
		}
		for k := range rulings {
			for i, a := range rulings[k].e.Applies {
				usable[i] = usable[i] || len(r.Needs.Balances) > 0 && a && !math.IsNaN(rulings[k].e.Effect.Val[i])
			}
			if rulings[k].verdict != finding.Fault {
				continue
			}
			if by := explained(p, &rulings[k], fixed, accused, opt); by != trend.NoRole {
				set.Findings = append(set.Findings, explainedBy(describe(p, &rulings[k], opt, nil), by))
			} else {
				set.Findings = append(set.Findings, describe(p, &rulings[k], opt, tally))
			}
		}
	}
	set.UsableShare = hours(usable, u.Axis) / set.PeriodHours
	set.Total = tally.total(b)
	for role := trend.NoRole; role < trend.NumRoles; role++ {
		if names := opens[role]; len(names) > 0 {
			set.OneMore = append(set.OneMore, finding.OneMore{Role: role.String(), Rules: names})
		}
	}
	sort.SliceStable(set.Findings, func(i, j int) bool { return before(&set.Findings[i], &set.Findings[j]) })
	return set
}

// before is the report order within a unit: priority, cost, confidence, rule; what is
// explained by another comes last.
func before(a, b *finding.Finding) bool {
	if x, y := a.ExplainedBy != "", b.ExplainedBy != ""; a.Priority == b.Priority && x != y {
		return y
	}
	if a.Priority != b.Priority {
		return a.Priority > b.Priority
	}
	if x, y := nz(a.Energy.Cost), nz(b.Energy.Cost); x != y {
		return x > y
	}
	if x, y := nz(a.Energy.KWh), nz(b.Energy.KWh); x != y {
		return x > y
	}
	if a.Confidence != b.Confidence {
		return a.Confidence > b.Confidence
	}
	if a.Rule != b.Rule {
		return a.Rule < b.Rule
	}
	return a.Component < b.Component
}

func nz(x float64) float64 {
	if math.IsNaN(x) {
		return 0
	}
	return x
}

func hours(mask []bool, ax trend.Axis) float64 {
	n := 0
	for _, m := range mask {
		if m {
			n++
		}
	}
	return float64(n) * ax.Hours()
}

// ask puts one rule's question and gives the unit's verdict with the rulings
// that made it.
func ask(p *Pass) (finding.Coverage, []ruling) {
	r, u := p.rule, p.b.Unit()
	cov := finding.Coverage{Rule: r.Name, UnitOf: r.Unit, Detectable: math.NaN()}
	if s, ok := u.Plant.Rules[r.Name]; ok && s.Disabled {
		cov.Reason = "disabled: " + s.Reason
		return cov, nil
	}
	if missing := r.Missing(p.b); len(missing) > 0 {
		for _, m := range missing {
			cov.Missing = append(cov.Missing, m.String())
		}
		cov.Reason = "missing: " + strings.Join(cov.Missing, ", ")
		return cov, nil
	}
	if r.Needs.Schedule && !p.b.OccupiedKnown() {
		cov.Reason = "missing: occupied"
		cov.Missing = []string{trend.Occupied.String()}
		return cov, nil
	}
	evidence := r.Eval(p)
	if len(evidence) == 0 {
		cov.Reason = "condition: the unit has no such place"
		if p.why != "" {
			cov.Reason = "condition: " + p.why
		}
		return cov, nil
	}
	rulings := make([]ruling, len(evidence))
	for k := range evidence {
		rulings[k] = judge(p, &evidence[k])
	}
	rulings = onePerPlace(rulings)
	merge(p, &cov, rulings)
	return cov, rulings
}

// onePerPlace keeps, of several faulty answers about the same place, the one
// that is surest; and lets an answer about one component stand for one about
// the whole train that contains it.
func onePerPlace(rs []ruling) []ruling {
	drop := make([]bool, len(rs))
	for i := range rs {
		for j := range rs {
			a, b := &rs[i], &rs[j]
			if i == j || drop[i] || drop[j] || a.verdict != finding.Fault || b.verdict != finding.Fault {
				continue
			}
			same := a.e.Component == b.e.Component
			within := a.e.Component == "" && b.e.Component != "" && len(b.e.Covers) > 0 && covers(a.e.Covers, b.e.Covers)
			if same && (a.confidence < b.confidence || a.confidence == b.confidence && (a.nflagged < b.nflagged || a.nflagged == b.nflagged && i > j)) || within {
				drop[i] = true
			}
		}
	}
	var out []ruling
	for i := range rs {
		if !drop[i] {
			out = append(out, rs[i])
		}
	}
	return out
}

func covers(all, some []trend.Component) bool {
	for _, c := range some {
		if !slices.Contains(all, c) {
			return false
		}
	}
	return true
}

// merge makes one verdict a unit and rule of the places' verdicts. A fault
// anywhere is a fault. Where evidence covers components, a pass needs every one
// of them covered by some passing evidence; its detectable is that of the worst
// covered one. Where places stand for themselves (readings), one that passes
// makes a pass, and the parts say which did not.
func merge(p *Pass, cov *finding.Coverage, rs []ruling) {
	ax := p.Axis()
	var targets []trend.Component
	var worst *ruling
	cov.Verdict = finding.NotTestable
	for k := range rs {
		r := &rs[k]
		h := float64(r.tested) * ax.Hours()
		cov.TestedHours = math.Max(cov.TestedHours, h)
		part := finding.CoveragePart{Component: r.e.Component, Verdict: r.verdict, TestedHours: h, Detectable: r.detectable, Reason: r.reason}
		cov.Parts = append(cov.Parts, part)
		if r.verdict == finding.Fault {
			cov.Verdict = finding.Fault
		}
		if r.verdict == finding.NotTestable && (worst == nil || r.tested > worst.tested) {
			worst = r
		}
		for _, c := range r.e.Covers {
			if !slices.Contains(targets, c) {
				targets = append(targets, c)
			}
		}
	}
	if cov.Verdict == finding.Fault {
		for k := range rs {
			if rs[k].verdict == finding.Fault && !(cov.Detectable >= rs[k].detectable) {
				cov.Detectable = rs[k].detectable
			}
		}
		return
	}
	if len(targets) == 0 {
		for k := range rs {
			if rs[k].verdict == finding.Pass {
				cov.Verdict = finding.Pass
				if !(cov.Detectable >= rs[k].detectable) {
					cov.Detectable = rs[k].detectable
				}
			}
		}
	} else {
		cov.Verdict = finding.Pass
		for _, c := range targets {
			best := math.NaN()
			for k := range rs {
				if rs[k].verdict == finding.Pass && slices.Contains(rs[k].e.Covers, c) && !(best <= rs[k].detectable) {
					best = rs[k].detectable
				}
			}
			if math.IsNaN(best) {
				cov.Verdict = finding.NotTestable
				break
			}
			if !(cov.Detectable >= best) {
				cov.Detectable = best
			}
		}
	}
	if cov.Verdict == finding.NotTestable {
		cov.Detectable = math.NaN()
		if worst != nil {
			cov.Reason = worst.reason
		}
	}
}

// Missing is the smallest set of roles without which the rule cannot be asked
// of this unit, in the order of the roles; nil where nothing is missing.
func (r *Rule) Missing(b *balance.Books) []trend.Role {
	u := b.Unit()
	var out []trend.Role
	add := func(rs ...trend.Role) {
		for _, x := range rs {
			if !slices.Contains(out, x) {
				out = append(out, x)
			}
		}
	}
	for _, d := range r.Needs.Balances {
		add(d.Missing(u)...)
	}
	for _, c := range r.commands(b) {
		if u.Plant.In(c) && b.Command(c) == nil {
			add(commandRole(c))
		}
	}
	for _, n := range r.readings(u) {
		best := []trend.Role(nil)
		for k, alt := range n.AnyOf {
			var lack []trend.Role
			for _, x := range alt {
				if !u.Has(x) {
					lack = append(lack, x)
				}
			}
			if k == 0 || len(lack) < len(best) {
				best = lack
			}
		}
		add(best...)
	}
	slices.Sort(out)
	return out
}

// commandRole is the usual point of a component's command.
func commandRole(c trend.Component) trend.Role {
	switch c {
	case trend.Mixing:
		return trend.OADamper
	case trend.Preheat:
		return trend.PreheatValve
	case trend.Heating, trend.Reheat:
		return trend.HeatValve
	case trend.Cooling:
		return trend.CoolValve
	case trend.Humidify, trend.Evaporative:
		return trend.Humidifier
	case trend.Recovery:
		return trend.RecoveryCmd
	}
	return trend.SAFanStatus
}

// describe makes a finding of a ruling. Without a tally it has no price.
func describe(p *Pass, r *ruling, opt Options, t *tally) finding.Finding {
	u, e, rule := p.b.Unit(), r.e, p.rule
	ax := u.Axis
	f := finding.Finding{
		Unit: u.Name, Rule: rule.Name, Component: e.Component,
		Start: r.spans[0].Start, End: r.spans[len(r.spans)-1].End,
		FaultHours:  float64(r.nflagged) * ax.Hours(),
		TestedHours: float64(r.tested) * ax.Hours(),
		Magnitude:   r.mag, Uncertainty: p.factor * r.u, UnitOf: rule.Unit,
		Matters:    p.Param(Matters),
		Confidence: r.confidence,
		Suspects:   e.Suspects,
		Checks:     rule.Checks,
		Lookalikes: rule.Doc.Cannot,
		Cause:      rule.Cause,
		Cautions:   rule.Cautions,
		Spans:      r.spans,
	}
	if len(rule.Checks) > 0 {
		f.Check = rule.Checks[0]
	}
	flaggedDays, testedDays := days(p, r)
	energyShare := 0.0
	if f.Energy = unpriced(); t != nil {
		f.Energy = t.add(p, r)
		if all := t.unitEnergy(p.b); all > 0 {
			energyShare = nz(f.Energy.KWh) / all
		}
	}
	f.Priority = priority(rule.Harm, &f, float64(flaggedDays)/math.Max(1, float64(testedDays)), energyShare)
	if e.Elsewhere && f.Priority > finding.Low {
		f.Priority--
	}
	says := rule.Doc.Says
	if e.Says != "" {
		says = e.Says
	}
	f.Statement = statement(says, &f, e, opt.Measure, flaggedDays)
	if w := worth(rule.Doc.IfSo, f.Energy, u.Site.Currency); w != "" {
		f.Statement += " " + w
	}
	f.Trace = finding.Trace{
		Effect: e.Effect.Val, Expanded: r.band, Applies: e.Applies, Matters: f.Matters,
		What: e.What, Formula: rule.Doc.Formula, Worked: worked(e, &f, r.flagged, opt.Measure),
	}
	for _, role := range e.Readings {
		f.Trace.Readings = append(f.Trace.Readings, role.String())
	}
	return f
}

// days counts the local days with half an hour or more flagged, and those with
// anything tested.
func days(p *Pass, r *ruling) (flagged, tested int) {
	ax, zone := p.Axis(), p.Site().Zone
	need := ax.Intervals(30 * time.Minute)
	day, nf, nt := "", 0, 0
	flush := func() {
		if nf >= need {
			flagged++
		}
		if nt >= need {
			tested++
		}
		nf, nt = 0, 0
	}
	var next time.Time
	for i := range ax.N {
		if at := ax.At(i); !at.Before(next) {
			local := at.In(zone)
			if d := local.Format(time.DateOnly); d != day {
				flush()
				day = d
			}
			next = time.Date(local.Year(), local.Month(), local.Day()+1, 0, 0, 0, 0, zone)
		}
		if r.flagged[i] {
			nf++
		}
		if r.e.Applies[i] && !math.IsNaN(r.e.Effect.Val[i]) {
			nt++
		}
	}
	flush()
	return flagged, tested
}

// Describe is the rule in the words that travel with its results, with the
// parameters in force where params is not nil.
func (r *Rule) Describe(params map[string]float64) finding.RuleDoc {
	d := finding.RuleDoc{
		Name: r.Name, Title: r.Doc.Title, Text: r.Doc.Text, Formula: r.Doc.Formula, Cannot: r.Doc.Cannot,
		Sources: r.Doc.Sources, Since: r.Doc.Since, Unit: r.Unit, Safety: r.Cautions, Needs: r.needsInWords(),
	}
	for _, q := range r.Params {
		v := q.Default
		if x, ok := params[q.Name]; ok {
			v = x
		}
		d.Params = append(d.Params, finding.ParamDoc{Name: q.Name, Unit: q.Unit, Value: v, Default: q.Default, Min: q.Min, Max: q.Max, Why: q.Why})
	}
	return d
}

func (r *Rule) needsInWords() []string {
	var out []string
	for _, d := range r.Needs.Balances {
		out = append(out, d.Title)
	}
	for _, n := range r.Needs.Roles {
		var alts []string
		for _, alt := range n.AnyOf {
			var names []string
			for _, x := range alt {
				names = append(names, x.String())
			}
			alts = append(alts, strings.Join(names, " with "))
		}
		out = append(out, fmt.Sprintf("%s (%s)", n.What, strings.Join(alts, ", or ")))
	}
	for _, c := range r.Needs.Commands {
		out = append(out, "command of the "+c.Title()+", where the train has it")
	}
	if r.Needs.CommandsFor != nil {
		out = append(out, "commands of the other coils in the same section")
	}
	if r.Needs.State {
		out = append(out, "fan and operating state")
	}
	if r.Needs.Schedule {
		out = append(out, "occupied or not: a point, or the schedule in site.toml")
	}
	return out
}
