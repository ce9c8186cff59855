package rules

import (
	"slices"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var moistureGainInSensibleCoil = &Rule{
	Name: "moisture-gain-in-sensible-coil",
	Unit: "g/kg",
	Harm: Wets,
	Doc: Doc{
		Title: "Moisture appears where nothing can add any",
		Text: "Air that is heated by a dry coil, or cooled by one that stays above its dew point, keeps its moisture content. Asks whether moisture rises across a preheat or heating coil, " +
			"or across the whole air path while no humidifier, wash or wet cooling coil is in use. Where the share of outdoor air is not known, supply moisture must still lie between outdoor and return.",
		Formula: "effect = W(leaving) − W(entering); for the whole path W(supply) − [f·W(outdoor) + (1−f)·W(return)], or W(supply) − max(W(outdoor), W(return)) where f is not known",
		When:    "settled running with every wet part out of use for half an hour",
		Says: "Between {from} and {to} the air gained {effect} of moisture while no part in use could add any, in {hours} of {tested} hours tested; " +
			"a leaking steam coil, a humidifier valve that passes or a humidity sensor out of calibration would do this.",
		Cannot: "A real gain and two humidity sensors that differ by as much are the same to the balance; a gain that follows a valve is real, one that never changes is a sensor.",
		Sources: []string{
			"Moisture content constant in sensible heating and cooling: ASHRAE Handbook of Fundamentals, psychrometrics chapter, moist air sensible heating or cooling",
			"Adiabatic mixing: the same chapter",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.MoistureGain},
		Commands: []trend.Component{trend.Cooling, trend.Humidify},
		State:    true,
	},
	Params: []Param{
		matters("g/kg", 0.8, 0.1, 10, "two humidity sensors within their accuracy differ by as much near 22 °C"),
		persist(60, "an hour outlasts the drying of a wet coil"),
	},
	Checks: []string{
		"Close the humidifier's or the steam coil's manual valve for an hour and see whether the gain goes",
		"Compare the two humidity sensors side by side in the same air",
		"Look for water below the coil and in the duct behind it, and for rust at its headers",
	},
	Cause:    "moisture enters a dry part of the unit",
	Cautions: []finding.Caution{finding.Isolate, finding.HotSurfaces, finding.Stagnant},
	Cases: []Case{
		{"the shut humidifier passes 2.5 g/kg", finding.Fault, humidified(synth.Marine, time.March, 1, synth.Fault{Kind: synth.HumidifierPasses, Severity: 2.5})},
		{"healthy", finding.Pass, month(synth.Marine, time.March, 2)},
		{"supply sensor 3 % high, within its accuracy", finding.Pass, month(synth.Marine, time.March, 3, synth.Fault{Kind: synth.SensorOffset, Role: trend.SARH, Severity: 0.03})},
	},
	Eval: func(p *Pass) []Evidence {
		return drySections(p, balance.MoistureGain, "moisture gained", func(q *balance.Part) []string {
			var who []string
			for _, c := range q.Between {
				if c == trend.Humidify || c.SensibleOnly() && c != trend.Fan && p.Plant().CoilKind[c] == "steam" {
					who = append(who, string(c))
				}
			}
			return who
		})
	},
}

// drySections makes evidence of a moisture balance over every section that
// holds a sensible-only coil, where no wet part of the section is in use.
func drySections(p *Pass, d *balance.Def, what string, first func(q *balance.Part) []string) []Evidence {
	settled, dry := p.Settled(), p.Dry()
	var out []Evidence
	for _, q := range p.Parts(d) {
		var coils []trend.Component
		applies := settled
		for _, c := range q.Between {
			switch {
			case c == trend.Fan:
			case c.SensibleOnly():
				coils = append(coils, c)
			default:
				applies = dry
			}
		}
		if len(coils) == 0 {
			continue
		}
		e := Evidence{
			Covers: coils, Effect: q.Series, Applies: applies, Bound: q.Bound,
			Suspects: first(q), Readings: q.Readings, What: what + " between " + q.From.Title() + " and " + q.To.Title(),
			From: q.From.Title(), To: q.To.Title(),
			Blind: "the streams' moisture or their mixture could not be told",
		}
		if len(coils) == 1 && len(q.Between) <= 2 && !slices.Contains(q.Between, trend.Mixing) {
			e.Component = string(coils[0])
		}
		for _, role := range q.Readings {
			if role.Kind() != trend.Temperature && role.Kind() != trend.AirFlow {
				e.Suspects = append(e.Suspects, role.String())
			}
		}
		e.Terms = moistureTerms(p, q)
		out = append(out, e)
	}
	if len(out) == 0 {
		return p.None("the train has no sensible-only coil between two humidity readings")
	}
	return out
}

func moistureTerms(p *Pass, q *balance.Part) []Term {
	var out []Term
	add := func(s trend.Station) {
		if w := p.HumRatioAt(s); w != nil {
			out = append(out, Term{s.Title(), "kg/kg", w})
		}
	}
	if p.HumRatioAt(q.From) == nil { // a computed mixture
		add(trend.Outdoor)
		add(trend.Return)
	} else {
		add(q.From)
	}
	add(q.To)
	return out
}
