package rules

import (
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var mixedTempOutsideStreams = &Rule{
	Name: "mixed-temp-outside-streams",
	Unit: "K",
	Harm: Misleads,
	Doc: Doc{
		Title:   "Mixed air colder or warmer than both its streams",
		Text:    "Any mixture of outdoor and return air lies between the two. Asks whether the mixed temperature leaves that range by more than its sensors explain.",
		Formula: "effect = max(T_m − max(T_o, T_r), min(T_o, T_r) − T_m)",
		When:    "settled running",
		Says: "Mixed air read {effect} outside the range between outdoor and return air, in {hours} of {tested} hours tested; no mixture can be there, " +
			"so one of the three temperature sensors misleads, or a coil beside the mixing box adds or takes heat.",
		Cannot: "Which of the three sensors is wrong, and stratified air at a single-point sensor; heat from a coil near the mixed-air sensor.",
		Sources: []string{
			"Adiabatic mixing of two moist air streams: ASHRAE Handbook of Fundamentals, psychrometrics chapter",
			"House, Vaezi-Nejad and Whitcomb 2001 and Schein and others 2006 have kindred rules (mixed air between its streams); the form here is ours",
		},
		Since: "0.1",
	},
	Needs: Needs{Balances: []*balance.Def{balance.MixedTempOutside}, State: true},
	Params: []Param{
		matters("K", 1.5, 0.2, 10, "an averaging element in a mixing box is good to 1 K and the streams to half of one: less than this could not pass"),
		persist(60, "an hour outlasts a change of the dampers"),
	},
	Checks: []string{
		"Compare the mixed-air sensor with a traverse across the mixing box",
		"Compare the outdoor sensor with a shaded thermometer, and with other units",
		"Check the return sensor against a hand-held thermometer",
	},
	Cause:    "temperature sensor in the mixing box misleads",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"mixed-air sensor 6 K high in summer", finding.Fault, month(synth.Marine, time.July, 1, synth.Fault{Kind: synth.SensorOffset, Role: trend.MATemp, Severity: 6})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"mixed-air sensor 1 K high, within its accuracy", finding.Pass, month(synth.Marine, time.July, 3, synth.Fault{Kind: synth.SensorOffset, Role: trend.MATemp, Severity: 1})},
	},
	Eval: func(p *Pass) []Evidence {
		if !p.Plant().In(trend.Mixing) {
			return p.None("the train has no mixing box")
		}
		var out []Evidence
		for _, q := range p.Parts(balance.MixedTempOutside) {
			out = append(out, Evidence{
				Component: string(trend.Mixing), Effect: q.Series, Applies: p.Settled(), Bound: false,
				Suspects: []string{"ma_temp", "oa_temp", "ra_temp"}, Readings: q.Readings,
				What:  "mixed temperature beyond the nearer of its streams (negative: between them)",
				Blind: "a temperature of the mixing box was missing",
				Terms: []Term{{"outdoor air", "degC", p.TempAt(trend.Outdoor)}, {"return air", "degC", p.TempAt(trend.Return)}, {"mixed air", "degC", p.TempAt(trend.Mixed)}},
			})
		}
		return out
	},
}
