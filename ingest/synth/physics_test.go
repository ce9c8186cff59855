package synth

import (
	"math"
	"testing"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// still is a sim of one step with a unit flow, for components on their own.
func still() (*sim, *Part) {
	s := &sim{spec: &Spec{}, air: psy.Model{P: 101325}, flow: 1}
	p := &Part{Heat: make([]float64, 1), Water: make([]float64, 1), WaterHeat: make([]float64, 1)}
	return s, p
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.4g, want %.4g ± %.2g", what, got, want, tol)
	}
}

// Worked examples of the ASHRAE Handbook of Fundamentals (2017, SI), chapter 1,
// "Typical Air-Conditioning Processes", their figures from memory. Tolerances are
// those of figures read off a chart, as the handbook does.
func TestHandbookExamples(t *testing.T) {
	t.Run("heating", func(t *testing.T) {
		// Saturated air at 2 degC, 10 m³/s, heated to 40 degC: 490 kW.
		s, p := still()
		x := state{2, s.air.SatHumRatio(2)}
		s.flow = 10 / s.air.Volume(x.t, x.w)
		y := s.warmTo(x, 40, p)
		near(t, "kW", p.Heat[0], 490, 5)
		if y.w != x.w {
			t.Errorf("heating changed the moisture from %v to %v", x.w, y.w)
		}
	})
	t.Run("mixing", func(t *testing.T) {
		// 2 m³/s at 4 degC and 2 degC wet bulb with 6.25 m³/s at 25 degC and 50 %:
		// 19.5 degC, 14.6 degC wet bulb.
		s, _ := still()
		o := state{4, s.air.HumRatioWetBulb(4, 2)}
		r := state{25, s.air.HumRatio(25, 0.5)}
		m1, m2 := 2/s.air.Volume(o.t, o.w), 6.25/s.air.Volume(r.t, r.w)
		f := m1 / (m1 + m2)
		s.body = body{leak: f, most: f}
		s.st[trend.Return] = r
		y := s.mix(o)
		near(t, "dry bulb, degC", y.t, 19.5, 0.2) // the handbook reads the line of mixtures off its chart
		near(t, "wet bulb, degC", s.air.WetBulb(y.t, y.w), 14.6, 0.2)
	})
	t.Run("steam", func(t *testing.T) {
		// Air at 20 degC and 8 degC wet bulb to a dew point of 13 degC with saturated
		// steam at 110 degC (2691 kJ/kg): 21 degC, 7.6 g/kg of steam.
		s, p := still()
		x := state{20, s.air.HumRatioWetBulb(20, 8)}
		y := s.wet(x, s.air.HumRatioDewPoint(13)-x.w, 2691, p)
		near(t, "dry bulb, degC", y.t, 21.1, 0.3)
		near(t, "steam, g/kg", 1000*p.Water[0], 7.6, 0.15)
	})
}

// Water offered to air that cannot take it stays where it is.
func TestWetStopsShortOfSaturation(t *testing.T) {
	for _, rh := range []float64{0.2, 0.6, 0.9, 0.965, 0.99} {
		for _, add := range []float64{0, 1e-4, 0.003, 0.05} {
			s, p := still()
			x := state{12, s.air.HumRatio(12, rh)}
			y := s.wet(x, add, waterCp*12, p)
			if got := s.air.RelHumidity(y.t, y.w); got > math.Max(0.9701, rh+1e-9) {
				t.Errorf("%v RH and %v kg/kg give %.4f RH", rh, add, got)
			}
			if p.Water[0] < 0 || p.Water[0] > add {
				t.Errorf("%v RH: %v kg/kg of %v evaporated", rh, p.Water[0], add)
			}
		}
	}
}

// A cooling coil dries only air whose dew point lies above its surface, and its
// process runs straight at the surface's saturation (bypass-factor method, ASHRAE
// Handbook of Fundamentals and Kusuda 1957, cited there).
func TestCoolingCoil(t *testing.T) {
	for _, c := range []struct{ t, rh, u float64 }{{30, 0.5, 1}, {27, 0.55, 0.7}, {24, 0.2, 1}, {18, 0.95, 0.3}, {35, 0.1, 0.5}} {
		s, p := still()
		rng := stream(1, 1)
		s.water = newAR(rng, 1, 1)
		s.water.x = 0
		s.body = body{design: 1, valve: 1, chw: 7}
		s.ctl.pos.cool = c.u
		s.dt = 300
		x := state{c.t, s.air.HumRatio(c.t, c.rh)}
		y := s.cool(x, p)
		surface := x.t - c.u*(x.t-9.5)
		ws := s.air.SatHumRatio(surface)
		switch {
		case ws >= x.w && y.w != x.w:
			t.Errorf("%+v: the surface at %.1f degC is above the dew point, yet W went from %.5f to %.5f", c, surface, x.w, y.w)
		case ws < x.w:
			slope := (x.w - ws) / (x.t - surface)
			if s.air.RelHumidity(y.t, y.w) < 0.98 {
				near(t, "slope of the process", (x.w-y.w)/(x.t-y.t), slope, 1e-9)
			}
			if y.w >= x.w || s.air.RelHumidity(y.t, y.w) > 0.9851 {
				t.Errorf("%+v: leaves at %.5f kg/kg, %.3f RH", c, y.w, s.air.RelHumidity(y.t, y.w))
			}
		}
		if p.Heat[0] >= 0 || y.t >= x.t {
			t.Errorf("%+v: no cooling: %.2f kW", c, p.Heat[0])
		}
	}
}

// The share of outdoor air rises with the damper's position from its leak to
// its most, whatever the unit.
func TestDamper(t *testing.T) {
	for seed := range uint64(20) {
		s := &sim{spec: &Spec{Seed: seed}, air: psy.Model{P: 101325}}
		s.build()
		b := &s.body
		last := -1.0
		for u := 0.0; u <= 1; u += 0.01 {
			f := b.damperShare(u, b.leak)
			if f < last {
				t.Fatalf("seed %d: the share falls at %.2f", seed, u)
			}
			last = f
		}
		near(t, "shut", b.damperShare(0, b.leak), b.leak, 1e-12)
		near(t, "open", b.damperShare(1, b.leak), b.most, 1e-12)
		near(t, "at minimum", b.damperShare(b.minDamper, b.leak), b.minShare, 0.015)
	}
}
