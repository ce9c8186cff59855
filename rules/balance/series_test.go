package balance

import (
	"math"
	"testing"

	"dewledger/ingest/trend"
)

func seriesOf(val []float64, terms ...[]float64) *Series {
	s := &Series{Val: val, Off: make([]float64, len(val)), Noise: make([]float64, len(val))}
	for k, g := range terms {
		s.Terms = append(s.Terms, Term{Role: trend.Role(k + 1), G: g})
		for i, x := range g {
			s.Off[i] = math.Hypot(s.Off[i], x)
		}
	}
	return s
}

// Offsets average with their sign: what changes sign cancels, what stays does not
// shrink however long the span.
func TestMeanOffsets(t *testing.T) {
	n := 1000
	val, same, turns := make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range val {
		same[i], turns[i] = 0.3, 0.4
		if i%2 == 1 {
			turns[i] = -0.4
		}
	}
	m := seriesOf(val, same, turns).Mean(0, n, nil)
	near(t, "offset of the mean", m.Off, 0.3, 1e-12)
	half := make([]bool, n)
	for i := range half {
		half[i] = i%2 == 0
	}
	m = seriesOf(val, same, turns).Mean(0, n, half)
	near(t, "offset over one sign", m.Off, 0.5, 1e-12)
	if m.N != n/2 {
		t.Errorf("N = %d", m.N)
	}
}

// A first-order process: the standard deviation of its mean over many draws is
// what Mean says of one (n_eff of Bayley and Hammersley 1946). A trend is not
// noise.
func TestMeanNoise(t *testing.T) {
	for _, rho := range []float64{0, 0.5, 0.8} {
		rng := seeded(77)
		const n, draws = 600, 400
		var means []float64
		var said, eff float64
		for range draws {
			val := make([]float64, n)
			x := rng.NormFloat64()
			for i := range val {
				val[i] = x + 0.01*float64(i)
				x = rho*x + math.Sqrt(1-rho*rho)*rng.NormFloat64()
			}
			m := seriesOf(val).Mean(0, n, nil)
			means = append(means, m.Val)
			said += m.Noise / draws
			eff += m.NEff / draws
		}
		sd, _ := deviation(means)
		// 400 draws know a standard deviation to 3.5 %; ρ is estimated low by about
		// (1+4ρ)/n, and the straight line takes up some of the noise.
		if math.Abs(said/sd-1) > 0.12 {
			t.Errorf("ρ = %v: noise of the mean %v, over the draws %v", rho, said, sd)
		}
		near(t, "n_eff", eff, n*(1-rho)/(1+rho), 0.1*n*(1-rho)/(1+rho))
	}
}

func TestMeanOfFew(t *testing.T) {
	s := seriesOf([]float64{nan, 3, nan, 5})
	for i := range s.Noise {
		s.Noise[i] = 0.2
	}
	m := s.Mean(0, 4, nil)
	if m.N != 2 || m.Val != 4 {
		t.Errorf("mean %+v", m)
	}
	near(t, "noise of two", m.Noise, 0.2/math.Sqrt2, 1e-12)
	m = s.Mean(2, 3, nil)
	if m.N != 0 || m.Val == m.Val || m.U() == m.U() {
		t.Errorf("mean of nothing %+v", m)
	}
	// A series of constant value keeps its readings' noise.
	s = seriesOf(filled(100, 1))
	for i := range s.Noise {
		s.Noise[i] = 0.5
	}
	near(t, "floor of noise", s.Mean(0, 100, nil).Noise, 0.05, 1e-12)
	// Without terms, Off is one offset.
	s = &Series{Val: []float64{1, 1, 1, 1}, Off: []float64{0.2, 0.4, 0.2, 0.4}, Noise: make([]float64, 4)}
	near(t, "offset without terms", s.Mean(0, 4, nil).Off, 0.3, 1e-12)
}

func TestScaled(t *testing.T) {
	s := seriesOf([]float64{1, 2, nan}, []float64{0.1, 0.2, 0.1}, []float64{0.3, -0.1, 0.1})
	x := s.Scaled("x", "K", -2, 4)
	if x.Val[0] != 2 || x.Val[1] != 0 || x.Val[2] == x.Val[2] {
		t.Errorf("values %v", x.Val)
	}
	near(t, "Off", x.Off[1], 2*s.Off[1], 1e-15)
	near(t, "term", x.Terms[1].At(1), 0.2, 1e-15)
	if s.Val[0] != 1 || s.Terms[0].G[0] != 0.1 {
		t.Error("the scaled series was written to")
	}
}

func TestRobust(t *testing.T) {
	rng := seeded(3)
	for range 200 {
		v := make([]float64, 1+rng.IntN(60))
		for i := range v {
			v[i] = math.Round(5 * rng.NormFloat64())
		}
		want := append([]float64(nil), v...)
		k := rng.IntN(len(v))
		got := selectK(append([]float64(nil), v...), k)
		sortFloats(want)
		if got != want[k] {
			t.Fatalf("selectK(%v, %d) = %v, want %v", v, k, got, want[k])
		}
		near(t, "median", median(append([]float64(nil), v...)), quantile(want, 0.5), 1e-12)
	}
	// The shortest half holds its ground against 45 % of values elsewhere.
	clean, dirty := make([]float64, 2000), make([]float64, 2000)
	for i := range clean {
		clean[i] = 1 + 0.5*rng.NormFloat64()
		dirty[i] = clean[i]
		if i%20 < 9 {
			dirty[i] += 4
		}
	}
	mid, scale := shortest(clean)
	near(t, "middle", mid, 1, 0.15)
	near(t, "scale", scale, 0.5, 0.05)
	mid, scale = shortest(dirty)
	near(t, "middle, with a fault", mid, 1, 0.6) // within the clean hours' spread
	// The middle 0.5/0.55 of a normal: 1.69/0.6745 times its standard deviation.
	near(t, "scale, with a fault", scale, 0.5*1.69/0.6745, 0.1)
}

func sortFloats(v []float64) {
	for i := 1; i < len(v); i++ {
		for j := i; j > 0 && v[j] < v[j-1]; j-- {
			v[j], v[j-1] = v[j-1], v[j]
		}
	}
}
