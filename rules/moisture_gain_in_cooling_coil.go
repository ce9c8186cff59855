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

var moistureGainInCoolingCoil = &Rule{
	Name: "moisture-gain-in-cooling-coil",
	Unit: "g/kg",
	Harm: Wets,
	Doc: Doc{
		Title: "Moisture rises across a cooling coil in use",
		Text: "A cooling coil can only lower the moisture content of the air or leave it. Asks whether it rises while the coil is on and settled: " +
			"droplets that leave the coil with the air and evaporate behind it, or a pan that does not drain, would do that.",
		Formula: "effect = W(leaving) − W(entering); with a computed mixture as at moisture-gain-in-sensible-coil",
		When:    "settled running with the cooling coil on for an hour or more and no humidifier",
		Says: "While the cooling coil ran, the air gained {effect} of moisture between {from} and {to}, in {hours} of {tested} hours tested; " +
			"water carried off the coil, a blocked drain or a humidity sensor out of calibration would do this.",
		Cannot: "Carry-over of droplets, a standing pan and a humidity sensor that reads high behind the coil.",
		Sources: []string{
			"Moist air cooling and dehumidification: ASHRAE Handbook of Fundamentals, psychrometrics chapter",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.MoistureGain},
		Commands: []trend.Component{trend.Cooling, trend.Humidify},
		State:    true,
	},
	Params: []Param{
		matters("g/kg", 0.4, 0.1, 10, "half of what is asked of a dry coil: here the true change is never upward, so any gain means water"),
		persist(60, "as long again as the coil is given to get wet or dry before it is asked"),
	},
	Checks: []string{
		"Look at the drain pan and trap while the coil runs: does the water leave",
		"Look for droplets and stains on the duct floor behind the coil; compare face velocity with the coil's data",
		"Compare the humidity sensors side by side in the same air",
	},
	Cause:    "water leaves the cooling coil with the air",
	Cautions: []finding.Caution{finding.Isolate, finding.Stagnant},
	Cases: []Case{
		{"standing water gives 4 g/kg in dry heat", finding.Fault, laboratory(synth.HotDry, time.May, 1, synth.Fault{Kind: synth.CarryOver, Severity: 4})},
		{"healthy, with laboratory hygrometers", finding.Pass, accurate(month(synth.HotDry, time.May, 2), 0.003, 0.1)},
		{"healthy, with ordinary sensors", finding.NotTestable, month(synth.HotDry, time.May, 3)},
	},
	Eval: func(p *Pass) []Evidence {
		if !p.Plant().In(trend.Cooling) {
			return p.None("the train has no cooling coil")
		}
		applies := and(p.Settled(), lasting(p.Running(trend.Cooling), p.Axis().Intervals(time.Hour)), p.Shut(trend.Humidify))
		dry := p.Dry()
		var out []Evidence
		for _, q := range p.Parts(balance.MoistureGain) {
			if !slices.Contains(q.Between, trend.Cooling) {
				continue
			}
			e := Evidence{
				Component: string(trend.Cooling), Covers: []trend.Component{trend.Cooling}, Effect: q.Series, Applies: applies, Bound: q.Bound,
				Suspects: []string{string(trend.Cooling)}, Readings: q.Readings, From: q.From.Title(), To: q.To.Title(),
				What: "moisture gained between " + q.From.Title() + " and " + q.To.Title(), Terms: moistureTerms(p, q),
				Blind: "the streams' moisture or their mixture could not be told",
			}
			// A gain that shows with the coil dry as well has another cause first.
			if m := q.Mean(0, p.N(), dry); float64(m.N)*p.Axis().Hours() >= leastTested && m.Val > math.Max(p.Param(Matters), p.Factor()*m.U()) {
				e.Elsewhere = true
				e.Says = p.rule.Doc.Says + " The air gained as much while the coil was dry, so look for another cause first."
			}
			for _, role := range q.Readings {
				if role.Kind() != trend.Temperature && role.Kind() != trend.AirFlow {
					e.Suspects = append(e.Suspects, role.String())
				}
			}
			out = append(out, e)
		}
		if len(out) == 0 {
			return p.None("no two humidity readings stand around the cooling coil")
		}
		return out
	},
}

// lasting is where a mask has held for at least n intervals: within its first
// hour a coil may still give back water that it held.
func lasting(mask []bool, n int) []bool {
	out := make([]bool, len(mask))
	run := 0
	for i, m := range mask {
		if run++; !m {
			run = 0
		}
		out[i] = run > n
	}
	return out
}
