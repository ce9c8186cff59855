package balance

import (
	"math"

	"dewledger/ingest/trend"
)

// Series is one balance over the unit's axis: its value and how well the
// readings let us know it. Off and Noise are standard uncertainties (JCGM
// 100:2008) of a single interval: Off from the sensors' constant offsets, fully
// correlated in time, Noise from what varies from interval to interval. Both
// are NaN where the value is.
type Series struct {
	Name  string // ledger column
	Unit  string // as package finding names it: "K", "g/kg", "fraction", "kW"
	Val   []float64
	Off   []float64
	Noise []float64
	Terms []Term
}

// Term is one sensor's part in Off: At(i) is the series' sensitivity to that
// sensor in interval i times the standard uncertainty of the sensor's offset,
// with its sign. Off[i]² is the sum of At(i)² over the terms. A sensor that enters
// a balance twice has one term, its sensitivities summed. Role NoRole marks what
// is no reading: the fan's heat, the unit's own spread.
type Term struct {
	Role trend.Role
	G    []float64 // the contributions, for a series that is made by hand; the books leave it nil and At multiplies

	c    float64
	d, o []float64 // sensitivity and offset uncertainty, nil for ones
}

// At is the term's contribution in interval i. It means nothing where the series
// has no value.
func (t *Term) At(i int) float64 {
	if t.G != nil {
		return t.G[i]
	}
	x := t.c
	if t.d != nil {
		x *= t.d[i]
	}
	if t.o != nil {
		x *= t.o[i]
	}
	return x
}

// sum is the sum of the contributions over i <= k < j where val is there and keep
// (nil: everywhere) holds.
func (t *Term) sum(i, j int, keep []bool, val []float64) float64 {
	var sum float64
	for k := i; k < j; k++ {
		if (keep == nil || keep[k]) && val[k] == val[k] {
			sum += t.At(k)
		}
	}
	return sum
}

// Mean is the mean of the series over the intervals that keep holds, with its
// standard uncertainty from offsets (each sensor's mean contribution, in full)
// and from noise.
type Mean struct {
	N     int
	Val   float64
	Off   float64
	Noise float64 // of the mean
	NEff  float64 // effective number of independent intervals
}

// U is the standard uncertainty of the mean.
func (m Mean) U() float64 { return math.Hypot(m.Off, m.Noise) }

// U is the standard uncertainty of interval i, offsets and noise together.
func (s *Series) U(i int) float64 { return math.Hypot(s.Off[i], s.Noise[i]) }

// maxRho bounds the lag-1 autocorrelation in n_eff: what persists beyond it is
// drift, and the offsets carry that.
const maxRho = 0.98

// Mean averages the series over the intervals i <= k < j that keep (indexed
// like the series; nil keeps all) holds and that have a value. Offsets average
// with their sign, sensor by sensor, and never shrink otherwise:
//
//	Off = sqrt(Σ_sensors mean(G)²)
//
// Noise is the standard deviation of the values about their straight-line trend
// over sqrt(n_eff), n_eff = n(1-ρ)/(1+ρ) with ρ the lag-1 autocorrelation of
// those residuals (JCGM 100:2008, 4.2, for the mean; Bayley and Hammersley 1946
// for n_eff of a first-order process), and at least the readings' own noise over
// sqrt(n). Without any value, N is 0 and the rest NaN. A series without terms
// is taken as one offset.
func (s *Series) Mean(i, j int, keep []bool) Mean {
	var n int
	var sum, nz, at float64
	for k := i; k < j; k++ {
		if keep != nil && !keep[k] || math.IsNaN(s.Val[k]) {
			continue
		}
		n++
		sum += s.Val[k]
		at += float64(k - i)
		if s.Noise != nil {
			nz += s.Noise[k] * s.Noise[k]
		}
	}
	if n == 0 {
		nan := math.NaN()
		return Mean{Val: nan, Off: nan, Noise: nan, NEff: 0}
	}
	m := Mean{N: n, Val: sum / float64(n), NEff: float64(n)}
	m.Off = s.meanOffset(i, j, keep, n)
	m.Noise = math.Sqrt(nz/float64(n)) / math.Sqrt(float64(n))
	if n < 4 {
		return m
	}

	var skk, skv float64
	mid := at / float64(n)
	for k := i; k < j; k++ {
		if keep != nil && !keep[k] || math.IsNaN(s.Val[k]) {
			continue
		}
		x := float64(k-i) - mid
		skk += x * x
		skv += x * (s.Val[k] - m.Val)
	}
	slope := skv / skk
	var c0, c1, last float64
	pairs, lastAt := 0, -2
	for k := i; k < j; k++ {
		if keep != nil && !keep[k] || math.IsNaN(s.Val[k]) {
			continue
		}
		r := s.Val[k] - m.Val - slope*(float64(k-i)-mid)
		c0 += r * r
		if lastAt == k-1 {
			c1 += r * last
			pairs++
		}
		last, lastAt = r, k
	}
	if c0 <= 0 {
		return m
	}
	rho := 0.0
	if pairs > 0 {
		rho = (c1 / float64(pairs)) / (c0 / float64(n))
	}
	rho = math.Min(math.Max(rho, 0), maxRho)
	m.NEff = math.Max(1, float64(n)*(1-rho)/(1+rho))
	sd := math.Sqrt(c0 / float64(n-2))
	m.Noise = math.Max(m.Noise, sd/math.Sqrt(m.NEff))
	return m
}

func (s *Series) meanOffset(i, j int, keep []bool, n int) float64 {
	terms := s.Terms
	if len(terms) == 0 {
		if s.Off == nil {
			return 0
		}
		terms = []Term{{G: s.Off}}
	}
	var off float64
	for k := range terms {
		x := terms[k].sum(i, j, keep, s.Val) / float64(n)
		off += x * x
	}
	return math.Sqrt(off)
}

// Scaled is scale·s + shift under another name and unit.
func (s *Series) Scaled(name, unit string, scale, shift float64) *Series {
	n := len(s.Val)
	out := &Series{Name: name, Unit: unit, Val: make([]float64, n), Off: s.Off, Noise: s.Noise}
	for i, v := range s.Val {
		out.Val[i] = scale*v + shift
	}
	if a := math.Abs(scale); a != 1 {
		out.Off, out.Noise = times(s.Off, a), times(s.Noise, a)
	}
	out.Terms = make([]Term, len(s.Terms))
	for k, t := range s.Terms {
		t.c *= scale
		if t.G != nil && scale != 1 {
			t.G = times(t.G, scale)
		}
		out.Terms[k] = t
	}
	return out
}

func times(v []float64, c float64) []float64 {
	if v == nil {
		return nil
	}
	out := make([]float64, len(v))
	for i, x := range v {
		out[i] = c * x
	}
	return out
}
