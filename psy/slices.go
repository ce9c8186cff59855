package psy

import "math"

// The slice forms do a whole column at once, without allocation, and equal the
// scalar forms within 1e-7 relative, temperatures within 1e-7 K where that is
// more. A destination may be one of its sources. Different lengths panic: a
// caller's mistake.

func sameLength(n int, lens ...int) {
	for _, k := range lens {
		if k != n {
			panic("psy: slices of different length")
		}
	}
}

// column is a Model with everything worked out that does not change along a
// column. Its polynomials are those of Enhancement, Enthalpy and the wet bulb.
type column struct {
	lo, hi         float64 // the range of states; empty where the pressure is outside it
	p              float64
	f0, f2         float64 // f = f0 + f2·t²
	c, a1, a2      float64 // h = c + a1·t + a2·t² + w·(b0 + b1·t + b2·t² + b3·w)
	b0, b1, b2, b3 float64
	maxW           float64
	table          *pieces // the saturation pressure that rh refers to
	dew            *dewTable
	bend           float64 // what dew.bend lacks of f2/f0
	tripleE        float64 // f·pws/f0 at the triple point
}

func (m Model) column() column {
	k := column{lo: minT, hi: maxT, p: m.P, maxW: maxW, table: overWater}
	if !(m.P >= minP && m.P <= maxP) {
		k.lo, k.hi = 1, 0
	}
	if m.Ice {
		k.table = overIce
	}
	if m.Ideal {
		k.f0, k.a1, k.b0, k.b1, k.maxW = 1, 1.006, 2501, 1.86, math.MaxFloat64
		k.dew, k.tripleE = idealDew, m.vapour(triplePoint, true)
		return k
	}
	q := m.P / 1e5
	d := q - 1.01325
	k.f0, k.f2 = m.Enhancement(0), enhancementT2
	k.dew, k.tripleE = realDew, m.vapour(triplePoint, true)/k.f0
	k.bend = k.f2/k.f0 - k.dew.bend
	k.c, k.a1, k.a2 = hc0*d, ha1+hc1*d, ha2
	k.b0, k.b1, k.b2, k.b3 = hb0+hb4*q, hb1, hb2, hb3
	return k
}

func (k *column) valid(t float64) bool { return t >= k.lo && t <= k.hi }

// humRatio is HumRatio at a t in range.
func (k *column) humRatio(t, rh float64) float64 {
	e := rh * (k.f0 + k.f2*t*t) * k.table.at(t)
	if d := k.p - e; d > 0 {
		return eps * e / d
	}
	return math.NaN()
}

func (k *column) enthalpy(t, w float64) float64 {
	if !(w <= k.maxW) {
		return math.NaN()
	}
	return k.c + t*(k.a1+k.a2*t) + w*(k.b0+t*(k.b1+k.b2*t)+k.b3*w)
}

// HumRatios is HumRatio over columns.
func (m Model) HumRatios(dst, t, rh []float64) {
	sameLength(len(dst), len(t), len(rh))
	k := m.column()
	for i, x := range t {
		y := math.NaN()
		if k.valid(x) {
			y = k.humRatio(x, rh[i])
		}
		dst[i] = y
	}
}

// HumRatiosPartials is HumRatioPartials over columns, without the pressure's.
func (m Model) HumRatiosPartials(w, dt, drh, t, rh []float64) {
	sameLength(len(w), len(dt), len(drh), len(t), len(rh))
	k := m.column()
	for i, x := range t {
		if !k.valid(x) {
			w[i], dt[i], drh[i] = math.NaN(), math.NaN(), math.NaN()
			continue
		}
		p, dp := k.table.both(x)
		f := k.f0 + k.f2*x*x
		w[i], dt[i], drh[i], _ = m.fromVapour(rh[i]*f*p, rh[i]*(2*k.f2*x*p+f*dp), f*p, 0)
	}
}

// HumRatiosEnthalpies is HumRatio and Enthalpy over columns in one pass.
func (m Model) HumRatiosEnthalpies(w, h, t, rh []float64) {
	sameLength(len(w), len(h), len(t), len(rh))
	k := m.column()
	table, nan := k.table, math.NaN()
	w, h, rh = w[:len(t)], h[:len(t)], rh[:len(t)]
	for i, x := range t {
		y, z := nan, nan
		if x >= k.lo && x <= k.hi {
			e := rh[i] * (k.f0 + k.f2*x*x) * table.at(x)
			if d := k.p - e; d > 0 {
				y = eps * e / d
				z = k.enthalpy(x, y)
			}
		}
		w[i], h[i] = y, z
	}
}

// HumRatiosDewPoint is HumRatioDewPoint over a column.
func (m Model) HumRatiosDewPoint(dst, td []float64) {
	sameLength(len(dst), len(td))
	m.Ice = true // a frost point is over ice
	k := m.column()
	for i, x := range td {
		if k.valid(x) {
			dst[i] = k.humRatio(x, 1)
		} else {
			dst[i] = m.HumRatioDewPoint(x) // frost points reach further down
		}
	}
}

// Enthalpies is Enthalpy over columns.
func (m Model) Enthalpies(dst, t, w []float64) {
	sameLength(len(dst), len(t), len(w))
	k := m.column()
	for i, x := range t {
		y := w[i]
		if k.valid(x) && !math.IsInf(y, 0) {
			dst[i] = k.enthalpy(x, y)
		} else {
			dst[i] = math.NaN()
		}
	}
}

// Volumes is Volume over columns.
func (m Model) Volumes(dst, t, w []float64) {
	sameLength(len(dst), len(t), len(w))
	for i, x := range t {
		dst[i] = m.Volume(x, w[i])
	}
}

// DewPoints is DewPoint over a column.
func (m Model) DewPoints(dst, w []float64) {
	sameLength(len(dst), len(w))
	k := m.column()
	for i, x := range w {
		td := math.NaN()
		if k.lo < k.hi && x > 0 {
			td = k.dewPoint(x)
			if !(td > minSat+2 && td < maxT-1) {
				td = m.DewPoint(x) // near the ends
			}
		}
		dst[i] = td
	}
}

// dewPoint is the dew point from the pieces, NaN beyond them. The table is made for
// one pressure; a step along its slope makes up for another's enhancement, at most
// 1e-5 of the vapour pressure.
func (k *column) dewPoint(w float64) float64 {
	e := k.p * w / ((eps + w) * k.f0)
	o := &k.dew.water
	if e < k.tripleE {
		o = &k.dew.ice
	}
	t, slope, ok := o.at(e)
	if !ok {
		return math.NaN()
	}
	return t - slope*k.bend*t*t/(1+k.dew.bend*t*t)
}

// WetBulbs is WetBulb over columns.
func (m Model) WetBulbs(dst, t, w []float64) {
	sameLength(len(dst), len(t), len(w))
	k := m.column()
	water, ice := phase{table: overWater}, phase{table: overIce}
	water.h0, water.h1 = m.wetBulbWater(true)
	ice.h0, ice.h1 = m.wetBulbWater(false)
	// Where the wet bulb over liquid is the triple point.
	ws := m.satHumRatio(triplePoint, true)
	hs, hw := k.enthalpy(triplePoint, ws), water.h0+water.h1*triplePoint
	for i, x := range t {
		y := w[i]
		if !k.valid(x) || !(y >= 0 && y < 10) {
			dst[i] = m.WetBulb(x, y)
			continue
		}
		ph := &water
		if x < triplePoint || k.enthalpy(x, y)-y*hw < hs-ws*hw {
			ph = &ice
		}
		tw := k.wetBulb(x, y, ph)
		if math.IsNaN(tw) {
			tw = m.WetBulb(x, y)
		}
		dst[i] = tw
	}
}

// phase is the water that a wet bulb evaporates: its saturation pressure and its
// enthalpy h0 + h1·t.
type phase struct {
	table  *pieces
	h0, h1 float64
}

// wetBulb solves h(t*, Ws) + (W − Ws)·hw(t*) = h(t, W), in which nothing is
// nested, by Halley's method: two or three rounds. NaN where it is not sure of
// the result: near saturation, the ends of the range and the triple point.
func (k *column) wetBulb(t, w float64, ph *phase) float64 {
	// The first guess: the psychrometric equation with a saturation pressure that
	// falls from dry bulb to wet bulb as 1/(1 + a·x), a quadratic in x. The bend
	// makes up for that falling more slowly than a saturation pressure does.
	const bend = 1.3
	es, des := overIce.both(t)
	e := k.p * w / (eps + w)
	gamma := 1.006 / (eps * 2501) * k.p
	a := bend * des / es
	b := gamma + e*a
	gap := es - e
	if !(gap > 1e-5*es) {
		return math.NaN()
	}
	tw := t - 2*gap/(b+math.Sqrt(b*b+4*gamma*a*gap))

	h := k.enthalpy(t, w)
	hi := maxT
	if ph.table == overIce {
		hi = triplePoint - 1e-6 // from there on the table is over water
	}
	for range 6 {
		tw = min(max(tw, minT), hi)
		p, dp, d2p := ph.table.curve(tw)
		f := k.f0 + k.f2*tw*tw
		e := f * p
		inv := 1 / (k.p - e)
		ws := eps * e * inv
		if !(ws > 0 && ws <= k.maxW) {
			return math.NaN()
		}
		de := (2*k.f2*tw*p + f*dp) * inv
		dws := (eps + ws) * de
		d2ws := (eps+ws)*f*d2p*inv + 2*dws*de
		hv := k.b0 + tw*(k.b1+k.b2*tw) + k.b3*ws - ph.h0 - ph.h1*tw
		r := k.c + tw*(k.a1+k.a2*tw) + ws*hv + w*(ph.h0+ph.h1*tw) - h
		dr := k.a1 + 2*k.a2*tw + ws*(k.b1+2*k.b2*tw) + dws*(hv+k.b3*ws) + (w-ws)*ph.h1
		d2r := d2ws*hv + 2*dws*(k.b1-ph.h1)
		step := 2 * r * dr / (2*dr*dr - r*d2r)
		tw -= step
		if math.Abs(step) < 0.01 { // the next would be under 1e-8
			if tw > minT+0.01 && tw < t && math.Abs(tw-triplePoint) > 1e-3 {
				return tw
			}
			break
		}
	}
	return math.NaN()
}
