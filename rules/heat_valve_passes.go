package rules

import (
	"math"
	"slices"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var heatValvePasses = &Rule{
	Name: "heat-valve-passes",
	Unit: "K",
	Harm: Wastes,
	Doc: Doc{
		Title: "Air is warmed with the heating valve shut",
		Text: "With every coil of a section shut, the air can warm only over the fan. Asks whether it warms by more. The fan's share is the site's figure or a cautious prior; it is never learned from " +
			"the hours under test, and this unit's own settled spread is carried in full.",
		Formula: "effect = T(leaving) − T(entering) − fan rise",
		When:    "settled running with the heating coil and its neighbours shut",
		Says: "With the heating valve shut, {to} was {effect} warmer than {from} and fan heat explain, in {hours} of {tested} hours tested; " +
			"a valve that leaks would do this, or temperature sensors that disagree by as much.",
		IfSo:   "it is the valve",
		Cannot: "A passing valve, a sensor offset as large, and a fan that warms the air more than was assumed. A leak that does not change with hot-water temperature points to a sensor.",
		Sources: []string{
			"Fan heat Δp/(ρ·cp·η): ASHRAE Handbook of Fundamentals and common practice for η",
			"Moist air sensible heating: ASHRAE Handbook of Fundamentals, psychrometrics chapter",
			"House, Vaezi-Nejad and Whitcomb 2001 and Schein and others 2006 have kindred rules (supply against mixed air without coils); the form here is ours",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.TempRise},
		Commands: []trend.Component{trend.Heating, trend.Reheat},
		CommandsFor: func(b *balance.Books) []trend.Component {
			return besides(b, trend.Heating, trend.Reheat)
		},
		State: true,
	},
	Params: []Param{
		matters("K", 1.5, 0.3, 10, "smaller rises are within what healthy units show with both coils shut"),
		persist(60, "an hour outlasts what a coil still holds"),
	},
	Checks: []string{
		"Feel the pipe behind the shut heating valve: warm means that it passes",
		"Close the manual valve for an hour and see whether the rise goes",
		"Compare the two temperature sensors; check the fan's pressure against its assumed heat",
	},
	Cause:    "heating valve passes",
	Cautions: []finding.Caution{finding.Isolate, finding.HotSurfaces},
	Cases: []Case{
		{"a quarter of the coil's duty with the valve shut", finding.Fault, month(synth.Marine, time.April, 1, synth.Fault{Kind: synth.HeatValvePasses, Severity: 0.25})},
		{"healthy", finding.Pass, month(synth.Marine, time.April, 2)},
		{"healthy, with thermometers good to 2 K", finding.NotTestable, accurate(month(synth.Marine, time.April, 3), 0.03, 2)},
	},
	Eval: func(p *Pass) []Evidence {
		return shutSections(p, []trend.Component{trend.Heating, trend.Reheat}, 1, HeatCoil)
	},
}

// passing prices a valve that passes: m·cp·ΔT of heat or cooling nobody asked
// for, and as much again, up to its duty, where the other coil works against it.
func passing(p *Pass, flow []float64, heating bool) func(i int, effect float64) Rate {
	heat, cool := p.Duties()
	return func(i int, effect float64) Rate {
		kw := flow[i] * CpAir * math.Max(0, effect)
		r := Rate{Heat: kw}
		switch {
		case heating && p.CoolAsked(i):
			r.Cool = capped(kw, cool, i)
		case !heating:
			r = Rate{Cool: kw}
			if p.HeatAsked(i) {
				r.Heat = capped(kw, heat, i)
			}
		}
		return r
	}
}

// besides lists the other parts with a command in the sections that hold one of
// the coils: unless they are shut as well, the section proves nothing.
func besides(b *balance.Books, coils ...trend.Component) []trend.Component {
	var out []trend.Component
	for _, q := range b.Get(balance.TempRise) {
		if !slices.ContainsFunc(coils, func(c trend.Component) bool { return slices.Contains(q.Between, c) }) {
			continue
		}
		for _, c := range q.Between {
			if slices.Contains(coilCommands, c) && !slices.Contains(coils, c) && !slices.Contains(out, c) {
				out = append(out, c)
			}
		}
	}
	return out
}

var coilCommands = []trend.Component{trend.Preheat, trend.Heating, trend.Reheat, trend.Cooling, trend.Humidify}

// shutSections makes evidence of the temperature rise (sign 1) or fall (−1)
// over every section that holds one of the coils, where all coils and wet parts
// of the section have been shut for half an hour.
func shutSections(p *Pass, coils []trend.Component, sign float64, pot Pot) []Evidence {
	wait := int32(p.Axis().Intervals(30 * time.Minute))
	flow := p.Flow()
	heating := sign > 0
	var out []Evidence
	for _, q := range p.Parts(balance.TempRise) {
		var mine []trend.Component
		for _, c := range coils {
			if slices.Contains(q.Between, c) {
				mine = append(mine, c)
			}
		}
		if len(mine) == 0 {
			continue
		}
		applies := slices.Clone(p.Settled())
		var others []string
		for _, c := range q.Between {
			if !slices.Contains(coilCommands, c) {
				continue
			}
			p.command(c)
			shut := p.b.ShutFor(c)
			for i := range applies {
				applies[i] = applies[i] && shut[i] >= wait
			}
			if !slices.Contains(mine, c) && (c != trend.Cooling) == heating {
				others = append(others, string(c))
			}
		}
		e := Evidence{
			Component: string(mine[0]), Covers: mine, Effect: q.Scaled(q.Name, "K", sign, 0), Applies: applies,
			Readings: q.Readings, From: q.From.Title(), To: q.To.Title(), Pot: pot,
			What:  "temperature of " + q.To.Title() + " less " + q.From.Title() + " and fan heat",
			Blind: "a temperature of the section was missing",
			Terms: []Term{{q.From.Title(), "degC", p.TempAt(q.From)}, {q.To.Title(), "degC", p.TempAt(q.To)}},
		}
		if sign < 0 {
			e.What = "temperature of " + q.From.Title() + " and fan heat less " + q.To.Title()
		}
		if slices.Contains(q.Between, trend.Fan) {
			e.Terms = append(e.Terms, Term{"expected fan rise", "K", p.FanRise()})
		}
		e.Suspects = append(e.Suspects, string(mine[0]))
		e.Suspects = append(e.Suspects, others...)
		for _, role := range q.Readings {
			if role.Kind() == trend.Temperature {
				e.Suspects = append(e.Suspects, role.String())
			}
		}
		if flow != nil {
			e.Waste = passing(p, flow.Val, heating)
		}
		out = append(out, e)
	}
	if len(out) == 0 {
		return p.None("the train has no such coil between two temperature sensors")
	}
	return out
}
