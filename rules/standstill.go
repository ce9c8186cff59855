package rules

import (
	"math"
	"time"

	"dewledger/rules/balance"
)

// A reading that stands still is no residual but a run of intervals. The two
// rules that look for one share the search.

// run is a stretch [i, j) in which the counted readings stay within a spread.
type run struct{ i, j, n int }

// runs lists the longest stretches in which val, where counted, stays within
// spread, at least the given number of counted intervals long. Intervals that
// are not counted neither break a run nor lengthen it.
func runs(val []float64, counted []bool, spread float64, least int) []run {
	var out []run
	begin, n, last := -1, 0, -1
	lo, hi := 0.0, 0.0
	flush := func() {
		if begin >= 0 && n >= least {
			out = append(out, run{begin, last + 1, n})
		}
		begin, n = -1, 0
	}
	for i, ok := range counted {
		if !ok || math.IsNaN(val[i]) {
			continue
		}
		if begin >= 0 && math.Max(hi, val[i])-math.Min(lo, val[i]) <= spread {
			lo, hi = math.Min(lo, val[i]), math.Max(hi, val[i])
			n, last = n+1, i
			continue
		}
		flush()
		begin, n, last, lo, hi = i, 1, i, val[i], val[i]
	}
	flush()
	return out
}

// moved is how far a reading ranges within [i, j) where counted: the difference
// of its 95th and 5th percentile, so that one wild sample moves nothing.
func moved(val []float64, counted []bool, i, j int) float64 {
	if val == nil {
		return 0
	}
	mask := make([]bool, len(val))
	copy(mask[i:j], counted[i:j])
	lo, hi := medianWhere(val, mask, 0.05), medianWhere(val, mask, 0.95)
	if math.IsNaN(lo) {
		return 0
	}
	return hi - lo
}

// couldTell reports whether any stretch of the given number of intervals offers
// a neighbour that moves: without one, a standstill would have shown nothing.
func couldTell(n, least int, movesIn func(i, j int) bool) bool {
	for i := 0; i+least <= n; i += max(1, least/2) {
		if movesIn(i, i+least) {
			return true
		}
	}
	return false
}

// standstill makes evidence of runs: the effect is the length of the run that
// an interval lies in, in hours.
func standstill(p *Pass, name string, val []float64, counted []bool, found []run, sees float64) Evidence {
	h := p.Axis().Hours()
	n := p.N()
	s := &balance.Series{Name: name, Unit: "h", Val: make([]float64, n), Off: make([]float64, n), Noise: make([]float64, n)}
	flags := make([]bool, n)
	for i := range n {
		if math.IsNaN(val[i]) {
			s.Val[i] = math.NaN()
		}
		s.Noise[i] = h / math.Sqrt(3) // a run ends somewhere within an interval
	}
	for _, r := range found {
		for i := r.i; i < r.j; i++ {
			if counted[i] && !math.IsNaN(val[i]) {
				s.Val[i] = float64(r.n) * h
				flags[i] = true
			}
		}
	}
	return Evidence{Effect: s, Applies: counted, Flags: flags, Sees: sees}
}

func (p *Pass) intervals(hours float64) int {
	return p.Axis().Intervals(time.Duration(hours * float64(time.Hour)))
}
