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

var sensorOffset = &Rule{
	Name: "sensor-offset",
	Unit: "fraction",
	Harm: Misleads,
	Doc: Doc{
		Title: "Sensor outside its accuracy",
		Text: "Asks which constant offset of each sensor would let every balance of the period close at once: the mixing box in moisture and temperature, the dry train, each section with its coils shut, " +
			"the mixture at either end of its damper, and the site's weather. A sensor is named where the balances do not believe its offset to be within its accuracy and no other sensor or part would explain as much. " +
			"The effect is the offset as a share of the accuracy.",
		Formula: "maximum a posteriori offsets z ~ N(0, 1) of r = Σ a·z + noise over all balances; flagged where |z| / √(1 − var z) exceeds the Šidák limit of all sensors at 1 %",
		When:    "settled running in which a balance of this sensor can be closed",
		Says: "The {reading} reading is out by {effect} of its accuracy: only so do the balances of {tested} hours close, all at once. " +
			"A sensor out of calibration, badly placed or wrongly scaled would do this.",
		Cannot: "A sensor and a part that acts on the same balance alone (a passing valve between two temperatures, steam into the duct) look alike: then neither is named here, and the section on sensors names both. A drift within the period is seen as its mean.",
		Sources: []string{
			"Measurement test: Mah and Tamhane 1982; Narasimhan and Jordache, Data Reconciliation and Gross Error Detection, 2000",
			"Bayesian least squares: JCGM 100:2008 for what an accuracy means as a standard uncertainty",
		},
		Since: "0.2",
	},
	Needs: Needs{
		Roles: []balance.Need{{What: "temperatures that a balance joins", AnyOf: [][]trend.Role{
			{trend.MATemp, trend.RATemp, trend.OATemp}, {trend.MATemp, trend.SATemp}, {trend.OATemp, trend.SATemp}, {trend.OATemp, trend.WXTemp}}}},
		State: true,
	},
	Params: []Param{
		matters("fraction", 2, 1, 10, "twice its accuracy: what calibration would find and controls act wrongly on"),
		persist(60, "the offset is one figure for the period; an hour is enough to speak of it"),
		{Name: "determined", Unit: "fraction", Default: 0.75, Min: 0.3, Max: 0.99, Why: "less of the offset than this from the data, and the sensor's own accuracy has the last word"},
	},
	Checks: []string{
		"Compare the sensor with a reference instrument at the same place, with the unit running",
		"Look at where it sits: sun, a coil's radiation, a leak or a dead corner",
		"Compare the controller's scaling and offset with the sensor's data sheet",
	},
	Cause:    "sensor out of calibration",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"mixed-air sensor 4 K high", finding.Fault, month(synth.Marine, time.May, 1, synth.Fault{Kind: synth.SensorOffset, Role: trend.MATemp, Severity: 4})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"mixed-air sensor 1 K high, within its accuracy", finding.Pass, month(synth.Marine, time.May, 3, synth.Fault{Kind: synth.SensorOffset, Role: trend.MATemp, Severity: 1})},
	},
	Eval: func(p *Pass) []Evidence {
		rec := p.Reconcile()
		if rec == nil {
			return p.None("no balance could be closed: no settled time in which one quantity was measured in two ways")
		}
		var out []Evidence
		for _, o := range rec.Held {
			if o.Share < p.Param("determined") {
				continue
			}
			band := o.Prior * math.Sqrt(3)
			val, u := o.Unbound()
			named := false
			if s := rec.Accused(o.Role); s != nil {
				named, val, u = true, s.Val, s.U
			}
			n := p.N()
			e := Evidence{
				Component: o.Role.String(), Suspects: []string{o.Role.String()}, Readings: []trend.Role{o.Role},
				Effect:  &balance.Series{Name: o.Role.String() + "_offset", Unit: "fraction", Val: constant(n, math.Abs(val)/band), Off: constant(n, u/band), Noise: make([]float64, n)},
				Applies: p.Settled(), Flags: make([]bool, n), Sees: rec.Sees(o) / band,
				What: "offset of the sensor over its accuracy",
			}
			if named && math.Abs(val)/band >= p.Param(Matters) {
				copy(e.Flags, e.Applies)
				e.Says = offsetSays(p, o.Role, val, u, band)
			}
			out = append(out, e)
		}
		if out == nil {
			return p.None("no balance decides more of a sensor's offset than its own accuracy does")
		}
		return out
	},
}

func offsetSays(p *Pass, r trend.Role, val, u, band float64) string {
	way := "high"
	if val < 0 {
		way = "low"
	}
	unit, scale := finding.Difference(r.Kind().Unit())
	return fmt.Sprintf("The {reading} reads %s too %s, %s times its accuracy: only so do the balances of {tested} hours close, all at once. A sensor out of calibration, badly placed or wrongly scaled would do this.",
		p.words.PlusMinus(scale*math.Abs(val), scale*p.Factor()*u, unit), way, finding.Significant(math.Abs(val)/band, 2))
}

func constant(n int, x float64) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = x
	}
	return v
}
