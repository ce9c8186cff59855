package balance

import (
	"math"
	"slices"
)

// sampleSize bounds how many values a robust scale or median looks at: its own
// standard error is then under 3 %, and the cost does not grow with the period.
const sampleSize = 2048

// sample copies the values that are there, and that keep holds, evenly thinned
// to sampleSize, into the books' scratch space: use it before the next call.
func (b *Books) sample(v []float64, keep []bool) []float64 {
	if b.scratch == nil {
		b.scratch = make([]float64, 0, sampleSize)
	}
	out := b.scratch[:0]
	count := 0
	for i, x := range v {
		if x == x && (keep == nil || keep[i]) {
			count++
		}
	}
	stride := (count + sampleSize - 1) / sampleSize
	k := 0
	for i, x := range v {
		if x == x && (keep == nil || keep[i]) {
			if k == 0 {
				out = append(out, x)
			}
			if k++; k >= stride {
				k = 0
			}
		}
	}
	b.scratch = out
	return out
}

// median reorders v. It is NaN for an empty v.
func median(v []float64) float64 {
	n := len(v)
	if n == 0 {
		return math.NaN()
	}
	hi := selectK(v, n/2)
	if n%2 == 1 {
		return hi
	}
	return (hi + slices.Max(v[:n/2])) / 2
}

// selectK is the k-th smallest of v (from 0), found by partition (Hoare 1961).
// It reorders v so that nothing before k is larger.
func selectK(v []float64, k int) float64 {
	lo, hi := 0, len(v)-1
	for lo < hi {
		p := v[lo+(hi-lo)/2]
		i, j := lo, hi
		for i <= j {
			for v[i] < p {
				i++
			}
			for v[j] > p {
				j--
			}
			if i <= j {
				v[i], v[j] = v[j], v[i]
				i++
				j--
			}
		}
		switch {
		case k <= j:
			hi = j
		case k >= i:
			lo = i
		default:
			return v[k]
		}
	}
	return v[k]
}

// madScale turns a median absolute value into a standard deviation, for normal
// values: 1/Φ⁻¹(3/4).
const madScale = 1.4826

// shortest is the shortest half of v: its middle and, from its width, a
// standard deviation for normal values. Up to half of the values may be
// anywhere else without carrying it off: a share e of them far away widens the
// scale to that of the middle 0.5/(1-e) of the rest, 1.4 times at a quarter, 2.5
// times at 45 % (Rousseeuw and Leroy, Robust Regression and Outlier Detection,
// 1987, chapter 4; Grübel 1988 for the scale). It sorts v, and is NaN for fewer
// than two values.
func shortest(v []float64) (mid, scale float64) {
	n := len(v)
	if n < 2 {
		return math.NaN(), math.NaN()
	}
	slices.Sort(v)
	h := n/2 + 1
	best, width := 0, math.Inf(1)
	for i := 0; i+h <= n; i++ {
		if w := v[i+h-1] - v[i]; w < width {
			best, width = i, w
		}
	}
	return (v[best] + v[best+h-1]) / 2, width / 2 * madScale
}

// quantile is the q-th quantile of sorted v, NaN for none.
func quantile(v []float64, q float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	x := q * float64(len(v)-1)
	i := int(x)
	if i+1 >= len(v) {
		return v[len(v)-1]
	}
	return v[i] + (x-float64(i))*(v[i+1]-v[i])
}
