package rules

import (
	"fmt"
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
	"dewledger/rules/finding"
)

// The judge turns evidence into verdicts, the same way for every rule.
//
// An interval is flagged where the effect, averaged over the time that it must
// persist, exceeds both what matters and its gate,
//
//	gate = sqrt((k·u_offset)² + (z·u_noise)²)
//
// the offset part in full, the noise part over the square root of the effective
// number of samples, n(1-rho)/(1+rho). The offset has one chance to deceive in
// the whole period; noise has a fresh one in every stretch, so its factor z
// holds the chance of a false flag in the period to that of k (Šidák 1967, for
// as many stretches as the tested time has). Averaging must not let one wild
// sample speak for an hour, so the interval's own effect has to reach half of
// what matters as well.
//
// Flags are joined over short interruptions; what lasts at least persist is a
// fault. Time in which the question did not apply neither counts nor breaks the
// chain for a day: a valve that leaks shows for half an hour each morning.
//
// Without a fault the verdict is a pass only if an effect of twice what matters
// would have been flagged in 95 % of such months:
//
//	detectable = max(matters, gate) + 1.645·u <= 2·matters
//
// with u the median uncertainty of such an average (JCGM 100:2008 for u; the
// quantile is the normal one). Otherwise it is not testable, with the reason.
const (
	joinGap     = 30 * time.Minute // unflagged time that does not break a fault
	bridgeGap   = 24 * time.Hour   // time without the question that does not break it
	splitGap    = time.Hour        // a reported span is cut at a longer gap of any kind
	leastTested = 3.0              // hours below which nothing passes
	quantile95  = 1.645
	hurry       = 1.5 // times its expanded uncertainty: an effect less sure than this is never high or urgent
	passFactor  = 2.0 // a pass claims that this many times what matters would have been seen
)

// ruling is the judge's answer to one piece of evidence.
type ruling struct {
	e          *Evidence
	verdict    finding.Verdict
	reason     string
	asked      int // intervals in which the question applied
	tested     int // of those, intervals with an effect
	detectable float64
	flagged    []bool
	nflagged   int
	spans      []finding.Span
	mag, u     float64 // mean over the flagged time, and its standard uncertainty
	confidence float64
	band       []float64 // expanded uncertainty, interval by interval, for the chart
}

func judge(p *Pass, e *Evidence) ruling {
	ax := p.Axis()
	n := ax.N
	if len(e.Effect.Val) != n || len(e.Applies) != n {
		panic(fmt.Sprintf("rules: %s: evidence is not on the unit's axis", p.rule.Name))
	}
	r := ruling{e: e, detectable: math.NaN(), mag: math.NaN(), u: math.NaN()}
	valid := make([]bool, n)
	for i, a := range e.Applies {
		if !a {
			continue
		}
		r.asked++
		if !math.IsNaN(e.Effect.Val[i]) {
			valid[i] = true
			r.tested++
		}
	}
	if r.tested == 0 {
		switch {
		case r.asked > 0 && e.Blind != "":
			r.reason = "condition: " + e.Blind
		case r.asked > 0:
			r.reason = "condition: " + p.rule.Doc.When + " occurred, but the readings behind it were missing"
		default:
			r.reason = "condition: the period had no " + p.rule.Doc.When
		}
		return r
	}

	lasting := ax.Intervals(p.persistence())
	av := smooth(e, valid, lasting, p.factor)
	raw := e.Flags
	if raw == nil {
		raw = flag(p, e, valid, av)
	} else {
		raw = and(raw, valid)
	}
	r.flagged, r.spans = chain(ax, raw, valid, lasting)
	for _, f := range r.flagged {
		if f {
			r.nflagged++
		}
	}
	r.detectable = detectable(p, e, valid, av)
	r.band = make([]float64, n)
	for i := range r.band {
		r.band[i] = p.factor * e.Effect.U(i)
	}

	if r.nflagged > 0 {
		r.verdict = finding.Fault
		m := e.Effect.Mean(0, n, r.flagged)
		r.mag, r.u = m.Val, m.U()
		for k := range r.spans {
			s := &r.spans[k]
			sm := e.Effect.Mean(s.I, s.J, r.flagged)
			s.Effect, s.Uncertainty = sm.Val, p.factor*sm.U()
		}
		r.confidence = confidence(r.mag, r.u, p.Param(Matters)) * float64(r.tested) / float64(r.asked)
		return r
	}
	r.verdict, r.reason = passOrNot(p, e, &r, valid, av)
	return r
}

// average is the effect over the time that it must persist, centred on each
// interval; NaN where the interval is not valid.
type average struct {
	mean []float64
	u    []float64 // standard uncertainty of the mean
	gate []float64 // what the mean has to exceed to be more than chance
}

func smooth(e *Evidence, valid []bool, window int, k float64) average {
	n := len(valid)
	av := average{make([]float64, n), make([]float64, n), make([]float64, n)}
	s := e.Effect
	rho := persistenceOfNoise(s.Val, valid, window)
	tested := 0
	ref := 0.0 // keeps the sum of squares well conditioned
	for i, ok := range valid {
		if ok {
			if tested == 0 {
				ref = s.Val[i]
			}
			tested++
		}
	}
	z := familyFactor(k, float64(tested)/float64(window))
	var cnt int
	var sum, sq, nz float64
	add := func(i int, sign float64) {
		if i < 0 || i >= n || !valid[i] {
			return
		}
		d := s.Val[i] - ref
		cnt += int(sign)
		sum += sign * d
		sq += sign * d * d
		nz += sign * s.Noise[i] * s.Noise[i]
	}
	back, ahead := (window-1)/2, window/2
	for i := 0; i < ahead; i++ {
		add(i, 1)
	}
	for i := range n {
		add(i+ahead, 1)
		add(i-back-1, -1)
		if !valid[i] {
			av.mean[i], av.u[i], av.gate[i] = math.NaN(), math.NaN(), math.NaN()
			continue
		}
		c := float64(cnt)
		m := sum / c
		eff := math.Max(1, c*(1-rho)/(1+rho))
		noise := math.Max(nz/c, 0)
		if eff > 1.5 { // fewer say nothing of the spread about their own mean
			noise = math.Max(noise, (sq/c-m*m)/(1-1/eff))
		}
		off2, noise2 := s.Off[i]*s.Off[i], noise/eff
		av.mean[i] = m + ref
		av.u[i] = math.Sqrt(off2 + noise2)
		av.gate[i] = math.Sqrt(k*k*off2 + z*z*noise2)
	}
	return av
}

// familyFactor is the factor that gives m independent trials together the
// one-sided chance of exceeding that k gives one (Šidák 1967).
func familyFactor(k, m float64) float64 {
	if m <= 1 {
		return k
	}
	one := 0.5 * math.Erfc(k/math.Sqrt2)
	each := -math.Expm1(math.Log1p(-one) / m)
	return math.Sqrt2 * math.Erfcinv(2*each)
}

// persistenceOfNoise is the lag-1 autocorrelation of what is left of the effect
// when its average over the window is taken off, between 0 and 0.95, freed of
// the bias that taking a mean of few samples off brings: E(r) is about
// rho − (1 + 4·rho)/n (Kendall 1954).
func persistenceOfNoise(val []float64, valid []bool, window int) float64 {
	if window < 3 {
		return 0
	}
	var c0, c1, sum float64
	var cnt int
	back, ahead := (window-1)/2, window/2
	add := func(i int, sign float64) {
		if i >= 0 && i < len(val) && valid[i] {
			sum += sign * val[i]
			cnt += int(sign)
		}
	}
	for i := 0; i < ahead; i++ {
		add(i, 1)
	}
	last, haveLast := 0.0, false
	for i := range val {
		add(i+ahead, 1)
		add(i-back-1, -1)
		if !valid[i] {
			haveLast = false
			continue
		}
		d := val[i] - sum/float64(cnt)
		c0 += d * d
		if haveLast {
			c1 += d * last
		}
		last, haveLast = d, true
	}
	if c0 <= 0 {
		return 0
	}
	r := c1 / c0
	if w := float64(window); w > 5 {
		r = (r + 1/w) / (1 - 4/w)
	}
	return math.Min(math.Max(r, 0), 0.95)
}

func flag(p *Pass, e *Evidence, valid []bool, av average) []bool {
	matters := p.Param(Matters)
	out := make([]bool, len(valid))
	for i, ok := range valid {
		switch {
		case !ok:
		case e.Ungated:
			out[i] = av.mean[i] > matters
		default:
			out[i] = av.mean[i] > math.Max(matters, av.gate[i]) && e.Effect.Val[i] > matters/2
		}
	}
	return out
}

// chain joins raw flags into faults that last, and cuts those into reported
// spans. The flags that come back are the raw ones inside a kept fault.
func chain(ax trend.Axis, raw, valid []bool, lasting int) (flagged []bool, spans []finding.Span) {
	n := len(raw)
	flagged = make([]bool, n)
	join, bridge, split := ax.Intervals(joinGap), ax.Intervals(bridgeGap), ax.Intervals(splitGap)
	begin, count, quiet, idle := -1, 0, 0, 0
	last := -1
	closeRun := func() {
		if begin >= 0 && count >= lasting {
			spans = append(spans, cut(ax, raw[:last+1], begin, split)...)
			for i := begin; i <= last; i++ {
				flagged[i] = raw[i]
			}
		}
		begin, count, quiet, idle = -1, 0, 0, 0
	}
	for i := range n {
		switch {
		case raw[i]:
			if begin < 0 {
				begin = i
			}
			count++
			quiet, idle, last = 0, 0, i
		case begin < 0:
		case valid[i]:
			if quiet++; quiet > join {
				closeRun()
			}
		default:
			if idle++; idle > bridge {
				closeRun()
			}
		}
	}
	closeRun()
	return flagged, spans
}

// cut lists the flagged stretches from begin on, joined over gaps of up to
// split intervals.
func cut(ax trend.Axis, raw []bool, begin, split int) []finding.Span {
	var out []finding.Span
	i, last := begin, begin
	flush := func() {
		out = append(out, finding.Span{Start: ax.At(i), End: ax.At(last + 1), I: i, J: last + 1})
	}
	for k := begin + 1; k < len(raw); k++ {
		if !raw[k] {
			continue
		}
		if k-last > split {
			flush()
			i = k
		}
		last = k
	}
	flush()
	return out
}

func detectable(p *Pass, e *Evidence, valid []bool, av average) float64 {
	if e.Flags != nil {
		return e.Sees
	}
	u := medianWhere(av.u, valid, 0.5)
	if e.Ungated {
		return p.Param(Matters) + quantile95*u
	}
	d := math.Max(p.Param(Matters), medianWhere(av.gate, valid, 0.5)) + quantile95*u
	if e.Bound {
		// The truth may be this far inside the bound unseen.
		d += math.Max(0, -medianWhere(av.mean, valid, 0.9))
	}
	return d
}

func medianWhere(v []float64, where []bool, q float64) float64 {
	s := make([]float64, 0, len(v))
	for i, ok := range where {
		if ok && !math.IsNaN(v[i]) {
			s = append(s, v[i])
		}
	}
	if len(s) == 0 {
		return math.NaN()
	}
	slices.Sort(s)
	return s[int(q*float64(len(s)-1)+0.5)]
}

func passOrNot(p *Pass, e *Evidence, r *ruling, valid []bool, av average) (finding.Verdict, string) {
	matters := p.Param(Matters)
	hours := float64(r.tested) * p.Axis().Hours()
	need := math.Max(leastTested, p.persistence().Hours())
	if hours < need {
		return finding.NotTestable, fmt.Sprintf("condition: only %s h of %s; %s h are needed",
			finding.Significant(hours, 2), p.rule.Doc.When, finding.Significant(need, 2))
	}
	if e.Short != "" {
		return finding.NotTestable, "condition: " + e.Short
	}
	if e.Ungated {
		for i, ok := range valid {
			if ok && av.mean[i]+p.factor*av.u[i] > matters {
				return finding.NotTestable, fmt.Sprintf("uncertainty: at %s the reading was nearer to the limit than its ± %s",
					p.Axis().At(i).In(p.Site().Zone).Format("2006-01-02 15:04"),
					p.words.Value(p.factor*av.u[i], p.rule.Unit, 2))
			}
		}
		return finding.Pass, ""
	}
	if math.IsNaN(r.detectable) {
		return finding.NotTestable, "uncertainty: not even a whole fault would have shown for sure"
	}
	if r.detectable > passFactor*matters {
		why := "its uncertainty drowns it"
		if e.Bound {
			why = "the outdoor share is not known well enough to see less"
		}
		return finding.NotTestable, fmt.Sprintf("uncertainty: only %s or more would have shown, %s is asked; %s",
			p.words.Value(r.detectable, p.rule.Unit, 2), p.words.Value(passFactor*matters, p.rule.Unit, 2), why)
	}
	return finding.Pass, ""
}

// confidence is the probability that the effect exceeds what matters.
func confidence(effect, u, matters float64) float64 {
	if u <= 0 {
		if effect > matters {
			return 1
		}
		return 0
	}
	return 0.5 * math.Erfc(-(effect-matters)/(u*math.Sqrt2))
}

// priority is how soon a person should look: by what the fault harms, how many
// of the days it shows on, and what share of the unit's energy it is worth.
func priority(h Harm, f *finding.Finding, dayShare, energyShare float64) finding.Priority {
	var p finding.Priority
	switch h {
	case Freezes:
		return finding.Urgent
	case Wets:
		p = finding.High
		if f.Magnitude-f.Uncertainty > f.Matters {
			p = finding.Urgent
		}
	case Wastes:
		p = finding.Medium
		if dayShare >= 0.6 {
			p = finding.High
		}
		if energyShare > 0.05 {
			p = finding.Urgent
		}
	case Misleads:
		p = finding.Medium
	case Bookkeeping:
		p = finding.Low
	}
	// Two standard uncertainties are reached by chance on one healthy unit in
	// forty, and a fleet has many: to be hurried for, an effect has to stand at half
	// as much again.
	if (f.Confidence < 0.6 || f.Magnitude < hurry*f.Uncertainty) && p > finding.Low {
		p = min(p, finding.High) - 1
	}
	return p
}
