package balance

import (
	"math"
	"slices"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// estimatedFlow is the half-width of a flow that is estimated from fan speed or
// status, as a share.
const estimatedFlow = 0.20

type massFlow struct {
	f         *form
	estimated bool
}

// MassFlow is the supply air's mass flow, kg of dry air per second: supply flow
// over the specific volume there; else velocity times duct area over it; else,
// and estimated says so, fan speed (or status) times design flow. Nil where not
// even that can be had.
func (b *Books) MassFlow() (s *Series, estimated bool) {
	m := b.massFlow()
	return b.named("mass_flow", func() *Series { return b.express("mass_flow", "kg/s", m.f, 1) }), m.estimated
}

func (b *Books) massFlow() massFlow {
	return b.flow.get(func() massFlow {
		n := b.n()
		pl := &b.u.Plant
		v := b.volume(trend.Supply)
		switch {
		case b.u.Has(trend.SAFlow):
			return massFlow{f: perVolume(b.reading(trend.SAFlow), 1, v)}
		case b.u.Has(trend.SAVelocity) && pl.DuctArea > 0:
			return massFlow{f: perVolume(b.reading(trend.SAVelocity), pl.DuctArea, v)}
		case !(pl.DesignFlow > 0):
			return massFlow{}
		}
		val, d := make([]float64, n), make([]float64, n)
		on, speed := b.FanOn(), b.u.Col(trend.SAFanSpeed)
		for i := range val {
			if on[i] {
				q := pl.DesignFlow
				if speed != nil {
					q *= speed[i]
				}
				val[i] = q / v[i]
			}
			d[i] = estimatedFlow / sqrt3 * val[i]
		}
		return massFlow{f: &form{val: val, sens: []sens{{role: trend.NoRole, c: 1, d: d}}}, estimated: true}
	})
}

func perVolume(q *form, area float64, v []float64) *form {
	n := len(q.val)
	val, d := make([]float64, n), make([]float64, n)
	for i := range val {
		d[i] = area / v[i]
		val[i] = q.val[i] * d[i]
	}
	return &form{val: val, sens: []sens{{role: q.sens[0].role, c: 1, d: d}}}
}

// volume is the specific volume at a station, m3 per kg of dry air; of air at a
// nominal moisture where that is not read, and at 20 degC where the temperature
// is not either.
func (b *Books) volume(s trend.Station) []float64 {
	n, air := b.n(), b.Air()
	t, w, v := make([]float64, n), make([]float64, n), make([]float64, n)
	tf, wf := b.tempForm(s), b.humRatio(s)
	for i := range t {
		t[i], w[i] = 20, nominalHumRatio
		if tf != nil && tf.val[i] == tf.val[i] {
			t[i] = tf.val[i]
		}
		if wf != nil && wf.val[i] == wf.val[i] {
			w[i] = wf.val[i]
		}
	}
	air.Volumes(v, t, w)
	return v
}

// volumeRatio is the specific volume at a over that at c; nil where a
// temperature is not read at both.
func (b *Books) volumeRatio(a, c trend.Station) []float64 {
	if !b.hasTemp(a) || !b.hasTemp(c) {
		return nil
	}
	x, y := b.volume(a), b.volume(c)
	for i := range x {
		x[i] /= y[i]
	}
	return x
}

// moistureAt is the moisture at a station of the air path: read; at the mixing
// box that of the computed mixture; else that of the next station whose moisture
// is read and that only sensible components lie between, downstream first, since
// they leave it as it is. Nil where it cannot be had.
func (b *Books) moistureAt(s trend.Station) *form {
	if w := b.humRatio(s); w != nil {
		return w
	}
	if s == trend.Mixed {
		if w := b.mixed().hum; w != nil {
			return w
		}
	}
	ps := b.path.places
	at := slices.IndexFunc(ps, func(p place) bool { return p.at == s })
	if at < 0 {
		return nil
	}
	carried := func(between []trend.Component) bool { return !slices.ContainsFunc(between, wet) }
	for k := at + 1; k < len(ps) && carried(b.path.train[ps[at].after:ps[k].after]); k++ {
		if w := b.humRatio(ps[k].at); w != nil {
			return w
		}
	}
	for k := at - 1; k >= 0 && carried(b.path.train[ps[k].after:ps[at].after]); k-- {
		if w := b.humRatio(ps[k].at); w != nil {
			return w
		}
	}
	if at > 0 && b.path.mixing && carried(b.path.train[ps[0].after:ps[at].after]) {
		return b.mixed().hum
	}
	return nil
}

// coilHeats strikes the duties of the coil sections. A sensible-only section
// keeps its moisture, so its duty is taken from temperatures: two humidity
// sensors would add more doubt than knowledge. The fan's heat is taken off
// where the fan is in the section.
func (b *Books) coilHeats(split bool) []*heat {
	m := b.massFlow().f
	var out []*heat
	for _, s := range b.tempSections() {
		if len(coils(s.between)) == 0 {
			continue
		}
		h := &heat{s: s}
		out = append(out, h)
		a := b.sectionCapacity(s)
		sensible := b.product(b.minus(b.tempForm(s.to), b.tempForm(s.from)), a)
		total := sensible
		var latent *form
		if slices.ContainsFunc(s.between, wet) {
			w1, w2 := b.moistureAt(s.from), b.moistureAt(s.to)
			if w1 != nil && w2 != nil {
				total = b.wetHeat(s, w1, w2, a)
				if split {
					latent = b.minus(total, sensible)
					for i := range latent.val {
						if w1.val[i] != w1.val[i] || w2.val[i] != w2.val[i] {
							latent.val[i] = math.NaN()
						}
					}
				}
			}
		}
		if slices.Contains(s.between, trend.Fan) {
			fan := b.product(b.fanRiseForm(), a)
			total = b.minus(total, fan)
			if split {
				sensible = b.minus(sensible, fan)
			}
		}
		h.total = b.perTime(m, total)
		if split {
			h.sensible = b.perTime(m, sensible)
			if latent != nil {
				h.latent = b.perTime(m, latent)
			}
		}
	}
	return out
}

type heat struct {
	s                       section
	total, sensible, latent *form
}

// sectionCapacity is the heat capacity of the air in a section, by the moisture
// at either end, kJ/(K·kg of dry air).
func (b *Books) sectionCapacity(s section) []float64 {
	w1, w2 := b.moistureAt(s.from), b.moistureAt(s.to)
	out := make([]float64, b.n())
	for i := range out {
		w, k := 0.0, 0.0
		if w1 != nil && w1.val[i] == w1.val[i] {
			w, k = w+w1.val[i], k+1
		}
		if w2 != nil && w2.val[i] == w2.val[i] {
			w, k = w+w2.val[i], k+1
		}
		if k == 0 {
			w, k = nominalHumRatio, 1
		}
		out[i] = cpAir + cpVapour*w/k
	}
	return out
}

// wetHeat is (h2 - h1) - (W2 - W1)·h_w2, kJ per kg of dry air, with h_w2 the
// enthalpy of the water that leaves, taken at the leaving air's temperature
// (ASHRAE Handbook of Fundamentals, psychrometrics chapter, moist air cooling and
// dehumidification). Where a moisture is missing it falls back on the sensible
// heat a·(T2 - T1).
func (b *Books) wetHeat(s section, w1, w2 *form, a []float64) *form {
	air := b.Air()
	t1, t2 := b.tempForm(s.from), b.tempForm(s.to)
	val, dt1, dw1, dt2, dw2 := b.buffer(), b.buffer(), b.buffer(), b.buffer(), b.buffer()
	for i := range val {
		x, y := w1.val[i], w2.val[i]
		if x != x || y != y {
			val[i], dt1[i], dw1[i], dt2[i], dw2[i] = a[i]*(t2.val[i]-t1.val[i]), -a[i], 0, a[i], 0
			continue
		}
		h1, h1t, h1w := air.EnthalpyPartials(t1.val[i], x)
		h2, h2t, h2w := air.EnthalpyPartials(t2.val[i], y)
		hw := psy.WaterEnthalpy(t2.val[i])
		val[i] = h2 - h1 - (y-x)*hw
		dt1[i], dw1[i], dt2[i], dw2[i] = -h1t, hw-h1w, h2t-(y-x)*cpWater, h2w-hw
	}
	return &form{val: val, sens: b.merge(
		weigh{f: t2, w: dt2, own: true}, weigh{f: t1, w: dt1, own: true}, weigh{f: w2, w: dw2, own: true}, weigh{f: w1, w: dw1, own: true})}
}

// cpWater is the specific heat of liquid water, kJ/(kg·K) (ASHRAE Handbook of
// Fundamentals, psychrometrics chapter).
const cpWater = 4.186

// perTime multiplies by the mass flow; nil leaves the quantity per kg.
func (b *Books) perTime(m, q *form) *form {
	if m == nil {
		return q
	}
	val := b.buffer()
	for i := range val {
		val[i] = m.val[i] * q.val[i]
	}
	return &form{val: val, sens: b.merge(weigh{f: m, w: q.val}, weigh{f: q, w: m.val})}
}

func (b *Books) heatUnit() string {
	if b.massFlow().f == nil {
		return "kJ/kg"
	}
	return "kW"
}

func keepCoilHeat(b *Books) []*Part { return b.coilHeatParts() }

func (b *Books) coilHeatParts() []*Part { return b.coilParts.get(b.strikeCoilHeat) }

func (b *Books) strikeCoilHeat() []*Part {
	var out []*Part
	for _, h := range b.coilHeats(false) {
		name := "coil_heat_" + h.s.from.String() + "_" + h.s.to.String()
		c := trend.Component("")
		if cs := coils(h.s.between); len(cs) == 1 {
			c = cs[0]
		}
		out = append(out, &Part{
			Series: b.express(name, b.heatUnit(), h.total, 1), Component: c,
			From: h.s.from, To: h.s.to, Between: h.s.between, Readings: rolesOf(h.total),
		})
	}
	return out
}

// CoilHeatSplit divides the duty of a part of CoilHeat into sensible and latent,
// in the part's unit, heating positive. Latent is nil where the section is
// sensible-only or moisture is not known at both of its ends.
func (b *Books) CoilHeatSplit(p *Part) (sensible, latent *Series) {
	for _, h := range b.coilHeats(true) {
		if h.s.from != p.From || h.s.to != p.To {
			continue
		}
		stem := h.s.from.String() + "_" + h.s.to.String()
		sensible = b.named("coil_sensible_"+stem, func() *Series { return b.express("coil_sensible_"+stem, b.heatUnit(), h.sensible, 1) })
		latent = b.named("coil_latent_"+stem, func() *Series { return b.express("coil_latent_"+stem, b.heatUnit(), h.latent, 1) })
		return sensible, latent
	}
	return nil, nil
}

// kept is where two masks hold; a nil mask holds everywhere.
func kept(a, c []bool) []bool {
	if c == nil {
		return a
	}
	out := slices.Clone(a)
	for i := range out {
		out[i] = out[i] && c[i]
	}
	return out
}
