package balance

import (
	"math"
	"slices"

	"dewledger/ingest/trend"
)

// Specific heats of dry air and of water vapour at constant pressure,
// kJ/(kg·K), near room temperature (ASHRAE Handbook of Fundamentals,
// psychrometrics chapter, moist air enthalpy).
const (
	cpAir    = 1.006
	cpVapour = 1.86
)

// nominalHumRatio stands for a moisture that is not read where only the heat
// capacity of the air hangs on it, kg/kg: 0.004 off moves that by 0.7 %.
const nominalHumRatio = 0.008

// leastSpread and leastMoistSpread are how far apart the streams must be at the
// least, however good the sensors: what lags and layers is there all the same,
// and near equal streams their differences decide the fraction (common practice,
// no source). K and kg/kg.
const (
	leastSpread      = 2.0
	leastMoistSpread = 0.0005
)

// leastDenominator is how many of its own standard uncertainties the difference
// between outdoor and return air must reach before a fraction is taken from it.
const leastDenominator = 4

// fractions are the outdoor-air fraction, three ways and combined.
type fractions struct {
	temp, moist, flow *form // nil where the unit cannot have it
	varTemp, varMoist []float64
	varFlow           []float64
	all               combined // of all three
	fromDry, fromWet  combined // without moisture; without temperature
	chi2              []float64
}

type combined struct {
	f *form
	v []float64
}

// heatCapacities is the heat capacity of a station's air, kJ/(K·kg of dry air).
func (b *Books) heatCapacities(s trend.Station) []float64 {
	return b.capacity[s].get(func() []float64 {
		w := b.humRatio(s)
		if w == nil {
			return filled(b.n(), cpAir+cpVapour*nominalHumRatio)
		}
		out := make([]float64, b.n())
		for i, x := range w.val {
			if x != x {
				x = nominalHumRatio
			}
			out[i] = cpAir + cpVapour*x
		}
		return out
	})
}

func (b *Books) fraction() *fractions {
	return b.fractions.get(func() *fractions {
		fr := &fractions{}
		if !b.path.mixing {
			return fr
		}
		fr.temp, fr.varTemp = b.fractionTemp()
		fr.moist, fr.varMoist = b.fractionMoisture()
		fr.flow, fr.varFlow = b.fractionFlow()
		fr.all, fr.chi2 = b.combine(fr, true, true, true)
		fr.fromDry, _ = b.combine(fr, true, false, true)
		fr.fromWet, _ = b.combine(fr, false, true, true)
		return fr
	})
}

// fractionTemp is the fraction from temperatures. With h = a·T + W·h_v0, a =
// cp_a + cp_v·W, the energy balance of adiabatic mixing is free of the mixed
// moisture: f·a_o·(T_m - T_o) = (1-f)·a_r·(T_r - T_m). What the moistures'
// own uncertainty adds through a is under 0.0005 of f and left out.
func (b *Books) fractionTemp() (*form, []float64) {
	in := b.path.inlet
	to, tr, tm := b.tempForm(in), b.tempForm(trend.Return), b.tempForm(trend.Mixed)
	if to == nil || tr == nil || tm == nil {
		return nil, nil
	}
	ao, ar := b.heatCapacities(in), b.heatCapacities(trend.Return)
	f, do, dr, dm, v := b.buffer(), b.buffer(), b.buffer(), b.buffer(), b.buffer()
	qo, qr, qm := b.total(in.DryBulb()), b.total(trend.RATemp), b.total(trend.MATemp)
	for i := range f {
		x, y := ar[i]*(tr.val[i]-tm.val[i]), ao[i]*(tm.val[i]-to.val[i])
		d := x + y
		span := tr.val[i] - to.val[i]
		if !(span*span >= max(leastSpread*leastSpread, leastDenominator*leastDenominator*(qo.at(i)+qr.at(i)))) {
			f[i], v[i], do[i], dr[i], dm[i] = math.NaN(), math.NaN(), 0, 0, 0
			continue
		}
		g := x / d
		f[i] = g
		r, o := (1-g)*ar[i]/d, g*ao[i]/d
		dr[i], do[i], dm[i] = r, o, -(r + o)
		v[i] = r*r*qr.at(i) + o*o*qo.at(i) + (r+o)*(r+o)*qm.at(i)
	}
	return &form{val: f, sens: []sens{{role: in.DryBulb(), c: 1, d: do}, {role: trend.RATemp, c: 1, d: dr}, {role: trend.MATemp, c: 1, d: dm}}}, v
}

// total is the variance of a reading in one interval, offset and noise.
type totalVariance struct {
	o   []float64
	nu2 float64
}

func (t totalVariance) at(i int) float64 { return t.o[i]*t.o[i] + t.nu2 }

func (b *Books) total(r trend.Role) totalVariance {
	nu := b.NoiseU(r)
	return totalVariance{b.OffsetU(r), nu * nu}
}

// fractionMoisture is (W_r - W_m)/(W_r - W_o): water is conserved.
func (b *Books) fractionMoisture() (*form, []float64) {
	wo, wr, wm := b.humRatio(b.path.inlet), b.humRatio(trend.Return), b.humRatio(trend.Mixed)
	if wo == nil || wr == nil || wm == nil {
		return nil, nil
	}
	f, do, dr, dm := b.buffer(), b.buffer(), b.buffer(), b.buffer()
	vo, vr := b.variance(wo), b.variance(wr)
	for i := range f {
		d := wr.val[i] - wo.val[i]
		if !(d*d >= max(leastMoistSpread*leastMoistSpread, leastDenominator*leastDenominator*(vo[i]+vr[i]))) {
			f[i], do[i], dr[i], dm[i] = math.NaN(), 0, 0, 0
			continue
		}
		g := (wr.val[i] - wm.val[i]) / d
		f[i] = g
		do[i], dr[i], dm[i] = g/d, (1-g)/d, -1/d
	}
	b.release(vo, vr)
	out := &form{val: f, sens: b.merge(weigh{f: wo, w: do, own: true}, weigh{f: wr, w: dr, own: true}, weigh{f: wm, w: dm, own: true})}
	return out, b.variance(out)
}

// fractionFlow is the outdoor over the supply mass flow: each volume flow over
// the specific volume at its station. The volumes' own uncertainty, 0.1 %
// against the flows' 6 %, is left out.
func (b *Books) fractionFlow() (*form, []float64) {
	qo, qs := b.reading(trend.OAFlow), b.reading(trend.SAFlow)
	if qo == nil || qs == nil {
		return nil, nil
	}
	ratio := b.volumeRatio(trend.Supply, trend.Outdoor)
	f, do, ds := b.buffer(), b.buffer(), b.buffer()
	total := b.total(trend.SAFlow)
	for i := range f {
		s := qs.val[i]
		if !(s > 0 && s*s >= leastDenominator*leastDenominator*total.at(i)) {
			f[i], do[i], ds[i] = math.NaN(), 0, 0
			continue
		}
		k := 1.0
		if ratio != nil {
			k = ratio[i]
		}
		f[i] = k * qo.val[i] / s
		do[i], ds[i] = k/s, -f[i]/s
	}
	out := &form{val: f, sens: []sens{{role: trend.OAFlow, c: 1, d: do}, {role: trend.SAFlow, c: 1, d: ds}}}
	return out, b.variance(out)
}

// flowVariance is the variance that the fraction from flows would have at
// another value f: what is a share of the outdoor flow moves with f.
func (b *Books) flowVariance(fr *fractions) func(i int, f float64) float64 {
	do := fr.flow.sens[0].d
	o, s := b.total(trend.OAFlow), b.total(trend.SAFlow)
	flow := b.u.Col(trend.SAFlow)
	share, least := b.relative(trend.OAFlow)
	return func(i int, f float64) float64 {
		x, y := do[i]*do[i], f/flow[i]
		u := o.o[i]
		if share > 0 {
			u = math.Max(share*math.Abs(f/do[i]), least)
		}
		return x*(u*u+o.nu2) + y*y*s.at(i)
	}
}

// combine weighs the fractions that an interval has by generalised least
// squares with their covariance: temperature and moisture share the dry bulbs;
// flow shares nothing with either. chi2 is the weighted sum of squares about the
// combined value, NaN with fewer than two.
func (b *Books) combine(fr *fractions, temp, moist, flow bool) (combined, []float64) {
	var parts []weigh
	var wt, wm, wq []float64
	var ft, fm, fq *form
	add := func(f *form) []float64 {
		w := b.buffer()
		clear(w)
		parts = append(parts, weigh{f: f, w: w, own: true})
		return w
	}
	if temp && fr.temp != nil {
		ft, wt = fr.temp, add(fr.temp)
	}
	if moist && fr.moist != nil {
		fm, wm = fr.moist, add(fr.moist)
	}
	if flow && fr.flow != nil {
		fq, wq = fr.flow, add(fr.flow)
	}
	switch {
	case len(parts) == 0:
		return combined{}, nil
	case len(parts) == 1 && ft != nil:
		return combined{ft, fr.varTemp}, nil
	case len(parts) == 1 && fm != nil:
		return combined{fm, fr.varMoist}, nil
	case len(parts) == 1:
		return combined{fq, fr.varFlow}, nil
	}
	var cov []float64
	if ft != nil && fm != nil {
		cov = b.covariance(ft, fm)
	}
	var flowVar func(i int, f float64) float64
	if fq != nil {
		flowVar = b.flowVariance(fr)
	}
	val, v, chi2 := b.buffer(), b.buffer(), b.buffer()
	for i := range val {
		x, vx, chi, dof := math.NaN(), math.Inf(1), 0.0, -1
		if ft != nil && ft.val[i] == ft.val[i] {
			x, vx, wt[i], dof = ft.val[i], fr.varTemp[i], 1, 0
		}
		if fm != nil && fm.val[i] == fm.val[i] {
			y, vy, c := fm.val[i], fr.varMoist[i], 0.0
			if dof == 0 {
				c = cov[i]
				den := vx + vy - 2*c
				if den > 1e-12 {
					w := (vy - c) / den // weight of what was there before
					chi += (x - y) * (x - y) / den
					x, vx = w*x+(1-w)*y, (vx*vy-c*c)/den
					wt[i], wm[i] = w, 1-w
				}
				dof = 1
			} else {
				x, vx, wm[i], dof = y, vy, 1, 0
			}
		}
		if fq != nil && fq.val[i] == fq.val[i] {
			y := fq.val[i]
			if dof >= 0 {
				// A flow's uncertainty is a share of the flow. Taken at the flow's own
				// reading it would favour low ones; it is taken at the combined value
				// instead, found in two steps.
				vy := fr.varFlow[i]
				w := vy / (vx + vy)
				vy = flowVar(i, w*x+(1-w)*y)
				if den := vx + vy; den > 0 {
					w = vy / den
					chi += (x - y) * (x - y) / den
					x, vx = w*x+(1-w)*y, vx*vy/den
					if wt != nil {
						wt[i] *= w
					}
					if wm != nil {
						wm[i] *= w
					}
					wq[i] = 1 - w
				}
				dof++
			} else {
				x, vx, wq[i], dof = y, fr.varFlow[i], 1, 0
			}
		}
		val[i], v[i], chi2[i] = x, vx, chi
		if dof < 1 {
			chi2[i] = math.NaN()
		}
	}
	if cov != nil {
		b.release(cov)
	}
	return combined{&form{val: val, sens: b.merge(parts...)}, v}, chi2
}

// one wraps a balance that has a single place.
func (b *Books) one(s *Series, c trend.Component, from, to trend.Station, readings []trend.Role) []*Part {
	if s == nil {
		return nil
	}
	return []*Part{{Series: s, Component: c, From: from, To: to, Readings: readings}}
}

// rolesOf lists the readings behind forms, in the order of the roles.
func rolesOf(fs ...*form) []trend.Role {
	var out []trend.Role
	for _, f := range fs {
		if f == nil {
			continue
		}
		for k := range f.sens {
			if r := f.sens[k].role; r != trend.NoRole && !slices.Contains(out, r) {
				out = append(out, r)
			}
		}
	}
	slices.Sort(out)
	return out
}

func keepFractionTemp(b *Books) []*Part {
	return b.mixingPart("oa_fraction_temp", "fraction", b.fraction().temp, 1)
}

func keepFractionMoisture(b *Books) []*Part {
	return b.mixingPart("oa_fraction_moisture", "fraction", b.fraction().moist, 1)
}

func keepFractionFlow(b *Books) []*Part {
	return b.mixingPart("oa_fraction_flow", "fraction", b.fraction().flow, 1)
}

func keepFraction(b *Books) []*Part {
	if !b.path.mixing {
		n := b.n()
		s := &Series{Name: "oa_fraction", Unit: "fraction", Val: filled(n, 1), Off: make([]float64, n), Noise: make([]float64, n)}
		return b.one(s, "", trend.NoStation, b.path.first, nil)
	}
	return b.mixingPart("oa_fraction", "fraction", b.fraction().all.f, 1)
}

func keepFractionChi2(b *Books) []*Part {
	fr := b.fraction()
	if fr.chi2 == nil {
		return nil
	}
	s := b.express("oa_fraction_chi2", "", &form{val: fr.chi2}, 1) // a statistic, not an estimate: no uncertainty of its own
	return b.one(s, trend.Mixing, trend.NoStation, trend.Mixed, rolesOf(fr.all.f))
}
