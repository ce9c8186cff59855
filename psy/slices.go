package psy

import "math"

// The slice forms do a whole column at once, without allocation, and equal the
// scalar forms within 1e-7 relative. A destination may be one of its sources.
// Different lengths panic: a caller's mistake.

// pieces is a function on a regular grid, a cubic a piece that meets the function
// and its slope at both ends (Hermite). For the saturation pressure on a
// half-kelvin grid the relative error is (d ln p/dT)⁴·h⁴/384: 4e-9 at room
// temperature, 5e-8 at -60 degC. Water and ice have a grid each, so that no piece
// straddles the triple point.
type pieces struct {
	from, scale float64 // scale is pieces a unit
	c           [][4]float64
}

func newPieces(from, to float64, n int, f func(float64) (v, slope float64)) *pieces {
	p := &pieces{from: from, scale: float64(n) / (to - from), c: make([][4]float64, n)}
	h := (to - from) / float64(n)
	at := func(i int) (float64, float64) {
		v, d := f(math.Min(from+h*float64(i), to)) // rounding must not leave f's range
		return v, d * h
	}
	a, da := at(0)
	for i := range p.c {
		b, db := at(i + 1)
		p.c[i] = [4]float64{a, da, 3*(b-a) - 2*da - db, da + db - 2*(b-a)}
		a, da = b, db
	}
	return p
}

// at is the function at x, which lies on the grid.
func (p *pieces) at(x float64) float64 {
	x = (x - p.from) * p.scale
	i := min(int(x), len(p.c)-1)
	x -= float64(i)
	c := &p.c[i]
	return c[0] + x*(c[1]+x*(c[2]+x*c[3]))
}

// both is the function at x and its slope.
func (p *pieces) both(x float64) (v, slope float64) {
	x = (x - p.from) * p.scale
	i := min(int(x), len(p.c)-1)
	x -= float64(i)
	c := &p.c[i]
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), (c[1] + x*(2*c[2]+x*3*c[3])) * p.scale
}

func pressureOf(ln func(float64) (float64, float64)) func(float64) (float64, float64) {
	return func(t float64) (v, slope float64) {
		l, d := ln(t)
		v = math.Exp(l)
		return v, v * d
	}
}

var (
	waterPressure = newPieces(minT-1, maxT+1, 2*152, pressureOf(lnSatWater))
	icePressure   = newPieces(minT-1, triplePoint, 2*62, pressureOf(lnSatIce))
)

// fastVapour is f·pws at t and its slope; t lies in the range of states.
func (m Model) fastVapour(t float64, water bool) (e, dt float64) {
	k := waterPressure
	if t < triplePoint && !water {
		k = icePressure
	}
	p, dp := k.both(t)
	f := m.Enhancement(t)
	return f * p, m.enhancementSlope(t)*p + f*dp
}

// octaves is the saturation temperature as a function of pressure, in pieces that
// are even in the pressure's mantissa: the exponent and the first mantissa bits
// of a float64 are its index.
type octaves struct {
	least uint64 // index of the first piece
	c     [][4]float64
}

const mantissaBits = 6 // 64 pieces an octave

func newOctaves(lo, hi float64, f func(p float64) (t, slope float64)) *octaves {
	index := func(p float64) uint64 { return math.Float64bits(p) >> (52 - mantissaBits) }
	o := &octaves{least: index(lo)}
	for k := o.least; k <= index(hi); k++ {
		a := math.Float64frombits(k << (52 - mantissaBits))
		b := math.Float64frombits((k + 1) << (52 - mantissaBits))
		va, da := f(a)
		vb, db := f(b)
		h := b - a
		da, db = da*h, db*h
		o.c = append(o.c, [4]float64{va, da, 3*(vb-va) - 2*da - db, da + db - 2*(vb-va)})
	}
	return o
}

// at is the temperature at p; false outside the pieces.
func (o *octaves) at(p float64) (float64, bool) {
	bits := math.Float64bits(p)
	i := bits>>(52-mantissaBits) - o.least // wraps far up for what is too small
	if i >= uint64(len(o.c)) {
		return 0, false
	}
	// The mantissa bits below the index, as a fraction of the piece.
	x := float64(bits&(1<<(52-mantissaBits)-1)) * (1.0 / (1 << (52 - mantissaBits)))
	c := &o.c[i]
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), true
}

// saturationAt inverts the logarithm of a saturation pressure.
func saturationAt(ln func(float64) (float64, float64), lo, hi float64) func(p float64) (t, slope float64) {
	return func(p float64) (float64, float64) {
		target, a, b := math.Log(p), lo, hi
		t := 0.5 * (a + b)
		var d float64
		for range 80 {
			var l float64
			l, d = ln(t)
			if l > target {
				b = t
			} else {
				a = t
			}
			next := t - (l-target)/d
			if !(next >= a && next <= b) {
				next = 0.5 * (a + b)
			}
			if math.Abs(next-t) < 1e-12 {
				break
			}
			t = next
		}
		return t, 1 / (d * p)
	}
}

var (
	triplePressure = SatPressureWater(triplePoint)
	waterPoint     = newOctaves(triplePressure/2, SatPressureWater(maxT), saturationAt(lnSatWater, -30, maxT+30))
	icePoint       = newOctaves(SatPressureIce(minSat+1), triplePressure, saturationAt(lnIceBeyond, minSat-5, triplePoint+5))
)

// lnIceBeyond is lnSatIce carried some kelvin beyond its ends, so that the last
// pieces have both of theirs.
func lnIceBeyond(t float64) (l, dt float64) {
	x := math.Min(math.Max(t, minSat), triplePoint)
	l, dt = lnSatIce(x)
	return l + dt*(t-x), dt
}

// fastDewPoint is dewPoint from the pieces: the enhancement is found in three
// rounds, each of which brings it a thousand times closer.
func (m Model) fastDewPoint(w float64) float64 {
	e := m.P * w / (eps + w)
	t := 10.0
	for range 4 {
		p := e / m.Enhancement(t)
		k := waterPoint
		if p < triplePressure {
			k = icePoint
		}
		var ok bool
		if t, ok = k.at(p); !ok {
			return m.dewPoint(w)
		}
		if m.Ideal {
			break
		}
	}
	if math.Abs(t-triplePoint) < 0.05 || t < minSat+2 || t > maxT-1 {
		return m.dewPoint(w) // near the kink and the ends
	}
	return t
}

func sameLength(n int, lens ...int) {
	for _, k := range lens {
		if k != n {
			panic("psy: slices of different length")
		}
	}
}

// HumRatios is HumRatio over columns.
func (m Model) HumRatios(dst, t, rh []float64) {
	sameLength(len(dst), len(t), len(rh))
	for i, x := range t {
		dst[i] = m.fastHumRatio(x, rh[i])
	}
}

func (m Model) fastHumRatio(t, rh float64) float64 {
	if !m.valid(t) {
		return math.NaN()
	}
	k := waterPressure
	if t < triplePoint && m.Ice {
		k = icePressure
	}
	e := rh * m.Enhancement(t) * k.at(t)
	if d := m.P - e; d > 0 {
		return eps * e / d
	}
	return math.NaN()
}

// HumRatiosPartials is HumRatioPartials over columns, without the pressure's.
func (m Model) HumRatiosPartials(w, dt, drh, t, rh []float64) {
	sameLength(len(w), len(dt), len(drh), len(t), len(rh))
	for i, x := range t {
		if !m.valid(x) {
			w[i], dt[i], drh[i] = math.NaN(), math.NaN(), math.NaN()
			continue
		}
		s, ds := m.fastVapour(x, !m.Ice)
		w[i], dt[i], drh[i], _ = m.fromVapour(rh[i]*s, rh[i]*ds, s, 0)
	}
}

// HumRatiosEnthalpies is HumRatio and Enthalpy over columns in one pass.
func (m Model) HumRatiosEnthalpies(w, h, t, rh []float64) {
	sameLength(len(w), len(h), len(t), len(rh))
	for i, x := range t {
		y := m.fastHumRatio(x, rh[i])
		w[i] = y
		h[i] = m.Enthalpy(x, y)
	}
}

// HumRatiosDewPoint is HumRatioDewPoint over a column.
func (m Model) HumRatiosDewPoint(dst, td []float64) {
	sameLength(len(dst), len(td))
	for i, x := range td {
		dst[i] = m.HumRatioDewPoint(x)
	}
}

// Enthalpies is Enthalpy over columns.
func (m Model) Enthalpies(dst, t, w []float64) {
	sameLength(len(dst), len(t), len(w))
	for i, x := range t {
		dst[i] = m.Enthalpy(x, w[i])
	}
}

// DewPoints is DewPoint over a column.
func (m Model) DewPoints(dst, w []float64) {
	sameLength(len(dst), len(w))
	ranged := m.P >= minP && m.P <= maxP
	for i, x := range w {
		if !ranged || !(x > 0) || math.IsInf(x, 0) {
			dst[i] = math.NaN()
			continue
		}
		dst[i] = m.fastDewPoint(x)
	}
}

// WetBulbs is WetBulb over columns.
func (m Model) WetBulbs(dst, t, w []float64) {
	sameLength(len(dst), len(t), len(w))
	for i, x := range t {
		dst[i] = m.WetBulb(x, w[i])
	}
}

// Volumes is Volume over columns.
func (m Model) Volumes(dst, t, w []float64) {
	sameLength(len(dst), len(t), len(w))
	for i, x := range t {
		dst[i] = m.Volume(x, w[i])
	}
}
