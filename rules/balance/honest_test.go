package balance_test

import (
	"math"
	"strings"
	"testing"

	"dewledger/ingest/synth"
	"dewledger/rules/balance"
)

// Residuals over their uncertainty, an interval drawn from each of 500 simulated
// unit-months with normal offsets, noise, lag, quantisation and an uneven mixing box,
// where nothing but the sensors can make them: they scatter as a standard normal does.
// Temperatures over a section claim less than they could: their uncertainty holds the
// fan's heat, which is 1 K in every simulated unit, and the unit's own spread, which is
// there for what no simulation has.
func TestResidualsAreHonest(t *testing.T) {
	if testing.Short() {
		t.Skip("500 simulated months")
	}
	type tally struct {
		n, out int
		z, z2  float64
	}
	by := map[string]*tally{}
	for seed := uint64(1); seed <= 500; seed++ {
		b := balance.Keep(unitMonth(seed, synth.Normal).Unit())
		settled, dry, states := b.Settled(), b.Dry(), b.States()
		closes := func(name string, i int) bool { // nothing but sensors can make a residual there
			switch {
			case strings.HasPrefix(name, "moisture_gain"):
				return dry[i]
			case strings.HasPrefix(name, "temp_rise"):
				return settled[i] && (states[i] == balance.Ventilating || states[i] == balance.FreeCooling)
			case strings.HasPrefix(name, "mixing_"):
				return settled[i]
			}
			return false
		}
		for _, d := range balance.Defs() {
			for _, p := range b.Get(d) {
				if p.Bound {
					continue
				}
				from := int(seed*7919) % len(p.Val)
				for k := range p.Val {
					i := (from + k) % len(p.Val)
					if !closes(p.Name, i) || math.IsNaN(p.Val[i]) {
						continue
					}
					w := by[p.Name]
					if w == nil {
						w = &tally{}
						by[p.Name] = w
					}
					z := p.Val[i] / p.U(i)
					w.n++
					w.z, w.z2 = w.z+z, w.z2+z*z
					if math.Abs(z) > 2 {
						w.out++
					}
					break
				}
			}
		}
	}
	seen := 0
	for name, w := range by {
		n := float64(w.n)
		sd, out := math.Sqrt(w.z2/n-w.z*w.z/n/n), float64(w.out)/n
		t.Logf("%-22s %3d units: standard deviation %.2f, %.1f %% beyond k = 2", name, w.n, sd, 100*out)
		if w.n < 100 {
			continue
		}
		seen++
		lo, hi, least := 0.85, 1.1, 0.015 // 0.9 to 1.1 and 3 to 7 %, less the sampling error of 220 draws: 0.05 and 1.5 %
		if strings.HasPrefix(name, "temp_rise") {
			lo, least = 0.55, 0
		}
		if sd < lo || sd > hi || out < least || out > 0.075 {
			t.Errorf("%s: standard deviation %.2f, %.1f %% beyond k = 2 in %d units", name, sd, 100*out, w.n)
		}
	}
	if seen < 6 {
		t.Errorf("only %d residuals were looked at", seen)
	}
}
