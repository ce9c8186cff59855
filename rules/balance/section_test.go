package balance

import (
	"math"
	"testing"

	"dewledger/ingest/trend"
)

// month is a unit with mixed and supply temperature, ventilating for 28 days,
// whose supply reads 1 K over mixed with a spread of 0.4 K from hour to hour and
// leak(i) on top.
func month(leak func(i int) float64) *rig {
	const n = 28 * 288
	rng := seeded(21)
	r := newRig(n).running()
	var drift float64
	r.flat(trend.MATemp, 17).set(trend.SATemp, func(i int) float64 {
		if i%12 == 0 {
			drift = 0.4 * rng.NormFloat64()
		}
		return 18 + drift + leak(i)
	})
	return r
}

// spreadOf is the term of TempRise that is no reading's and not the fan's.
func spreadOf(t *testing.T, r *rig) float64 {
	t.Helper()
	p := Keep(r.u).Get(TempRise)[0]
	x := p.Terms[len(p.Terms)-1]
	if x.Role != trend.NoRole {
		t.Fatal("the last term is not the spread")
	}
	return math.Abs(x.At(0))
}

// The unit's own spread is what a healthy month shows, and a leak does not pass
// for it, whenever it comes.
func TestSpreadIsNotALeak(t *testing.T) {
	healthy := spreadOf(t, month(func(int) float64 { return 0 }))
	near(t, "healthy", healthy, 0.4, 0.08)
	for _, c := range []struct {
		name string
		leak func(i int) float64
		most float64 // times the healthy spread
	}{
		{"all month", func(int) float64 { return 4 }, 1.05},
		{"second half", func(i int) float64 {
			if i >= 14*288 {
				return 4
			}
			return 0
		}, 1.3},
		{"from the tenth day", func(i int) float64 {
			if i >= 10*288 {
				return 4
			}
			return 0
		}, 1.3},
		{"six hours a day", func(i int) float64 {
			if i%288 < 72 {
				return 4
			}
			return 0
		}, 1.6},
		{"ten hours a day", func(i int) float64 {
			if i%288 < 120 {
				return 4
			}
			return 0
		}, 2.6},
	} {
		if s := spreadOf(t, month(c.leak)); s > c.most*healthy || s < 0.7*healthy {
			t.Errorf("leak %s: spread %.3f K, healthy %.3f K", c.name, s, healthy)
		}
	}
}

func TestLearnedFanRise(t *testing.T) {
	rise, u, hours := Keep(month(func(int) float64 { return 0 }).u).LearnedFanRise()
	near(t, "learned", rise, 1, 0.15)
	// Two sensors' offsets, 1.0 and 0.5 K bands, stay however long the month.
	near(t, "its uncertainty", u, math.Hypot(1, 0.5)/sqrt3, 0.02)
	near(t, "hours", hours, 28*24, 1)
	// A leak in ten days of the month leaves it where it was, within the spread.
	rise, _, _ = Keep(month(func(i int) float64 {
		if i < 10*288 {
			return 5
		}
		return 0
	}).u).LearnedFanRise()
	near(t, "learned beside a leak", rise, 1, 0.4)
	// Too little to learn from.
	r := newRig(20).running().flat(trend.MATemp, 17).flat(trend.SATemp, 18)
	if rise, _, _ = Keep(r.u).LearnedFanRise(); rise == rise {
		t.Errorf("learned %v from 20 intervals", rise)
	}
}

func TestExpectedFanRise(t *testing.T) {
	r := newRig(4).flat(trend.SAFanStatus, 1)
	s := Keep(r.u).ExpectedFanRise()
	near(t, "prior", s.Val[0], 1, 0)
	near(t, "its uncertainty", s.Off[0], 0.5, 0)
	r.u.Plant.FanHeat, r.u.Plant.FanHeatU = 0.8, 0.1
	r.flat(trend.SAFanSpeed, 0.5)
	s = Keep(r.u).ExpectedFanRise()
	near(t, "stated, at half speed", s.Val[0], 0.2, 1e-12)
	near(t, "its uncertainty", s.Off[0], 0.05, 1e-12)
	r.flat(trend.SAFanStatus, 0)
	near(t, "fan off", Keep(r.u).ExpectedFanRise().Val[0], 0, 0)
}

// Only outdoor, return and supply humidity: the path from the computed mixture,
// and the bound.
func TestDryTrain(t *testing.T) {
	r := standard(600, 0.35)
	r.u.Cols[trend.MARH] = nil
	b := Keep(r.u)
	ps := b.Get(MoistureGain)
	if len(ps) != 2 || ps[0].Bound || !ps[1].Bound {
		t.Fatalf("%d parts, want an estimate and a bound", len(ps))
	}
	est, bound := ps[0], ps[1]
	if est.From != trend.Mixed || est.To != trend.Supply || len(est.Between) != 4 {
		t.Errorf("from %v to %v over %v", est.From, est.To, est.Between)
	}
	near(t, "gain from the mixture", est.Val[100], 0, 1e-3)
	wo, wr, ws := b.HumRatio(trend.Outdoor).Val[100], b.HumRatio(trend.Return).Val[100], b.HumRatio(trend.Supply).Val[100]
	near(t, "bound", bound.Val[100], 1000*(ws-math.Max(wo, wr)), 1e-9)
	if !(bound.Val[100] < est.Val[100]) {
		t.Error("a bound above the estimate")
	}
	near(t, "bound of the loss", b.Get(MoistureLoss)[1].Val[100], 1000*(math.Min(wo, wr)-ws), 1e-9)
	// The return dry bulb enters through its moisture, through the fraction, once.
	seen := 0
	for _, x := range est.Terms {
		if x.Role == trend.RATemp {
			seen++
		}
	}
	if seen != 1 {
		t.Errorf("%d terms of the return temperature", seen)
	}
	// Where the fraction cannot be had there is no estimate, and the bound stands.
	r.flat(trend.MATemp, nan)
	b = Keep(r.u)
	p := b.Get(MoistureGain)[0]
	if !math.IsNaN(p.Val[100]) {
		t.Errorf("a gain of %v from an unknown mixture", p.Val[100])
	}
	near(t, "bound with an unknown mixture", b.Get(MoistureGain)[1].Val[100], 1000*(ws-math.Max(wo, wr)), 1e-9)
}

// With the mixed moisture read there is nothing to estimate.
func TestMoistureSections(t *testing.T) {
	r := standard(20, 0.3).flat(trend.CCTemp, 17).flat(trend.CCRH, 0.5)
	var names []string
	for _, p := range Keep(r.u).Get(MoistureGain) {
		names = append(names, p.Name)
		if p.Bound {
			t.Errorf("%s is a bound", p.Name)
		}
	}
	want := []string{"moisture_gain_ma_cc", "moisture_gain_cc_sa", "moisture_gain_ma_sa"}
	for i := range want {
		if i >= len(names) || names[i] != want[i] {
			t.Fatalf("parts %v, want %v", names, want)
		}
	}
}

func TestMixedOutside(t *testing.T) {
	r := newRig(1).flat(trend.OATemp, 5).flat(trend.RATemp, 20)
	for _, c := range []struct {
		tm, want float64
		bound    trend.Role
	}{{25, 5, trend.RATemp}, {19, -1, trend.RATemp}, {6, -1, trend.OATemp}, {2, 3, trend.OATemp}} {
		r.flat(trend.MATemp, c.tm)
		p := Keep(r.u).Get(MixedTempOutside)[0]
		near(t, "outside", p.Val[0], c.want, 1e-12)
		for _, x := range p.Terms {
			if active := x.Role == c.bound || x.Role == trend.MATemp; active != (x.At(0) != 0) {
				t.Errorf("at %v: term of %s is %v", c.tm, x.Role, x.At(0))
			}
		}
	}
	// Behind a recovery the outdoor stream is what leaves it.
	r = newRig(1, trend.Recovery, trend.Mixing, trend.Cooling).flat(trend.OATemp, -5).flat(trend.RATemp, 20).flat(trend.MATemp, 12)
	if Keep(r.u).Get(MixedTempOutside) != nil {
		t.Error("struck without the temperature behind the recovery")
	}
	if m := MixedTempOutside.Missing(r.u); len(m) != 1 || m[0] != trend.RETemp {
		t.Errorf("misses %v, want re_temp", m)
	}
	r.flat(trend.RETemp, 10)
	near(t, "outside, recovered stream", Keep(r.u).Get(MixedTempOutside)[0].Val[0], -2, 1e-12)
}

func TestOffsets(t *testing.T) {
	r := newRig(3).set(trend.SARH, func(i int) float64 { return []float64{0.5, 0.95, 0.05}[i] })
	r.flat(trend.OATemp, 0).flat(trend.RATemp, 20).set(trend.MATemp, func(i int) float64 { return []float64{10, 25, nan}[i] })
	r.set(trend.SAFlow, func(i int) float64 { return []float64{2, 0, nan}[i] }).flat(trend.OARH, 0.5)
	b := Keep(r.u)
	rh := b.OffsetU(trend.SARH)
	near(t, "supply RH", rh[0], 0.03/sqrt3, 1e-12)
	near(t, "supply RH, wet end", rh[1], 0.06/sqrt3, 1e-12)
	near(t, "supply RH, dry end", rh[2], 0.06/sqrt3, 1e-12)
	near(t, "outdoor RH", b.OffsetU(trend.OARH)[0], 0.05/sqrt3, 1e-12)
	near(t, "outdoor temperature", b.OffsetU(trend.OATemp)[0], 0.5/sqrt3, 1e-12)
	ma := b.OffsetU(trend.MATemp)
	near(t, "half and half", ma[0], math.Hypot(1, 0.05*20)/sqrt3, 1e-12) // 4f(1-f) = 1
	near(t, "outside its streams", ma[1], 1/sqrt3, 1e-12)
	near(t, "missing", ma[2], 1/sqrt3, 1e-12)
	q := b.OffsetU(trend.SAFlow)
	near(t, "flow", q[0], 0.2/sqrt3, 1e-12)
	if !(q[1] > 0) {
		t.Error("a flow of 0 is known exactly")
	}
	// What the site says goes before the defaults, the point's own before that.
	r.u.Site.AccuracyByKind = map[trend.Kind]trend.Band{trend.Temperature: {HalfWidth: 0.2}, trend.AirFlow: {HalfWidth: 0.3}}
	r.u.Site.AccuracyByRole = map[trend.Role]trend.Band{trend.RATemp: {HalfWidth: 0.1}}
	b = Keep(r.u)
	near(t, "by kind", b.OffsetU(trend.OATemp)[0], 0.2/sqrt3, 1e-12)
	near(t, "by role", b.OffsetU(trend.RATemp)[0], 0.1/sqrt3, 1e-12)
	near(t, "absolute flow", b.OffsetU(trend.SAFlow)[0], 0.3/sqrt3, 1e-12)
	r.u.Cols[trend.RATemp].Accuracy = 0.7
	near(t, "by point", Keep(r.u).OffsetU(trend.RATemp)[0], 0.7/sqrt3, 1e-12)
	if b.OffsetU(trend.CCTemp) != nil || b.NoiseU(trend.CCTemp) != 0 {
		t.Error("a point that is not there has an uncertainty")
	}
}

func TestNoise(t *testing.T) {
	rng := seeded(8)
	r := newRig(4000).running().flat(trend.SATemp, 18).noisy(rng, trend.SATemp, 0.2).flat(trend.RATemp, 22)
	r.u.Cols[trend.RATemp].Resolution = 0.5
	b := Keep(r.u)
	near(t, "from differences", b.NoiseU(trend.SATemp), 0.2, 0.2*0.08)
	near(t, "from resolution", b.NoiseU(trend.RATemp), 0.25/sqrt3, 1e-12)
}
