package rules

import (
	"math"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var humidityRoles = []trend.Role{trend.OARH, trend.RARH, trend.MARH, trend.CCRH, trend.SARH, trend.RERH}

var rhImpossible = &Rule{
	Name: "rh-impossible",
	Unit: "%",
	Harm: Misleads,
	Doc: Doc{
		Title: "Humidity reading that air cannot have",
		Text: "Asks whether a humidity reading leaves 0 to 100 % by more than its accuracy, or implies a moisture content that air at this place does not reach: " +
			"a dew point above the highest that outdoor air has, or above what a duct can hold without water standing in it.",
		Formula: "effect = max(RH − 100 %, −RH, RH − RH(T, highest dew point)) − accuracy",
		When:    "running time with a humidity reading",
		Says: "The {reading} sensor read {effect} beyond what air can hold even after its stated accuracy is allowed for, in {hours} of {tested} hours; " +
			"a sensor out of calibration, a wet element or a wrong scaling would do this.",
		Cannot: "A wet element, a wrong scaling in the controller and a wrong unit in the export look the same here.",
		Sources: []string{
			"Range of relative humidity and dew point of moist air: ASHRAE Handbook of Fundamentals, psychrometrics chapter",
			"Highest outdoor dew point: about 35 °C has been observed, from memory, no source",
			"Highest dew point in a duct: common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Roles: []balance.Need{{What: "a relative humidity", AnyOf: [][]trend.Role{
			{trend.OARH}, {trend.RARH}, {trend.MARH}, {trend.CCRH}, {trend.SARH}, {trend.RERH}}}},
		Uses:  []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.CCTemp, trend.SATemp, trend.RETemp},
		State: true,
	},
	Params: []Param{
		matters("%", 2, 0.5, 20, "less than this beyond the stated accuracy is drift that a yearly calibration takes out"),
		persist(30, "a sensor may be splashed or pass through fog for some minutes"),
		{Name: "outdoor_dewpoint", Unit: "degC", Default: 35, Min: 20, Max: 40, Why: "about the highest dew point observed outdoors"},
		{Name: "duct_dewpoint", Unit: "degC", Default: 30, Min: 15, Max: 40, Why: "a duct that carries air with a higher dew point in a conditioned building runs with water"},
	},
	Checks: []string{
		"Hold a reference hygrometer beside the sensor and compare",
		"Compare the controller's scaling (0 to 100 % over the signal range) with the sensor's data sheet",
		"Look for a wet or dirty element; clean or replace it",
	},
	Cause: "humidity sensor out of range",
	Cases: []Case{
		{"supply sensor reads 1.7 times the truth", finding.Fault, month(synth.Marine, time.May, 1, synth.Fault{Kind: synth.SensorScale, Role: trend.SARH, Severity: 1.7})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"outdoor sensor 3 % high in damp weather", finding.Pass, month(synth.Marine, time.January, 3, synth.Fault{Kind: synth.SensorOffset, Role: trend.OARH, Severity: 0.03})},
	},
	Eval: func(p *Pass) []Evidence {
		var out []Evidence
		for _, role := range humidityRoles {
			rh := p.Reading(role)
			if rh == nil {
				continue
			}
			limit := p.Param("duct_dewpoint")
			applies := p.FanOn()
			if role == trend.OARH {
				limit = p.Param("outdoor_dewpoint")
				applies = always(p.N())
			}
			air := p.b.Air()
			ceiling := air.HumRatioDewPoint(limit)
			temp := p.Col(role.Station().DryBulb())
			zero := make([]float64, p.N())
			s := &balance.Series{Name: role.String() + "_beyond", Unit: "%", Val: make([]float64, p.N()), Off: zero, Noise: make([]float64, p.N())}
			for i, x := range rh.Val {
				over := math.Max(x-1, -x)
				if temp != nil && !math.IsNaN(temp[i]) && x > 0.2 {
					over = math.Max(over, x-air.RelHumidity(temp[i], ceiling))
				}
				// The accuracy is taken off in full: what is left is beyond it.
				s.Val[i] = 100 * (over - math.Sqrt(3)*rh.Off[i])
				s.Noise[i] = 100 * rh.Noise[i]
			}
			out = append(out, Evidence{
				Component: role.String(), Effect: s, Applies: applies,
				Suspects: []string{role.String()}, Readings: []trend.Role{role, role.Station().DryBulb()},
				What:  "reading beyond the nearest humidity that air can have, less the sensor's accuracy",
				Terms: []Term{{"reading", "%", scaled(rh.Val, 100)}},
			})
		}
		return out
	},
	Cautions: []finding.Caution{finding.Isolate},
}

func always(n int) []bool {
	m := make([]bool, n)
	for i := range m {
		m[i] = true
	}
	return m
}

func scaled(v []float64, k float64) []float64 {
	out := make([]float64, len(v))
	for i, x := range v {
		out[i] = k * x
	}
	return out
}
