package ingest

import (
	"math"
	"slices"
	"sort"
	"time"

	"dewledger/ingest/trend"
)

// How long a value that is logged on change stands before it is stale, where
// nothing else is said (common practice, no source: loggers repeat an unchanged
// value at least daily, and an air temperature never rests for hours).
const (
	holdAnalogue = 4 * time.Hour
	holdCommand  = 24 * time.Hour
)

// maxIntervals bounds a unit's axis: 30 years of 1 min data.
const maxIntervals = 16 << 20

// series is one point's samples in UTC, ascending, one a stamp.
type series struct {
	ms  []int64
	val []float64
}

// niceSteps are the steps that controllers log in.
var niceSteps = []time.Duration{
	time.Second, 2 * time.Second, 5 * time.Second, 10 * time.Second, 15 * time.Second, 20 * time.Second, 30 * time.Second,
	time.Minute, 2 * time.Minute, 3 * time.Minute, 4 * time.Minute, 5 * time.Minute, 6 * time.Minute, 10 * time.Minute, 12 * time.Minute, 15 * time.Minute,
	20 * time.Minute, 30 * time.Minute, time.Hour, 2 * time.Hour, 3 * time.Hour, 4 * time.Hour, 6 * time.Hour, 12 * time.Hour, 24 * time.Hour,
}

// spacing is the median time between stamps and the share of them that are
// within a tenth of it.
func spacing(ms []int64) (median time.Duration, regular float64) {
	if len(ms) < 2 {
		return 0, 1
	}
	d := make([]int64, 0, len(ms)-1)
	for i := 1; i < len(ms); i++ {
		if x := ms[i] - ms[i-1]; x > 0 {
			d = append(d, x)
		}
	}
	if len(d) == 0 {
		return 0, 1
	}
	slices.Sort(d)
	m := d[len(d)/2]
	tol := max(m/10, 1000)
	n := 0
	for _, x := range d {
		if x >= m-tol && x <= m+tol {
			n++
		}
	}
	return time.Duration(m) * time.Millisecond, float64(n) / float64(len(d))
}

// stepOf is the step that a file is logged at: its median spacing, brought to a
// whole step that controllers log in where it is near one, else to whole
// seconds.
func stepOf(ms []int64) (step time.Duration, regular float64) {
	m, regular := spacing(ms)
	if m <= 0 {
		return 0, regular
	}
	best, off := time.Duration(0), time.Duration(math.MaxInt64)
	for _, s := range niceSteps {
		if d := (m - s).Abs(); d < off {
			best, off = s, d
		}
	}
	if regular < 0.6 || off <= best/20 {
		return best, regular
	}
	return max(m.Round(time.Second), time.Second), regular
}

// sortSamples puts rows in order of time and leaves one a stamp, the last
// written; it says how many were out of order and how many repeated.
func sortSamples(ms []int64, cols [][]float64) (outMS []int64, out [][]float64, unsorted, repeated int) {
	ascending, strict := true, true
	for i := 1; i < len(ms); i++ {
		if ms[i] < ms[i-1] {
			ascending = false
			unsorted++
		}
		if ms[i] <= ms[i-1] {
			strict = false
		}
	}
	if strict {
		return ms, cols, 0, 0
	}
	idx := make([]int, len(ms))
	for i := range idx {
		idx[i] = i
	}
	if !ascending {
		sort.SliceStable(idx, func(a, b int) bool { return ms[idx[a]] < ms[idx[b]] })
	}
	outMS = make([]int64, 0, len(ms))
	out = make([][]float64, len(cols))
	for c := range out {
		out[c] = make([]float64, 0, len(ms))
	}
	for _, i := range idx {
		if n := len(outMS); n > 0 && outMS[n-1] == ms[i] {
			repeated++
			for c := range cols { // the last one wins, unless it says nothing
				if v := cols[c][i]; v == v || out[c][n-1] != out[c][n-1] {
					out[c][n-1] = v
				}
			}
			continue
		}
		outMS = append(outMS, ms[i])
		for c := range cols {
			out[c] = append(out[c], cols[c][i])
		}
	}
	return outMS, out, unsorted, repeated
}

// descending reports whether most rows go back in time, as exports do that show
// the newest first.
func descending(ms []int64) bool {
	down, up := 0, 0
	for i := 1; i < len(ms); i++ {
		switch {
		case ms[i] < ms[i-1]:
			down++
		case ms[i] > ms[i-1]:
			up++
		}
	}
	return down > up
}

func (p *rawPart) reverse() {
	slices.Reverse(p.ms)
	for _, c := range p.cols {
		slices.Reverse(c)
	}
}

// hold says how a point's samples are carried forward onto the axis.
type hold struct {
	age     time.Duration // for which a sample stands beyond its own interval; 0: not at all
	changes bool          // logged on change
}

// holdOf judges how a point is logged against the step of the axis: as often as
// that, at a slower regular step, or on change.
func holdOf(ms []int64, step time.Duration, k trend.Kind, analogue bool) hold {
	m, regular := spacing(ms)
	if m <= step+step/2 && regular >= 0.5 || len(ms) < 3 {
		return hold{}
	}
	if regular >= 0.8 {
		if m > step+step/2 {
			return hold{age: m}
		}
		return hold{}
	}
	if m <= step && k != trend.Switch && analogue { // bursts: dense enough not to need holding
		return hold{age: holdAnalogue, changes: true}
	}
	if analogue {
		return hold{age: holdAnalogue, changes: true}
	}
	return hold{age: holdCommand, changes: true}
}

// onAxis lays samples out on the axis. Several samples in an interval: their
// mean, of a switch the last. One: that one. None: the last value while it
// holds, else the reason.
func onAxis(ax trend.Axis, s series, k trend.Kind, h hold, why []trend.Reason) (val []float64, reasons []trend.Reason) {
	val = make([]float64, ax.N)
	start, step := ax.Start.UnixMilli(), ax.Step.Milliseconds()
	// A stamp a moment before a boundary belongs to the interval it begins.
	slack := min(step/10, 30_000)
	if m, _ := spacing(s.ms); m > 0 && m < ax.Step*9/10 {
		slack = 0 // several an interval: each counts where it is
	}
	reasons = why
	lost := func(i int, r trend.Reason) {
		if reasons == nil {
			reasons = make([]trend.Reason, ax.N)
		}
		val[i], reasons[i] = math.NaN(), r
	}
	j := 0
	held, heldAt := math.NaN(), int64(math.MinInt64)
	for ; j < len(s.ms) && s.ms[j]+slack < start; j++ { // what holds into the first interval
		if v := s.val[j]; v == v {
			held, heldAt = v, s.ms[j]
		}
	}
	age := h.age.Milliseconds()
	for i := range val {
		end := start + int64(i+1)*step
		sum, n, last := 0.0, 0, 0.0
		bad := trend.Present
		for j < len(s.ms) && s.ms[j]+slack < end {
			if v := s.val[j]; v == v {
				sum, last = sum+v, v
				n++
				held, heldAt = v, s.ms[j]
			} else if r := reasonOf(v); r != trend.Gap || bad == trend.Present {
				bad = r
			}
			j++
		}
		switch {
		case n == 1 || (n > 1 && k == trend.Switch):
			val[i] = last
		case n > 1:
			val[i] = sum / float64(n)
		case bad != trend.Present && bad != trend.Gap:
			lost(i, bad)
			held = math.NaN()
		case age > 0 && held == held && end-step-heldAt < age:
			val[i] = held
		case age > 0 && held == held && h.changes:
			lost(i, trend.Stale)
		default:
			lost(i, trend.Gap)
		}
	}
	return val, reasons
}

// resolution is the decimal step of which all differences between the values are
// multiples, 1, 2, 2.5 or 5 of a decimal place: what the point was logged in. 0
// where there is none down to 1e-4, or where the values never differ.
func resolution(vals []float64) float64 {
	scale := 1.0
	for d := 0; d <= 4; d++ {
		if d > 0 {
			scale *= 10
		}
		step, ok := commonStep(vals, scale)
		if !ok {
			continue
		}
		switch step { // what loggers round to; a larger step is chance, of a point that rests at few values
		case 0, 1, 2, 5, 25, 125:
			return float64(step) / scale
		}
		return 1 / scale
	}
	return 0
}

func commonStep(vals []float64, scale float64) (int64, bool) {
	var g, first int64
	started := false
	for _, v := range vals {
		if v != v {
			continue
		}
		x := v * scale
		r := math.Round(x)
		// A value that went through a 32-bit float is off by 6e-8 of itself.
		if math.Abs(x-r) > 1e-9*scale+1.2e-7*math.Abs(x) || math.Abs(r) > 1e15 {
			return 0, false
		}
		n := int64(r)
		if !started {
			first, started = n, true
			continue
		}
		d := n - first
		if d < 0 {
			d = -d
		}
		for d != 0 { // greatest common divisor
			g, d = d, g%d
		}
	}
	return g, true
}
