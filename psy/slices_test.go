package psy

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Every slice form against its scalar form over the whole range of states: 1e-7
// relative, or 1e-7 K (kJ/kg) where that is more, and NaN for the same arguments.
// A seventh of the states lies around the triple point, an eleventh at saturation,
// a thirteenth is very dry.
func TestSlicesEqualScalars(t *testing.T) {
	const n = 40000
	rng := rand.New(rand.NewPCG(3, 1))
	for _, m := range []Model{{}, {Ice: true}, {Ideal: true}, {Ideal: true, Ice: true}} {
		for p := 50e3; p <= 110e3; p += 6e3 {
			m.P = p
			db, rh, w := make([]float64, n/10), make([]float64, n/10), make([]float64, n/10)
			for i := range db {
				db[i], rh[i] = -62+154*rng.Float64(), rng.Float64()
				if i%7 == 0 {
					db[i] = triplePoint + 0.2*rng.NormFloat64()
				}
				if i%11 == 0 {
					rh[i] = 1 - 1e-5*rng.Float64()
				}
				if i%13 == 0 {
					rh[i] *= 0.01
				}
				w[i] = m.HumRatio(db[i], rh[i])
				if w[i] > 2 { // so near boiling, W hangs on the last digits
					rh[i], w[i] = math.NaN(), math.NaN()
				}
			}
			got, a, b := make([]float64, len(db)), make([]float64, len(db)), make([]float64, len(db))
			check := func(what string, tol, floor float64, want func(i int) float64) {
				t.Helper()
				for i, g := range got {
					x := want(i)
					if math.IsNaN(g) != math.IsNaN(x) || math.Abs(g-x) > tol*math.Max(math.Abs(x), floor) {
						t.Errorf("%+v t=%v rh=%v: %s %v, scalar %v", m, db[i], rh[i], what, g, x)
					}
				}
			}
			m.HumRatios(got, db, rh)
			check("W", 1e-7, 0, func(i int) float64 { return w[i] })
			m.HumRatiosEnthalpies(got, a, db, rh)
			check("fused W", 1e-7, 0, func(i int) float64 { return w[i] })
			copy(got, a)
			check("fused h", 1e-7, 1, func(i int) float64 { return m.Enthalpy(db[i], w[i]) })
			m.HumRatiosPartials(got, a, b, db, rh)
			check("W with partials", 1e-7, 0, func(i int) float64 { return w[i] })
			copy(got, a) // the slope of a cubic is a digit or two worse than the cubic
			check("dW/dT", 1e-5, 0, func(i int) float64 { _, x, _, _ := m.HumRatioPartials(db[i], rh[i]); return x })
			copy(got, b)
			check("dW/drh", 1e-6, 0, func(i int) float64 { _, _, x, _ := m.HumRatioPartials(db[i], rh[i]); return x })
			m.Enthalpies(got, db, w)
			check("h", 1e-7, 1, func(i int) float64 { return m.Enthalpy(db[i], w[i]) })
			m.Volumes(got, db, w)
			check("v", 1e-7, 0, func(i int) float64 { return m.Volume(db[i], w[i]) })
			m.DewPoints(got, w)
			check("dew point", 1e-7, 1, func(i int) float64 { return m.DewPoint(w[i]) })
			m.WetBulbs(got, db, w)
			check("wet bulb", 1e-7, 1, func(i int) float64 { return m.WetBulb(db[i], w[i]) })
			m.DewPoints(b, w)
			m.HumRatiosDewPoint(got, b)
			check("W from dew point", 1e-7, 0, func(i int) float64 { return m.HumRatioDewPoint(b[i]) })
		}
	}
}

// What no sensor should say, and every pair of it.
func TestSlicesOnOddValues(t *testing.T) {
	odd := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, math.Copysign(0, -1), -1e-9, 1e-300, 5e-324, -0.3, 0.5, 1, 1.2, 3, 20, -59.999, 90, 90.001, 1e6, -1e6, 1e308, -1e308}
	for _, m := range []Model{{P: 101325}, {P: 101325, Ideal: true}, {P: 70e3, Ice: true}, {P: 0}, {P: math.NaN()}, {P: 200e3}} {
		for _, x := range odd {
			for _, y := range odd {
				got, h := []float64{7}, []float64{7}
				xs, ys := []float64{x}, []float64{y}
				same := func(what string, got, want float64) {
					t.Helper()
					if math.IsNaN(got) != math.IsNaN(want) || math.Abs(got-want) > 1e-7*math.Max(math.Abs(want), 1e-3) {
						t.Errorf("%+v (%v, %v): %s %v, scalar %v", m, x, y, what, got, want)
					}
				}
				m.HumRatios(got, xs, ys)
				same("W", got[0], m.HumRatio(x, y))
				m.HumRatiosEnthalpies(got, h, xs, ys)
				same("fused W", got[0], m.HumRatio(x, y))
				m.Enthalpies(got, xs, ys)
				same("h", got[0], m.Enthalpy(x, y))
				m.DewPoints(got, ys)
				same("dew point", got[0], m.DewPoint(y))
				m.WetBulbs(got, xs, ys)
				same("wet bulb", got[0], m.WetBulb(x, y))
				m.Volumes(got, xs, ys)
				same("v", got[0], m.Volume(x, y))
				m.HumRatiosDewPoint(got, xs)
				same("W from dew point", got[0], m.HumRatioDewPoint(x))
			}
		}
	}
}

// columnOf makes n states of a mild month's supply air.
func columnOf(m Model, n int) (t, rh, w []float64) {
	t, rh, w = make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range t {
		t[i], rh[i] = 5+25*float64(i)/float64(n), 0.3+0.4*float64(i%97)/97
		w[i] = m.HumRatio(t[i], rh[i])
	}
	return t, rh, w
}

func TestSlicesDoNotAllocate(t *testing.T) {
	m := Model{P: 98e3}
	db, rh, w := columnOf(m, 64)
	a, b, c := make([]float64, 64), make([]float64, 64), make([]float64, 64)
	for name, f := range map[string]func(){
		"HumRatios":           func() { m.HumRatios(a, db, rh) },
		"HumRatiosPartials":   func() { m.HumRatiosPartials(a, b, c, db, rh) },
		"HumRatiosEnthalpies": func() { m.HumRatiosEnthalpies(a, b, db, rh) },
		"HumRatiosDewPoint":   func() { m.HumRatiosDewPoint(a, db) },
		"Enthalpies":          func() { m.Enthalpies(a, db, w) },
		"DewPoints":           func() { m.DewPoints(a, w) },
		"WetBulbs":            func() { m.WetBulbs(a, db, w) },
		"Volumes":             func() { m.Volumes(a, db, w) },
	} {
		if n := testing.AllocsPerRun(10, f); n != 0 {
			t.Errorf("%s allocates %v times", name, n)
		}
	}
}

// A destination may be either source; different lengths panic.
func TestSlicesShareAndRefuse(t *testing.T) {
	m := Model{P: 98e3}
	for name, f := range map[string]func(dst, t, y []float64){
		"HumRatios": m.HumRatios, "Enthalpies": m.Enthalpies, "WetBulbs": m.WetBulbs, "Volumes": m.Volumes,
		"HumRatiosEnthalpies": func(dst, t, y []float64) { m.HumRatiosEnthalpies(t, dst, t, y) },
		"HumRatiosPartials":   func(dst, t, y []float64) { m.HumRatiosPartials(make([]float64, len(t)), t, dst, t, y) },
		"DewPoints":           func(dst, _, y []float64) { m.DewPoints(dst, y) },
		"HumRatiosDewPoint":   func(dst, t, _ []float64) { m.HumRatiosDewPoint(dst, t) },
	} {
		apart := func() (dst, db, y []float64) {
			db, _, y = columnOf(m, 50)
			return make([]float64, 50), db, y
		}
		want, db, y := apart()
		f(want, db, y)
		for k := range 2 {
			_, db, y := apart()
			dst := [][]float64{db, y}[k]
			if name == "HumRatiosEnthalpies" || name == "HumRatiosPartials" {
				dst = y // t is a destination of these already
			}
			f(dst, db, y)
			for i := range want {
				if dst[i] != want[i] {
					t.Fatalf("%s into source %d: [%d] is %v, apart %v", name, k, i, dst[i], want[i])
				}
			}
		}
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic on slices of different length", name)
				}
			}()
			dst, db, y := apart()
			f(dst[:49], db, y)
		}()
	}
}

// Scalar and slice forms in one run; the ratio is what matters.
func BenchmarkSlices(b *testing.B) {
	const n = 4096
	m := Model{P: 101325}
	t, rh, w := columnOf(m, n)
	h, out := make([]float64, n), make([]float64, n)
	for _, c := range []struct {
		name string
		run  func()
	}{
		{"W and h/scalar", func() {
			for i := range t {
				out[i] = m.HumRatio(t[i], rh[i])
				h[i] = m.Enthalpy(t[i], out[i])
			}
		}},
		{"W and h/slices", func() { m.HumRatiosEnthalpies(out, h, t, rh) }},
		{"dew point/scalar", func() {
			for i := range w {
				out[i] = m.DewPoint(w[i])
			}
		}},
		{"dew point/slices", func() { m.DewPoints(out, w) }},
		{"wet bulb/scalar", func() {
			for i := range w {
				out[i] = m.WetBulb(t[i], w[i])
			}
		}},
		{"wet bulb/slices", func() { m.WetBulbs(out, t, w) }},
	} {
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				c.run()
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/value")
		})
	}
}
