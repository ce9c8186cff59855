package rules

import (
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var moistureLossInSensibleCoil = &Rule{
	Name: "moisture-loss-in-sensible-coil",
	Unit: "g/kg",
	Harm: Misleads,
	Doc: Doc{
		Title: "Moisture vanishes where nothing can condense",
		Text: "Asks whether moisture falls across a preheat or heating coil, or across the whole air path while the cooling coil is shut and dry. " +
			"Nothing there can take moisture out of the air.",
		Formula: "effect = W(entering) − W(leaving); for the whole path [f·W(outdoor) + (1−f)·W(return)] − W(supply), or min(W(outdoor), W(return)) − W(supply) where f is not known",
		When:    "settled running with every wet part out of use for half an hour",
		Says: "Between {from} and {to} the air lost {effect} of moisture although nothing could condense, in {hours} of {tested} hours tested; " +
			"a humidity sensor out of calibration would do this, or a cooling valve that passes enough cold water to dry the air.",
		Cannot: "Which of the humidity sensors is wrong; a passing cooling valve also cools, so look at the supply temperature with both valves shut.",
		Sources: []string{
			"Moisture content constant in sensible heating and cooling: ASHRAE Handbook of Fundamentals, psychrometrics chapter, moist air sensible heating or cooling",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.MoistureLoss},
		Commands: []trend.Component{trend.Cooling, trend.Humidify},
		State:    true,
	},
	Params: []Param{
		matters("g/kg", 0.8, 0.1, 10, "two humidity sensors within their accuracy differ by as much near 22 °C"),
		persist(60, "an hour outlasts what a coil still holds"),
	},
	Checks: []string{
		"Compare the humidity sensors side by side in the same air",
		"Feel the pipe behind the shut cooling valve: cold means that it passes",
	},
	Cause:    "humidity sensors disagree",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"supply sensor 20 % low", finding.Fault, month(synth.Marine, time.March, 1, synth.Fault{Kind: synth.SensorOffset, Role: trend.SARH, Severity: -0.20})},
		{"healthy", finding.Pass, month(synth.Marine, time.March, 2)},
		{"supply sensor 3 % low, within its accuracy", finding.Pass, month(synth.Marine, time.March, 3, synth.Fault{Kind: synth.SensorOffset, Role: trend.SARH, Severity: -0.03})},
	},
	Eval: func(p *Pass) []Evidence {
		return drySections(p, balance.MoistureLoss, "moisture lost", func(*balance.Part) []string { return nil })
	},
}

// The cooling coil stands last among the suspects of a loss: it needs to be cold
// as well as open.
