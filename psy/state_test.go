package psy

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

var properties = []Property{DryBulb, HumRatio, RelHumidity, DewPoint, WetBulb, Enthalpy, Volume}

// fixes tells whether two properties fix a state.
func fixes(a, b Property) bool {
	pair := func(x, y Property) bool { return a == x && b == y || a == y && b == x }
	return a != b && !pair(HumRatio, DewPoint) && !pair(WetBulb, Enthalpy)
}

// Every pair of a state's properties, in both orders, leads back to the state.
func TestFindComesBack(t *testing.T) {
	states(1500, 7, func(m Model, tt, rh float64) {
		want := m.At(tt, m.HumRatio(tt, rh))
		for _, a := range properties {
			for _, b := range properties {
				if !fixes(a, b) {
					continue
				}
				got, err := m.Find(a, want.Of(a), b, want.Of(b))
				if err != nil {
					t.Errorf("%+v %s and %s: %v", want, a, b, err)
					continue
				}
				// What was given comes back, and so does the state. Near saturation and at
				// low humidity wet bulb and volume, or enthalpy and volume, cross at a small
				// angle.
				for _, p := range []Property{a, b} {
					if d := math.Abs(got.Of(p) - want.Of(p)); !(d <= 1e-6 || d <= 1e-9*math.Abs(want.Of(p))) {
						t.Errorf("%+v %s and %s: %s comes back as %v", want, a, b, p, got.Of(p))
					}
				}
				if d := math.Abs(got.T - want.T); !(d <= 1e-5) {
					t.Errorf("%+v %s and %s: dry bulb comes back as %v", want, a, b, got.T)
				}
				if d := math.Abs(got.W - want.W); !(d <= 1e-8) {
					t.Errorf("%+v %s and %s: humidity ratio comes back as %v", want, a, b, got.W)
				}
			}
		}
	})
}

func TestFindRefuses(t *testing.T) {
	m := Model{P: 101325}
	for _, c := range []struct {
		a    Property
		x    float64
		b    Property
		y    float64
		want string
	}{
		{DewPoint, 10, HumRatio, 0.0077, "dew point and humidity ratio do not fix a state"},
		{HumRatio, 0.01, HumRatio, 0.01, "do not fix a state"},
		{Enthalpy, 40, WetBulb, 14, "enthalpy and wet bulb do not fix a state"},
		{DryBulb, 20, WetBulb, 25, "has dry bulb 20 and wet bulb 25"},
		{DryBulb, 20, Enthalpy, 10, "no moist air"}, // less than dry air's
		{DryBulb, 95, RelHumidity, 0.5, "no moist air"},
		{DewPoint, 30, RelHumidity, 0, "no moist air"},
		{DryBulb, math.NaN(), RelHumidity, 0.5, "no moist air"},
		{Property(-1), 1, DryBulb, 20, "property -1 does not exist"},
		{DryBulb, 20, Property(99), 1, "property 99 does not exist"},
	} {
		got, err := m.Find(c.a, c.x, c.b, c.y)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s %v, %s %v: %+v, %v; want %q", c.a, c.x, c.b, c.y, got, err, c.want)
		}
	}
	// Over 100 % is representable: a sensor may report it.
	s, err := m.Find(DryBulb, 20, RelHumidity, 1.05)
	if err != nil || !(math.Abs(s.RH-1.05) < 1e-12) || !math.IsNaN(s.WetBulb) {
		t.Errorf("supersaturated air: %+v, %v", s, err)
	}
}

// The same states as the handbook's examples, from the pairs that they are given by
// (ASHRAE Fundamentals 2021 SI, chapter 1, examples 4 and 6; readings off a chart).
func TestFindHandbookExamples(t *testing.T) {
	m := Model{P: 101325}
	find := func(a Property, x float64, b Property, y float64) State {
		t.Helper()
		s, err := m.Find(a, x, b, y)
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	near := func(source, quantity string, got, tol float64) {
		t.Helper()
		if want := published(t, source, quantity); !(math.Abs(got-want) <= tol) {
			t.Errorf("%s: %s %.6g, published %v ± %v", source, quantity, got, want, tol)
		}
	}
	// 2 m³/s at 4 degC with wet bulb 2 and 6.25 m³/s at 25 degC and 50 % are mixed.
	const four = "ASHRAE F2021 SI ch1 Ex4 mixing"
	out, room := find(DryBulb, 4, WetBulb, 2), find(DryBulb, 25, RelHumidity, 0.5)
	m1, m2 := 2/out.Volume, 6.25/room.Volume
	f := m2 / (m1 + m2)
	near(four, "v1", out.Volume, 0.003)
	near(four, "v2", room.Volume, 0.003)
	near(four, "m1", m1, 0.01)
	near(four, "m2", m2, 0.03)
	near(four, "frac", f, 0.001)
	mixed := find(HumRatio, out.W+f*(room.W-out.W), Enthalpy, out.Enthalpy+f*(room.Enthalpy-out.Enthalpy))
	near(four, "t3", mixed.T, 0.25)
	near(four, "tw3", mixed.WetBulb, 0.25)

	// A room at 25 degC with wet bulb 19 takes 9 kW and 1.5 g/s with 2555.5 kJ/kg from
	// air at 15 degC: on the line of slope dh/dW through the room's state.
	const six = "ASHRAE F2021 SI ch1 Ex6 space 9 kW, 1.5 g/s"
	room = find(DryBulb, 25, WetBulb, 19)
	slope := (9 + 0.0015*SteamEnthalpy(30)) / 0.0015
	near(six, "dh/dW", slope, 5)
	near(six, "h2", room.Enthalpy, 0.25)
	lo, hi := 0.0, room.W
	for range 60 {
		mid := 0.5 * (lo + hi)
		if m.Enthalpy(15, mid)-mid*slope > room.Enthalpy-room.W*slope {
			lo = mid
		} else {
			hi = mid
		}
	}
	supply := m.At(15, lo)
	near(six, "h1", supply.Enthalpy, 0.25)
	near(six, "tw1", supply.WetBulb, 0.25)
	near(six, "v1", supply.Volume, 0.003)
	mda := 0.0015 / (room.W - supply.W)
	near(six, "mda", mda, 0.02) // the difference of two readings
	near(six, "V m3/s", mda*supply.Volume, 0.02)
}

// First-order uncertainty (JCGM 100) against a seeded Monte Carlo (JCGM 101) with
// independent normal inputs, within 5 %, at a dozen typical states. None has its dew point at the triple point,
// where its slope has a step that no first order sees.
func TestFirstOrderUncertainty(t *testing.T) {
	const n = 40000 // a standard deviation to 0.35 %
	rng := rand.New(rand.NewPCG(11, 12))
	spread := func(f func() float64) float64 {
		var sum, sum2 float64
		base := f()
		for range n {
			d := f() - base
			sum, sum2 = sum+d, sum2+d*d
		}
		return math.Sqrt((sum2 - sum*sum/n) / (n - 1))
	}
	norm := func(x ...float64) float64 {
		s := 0.0
		for _, v := range x {
			s += v * v
		}
		return math.Sqrt(s)
	}
	for _, s := range []struct{ t, rh, p float64 }{
		{-20, 0.6, 101325}, {-8, 0.8, 84e3}, {4, 0.9, 101325}, {10, 0.7, 97e3}, {13, 0.95, 101325}, {18, 0.5, 75e3},
		{22, 0.45, 101325}, {24, 0.6, 90e3}, {27, 0.4, 101325}, {32, 0.7, 100e3}, {38, 0.3, 101325}, {45, 0.15, 95e3},
	} {
		m := Model{P: s.p}
		ut, urh, up := 0.5/math.Sqrt(3), 0.03/math.Sqrt(3), 300.0
		state := m.At(s.t, m.HumRatio(s.t, s.rh))
		uh, utd, utw, uw := 3.5/math.Sqrt(3)/2, 1/math.Sqrt(3), 0.3/math.Sqrt(3), 0.02*state.W
		draw := func(x, u float64) float64 { return x + u*rng.NormFloat64() }
		at := func() (Model, float64) { return Model{P: draw(s.p, up)}, draw(s.t, ut) }
		check := func(what string, first float64, f func() float64) {
			t.Helper()
			if mc := spread(f); !(math.Abs(first/mc-1) <= 0.05) {
				t.Errorf("%v: %s has u = %.4g to first order, %.4g by Monte Carlo", s, what, first, mc)
			}
		}
		w, wt, wrh, wp := m.HumRatioPartials(s.t, s.rh)
		check("W", norm(wt*ut, wrh*urh, wp*up), func() float64 { m, x := at(); return m.HumRatio(x, draw(s.rh, urh)) })
		// Temperature enters twice: once by itself, once through W.
		_, ht, hw := m.EnthalpyPartials(s.t, w)
		check("h", norm((ht+hw*wt)*ut, hw*wrh*urh, hw*wp*up), func() float64 {
			m, x := at()
			return m.Enthalpy(x, m.HumRatio(x, draw(s.rh, urh)))
		})
		_, vt, vw := m.VolumePartials(s.t, w)
		check("v", norm((vt+vw*wt)*ut, vw*wrh*urh, (vw*wp-state.Volume/s.p)*up), func() float64 {
			m, x := at()
			return m.Volume(x, m.HumRatio(x, draw(s.rh, urh)))
		})
		_, dw, dp := m.DewPointPartials(w)
		check("dew point", norm(dw*wt*ut, dw*wrh*urh, (dw*wp+dp)*up), func() float64 {
			m, x := at()
			return m.DewPoint(m.HumRatio(x, draw(s.rh, urh)))
		})
		_, wtd, wp := m.HumRatioDewPointPartials(state.DewPoint)
		check("W from dew point", norm(wtd*utd, wp*up), func() float64 {
			m, _ := at()
			return m.HumRatioDewPoint(draw(state.DewPoint, utd))
		})
		_, bt, btw, bp := m.HumRatioWetBulbPartials(s.t, state.WetBulb)
		if math.Abs(state.WetBulb-triplePoint) > 5*utw && s.t-state.WetBulb > 5*norm(ut, utw) { // neither across the branches nor beyond saturation
			check("W from wet bulb", norm(bt*ut, btw*utw, bp*up), func() float64 {
				m, x := at()
				return m.HumRatioWetBulb(x, draw(state.WetBulb, utw))
			})
			_, tt, tw, tp := m.WetBulbPartials(s.t, w)
			check("wet bulb", norm(tt*ut, tw*uw, tp*up), func() float64 {
				m, x := at()
				return m.WetBulb(x, draw(w, uw))
			})
		}
		_, et, eh := m.HumRatioEnthalpyPartials(s.t, state.Enthalpy)
		check("W from enthalpy", norm(et*ut, eh*uh), func() float64 {
			_, x := at()
			return m.HumRatioEnthalpy(x, draw(state.Enthalpy, uh))
		})
		_, rt, rw, rp := m.RelHumidityPartials(s.t, w)
		check("rh", norm(rt*ut, rw*uw, rp*up), func() float64 { m, x := at(); return m.RelHumidity(x, draw(w, uw)) })
		_, th, tw := m.TempPartials(state.Enthalpy, w)
		check("T", norm(th*uh, tw*uw), func() float64 { return m.Temp(draw(state.Enthalpy, uh), draw(w, uw)) })
	}
}

// Where physics is monotone, so are the functions: between neighbours a step apart,
// over the whole range, and across the triple point.
func TestMonotone(t *testing.T) {
	for _, m := range []Model{{P: 101325}, {P: 101325, Ice: true}, {P: 55e3}, {P: 101325, Ideal: true}} {
		rises := func(what string, from, to, step float64, f func(x float64) float64) {
			t.Helper()
			last := math.Inf(-1)
			for x := from; x <= to; x += step {
				v := f(x)
				if !(v >= last) {
					t.Errorf("%+v: %s falls at %v: %v after %v", m, what, x, v, last)
					return
				}
				last = v
			}
		}
		rises("saturation pressure", -100, 200, 0.013, SatPressure)
		rises("saturation pressure over water", -100, 200, 0.013, SatPressureWater)
		rises("steam enthalpy", 0, 200, 0.1, SteamEnthalpy)
		rises("water enthalpy", -100, 200, 0.1, WaterEnthalpy)
		rises("W of temperature", -60, 75, 0.011, func(x float64) float64 { return m.HumRatio(x, 0.5) })
		rises("W of humidity", 0, 1, 0.001, func(x float64) float64 { return m.HumRatio(25, x) })
		rises("h of temperature", -60, 90, 0.05, func(x float64) float64 { return m.Enthalpy(x, 0.01) })
		rises("h of W", 0, 1, 0.001, func(x float64) float64 { return m.Enthalpy(25, x) })
		rises("v of W", 0, 1, 0.001, func(x float64) float64 { return m.Volume(25, x) })
		rises("dew point of W", 1e-6, 0.5, 1e-4, m.DewPoint)
		for _, at := range []float64{-5, 0, 2, 10, 30} {
			ws := m.SatHumRatio(at)
			rises("wet bulb of W", 0, ws, ws/3000, func(w float64) float64 { return m.WetBulb(at, w) })
		}
		rises("wet bulb of temperature", 8, 60, 0.02, func(x float64) float64 { return m.WetBulb(x, 0.001) })
	}
}

// Near freezing air has a wet bulb over liquid and one over ice. Both solve the
// equation; the one over liquid is given where there is one, and the other comes in
// by a jump of the documented size.
func TestWetBulbBranches(t *testing.T) {
	for _, m := range []Model{{P: 101325}, {P: 70e3}, {P: 101325, Ideal: true}} {
		for _, at := range []float64{0.5, 2, 5, 8, 9, 20} {
			liquid, ice := m.wetBulbHumRatio(at, triplePoint, true), m.wetBulbHumRatio(at, triplePoint, false)
			if !(liquid < ice) {
				t.Fatalf("%+v at %v degC: the branches do not overlap", m, at)
			}
			if liquid < 0 {
				continue // even dry air has a higher wet bulb
			}
			if got := m.WetBulb(at, liquid+1e-9); !(got >= triplePoint && got < triplePoint+0.001) {
				t.Errorf("%+v at %v degC: wet bulb %v where the branch over liquid ends", m, at, got)
			}
			below := m.WetBulb(at, liquid-1e-9)
			if d := triplePoint - below; !(math.Abs(d/at-0.07) <= 0.015) {
				t.Errorf("%+v at %v degC: a jump of %v K, documented 0.07 K a kelvin", m, at, d)
			}
			if got := m.HumRatioWetBulb(at, below); !(math.Abs(got-liquid) <= 2e-9) {
				t.Errorf("%+v at %v degC: over ice W %v, want %v", m, at, got, liquid)
			}
		}
	}
}
