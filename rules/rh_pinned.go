package rules

import (
	"math"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/finding"
)

var rhPinned = &Rule{
	Name: "rh-pinned",
	Unit: "h",
	Harm: Misleads,
	Doc: Doc{
		Title: "Humidity reading that sits at one value or a ceiling",
		Text: "Asks whether a humidity reading stays within a few steps of its resolution for hours while the air around it changes. " +
			"At constant moisture, relative humidity moves by about a sixteenth of itself for every kelvin, so a sensor whose own air warms by some kelvin must move.",
		Formula: "flag where max(RH) − min(RH) ≤ spread over at least the hours asked, while T at the same place moved by temp_swing or another humidity by rh_swing",
		When:    "running time with a humidity reading and a change around it",
		Says: "The {reading} sensor stood still for {effect} at a stretch while the air around it changed ({hours} of {tested} hours tested); " +
			"a sensor at the end of its range, a wet element or a held value would do this.",
		Cannot: "A reading above 97 % outdoors is left alone: fog and rain hold the real humidity there. A clipped sensor and a value held in the controller look alike.",
		Sources: []string{
			"Change of relative humidity with temperature at constant moisture: saturation pressure after Hyland and Wexler 1983",
			"Outdoor sensors that clip for weeks, supply sensors that sit at one value for months: common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Roles: rhImpossible.Needs.Roles,
		Uses:  rhImpossible.Needs.Uses,
		State: true,
	},
	Params: []Param{
		matters("h", 6, 1, 168, "shorter stretches happen on a still night"),
		persist(360, "as long as what matters"),
		{Name: "steps", Unit: "", Default: 3, Min: 0, Max: 20, Why: "noise of a healthy sensor moves it by more than three steps of its resolution in hours"},
		{Name: "temp_swing", Unit: "K", Default: 1.5, Min: 0.5, Max: 10, Why: "moves a healthy reading near 50 % by about 5 %"},
		{Name: "rh_swing", Unit: "%", Default: 15, Min: 5, Max: 50, Why: "weather that changes this much reaches every stream, if damped"},
	},
	Checks: []string{
		"Breathe on the sensor or warm it by hand: a healthy one moves at once",
		"Look in the controller for a held or overridden value",
		"Clean or replace the element; one that clips below 100 % is at the end of its life",
	},
	Cause:    "humidity sensor stuck",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"outdoor sensor clips at 60 %", finding.Fault, month(synth.Marine, time.May, 1, synth.Fault{Kind: synth.SensorCeiling, Role: trend.OARH, Severity: 0.60})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"nothing around the sensor is trended", finding.NotTestable, only(month(synth.Marine, time.May, 3), trend.SARH, trend.SAFanStatus)},
	},
	Eval: func(p *Pass) []Evidence {
		least := p.intervals(p.Param(Matters))
		swingT, swingRH := p.Param("temp_swing"), p.Param("rh_swing")/100
		var out []Evidence
		for _, role := range humidityRoles {
			c := p.Column(role)
			if c == nil {
				continue
			}
			counted := and(p.FanOn())
			if role == trend.OARH {
				counted = always(p.N())
				for i, x := range c.Val {
					counted[i] = !(x > 0.97)
				}
			}
			// A resolution finer than a tenth of a percent is the file's, not the sensor's.
			step := math.Max(c.Resolution, 0.001)
			temp := p.Col(role.Station().DryBulb())
			warmed := func(i, j int) bool { return moved(temp, counted, i, j) >= swingT }
			others := func(i, j int) bool {
				for _, o := range humidityRoles {
					if v := p.Col(o); o != role && v != nil && moved(v, counted, i, j) >= swingRH {
						return true
					}
				}
				return false
			}
			var found []run
			for _, r := range runs(c.Val, counted, p.Param("steps")*step, least) {
				// A coil holds supply humidity steady for hours, so another stream's
				// change proves something only of a reading that does not move at all.
				if warmed(r.i, r.j) || moved(c.Val, counted, r.i, r.j) <= step && others(r.i, r.j) {
					found = append(found, r)
				}
			}
			sees := nan()
			if couldTell(p.N(), least, func(i, j int) bool { return warmed(i, j) || others(i, j) }) {
				sees = p.Param(Matters)
			}
			e := standstill(p, role.String()+"_still", c.Val, counted, found, sees)
			e.Component = role.String()
			e.Suspects = []string{role.String(), "logger"}
			e.Readings = []trend.Role{role, role.Station().DryBulb()}
			e.What = "hours for which the reading stood still"
			e.Terms = []Term{{"reading", "%", scaled(c.Val, 100)}, {"temperature there", "degC", temp}}
			out = append(out, e)
		}
		return out
	},
}
