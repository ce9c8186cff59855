package rules

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// judgePass is a pass of a plain rule over n five-minute intervals.
func judgePass(n int) *Pass {
	r := &Rule{Name: "plain-rule", Unit: "K", Doc: Doc{When: "time under test"},
		Params: []Param{matters("K", 1, 0, 10, "x"), persist(60, "x")}}
	u := &trend.Unit{Name: "AHU-1", Site: trend.Site{Zone: time.UTC},
		Axis: trend.Axis{Start: time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC), Step: 5 * time.Minute, N: n}}
	return newPass(r, balance.Keep(u), Options{Factor: 2})
}

// effect is evidence with a value, an offset and a noise uncertainty everywhere.
func effect(n int, off, noise float64, val func(i int) float64) *Evidence {
	s := &balance.Series{Name: "effect", Unit: "K", Val: make([]float64, n), Off: make([]float64, n), Noise: make([]float64, n),
		Terms: []balance.Term{{Role: trend.SATemp, G: make([]float64, n)}}}
	for i := range n {
		s.Val[i], s.Off[i], s.Noise[i], s.Terms[0].G[i] = val(i), off, noise, off
	}
	return &Evidence{Effect: s, Applies: always(n)}
}

func TestJudge(t *testing.T) {
	const n = 12 * 24 * 7
	between := func(a, b int, in float64) func(int) float64 {
		return func(i int) float64 {
			if i >= a && i < b {
				return in
			}
			return 0
		}
	}
	for _, c := range []struct {
		name   string
		e      *Evidence
		want   finding.Verdict
		reason string
		spans  int
		hours  float64
	}{
		{"nothing there", effect(n, 0.2, 0.05, between(0, 0, 0)), finding.Pass, "", 0, 0},
		{"one long fault", effect(n, 0.2, 0.05, between(300, 500, 3)), finding.Fault, "", 1, 200. / 12},
		{"too short", effect(n, 0.2, 0.05, between(300, 308, 3)), finding.Pass, "", 0, 0},
		{"one wild sample", effect(n, 0.2, 0.05, between(300, 301, 100)), finding.Pass, "", 0, 0},
		{"under what matters", effect(n, 0.2, 0.05, between(0, n, 0.9)), finding.Pass, "", 0, 0},
		{"over what matters, within uncertainty", effect(n, 0.8, 0.05, between(0, n, 1.5)), finding.NotTestable, "uncertainty:", 0, 0},
		{"never asked", func() *Evidence { e := effect(n, 0.2, 0.05, between(0, n, 5)); e.Applies = make([]bool, n); return e }(), finding.NotTestable, "condition: the period had no time under test", 0, 0},
		{"asked for an hour", func() *Evidence {
			e := effect(n, 0.2, 0.05, between(0, 0, 5))
			for i := 12; i < n; i++ {
				e.Applies[i] = false
			}
			return e
		}(), finding.NotTestable, "condition: only 1.0 h", 0, 0},
		{"readings missing", effect(n, 0.2, 0.05, func(int) float64 { return math.NaN() }), finding.NotTestable, "condition:", 0, 0},
		{"bound far inside", func() *Evidence { e := effect(n, 0.2, 0.05, between(0, n, -4)); e.Bound = true; return e }(), finding.NotTestable, "uncertainty:", 0, 0},
		{"half an hour each morning", func() *Evidence {
			e := effect(n, 0.2, 0.05, between(0, n, 3))
			for i := range n {
				e.Applies[i] = i%288 < 6
			}
			return e
		}(), finding.Fault, "", 7, 3.5},
		{"reading near its limit", func() *Evidence { e := effect(n, 0.3, 0.05, between(0, n, 0.8)); e.Ungated = true; return e }(), finding.NotTestable, "uncertainty:", 0, 0},
		{"reading clear of its limit", func() *Evidence { e := effect(n, 0.3, 0.05, between(0, n, -2)); e.Ungated = true; return e }(), finding.Pass, "", 0, 0},
		{"reading over its limit, however unsure", func() *Evidence { e := effect(n, 3, 0.05, between(0, n, 1.2)); e.Ungated = true; return e }(), finding.Fault, "", 1, n / 12.},
	} {
		r := judge(judgePass(n), c.e)
		if r.verdict != c.want || !strings.HasPrefix(r.reason, c.reason) {
			t.Errorf("%s: %v %q, want %v %q", c.name, r.verdict, r.reason, c.want, c.reason)
		}
		if len(r.spans) != c.spans || math.Abs(float64(r.nflagged)/12-c.hours) > 0.5 {
			t.Errorf("%s: %d spans, %.1f h flagged; want %d, %.1f", c.name, len(r.spans), float64(r.nflagged)/12, c.spans, c.hours)
		}
		if r.verdict == finding.Pass && math.IsNaN(r.detectable) {
			t.Errorf("%s: a pass that does not say what it would have seen", c.name)
		}
		for _, s := range r.spans {
			if s.I >= s.J || !s.Start.Before(s.End) || math.IsNaN(s.Effect) || math.IsNaN(s.Uncertainty) {
				t.Errorf("%s: span %+v", c.name, s)
			}
		}
	}
}

// What the judge calls detectable must be what it detects: of simulated weeks
// whose sensors have random offsets, with autocorrelated noise (lag-1 0.6), 95 %
// are to be flagged at that effect, and few with none.
func TestDetectableIsHonest(t *testing.T) {
	const n, weeks = 12 * 24 * 7, 400
	for _, c := range []struct{ off, noise float64 }{{0.3, 0.3}, {0.8, 0.2}, {0.1, 1.0}} {
		rng := rand.New(rand.NewPCG(1, uint64(1000*c.off)))
		month := func(truth float64) *Evidence {
			b, x := c.off*rng.NormFloat64(), 0.0
			return effect(n, c.off, c.noise, func(int) float64 {
				x = 0.6*x + 0.8*c.noise*rng.NormFloat64()
				return truth + b + x
			})
		}
		p := judgePass(n)
		seen, false1 := 0, 0
		for range weeks {
			e := month(0)
			r := judge(p, e)
			if r.verdict == finding.Fault {
				false1++
			}
			if judge(p, month(r.detectable)).verdict == finding.Fault {
				seen++
			}
		}
		// 400 weeks: the standard error of 95 % is 1.1 %.
		if got := float64(seen) / weeks; got < 0.92 {
			t.Errorf("offset %v, noise %v: %.3f flagged at what is called detectable, want 0.95", c.off, c.noise, got)
		}
		// One-sided k = 2 is 2.3 % for a constant offset; noise adds little.
		if got := float64(false1) / weeks; got > 0.045 {
			t.Errorf("offset %v, noise %v: %.3f flagged without a fault", c.off, c.noise, got)
		}
	}
}

func TestChainKeepsRawFlags(t *testing.T) {
	ax := trend.Axis{Start: time.Unix(0, 0).UTC(), Step: time.Minute, N: 200}
	raw, valid := make([]bool, 200), always(200)
	for i := 20; i < 60; i++ {
		raw[i] = i%3 != 0 // chatter
	}
	for i := 150; i < 155; i++ {
		raw[i] = true // too short
	}
	flagged, spans := chain(ax, raw, valid, 20)
	if len(spans) != 1 || spans[0].I != 20 || spans[0].J != 60 {
		t.Fatalf("spans %+v", spans)
	}
	for i := range flagged {
		if want := raw[i] && i < 100; flagged[i] != want {
			t.Fatalf("interval %d: %v, want %v", i, flagged[i], want)
		}
	}
}

func TestPriority(t *testing.T) {
	sure := &finding.Finding{Confidence: 0.9, Magnitude: 2, Uncertainty: 0.5, Matters: 1}
	unsure := &finding.Finding{Confidence: 0.5, Magnitude: 2, Uncertainty: 1.5, Matters: 1}
	barely := &finding.Finding{Confidence: 0.9, Magnitude: 2.4, Uncertainty: 2, Matters: 1}
	for _, c := range []struct {
		h           Harm
		f           *finding.Finding
		days, share float64
		want        finding.Priority
	}{
		{Freezes, unsure, 0, 0, finding.Urgent},
		{Wastes, barely, 0.9, 0.2, finding.Medium},
		{Wets, sure, 0, 0, finding.Urgent},
		{Wets, unsure, 0, 0, finding.Medium},
		{Wastes, sure, 0.9, 0.01, finding.High},
		{Wastes, sure, 0.1, 0.01, finding.Medium},
		{Wastes, sure, 0.1, 0.10, finding.Urgent},
		{Misleads, sure, 1, 0, finding.Medium},
		{Bookkeeping, sure, 1, 0, finding.Low},
	} {
		if got := priority(c.h, c.f, c.days, c.share); got != c.want {
			t.Errorf("harm %d, days %v, share %v: %v, want %v", c.h, c.days, c.share, got, c.want)
		}
	}
}
