package rules

import (
	"fmt"
	"math"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var oaDamperStuck = &Rule{
	Name: "oa-damper-stuck",
	Unit: "fraction",
	Harm: Wastes,
	Doc: Doc{
		Title: "Outdoor air does not follow its damper command",
		Text: "Takes the days, joined until the command has swung far enough, and compares the share of outdoor air at the top of the swing with that at the bottom. " +
			"Command is not share, and on a healthy unit they differ by 0.1 to 0.3; but a damper that moves changes the share by much more than a third of what is asked.",
		Formula: "effect = 1 − (f at high command − f at low command) / (high command − low command)",
		When:    "settled running in which the damper command swings far enough within a week while outdoor and return air differ",
		Says: "The share of outdoor air missed {effect} of the change that the damper command asked for, in {hours} of {tested} hours tested; " +
			"a stuck damper, a loose linkage or a dead actuator would do this.",
		IfSo:   "it is the damper",
		Cannot: "A stuck damper, a slipped linkage and a dead actuator; a mixed-air sensor that does not see the mixture. A damper whose share of the pressure drop is small moves little air over part of its stroke.",
		Sources: []string{
			"Outdoor-air fraction from temperatures, moisture and flow: adiabatic mixing, ASHRAE Handbook of Fundamentals, psychrometrics chapter",
			"A third of the asked range: common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Balances: []*balance.Def{balance.Fraction},
		Commands: []trend.Component{trend.Mixing},
		State:    true,
	},
	Params: []Param{
		matters("fraction", 2.0/3, 0.3, 0.95, "under a third of the asked change means that the damper does not do what it is told"),
		persist(60, "an hour of settled running at both ends of the swing"),
		{Name: "min_swing", Unit: "fraction", Default: 0.3, Min: 0.1, Max: 1, Why: "a smaller swing asks for a change that a nonlinear damper may well not give"},
	},
	Checks: []string{
		"Command the damper from minimum to full open and watch the blades and the linkage",
		"Compare the actuator's position feedback with the blades",
		"Compare mixed with outdoor temperature at full command: they should nearly meet",
	},
	Cause:    "outdoor damper stuck",
	Cautions: []finding.Caution{finding.Isolate, finding.Ventilation},
	Cases: []Case{
		{"stuck half open", finding.Fault, month(synth.Marine, time.April, 1, synth.Fault{Kind: synth.DamperStuck, Severity: 0.5})},
		{"healthy", finding.Pass, month(synth.Marine, time.April, 2)},
		{"the command never swings in a hot month", finding.NotTestable, month(synth.HumidSubtropical, time.July, 3)},
	},
	Eval: func(p *Pass) []Evidence {
		if !p.Plant().In(trend.Mixing) {
			return p.None("the train has no mixing box")
		}
		f, cmd := p.One(balance.Fraction), p.Command(trend.Mixing)
		n := p.N()
		s := &balance.Series{Name: "damper_unresponsive", Unit: "fraction", Val: nans(n), Off: nans(n), Noise: make([]float64, n)}
		e := Evidence{
			Component: string(trend.Mixing), Effect: s, Applies: make([]bool, n), Flags: make([]bool, n), Sees: math.NaN(),
			Suspects: []string{"oa_damper", "linkage", "ma_temp"}, Readings: []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.OADamper},
			What:  "share of the asked change that the outdoor air missed",
			Terms: []Term{{"share of outdoor air", "fraction", f.Val}, {"damper command", "fraction", cmd}},
			Pot:   OutdoorAir,
		}
		usable := p.Settled()
		matters := p.Param(Matters)
		var us []float64
		var lowF, highF, lowC, highC float64
		for _, w := range swingWindows(p, f, cmd, usable, p.Param("min_swing")) {
			ratio, u := w.ratio, w.u
			us = append(us, u)
			bad := 1-ratio-quantile95*u > matters
			for i := w.i; i < w.j; i++ {
				if !usable[i] || math.IsNaN(cmd[i]) || !(f.U(i) <= known) {
					continue
				}
				e.Applies[i] = true
				s.Val[i], s.Off[i] = 1-ratio, u
				e.Flags[i] = bad
			}
			if bad {
				lowF, highF, lowC, highC = meanWhere(f.Val, w.low), meanWhere(f.Val, w.high), meanWhere(cmd, w.low), meanWhere(cmd, w.high)
				e.Says = fmt.Sprintf("While the damper command went from %s to %s, the share of outdoor air only went from %s to %s (last such week); "+
					"it missed {effect} of the change asked for, in {hours} of {tested} hours tested. A stuck damper, a loose linkage or a dead actuator would do this.",
					p.words.Value(lowC, "fraction", 2), p.words.Value(highC, "fraction", 2), p.words.Value(lowF, "fraction", 2), p.words.Value(highF, "fraction", 2))
			}
		}
		// A damper that sticks where its command rests shows nothing: weeks without a
		// swing are not passed by those with one.
		if asked, all := hours(e.Applies, p.Axis()), hours(usable, p.Axis()); asked > 0 && asked < 0.5*all {
			e.Short = fmt.Sprintf("the damper command swung far enough in only %s of %s settled hours", finding.Significant(asked, 2), finding.Significant(all, 2))
		}
		if len(us) > 0 {
			all := always(len(us))
			if e.Sees = matters + 2*quantile95*medianWhere(us, all, 0.5); e.Sees > 1 {
				e.Sees = math.NaN() // even a damper that stands still would not have shown for sure
			}
		}
		excess, missed := excessOutdoorAir(p), missedFreeCooling(p)
		if excess != nil {
			floor := nz(p.Plant().MinOAFraction)
			e.Waste = func(i int, effect float64) Rate {
				// The command stands for the share that was asked for: the best there is
				// while the damper does not answer.
				asked := math.Max(cmd[i], floor)
				if d := f.Val[i] - asked; d > 0 {
					return excess(i, d)
				}
				return missed(i, asked-f.Val[i])
			}
		}
		return []Evidence{e}
	},
}
