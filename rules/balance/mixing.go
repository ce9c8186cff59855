package balance

import (
	"math"

	"dewledger/ingest/trend"
)

// mixture is what outdoor and return air mix to, by a fraction.
type mixture struct {
	temp *form // by the combined fraction, degC
	hum  *form // by the combined fraction, kg/kg
	dry  *form // humidity ratio by a fraction that does not use moisture, kg/kg
}

// worstFraction is the standard uncertainty of a share of which nothing is
// known but that it lies between 0 and 1 (rectangular).
var worstFraction = 0.5 / sqrt3

// mixFrom is f·x_o + (1-f)·x_r, each weighted by its share of what is mixed;
// sensors that f and the streams share enter once.
func (b *Books) mixFrom(f, xo, xr *form) *form {
	val, wf, wo, wr := b.buffer(), b.buffer(), b.buffer(), b.buffer()
	for i := range val {
		g, o, r := f.val[i], xo.val[i], xr.val[i]
		val[i] = g*o + (1-g)*r
		wf[i], wo[i], wr[i] = o-r, g, 1-g
	}
	return &form{val: val, sens: b.merge(weigh{f: f, w: wf, own: true}, weigh{f: xo, w: wo, own: true}, weigh{f: xr, w: wr, own: true})}
}

// mixTemp is the temperature of a mixture, weighted by heat capacity.
func (b *Books) mixTemp(f, to, tr *form) *form {
	n := b.n()
	ao, ar := b.heatCapacities(b.path.inlet), b.heatCapacities(trend.Return)
	val, wf, wo, wr := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range val {
		g, a, c := f.val[i], ao[i], ar[i]
		o, r := to.val[i], tr.val[i]
		sum := g*a + (1-g)*c
		t := (g*a*o + (1-g)*c*r) / sum
		val[i] = t
		// d/df of (g·a·o + (1-g)·c·r)/(g·a + (1-g)·c)
		wf[i] = (a*(o-t) - c*(r-t)) / sum
		wo[i], wr[i] = g*a/sum, (1-g)*c/sum
	}
	return &form{val: val, sens: b.merge(weigh{f: f, w: wf, own: true}, weigh{f: to, w: wo, own: true}, weigh{f: tr, w: wr, own: true})}
}

// mixed gives the mixtures that the unit lets be computed.
func (b *Books) mixed() *mixture {
	return b.mixture.get(func() *mixture {
		m := &mixture{}
		if !b.path.mixing {
			return m
		}
		fr := b.fraction()
		wo, wr := b.humRatio(b.path.inlet), b.humRatio(trend.Return)
		to, tr := b.tempForm(b.path.inlet), b.tempForm(trend.Return)
		if fr.all.f != nil && to != nil && tr != nil {
			m.temp = b.mixTemp(fr.all.f, to, tr)
		}
		if wo == nil || wr == nil {
			return m
		}
		if fr.all.f != nil {
			m.hum = b.mixFrom(fr.all.f, wo, wr)
		}
		if fr.fromDry.f != nil {
			m.dry = b.mixFrom(b.knownFraction(fr.fromDry), wo, wr)
		}
		return m
	})
}

// knownFraction is the fraction where it is known better than not at all, and
// NaN elsewhere: a guess of one half would err the same way all month on a unit
// that stands at its minimum, and the bound says what is sure.
func (b *Books) knownFraction(c combined) *form {
	val, w := b.buffer(), b.buffer()
	for i := range val {
		val[i], w[i] = math.NaN(), 0
		if c.v[i] <= worstFraction*worstFraction {
			val[i], w[i] = c.f.val[i], 1
		}
	}
	return &form{val: val, sens: b.merge(weigh{f: c.f, w: w, own: true})}
}

// mixingEnergy is the mixed temperature less that of the mixture, by a fraction
// that rests on no temperature difference: moisture and flow. K.
func (b *Books) mixingEnergy() *form {
	f := b.fraction().fromWet.f
	to, tr, tm := b.tempForm(b.path.inlet), b.tempForm(trend.Return), b.tempForm(trend.Mixed)
	if f == nil || to == nil || tr == nil || tm == nil {
		return nil
	}
	return b.minus(tm, b.mixTemp(f, to, tr))
}

// mixingMoisture is the mixed moisture less that of the mixture, by a fraction
// that uses no moisture: temperature and flow. kg/kg.
func (b *Books) mixingMoisture() *form {
	f := b.fraction().fromDry.f
	wo, wr, wm := b.humRatio(b.path.inlet), b.humRatio(trend.Return), b.humRatio(trend.Mixed)
	if f == nil || wo == nil || wr == nil || wm == nil {
		return nil
	}
	return b.minus(wm, b.mixFrom(f, wo, wr))
}

func keepMixingEnergy(b *Books) []*Part {
	return b.mixingPart("mixing_energy", "K", b.mixingEnergy(), 1)
}

func keepMixingMoisture(b *Books) []*Part {
	return b.mixingPart("mixing_moisture", "g/kg", b.mixingMoisture(), 1000)
}

// mixingPart makes the one part of a balance of the mixing box.
func (b *Books) mixingPart(name, unit string, f *form, scale float64) []*Part {
	if f == nil {
		return nil
	}
	return b.one(b.express(name, unit, f, scale), trend.Mixing, trend.NoStation, trend.Mixed, rolesOf(f))
}

func keepMixedTempOutside(b *Books) []*Part {
	return b.mixingPart("mixed_temp_outside", "K", b.outside(b.tempForm), 1)
}

func keepMixedMoistureOutside(b *Books) []*Part {
	return b.mixingPart("mixed_moisture_outside", "g/kg", b.outside(b.humRatio), 1000)
}

// outside is how far the mixed state m lies outside the range between its streams
// o and r, negative inside: max(m - max(o,r), min(o,r) - m). The stream that sets
// the nearer end is the one that enters. Nil where one of them is not read.
func (b *Books) outside(state func(trend.Station) *form) *form {
	if !b.path.mixing {
		return nil
	}
	m, o, r := state(trend.Mixed), state(b.path.inlet), state(trend.Return)
	if m == nil || o == nil || r == nil {
		return nil
	}
	val, wm, wo, wr := b.buffer(), b.buffer(), b.buffer(), b.buffer()
	for i := range val {
		wm[i], wo[i], wr[i] = 0, 0, 0
		x, y, z := m.val[i], o.val[i], r.val[i]
		hi, lo, ho := y, z, &wo[i]
		hl := &wr[i]
		if z > y {
			hi, lo = z, y
			ho, hl = &wr[i], &wo[i]
		}
		if above, below := x-hi, lo-x; above >= below {
			val[i], wm[i], *ho = above, 1, -1
		} else if below > above {
			val[i], wm[i], *hl = below, -1, 1
		} else {
			val[i] = math.NaN()
		}
	}
	return &form{val: val, sens: b.merge(weigh{f: m, w: wm, own: true}, weigh{f: o, w: wo, own: true}, weigh{f: r, w: wr, own: true})}
}
