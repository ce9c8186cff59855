package synth

import (
	"math"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

// trains are orders along the air that site.toml allows.
var trains = map[string][]trend.Component{
	"default":            nil,
	"fan first":          {trend.Mixing, trend.Fan, trend.Preheat, trend.Cooling, trend.Heating},
	"all outdoor air":    {trend.Preheat, trend.Cooling, trend.Heating, trend.Fan},
	"humidifier":         {trend.Mixing, trend.Heating, trend.Cooling, trend.Humidify, trend.Fan},
	"recovery":           {trend.Recovery, trend.Mixing, trend.Cooling, trend.Heating, trend.Fan},
	"recovery, outdoor":  {trend.Recovery, trend.Preheat, trend.Cooling, trend.Fan, trend.Heating},
	"evaporative":        {trend.Mixing, trend.Evaporative, trend.Cooling, trend.Fan, trend.Heating},
	"reheat":             {trend.Mixing, trend.Heating, trend.Cooling, trend.Reheat, trend.Fan},
	"reheat only":        {trend.Mixing, trend.Cooling, trend.Reheat, trend.Fan},
	"neither coil":       {trend.Mixing, trend.Fan},
	"heating by a flame": {trend.Mixing, trend.Fan, trend.Cooling, trend.Heating},
}

// everyFault is one of each kind that the train can have.
func everyFault(train []trend.Component, from time.Time) []Fault {
	if train == nil {
		train = trend.DefaultTrain()
	}
	p := trend.Plant{Train: train}
	var out []Fault
	for _, k := range FaultKinds() {
		f := Fault{Kind: k.Kind, Severity: k.Typical, From: from}
		ok := true
		switch k.Kind {
		case SensorOffset:
			f.Role = trend.RATemp
		case SensorScale, SensorCeiling, SensorFrozen:
			f.Role = trend.SARH
		case CoilLeak, HeatValvePasses:
			ok = p.In(trend.Heating)
		case CarryOver, CoolValvePasses:
			ok = p.In(trend.Cooling)
		case HumidifierPasses:
			ok = p.In(trend.Humidify)
		case DamperStuck, DamperLeaks, EconomizerOff:
			ok = p.In(trend.Mixing)
		case PreheatFails:
			ok = p.In(trend.Preheat)
		}
		if ok {
			out = append(out, f)
		}
	}
	return out
}

// Energy and water close over every component at every step, to rounding: mass
// and energy conservation, whatever the laws of the components are.
func TestBooksClose(t *testing.T) {
	start := time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC)
	for name, train := range trains {
		for _, c := range Climates() {
			for _, faults := range [][]Fault{nil, everyFault(train, start.AddDate(0, 0, 3))} {
				r := Simulate(Spec{Seed: 11, Climate: c, Start: start, Days: 6, Step: 10 * time.Minute, Plant: trend.Plant{Train: train}, Variable: c%2 == 0, Sensors: Realistic(), Faults: faults})
				checkBooks(t, name+" "+c.String(), r)
			}
		}
	}
}

func checkBooks(t *testing.T, name string, r *Run) {
	t.Helper()
	air, tr := r.Air(), r.True
	ran := 0
	for i, m := range tr.Flow {
		if m == 0 {
			continue
		}
		ran++
		// The mixture: f of the outdoor (or recovered) stream, the rest return air.
		if tr.T[trend.Mixed] != nil {
			o := trend.Outdoor
			if tr.T[trend.Recovered] != nil {
				o = trend.Recovered
			}
			f := tr.Fraction[i]
			h := f*air.Enthalpy(tr.T[o][i], tr.W[o][i]) + (1-f)*air.Enthalpy(tr.T[trend.Return][i], tr.W[trend.Return][i])
			w := f*tr.W[o][i] + (1-f)*tr.W[trend.Return][i]
			closes(t, name, "mixing, energy", i, h, air.Enthalpy(tr.T[trend.Mixed][i], tr.W[trend.Mixed][i]), 100)
			closes(t, name, "mixing, water", i, w, tr.W[trend.Mixed][i], 0.01)
		}
		for k := range tr.Parts {
			p := &tr.Parts[k]
			in, out := air.Enthalpy(p.TIn[i], p.WIn[i]), air.Enthalpy(p.TOut[i], p.WOut[i])
			closes(t, name, string(p.Component)+", energy", i, m*in+p.Heat[i]+p.WaterHeat[i], m*out, 100*m)
			closes(t, name, string(p.Component)+", water", i, m*p.WIn[i]+p.Water[i], m*p.WOut[i], 0.01*m)
			if k > 0 {
				q := &tr.Parts[k-1]
				if q.TOut[i] != p.TIn[i] || q.WOut[i] != p.WIn[i] {
					t.Fatalf("%s: air leaves %s and enters %s in another state at %d", name, q.Component, p.Component, i)
				}
			}
			if rh := air.RelHumidity(p.TOut[i], p.WOut[i]); !(rh >= 0 && rh < 1.02) && p.Component != trend.Recovery && air.RelHumidity(p.TIn[i], p.WIn[i]) < 1 {
				t.Fatalf("%s: air leaves %s at %.4f RH, interval %d", name, p.Component, rh, i)
			}
		}
	}
	if ran < r.Axis.N/6 {
		t.Errorf("%s: the fan ran in %d of %d intervals", name, ran, r.Axis.N)
	}
}

// closes holds two sides of a book within 1e-9 of a magnitude typical of the
// book (100 kJ/kg, 10 g/kg).
func closes(t *testing.T, name, book string, i int, a, b, scale float64) {
	t.Helper()
	if !(math.Abs(a-b) <= 1e-9*scale) {
		t.Fatalf("%s, %s: %.12g against %.12g at interval %d", name, book, a, b, i)
	}
}
