package rules

import (
	"context"
	"testing"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

func days4(n int, faults ...synth.Fault) *trend.Unit {
	s := spec(synth.Marine, time.April, 5, faults)
	s.Days = n
	return synth.Simulate(s).Unit()
}

// Work grows with the intervals, the number of allocations does not: some per
// rule, some per day, none per interval.
func TestNoAllocationPerInterval(t *testing.T) {
	allocs := func(u *trend.Unit) float64 {
		return testing.AllocsPerRun(2, func() { Run(context.Background(), balance.Keep(u), Options{}) })
	}
	short, long := days4(14), days4(56)
	more := allocs(long) - allocs(short)
	if per := more / float64(long.Axis.N-short.Axis.N); per > 0.1 {
		t.Errorf("%.3f allocations an interval", per)
	}
}

func BenchmarkRules(b *testing.B) {
	u := days4(28)
	for _, part := range []struct {
		name string
		run  func()
	}{
		{"books", func() {
			k := balance.Keep(u)
			for _, d := range balance.Defs() {
				k.Get(d)
			}
		}},
		{"books and rules", func() { Run(context.Background(), balance.Keep(u), Options{}) }},
	} {
		b.Run(part.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				part.run()
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(u.Axis.N), "ns/interval")
		})
	}
}

// Two findings that describe one waste share it.
func TestTotalCountsNothingTwice(t *testing.T) {
	u := days4(28, synth.Fault{Kind: synth.DamperStuck, Severity: 0.5})
	u.Site.Prices = trend.Prices{Electricity: 0.2, Heat: 0.1, CoolingCOP: 3}
	set := Run(context.Background(), balance.Keep(u), Options{})
	var sum, most float64
	for _, f := range set.Findings {
		if f.Energy.KWh > 0 {
			sum += f.Energy.KWh
			most = max(most, f.Energy.KWh)
		}
	}
	if len(set.Findings) < 2 || !(set.Total.KWh < 0.999*sum) || !(set.Total.KWh >= 0.999*most) {
		t.Errorf("%d findings worth %.0f kWh together, the largest %.0f; the total is %.0f", len(set.Findings), sum, most, set.Total.KWh)
	}
	if en := set.Total; !(en.Low <= en.KWh && en.KWh <= en.High && en.CostLow <= en.Cost && en.Cost <= en.CostHigh) {
		t.Errorf("low and high do not enclose the total: %+v", en)
	}
}

func TestDisabledRule(t *testing.T) {
	u := days4(7)
	u.Plant.Rules = map[string]trend.RuleSetting{"runs-unoccupied": {Disabled: true, Reason: "24 h laboratory"}}
	for _, c := range Run(context.Background(), balance.Keep(u), Options{}).Coverage {
		if c.Rule == "runs-unoccupied" && (c.Verdict != finding.NotTestable || c.Reason != "disabled: 24 h laboratory") {
			t.Errorf("%v %q", c.Verdict, c.Reason)
		}
	}
}

// A parameter from site.toml changes the verdict that it should.
func TestParameterInForce(t *testing.T) {
	u := days4(14, synth.Fault{Kind: synth.HeatValvePasses, Severity: 0.25})
	verdict := func() finding.Verdict {
		return Run(context.Background(), balance.Keep(u), Options{Only: []string{"heat-valve-passes"}}).Coverage[0].Verdict
	}
	if got := verdict(); got != finding.Fault {
		t.Fatalf("%v at the default", got)
	}
	u.Plant.Rules = map[string]trend.RuleSetting{"heat-valve-passes": {Params: map[string]float64{"matters": 10}}}
	if got := verdict(); got == finding.Fault {
		t.Errorf("%v although only 10 K matters", got)
	}
}

// What a rule declares it reads on some unit, and it reads nothing else: Pass
// panics on that.
func TestDeclaredNeedsAreRead(t *testing.T) {
	seenBy := map[string]*seen{}
	for _, r := range All() {
		for _, c := range r.Cases {
			b := balance.Keep(c.Make())
			if len(r.Missing(b)) > 0 || r.Needs.Schedule && !b.OccupiedKnown() {
				continue
			}
			p := newPass(r, b, Options{Factor: 2})
			if s := seenBy[r.Name]; s != nil {
				p.seen = s
			}
			seenBy[r.Name] = p.seen
			for _, e := range r.Eval(p) {
				if e.Waste != nil {
					e.Waste(0, 1)
				}
			}
		}
		s := seenBy[r.Name]
		for _, d := range r.Needs.Balances {
			if !s.balances[d] {
				t.Errorf("%s declares balance %s and does not read it", r.Name, d.Name)
			}
		}
		if r.Needs.State && !s.state {
			t.Errorf("%s declares the operating state and does not read it", r.Name)
		}
		if r.Needs.Schedule && !s.schedule {
			t.Errorf("%s declares the schedule and does not read it", r.Name)
		}
		for _, c := range r.Needs.Commands {
			// What no default train has can be read on none of the cases.
			if !s.commands[c] && c != trend.Reheat && c != trend.Humidify {
				t.Errorf("%s declares the command of %s and does not read it", r.Name, c)
			}
		}
	}
}
