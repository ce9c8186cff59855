package balance

import "math"

// Contrast is the difference of the series' means over two sets of intervals,
// high less low, with its standard uncertainty: each sensor's offset enters
// with the difference of its mean contributions, so what is common to both sets
// cancels; the noise parts add in quadrature. Empty sets give NaN.
func (s *Series) Contrast(high, low []bool) Mean {
	n := len(s.Val)
	h, l := s.Mean(0, n, high), s.Mean(0, n, low)
	if h.N == 0 || l.N == 0 {
		return Mean{Val: math.NaN(), Off: math.NaN(), Noise: math.NaN()}
	}
	var off float64
	for k := range s.Terms {
		t := &s.Terms[k]
		d := t.sum(0, n, high, s.Val)/float64(h.N) - t.sum(0, n, low, s.Val)/float64(l.N)
		off += d * d
	}
	return Mean{N: h.N + l.N, Val: h.Val - l.Val, Off: math.Sqrt(off), Noise: math.Hypot(h.Noise, l.Noise), NEff: math.Min(h.NEff, l.NEff)}
}
