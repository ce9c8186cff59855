// Package ruletest runs rules' cases, and multiplies each: a verdict must not
// depend on the calendar, and a rule must not claim anything once a reading that
// it needs is gone.
package ruletest

import (
	"context"
	"slices"
	"testing"
	"time"

	"dewledger/ingest/trend"
	"dewledger/rules"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// Verdict runs one rule on one unit.
func Verdict(r *rules.Rule, u *trend.Unit) (finding.Coverage, []finding.Finding) {
	set := rules.Run(context.Background(), balance.Keep(u), rules.Options{Only: []string{r.Name}})
	return set.Coverage[0], set.Findings
}

// Cases runs every case of a rule, each in its variants.
func Cases(t *testing.T, r *rules.Rule) {
	for _, c := range r.Cases {
		t.Run(c.Name, func(t *testing.T) {
			u := c.Make()
			cov, found := Verdict(r, u)
			if cov.Verdict != c.Want {
				t.Errorf("verdict %v (%s; detectable %.3g %s), want %v", cov.Verdict, cov.Reason, cov.Detectable, cov.UnitOf, c.Want)
				for _, f := range found {
					t.Logf("%s: %.3g ± %.2g %s, %.1f of %.1f h", f.Component, f.Magnitude, f.Uncertainty, f.UnitOf, f.FaultHours, f.TestedHours)
				}
				return
			}
			shifted := c.Make()
			shifted.Axis.Start = shifted.Axis.Start.Add(7 * 24 * time.Hour)
			if got, _ := Verdict(r, shifted); got.Verdict != cov.Verdict {
				t.Errorf("a week later the verdict is %v, was %v", got.Verdict, cov.Verdict)
			}
			removeEach(t, r, c, cov)
		})
	}
}

// removeEach takes one role away at a time. A rule that called for it must say
// so, or answer as before from what is left; it must never find a fault where
// there was none.
func removeEach(t *testing.T, r *rules.Rule, c rules.Case, before finding.Coverage) {
	whole := c.Make()
	for _, role := range whole.Roles() {
		u := *whole
		u.Cols[role] = nil
		missing := r.Missing(balance.Keep(&u))
		got, _ := Verdict(r, &u)
		if slices.Contains(missing, role) && (got.Verdict != finding.NotTestable || !slices.Contains(got.Missing, role.String())) {
			t.Errorf("without %s, which it needs: %v %q", role, got.Verdict, got.Reason)
		}
		if before.Verdict == finding.Pass && got.Verdict == finding.Fault {
			t.Errorf("without %s a pass became a fault", role)
		}
	}
}
