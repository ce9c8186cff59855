package rules

import (
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var oaDamperLeaks = &Rule{
	Name: "oa-damper-leaks",
	Unit: "fraction",
	Harm: Wastes,
	Doc: Doc{
		Title:   "Outdoor air enters with the damper commanded shut",
		Text:    "Asks what share of the mixed air is outdoor air while the outdoor damper is commanded shut and the fan runs, as it is in warm-up or at night.",
		Formula: "effect = f while the damper command is at most 2 %",
		When:    "settled running with the outdoor damper commanded shut while outdoor and return air differ",
		Says: "With the outdoor damper commanded shut, {effect} of the mixed air was still outdoor air, in {hours} of {tested} hours tested; " +
			"worn seals, a loose linkage or a mixed-air sensor that reads towards outdoors would do this.",
		IfSo:   "it is the damper",
		Cannot: "A leaking damper and a mixed or return sensor with an offset look alike while the difference between outdoor and return air hardly varies.",
		Sources: []string{
			"Outdoor-air fraction: adiabatic mixing, ASHRAE Handbook of Fundamentals, psychrometrics chapter",
			"A tight damper leaks a few percent: common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.Fraction},
		Commands: []trend.Component{trend.Mixing},
		State:    true,
	},
	Params: []Param{
		matters("fraction", 0.10, 0.02, 0.5, "a damper with sound seals passes less than half of this"),
		persist(60, "an hour outlasts the closing of the damper"),
	},
	Checks: []string{
		"Look at the blades and seals with the damper commanded shut; feel for air at the intake",
		"Check that the actuator reaches its end: linkage and travel",
		"Compare the mixed with the return sensor while the unit recirculates",
	},
	Cause:    "outdoor damper leaks",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"a third of the air leaks in", finding.Fault, month(synth.Marine, time.January, 1, synth.Fault{Kind: synth.DamperLeaks, Severity: 0.33})},
		{"healthy", finding.Pass, month(synth.Marine, time.January, 2)},
		{"outdoor and return air alike", finding.NotTestable, month(synth.HumidSubtropical, time.July, 3)},
	},
	Eval: func(p *Pass) []Evidence {
		if !p.Plant().In(trend.Mixing) {
			return p.None("the train has no mixing box")
		}
		f := p.One(balance.Fraction)
		return []Evidence{{
			Component: string(trend.Mixing), Effect: f, Applies: and(p.Settled(), p.Shut(trend.Mixing)),
			Suspects: []string{"oa_damper", "linkage", "ma_temp"}, Readings: []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.OADamper},
			What:  "share of outdoor air",
			Blind: "outdoor and return air were too alike to tell the share of outdoor air",
			Terms: []Term{{"outdoor air", "degC", p.TempAt(trend.Outdoor)}, {"return air", "degC", p.TempAt(trend.Return)}, {"mixed air", "degC", p.TempAt(trend.Mixed)}},
			Waste: excessOutdoorAir(p), Pot: OutdoorAir,
		}}
	},
}
