package rules

import (
	"math"
	"time"

	"dewledger/rules/balance"
)

// What a damper does shows where its command swings: the search for such
// stretches.

// window is a stretch [i, j) with settled time at both ends of a command swing.
type window struct {
	i, j      int
	low, high []bool
	ratio, u  float64 // change of the fraction over the swing, and its standard uncertainty
}

// near is how close to an end of the swing a command counts as there: closer
// than that, what the share still varies by is not the command's doing.
const near = 0.06

// sharp is the uncertainty of the ratio at which a window needs no more days: at
// it a damper that stands still is seen in 95 % of such windows.
const sharp = 0.08

// known is how well an interval's fraction has to be known to count: in mild
// weather, where the streams differ by little, the mixed sensor's offset alone
// would swing it.
const known = 0.12

// swingWindows joins local days, up to a week, until the command has swung by
// at least least with an hour or more near each end and the answer is sharp.
func swingWindows(p *Pass, f *balance.Series, cmd []float64, usable []bool, least float64) []window {
	n, ax, zone := p.N(), p.Axis(), p.Site().Zone
	ok := make([]bool, n)
	for i := range n {
		ok[i] = usable[i] && !math.IsNaN(cmd[i]) && f.U(i) <= known
	}
	var out []window
	begin, days := 0, 0
	day := ax.At(0).In(zone).YearDay()
	for i := 1; i <= n; i++ {
		if i < n {
			today := ax.At(i).In(zone).YearDay()
			if today == day {
				continue
			}
			day = today
		}
		days++
		w, found := swing(f, cmd, ok, begin, i, least, ax.Intervals(time.Hour))
		if found && (w.u <= sharp || days >= 7 || i == n) {
			out = append(out, w)
		}
		if found && w.u <= sharp || days >= 7 {
			begin, days = i, 0
		}
	}
	return out
}

// swing compares the ends of the command's swing within [i, j).
func swing(f *balance.Series, cmd []float64, ok []bool, i, j int, least float64, need int) (window, bool) {
	w := window{i: i, j: j, low: make([]bool, len(cmd)), high: make([]bool, len(cmd))}
	within := make([]bool, len(cmd))
	copy(within[i:j], ok[i:j])
	lo, hi := medianWhere(cmd, within, 0.1), medianWhere(cmd, within, 0.9)
	if !(hi-lo >= least) {
		return w, false
	}
	nl, nh := 0, 0
	for k := i; k < j; k++ {
		switch {
		case !within[k]:
		case math.Abs(cmd[k]-lo) <= near:
			w.low[k] = true
			nl++
		case math.Abs(cmd[k]-hi) <= near:
			w.high[k] = true
			nh++
		}
	}
	if nl < need || nh < need {
		return w, false
	}
	span := meanWhere(cmd, w.high) - meanWhere(cmd, w.low)
	c := f.Contrast(w.high, w.low)
	w.ratio, w.u = c.Val/span, c.U()/span
	return w, true
}

func meanWhere(v []float64, where []bool) float64 {
	var sum float64
	var n int
	for i, k := range where {
		if k && !math.IsNaN(v[i]) {
			sum += v[i]
			n++
		}
	}
	return sum / float64(n)
}

func nans(n int) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = math.NaN()
	}
	return v
}
