package balance

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"dewledger/ingest/trend"
)

func seeded(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, 1)) }

// Random mixing states come back: the fractions are the one that mixed, the
// mixing balances close. The mixture is made in enthalpy, the fraction is taken
// with constant specific heats: that difference is under 3e-4 of f.
func TestMixingRecovered(t *testing.T) {
	rng := seeded(11)
	for range 300 {
		f := rng.Float64()
		to := -20 + 55*rng.Float64()
		tr := 20 + 6*rng.Float64()
		if math.Abs(tr-to) < 4 {
			continue
		}
		wo, wr := atSeaLevel.HumRatio(to, 0.3+0.6*rng.Float64()), atSeaLevel.HumRatio(tr, 0.3+0.3*rng.Float64())
		tm, wm := mixedTemp(f, to, wo, tr, wr), f*wo+(1-f)*wr
		r := newRig(4).running()
		r.air(trend.Outdoor, trend.OARH, flat(to), flat(wo)).air(trend.Return, trend.RARH, flat(tr), flat(wr))
		r.air(trend.Mixed, trend.MARH, flat(tm), flat(wm))
		b := Keep(r.u)
		near(t, "f_T", b.Get(FractionTemp)[0].Val[1], f, 3e-4)
		if x := b.Get(FractionMoisture)[0].Val[1]; x == x {
			near(t, "f_W", x, f, 1e-6)
			near(t, "mixing energy", b.Get(MixingEnergy)[0].Val[1], 0, 3e-4*math.Abs(tr-to))
			near(t, "mixing moisture", b.Get(MixingMoisture)[0].Val[1], 0, 3e-4*1000*math.Abs(wr-wo)+1e-6)
			if c := b.Get(FractionChi2)[0].Val[1]; !(c < 1e-3) {
				t.Errorf("fractions that agree have chi-square %v", c)
			}
		}
		if x := b.Get(MixedTempOutside)[0].Val[1]; x > 3e-4*math.Abs(tr-to) {
			t.Errorf("a true mixture lies %v K outside its streams", x)
		}
		if x := b.Get(MixedMoistureOutside)[0].Val[1]; x > 1e-9 {
			t.Errorf("a true mixture lies %v g/kg outside its streams", x)
		}
	}
}

// Sensible heating leaves the moisture content unchanged (ASHRAE Handbook of
// Fundamentals, psychrometrics chapter). The duty is taken with constant specific
// heats, which lie within 0.15 % of package psy's real-gas enthalpies.
func TestSensibleHeatingKeepsMoisture(t *testing.T) {
	rng := seeded(12)
	for range 200 {
		t1 := -15 + 40*rng.Float64()
		w := atSeaLevel.HumRatio(t1, 0.2+0.7*rng.Float64())
		t2 := t1 + 30*rng.Float64()
		r := newRig(4, trend.Heating).running()
		r.air(trend.Outdoor, trend.OARH, flat(t1), flat(w)).air(trend.Supply, trend.SARH, flat(t2), flat(w))
		b := Keep(r.u)
		near(t, "moisture gained", b.Get(MoistureGain)[0].Val[1], 0, 2e-6*1000*w)
		near(t, "heat", b.Get(CoilHeat)[0].Val[1], atSeaLevel.Enthalpy(t2, w)-atSeaLevel.Enthalpy(t1, w), 1.5e-3*(t2-t1)+1e-9)
	}
}

// What one series calls a gain the other calls a loss, with the same doubt.
func TestLossIsGainReversed(t *testing.T) {
	b := Keep(standard(300, 0.4).u)
	g, l := b.Get(MoistureGain), b.Get(MoistureLoss)
	if len(g) != 1 || len(l) != 1 {
		t.Fatalf("%d gains and %d losses with mixed and supply moisture, want 1 and 1", len(g), len(l))
	}
	for i := range g[0].Val {
		if g[0].Val[i] != -l[0].Val[i] || g[0].U(i) != l[0].U(i) {
			t.Fatalf("interval %d: gain %v ± %v, loss %v ± %v", i, g[0].Val[i], g[0].U(i), l[0].Val[i], l[0].U(i))
		}
	}
}

// Off² is the sum of the terms' squares, and no reading has two terms.
func TestTermsMakeOff(t *testing.T) {
	b := Keep(standard(300, 0.4).flat(trend.OAFlow, 1).flat(trend.SAFlow, 3).flat(trend.SAFanSpeed, 0.8).u)
	for _, d := range Defs() {
		for _, p := range b.Get(d) {
			seen := map[trend.Role]bool{}
			for _, x := range p.Terms {
				if x.Role != trend.NoRole && seen[x.Role] {
					t.Errorf("%s: two terms of %s", p.Name, x.Role)
				}
				seen[x.Role] = true
			}
			for i, v := range p.Val {
				if v != v {
					if p.Off[i] == p.Off[i] || p.Noise[i] == p.Noise[i] {
						t.Fatalf("%s: uncertainty without a value at %d", p.Name, i)
					}
					continue
				}
				var sum float64
				for _, x := range p.Terms {
					sum += x.At(i) * x.At(i)
				}
				if math.Abs(math.Sqrt(sum)-p.Off[i]) > 1e-12+1e-9*p.Off[i] {
					t.Fatalf("%s at %d: Off %v, terms give %v", p.Name, i, p.Off[i], math.Sqrt(sum))
				}
			}
		}
	}
}

// A train without mixing takes outdoor air only.
func TestNoMixing(t *testing.T) {
	r := newRig(20, trend.Preheat, trend.Cooling, trend.Fan).running()
	r.air(trend.Outdoor, trend.OARH, flat(10), flat(0.005)).air(trend.Supply, trend.SARH, flat(12), flat(0.005))
	b := Keep(r.u)
	f := b.Get(Fraction)[0]
	if f.Val[7] != 1 || f.U(7) != 0 || f.Mean(0, 20, nil).U() != 0 {
		t.Errorf("fraction %v ± %v, want 1 exactly", f.Val[7], f.U(7))
	}
	for _, d := range []*Def{FractionTemp, FractionMoisture, FractionFlow, FractionChi2, MixingEnergy, MixingMoisture, MixedTempOutside, MixedMoistureOutside} {
		if b.Get(d) != nil {
			t.Errorf("%s struck without a mixing box", d.Name)
		}
		if d.Missing(r.u) != nil {
			t.Errorf("%s: a sensor would not help where there is no mixing box", d.Name)
		}
	}
	p := b.Get(TempRise)[0]
	if p.From != trend.Outdoor || p.To != trend.Supply || !slices.Equal(p.Between, r.u.Plant.Train) {
		t.Errorf("temperature rise from %v to %v over %v", p.From, p.To, p.Between)
	}
	near(t, "temperature rise less the fan", p.Val[7], 1, 1e-9)
	if got := b.States()[19]; got != Ventilating {
		t.Errorf("state %v, want ventilating", got)
	}
}

// The stations stand where the train puts their components.
func TestSectionsFollowTheTrain(t *testing.T) {
	for _, c := range []struct {
		train []trend.Component
		want  []string
	}{
		{trend.DefaultTrain(), []string{"temp_rise_ma_ph", "temp_rise_ph_cc", "temp_rise_cc_hc"}},
		{[]trend.Component{trend.Mixing, trend.Heating, trend.Cooling, trend.Fan}, []string{"temp_rise_ma_hc", "temp_rise_hc_cc", "temp_rise_cc_sa"}},
		{[]trend.Component{trend.Recovery, trend.Mixing, trend.Cooling}, []string{"temp_rise_ma_cc"}},
		{[]trend.Component{trend.Recovery, trend.Preheat, trend.Cooling, trend.Fan}, []string{"temp_rise_re_ph", "temp_rise_ph_cc", "temp_rise_cc_sa"}},
		{[]trend.Component{trend.Mixing, trend.Fan, trend.Cooling, trend.Reheat}, []string{"temp_rise_ma_cc", "temp_rise_cc_sa"}},
		{[]trend.Component{trend.Mixing, trend.Evaporative, trend.Cooling}, nil},
	} {
		r := newRig(30, c.train...).running()
		for _, role := range []trend.Role{trend.OATemp, trend.RATemp, trend.RETemp, trend.MATemp, trend.PHTemp, trend.CCTemp, trend.HCTemp, trend.SATemp} {
			r.flat(role, 15)
		}
		var got []string
		for _, p := range Keep(r.u).Get(TempRise) {
			got = append(got, p.Name)
		}
		// hc and sa stand at one place where heating comes last: no section.
		if !slices.Equal(got, c.want) {
			t.Errorf("train %v: sections %v, want %v", c.train, got, c.want)
		}
	}
}
