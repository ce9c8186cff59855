package rules

import (
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var coolValvePasses = &Rule{
	Name: "cool-valve-passes",
	Unit: "K",
	Harm: Wastes,
	Doc: Doc{
		Title: "Air is cooled with the cooling valve shut",
		Text: "With every coil of a section shut, the air cannot cool and warms a little over the fan. Asks whether it cools. The fan's share is the site's figure or a cautious prior; " +
			"it is never learned from the hours under test, and this unit's own settled spread is carried in full.",
		Formula: "effect = T(entering) + fan rise − T(leaving)",
		When:    "settled running with the cooling coil and its neighbours shut",
		Says: "With the cooling valve shut, {to} was {effect} colder than {from} and fan heat explain, in {hours} of {tested} hours tested; " +
			"a valve that leaks would do this, or temperature sensors that disagree by as much.",
		IfSo:   "it is the valve",
		Cannot: "A passing valve, a sensor offset as large, and a fan that warms the air less than was assumed. Moisture lost over the same hours speaks for the valve.",
		Sources: []string{
			"Fan heat Δp/(ρ·cp·η): ASHRAE Handbook of Fundamentals and common practice for η",
			"House, Vaezi-Nejad and Whitcomb 2001 and Schein and others 2006 have kindred rules (supply against mixed air without coils); the form here is ours",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.TempRise},
		Commands: []trend.Component{trend.Cooling},
		CommandsFor: func(b *balance.Books) []trend.Component {
			return besides(b, trend.Cooling)
		},
		State: true,
	},
	Params: []Param{
		matters("K", 1.5, 0.3, 10, "smaller falls are within what healthy units show with both coils shut"),
		persist(60, "an hour outlasts what a coil still holds"),
	},
	Checks: []string{
		"Feel the pipe behind the shut cooling valve: cold means that it passes",
		"Close the manual valve for an hour and see whether the fall goes",
		"Compare the two temperature sensors",
	},
	Cause:    "cooling valve passes",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"two fifths of the coil's duty with the valve shut", finding.Fault, month(synth.Marine, time.April, 1, synth.Fault{Kind: synth.CoolValvePasses, Severity: 0.4})},
		{"healthy", finding.Pass, month(synth.Marine, time.April, 2)},
		{"healthy, with thermometers good to 2 K", finding.NotTestable, accurate(month(synth.Marine, time.April, 3), 0.03, 2)},
	},
	Eval: func(p *Pass) []Evidence {
		return shutSections(p, []trend.Component{trend.Cooling}, -1, CoolCoil)
	},
}
