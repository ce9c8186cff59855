package rules

import (
	"math"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var freeCoolingMissed = &Rule{
	Name: "free-cooling-missed",
	Unit: "fraction",
	Harm: Wastes,
	Doc: Doc{
		Title: "Mechanical cooling runs while cool outdoor air is left outside",
		Text: "While the cooling coil works and outdoor air is welcome, more of it would do part or all of the work. Asks how far the share of outdoor air stays under what was to be had: " +
			"all of it while it is warmer than the supply needs, else as much as mixes down to the supply setpoint. Outdoor air is welcome under the site's high limit; where the site states none, " +
			"under the most cautious published one, 18 °C dry bulb and an enthalpy under that of return air.",
		Formula: "effect = f(available) − f; f(available) = min(1, (T_r − T_set + fan rise) / (T_r − T_o))",
		When:    "settled running with the cooling coil on and outdoor air under the high limit",
		Says: "While the cooling coil ran and outdoor air was welcome, the share of outdoor air stayed {effect} under what was to be had, in {hours} of {tested} hours tested; " +
			"a locked or mis-set economizer, or a damper that does not open, would do this.",
		IfSo:   "the outdoor air had been used",
		Cannot: "A sequence that is switched off, a limit set too low and a damper that does not open: look at the damper command, which tells the first two from the last.",
		Sources: []string{
			"Economizer high limits: ANSI/ASHRAE/IES Standard 90.1, fixed dry-bulb limits of 18 to 24 °C by climate, from memory",
			"Outdoor-air fraction: adiabatic mixing, ASHRAE Handbook of Fundamentals, psychrometrics chapter",
			"House, Vaezi-Nejad and Whitcomb 2001 and Schein and others 2006 have kindred rules (mechanical cooling in economizer weather); the form here is ours",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.Fraction},
		Commands: []trend.Component{trend.Cooling},
		Roles:    []balance.Need{{What: "outdoor and return temperature", AnyOf: [][]trend.Role{{trend.OATemp, trend.RATemp}}}},
		Uses:     []trend.Role{trend.SATempSP, trend.SATempSPCool, trend.SATemp},
		State:    true,
	},
	Params: []Param{
		matters("fraction", 0.2, 0.05, 0.8, "command is not share: healthy units miss by 0.1 to 0.3 near full opening"),
		persist(60, "an hour outlasts the change between modes"),
		{Name: "cautious_limit", Unit: "degC", Default: 18, Min: 10, Max: 26, Why: "lowest published fixed dry-bulb limit; used only where the site states no high limit"},
		{Name: "margin", Unit: "K", Default: 1, Min: 0, Max: 5, Why: "a controller may hold its mode this far beyond a limit"},
	},
	Checks: []string{
		"Look at the damper command in these hours: at minimum, the sequence held it; open, the damper did not follow",
		"Look at the high limit's setting and the sensor that it uses",
		"Command the damper open on a cool day and watch blades and mixed temperature",
	},
	Cause:    "free cooling not used",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"the economizer is switched off", finding.Fault, month(synth.Marine, time.May, 1, synth.Fault{Kind: synth.EconomizerOff, Severity: 1})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"no cooling in winter", finding.NotTestable, month(synth.Cold, time.January, 3)},
	},
	Eval: func(p *Pass) []Evidence {
		if !p.Plant().In(trend.Mixing) {
			return p.None("the train has no mixing box")
		}
		if !p.Plant().In(trend.Cooling) {
			return p.None("the train has no cooling coil")
		}
		f := p.One(balance.Fraction)
		to, tr := p.Col(trend.OATemp), p.Col(trend.RATemp)
		set := p.Col(trend.SATempSPCool)
		if set == nil {
			set = p.Col(trend.SATempSP)
		}
		if set == nil {
			set = p.Col(trend.SATemp)
		}
		fan := p.FanRise()
		welcome := highLimit(p)
		cooling, settled := p.Running(trend.Cooling), p.Settled()
		n := p.N()
		s := &balance.Series{Name: "free_cooling_missed", Unit: "fraction", Val: nans(n), Off: f.Off, Noise: f.Noise}
		s.Terms = f.Scaled("", "fraction", -1, 0).Terms
		applies := make([]bool, n)
		for i := range n {
			if !settled[i] || !cooling[i] || !welcome(i) {
				continue
			}
			applies[i] = true
			available := 1.0
			if set != nil && fan != nil && !math.IsNaN(set[i]) {
				// A colder outdoors needs only as much as mixes down to the setpoint.
				if need := (tr[i] - set[i] + fan[i]) / (tr[i] - to[i]); need < 1 {
					available = math.Max(need, 0)
				}
			}
			s.Val[i] = available - f.Val[i]
		}
		return []Evidence{{
			Component: string(trend.Mixing), Effect: s, Applies: applies,
			Suspects: []string{"sequence", "setpoint", "oa_damper"}, Readings: []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.OADamper, trend.CoolValve},
			What:  "share of outdoor air to be had less the share taken",
			Blind: "outdoor and return air were too alike to tell the share of outdoor air",
			Terms: []Term{{"outdoor air", "degC", to}, {"return air", "degC", tr}, {"share taken", "fraction", f.Val}},
			Waste: missedFreeCooling(p), Pot: OutdoorAir,
		}}
	},
}

// highLimit says at which intervals outdoor air is welcome, with the rule's
// margin on the safe side.
func highLimit(p *Pass) func(i int) bool {
	to, tr := p.Col(trend.OATemp), p.Col(trend.RATemp)
	ho, hr := p.EnthalpyAt(trend.Outdoor), p.EnthalpyAt(trend.Return)
	m := p.Param("margin")
	lim := p.Plant().HighLimit
	// A margin in enthalpy is that of the same temperature step.
	lower := func(i int) bool {
		return ho == nil || hr == nil || math.IsNaN(ho[i]+hr[i]) || ho[i] < hr[i]-CpAir*m
	}
	return func(i int) bool {
		cooler := to[i] < tr[i]-m
		switch lim.Kind {
		case trend.FixedDryBulb:
			return cooler && to[i] < lim.Value-m
		case trend.FixedEnthalpy:
			return cooler && ho != nil && ho[i] < lim.Value-CpAir*m
		case trend.DifferentialDryBulb:
			return cooler
		case trend.DifferentialEnthalpy:
			return cooler && ho != nil && hr != nil && ho[i] < hr[i]-CpAir*m
		}
		return cooler && to[i] < p.Param("cautious_limit")-m && lower(i)
	}
}
