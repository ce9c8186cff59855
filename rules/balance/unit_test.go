package balance

import (
	"math"
	"math/rand/v2"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// rig is a unit made by hand: readings as given, every interval the same unless
// vary changes it.
type rig struct {
	u *trend.Unit
}

var atSeaLevel = psy.Model{P: 101325}

func newRig(n int, train ...trend.Component) *rig {
	nan := math.NaN()
	if train == nil {
		train = trend.DefaultTrain()
	}
	return &rig{&trend.Unit{
		Name: "AHU-1",
		Axis: trend.Axis{Start: time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC), Step: 5 * time.Minute, N: n},
		Site: trend.Site{Zone: time.UTC, PressurePa: 101325},
		Plant: trend.Plant{
			Train: train, DesignFlow: nan, DuctArea: nan, MinOAFraction: nan, MinDamper: nan, FanHeat: nan, FanHeatU: nan,
		},
	}}
}

// set gives a role the values of f.
func (r *rig) set(role trend.Role, f func(i int) float64) *rig {
	v := make([]float64, r.u.Axis.N)
	for i := range v {
		v[i] = f(i)
	}
	r.u.Cols[role] = &trend.Column{Role: role, Val: v}
	return r
}

func (r *rig) flat(role trend.Role, x float64) *rig {
	return r.set(role, func(int) float64 { return x })
}

// air sets a station's temperature and relative humidity from t and w.
func (r *rig) air(s trend.Station, rh trend.Role, t, w func(i int) float64) *rig {
	r.set(s.DryBulb(), t)
	return r.set(rh, func(i int) float64 { return atSeaLevel.RelHumidity(t(i), w(i)) })
}

func flat(x float64) func(int) float64 { return func(int) float64 { return x } }

// running sets the points of a unit that ventilates with its coils shut.
func (r *rig) running() *rig {
	r.flat(trend.SAFanStatus, 1).flat(trend.OADamper, 0.3)
	for _, c := range r.u.Plant.Train {
		switch c {
		case trend.Preheat:
			r.flat(trend.PreheatValve, 0)
		case trend.Heating:
			r.flat(trend.HeatValve, 0)
		case trend.Cooling:
			r.flat(trend.CoolValve, 0)
		case trend.Humidify:
			r.flat(trend.Humidifier, 0)
		}
	}
	return r
}

// standard is a unit with humidity at four stations, mixing f of outdoor air
// exactly, ventilating, its fan warming by 1 K.
func standard(n int, f float64) *rig {
	r := newRig(n).running()
	day := func(i int) float64 { return math.Sin(2 * math.Pi * float64(i) / 288) }
	to := func(i int) float64 { return 5 + 4*day(i) }
	wo := func(i int) float64 { return 0.0035 + 0.0004*day(i) }
	tr := func(i int) float64 { return 22 + 0.5*day(i-40) }
	wr := func(i int) float64 { return 0.0068 + 0.0002*day(i-20) }
	wm := func(i int) float64 { return f*wo(i) + (1-f)*wr(i) }
	tm := func(i int) float64 { return mixedTemp(f, to(i), wo(i), tr(i), wr(i)) }
	r.air(trend.Outdoor, trend.OARH, to, wo)
	r.air(trend.Return, trend.RARH, tr, wr)
	r.air(trend.Mixed, trend.MARH, tm, wm)
	r.air(trend.Supply, trend.SARH, func(i int) float64 { return tm(i) + 1 }, wm)
	return r
}

// mixedTemp mixes exactly in enthalpy and moisture and finds the temperature by
// bisection: an independent way to what the balances assume.
func mixedTemp(f, to, wo, tr, wr float64) float64 {
	h := f*atSeaLevel.Enthalpy(to, wo) + (1-f)*atSeaLevel.Enthalpy(tr, wr)
	w := f*wo + (1-f)*wr
	lo, hi := math.Min(to, tr)-1, math.Max(to, tr)+1
	for range 80 {
		mid := (lo + hi) / 2
		if atSeaLevel.Enthalpy(mid, w) < h {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}

// noisy adds seeded normal noise of the given standard deviation to a role.
func (r *rig) noisy(rng *rand.Rand, role trend.Role, sd float64) *rig {
	v := r.u.Cols[role].Val
	for i := range v {
		v[i] += sd * rng.NormFloat64()
	}
	return r
}
