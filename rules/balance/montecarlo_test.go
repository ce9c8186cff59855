package balance

import (
	"math"
	"slices"
	"testing"

	"dewledger/ingest/trend"
)

// typical states, with all stations read: outdoor, return, mixed fraction, how
// far supply is from mixed, supply moisture factor.
var typicalStates = []struct {
	name               string
	to, rho, tr, rhr   float64
	f, rise, dry       float64
	denominatorIsSmall bool
}{
	{name: "frost", to: -12, rho: 0.8, tr: 21, rhr: 0.25, f: 0.2, rise: 8, dry: 1},
	{name: "cold", to: -2, rho: 0.7, tr: 21.5, rhr: 0.3, f: 0.3, rise: 3, dry: 1},
	{name: "cool", to: 6, rho: 0.75, tr: 22, rhr: 0.35, f: 0.5, rise: 1, dry: 1},
	{name: "cool and wet", to: 9, rho: 0.95, tr: 22, rhr: 0.45, f: 0.35, rise: 1, dry: 1},
	{name: "free cooling", to: 10, rho: 0.6, tr: 23, rhr: 0.55, f: 0.8, rise: 1, dry: 1},
	{name: "all outdoor air", to: 8, rho: 0.6, tr: 23, rhr: 0.6, f: 1, rise: 1, dry: 1},
	{name: "recirculating", to: 2, rho: 0.8, tr: 20, rhr: 0.5, f: 0, rise: 5, dry: 1},
	{name: "humid", to: 32, rho: 0.6, tr: 24, rhr: 0.5, f: 0.3, rise: -11, dry: 0.75},
	{name: "tropical", to: 33, rho: 0.75, tr: 23.5, rhr: 0.5, f: 0.4, rise: -13, dry: 0.7},
	{name: "hot and dry", to: 40, rho: 0.12, tr: 25, rhr: 0.45, f: 0.2, rise: -10, dry: 1},
	{name: "hot, much outdoor air", to: 38, rho: 0.35, tr: 24, rhr: 0.4, f: 0.7, rise: -14, dry: 0.8},
	{name: "winter, humidified", to: -8, rho: 0.85, tr: 22, rhr: 0.45, f: 0.25, rise: 2, dry: 1.2},
}

// First-order uncertainties against a Monte Carlo (JCGM 101:2008): every reading
// is drawn from its rectangular band, the balances are struck on the draws with
// their exact equations, and the standard deviation over the draws is held
// against Off of the undisturbed interval. Terms that are no reading are left out
// on both sides. 20 000 draws know a standard deviation to 0.5 %; 5 % is what
// first order may miss (physics: its terms beyond the first are of order (u/x)²).
func TestFirstOrderAgainstMonteCarlo(t *testing.T) {
	const draws = 20000
	roles := []trend.Role{
		trend.OATemp, trend.OARH, trend.RATemp, trend.RARH, trend.MATemp, trend.MARH, trend.SATemp, trend.SARH, trend.OAFlow, trend.SAFlow,
	}
	for k, st := range typicalStates {
		t.Run(st.name, func(t *testing.T) {
			wo, wr := atSeaLevel.HumRatio(st.to, st.rho), atSeaLevel.HumRatio(st.tr, st.rhr)
			wm := st.f*wo + (1-st.f)*wr
			tm := mixedTemp(st.f, st.to, wo, st.tr, wr)
			make := func(n int) *rig {
				r := newRig(n).running()
				r.air(trend.Outdoor, trend.OARH, flat(st.to), flat(wo)).air(trend.Return, trend.RARH, flat(st.tr), flat(wr))
				r.air(trend.Mixed, trend.MARH, flat(tm), flat(wm))
				r.air(trend.Supply, trend.SARH, flat(tm+st.rise), flat(wm*st.dry))
				vo, vs := atSeaLevel.Volume(st.to, wo), atSeaLevel.Volume(tm+st.rise, wm*st.dry)
				return r.flat(trend.OAFlow, st.f*vo/vs).flat(trend.SAFlow, 1)
			}
			exact := Keep(make(1).u)
			drawn := make(draws)
			rng := seeded(uint64(100 + k))
			for _, role := range roles {
				u := exact.OffsetU(role)[0]
				v := drawn.u.Cols[role].Val
				for i := range v {
					v[i] += u * sqrt3 * (2*rng.Float64() - 1)
				}
			}
			sampled := Keep(drawn.u)
			// A fraction that some draws have and others have not makes two estimators
			// of one.
			moist := sampled.Get(FractionMoisture)[0].Val
			_, have := deviation(moist)
			mixesEstimators := have > 0 && have < draws || (exact.Get(FractionMoisture)[0].Val[0] == exact.Get(FractionMoisture)[0].Val[0]) != (have > 0)
			checked := 0
			for _, d := range append(slices.Clone(Defs()), nil) {
				var want, got []*Series
				if mixesEstimators && (d == Fraction || d == MixingEnergy || d == MixingMoisture || d == CoilHeat) {
					continue
				}
				if d == nil {
					for _, s := range []trend.Station{trend.Outdoor, trend.Return, trend.Mixed, trend.Supply} {
						want = append(want, exact.HumRatio(s), exact.Enthalpy(s), exact.DewPoint(s))
						got = append(got, sampled.HumRatio(s), sampled.Enthalpy(s), sampled.DewPoint(s))
					}
					if !mixesEstimators {
						want = append(want, exact.MixtureTemp(), exact.MixtureHumRatio())
						got = append(got, sampled.MixtureTemp(), sampled.MixtureHumRatio())
					}
				} else if d != FractionChi2 && d != MixedTempOutside && d != MixedMoistureOutside && d != FanRise {
					// The envelope has a corner where the mixture meets a stream; the fan's
					// rise is TempRise without the fan.
					for i, p := range exact.Get(d) {
						want, got = append(want, p.Series), append(got, sampled.Get(d)[i].Series)
					}
				}
				for i, w := range want {
					if w.Val[0] != w.Val[0] {
						continue // a denominator too small to say
					}
					var first float64
					for _, x := range w.Terms {
						if x.Role != trend.NoRole {
							first += x.At(0) * x.At(0)
						}
					}
					first = math.Sqrt(first)
					sd, n := deviation(got[i].Val)
					if n < draws*99/100 {
						continue // so near its limit that the draws fall on both sides
					}
					checked++
					if testing.Verbose() {
						t.Logf("%s: first order %.4g, Monte Carlo %+.1f %%", w.Name, first, 100*(sd/first-1))
					}
					if math.Abs(sd/first-1) > 0.05 {
						t.Errorf("%s: first order %.4g, Monte Carlo %.4g", w.Name, first, sd)
					}
				}
			}
			if checked < 15 {
				t.Errorf("only %d series could be compared", checked)
			}
		})
	}
}

func deviation(v []float64) (sd float64, n int) {
	var sum, sq float64
	for _, x := range v {
		if x == x {
			n++
			sum += x
		}
	}
	mean := sum / float64(n)
	for _, x := range v {
		if x == x {
			sq += (x - mean) * (x - mean)
		}
	}
	return math.Sqrt(sq / float64(n-1)), n
}

// Noise in shared sensors adds as the sensors do, not as the terms do: a dry bulb
// with noise moves a humidity ratio and a temperature together.
func TestNoiseFollowsSensors(t *testing.T) {
	const n = 20000
	r := newRig(n).running()
	wo, wr := 0.003, 0.008
	tm, wm := mixedTemp(0.3, 0, wo, 22, wr), 0.3*wo+0.7*wr
	r.air(trend.Outdoor, trend.OARH, flat(0), flat(wo)).air(trend.Return, trend.RARH, flat(22), flat(wr))
	r.air(trend.Mixed, trend.MARH, flat(tm), flat(wm)).air(trend.Supply, trend.SARH, flat(tm+1), flat(wm))
	rng := seeded(5)
	for _, role := range []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.SATemp} {
		r.noisy(rng, role, 0.1)
	}
	for _, role := range []trend.Role{trend.OARH, trend.RARH, trend.MARH, trend.SARH} {
		r.noisy(rng, role, 0.004)
	}
	b := Keep(r.u)
	for _, d := range []*Def{FractionTemp, FractionMoisture, Fraction, MixingEnergy, MixingMoisture, TempRise, MoistureGain, CoilHeat} {
		p := b.Get(d)[0]
		sd, _ := deviation(p.Val)
		// The robust scale of 2048 differences is known to about 3 %, and there are
		// up to eight of them.
		if math.Abs(sd/p.Noise[100]-1) > 0.08 {
			t.Errorf("%s: noise %.4g, standard deviation over the intervals %.4g", p.Name, p.Noise[100], sd)
		}
	}
}
