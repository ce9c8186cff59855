package psy

import "math"

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

// curve is the function at x, its slope and its second derivative.
func (p *pieces) curve(x float64) (v, slope, curve float64) {
	x = (x - p.from) * p.scale
	i := min(int(x), len(p.c)-1)
	x -= float64(i)
	c := &p.c[i]
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), (c[1] + x*(2*c[2]+x*3*c[3])) * p.scale, (2*c[2] + x*6*c[3]) * p.scale * p.scale
}

func pressureOf(ln, slope func(float64) float64) func(float64) (float64, float64) {
	return func(t float64) (v, d float64) {
		v = math.Exp(ln(t))
		return v, v * slope(t)
	}
}

var (
	waterPressure = newPieces(minT-1, maxT+1, 2*152, pressureOf(lnWater, lnWaterSlope))
	icePressure   = newPieces(minT-1, triplePoint, 2*62, pressureOf(lnIce, lnIceSlope))
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

// piece is that of p and the place in it, 0 to 1; nil outside the pieces.
func (o *octaves) piece(p float64) (c *[4]float64, x float64) {
	bits := math.Float64bits(p)
	i := bits>>(52-mantissaBits) - o.least // wraps far up for what is too small
	if i >= uint64(len(o.c)) {
		return nil, 0
	}
	// The mantissa bits below the index, as a fraction of the piece.
	return &o.c[i], float64(bits&(1<<(52-mantissaBits)-1)) * (1.0 / (1 << (52 - mantissaBits)))
}

// at is the temperature at p; false outside the pieces.
func (o *octaves) at(p float64) (float64, bool) {
	c, x := o.piece(p)
	if c == nil {
		return 0, false
	}
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), true
}

// both is nearly the temperature at p and its slope with ln p, K, without the
// cubic's last term (under 1e-4 K); false outside the pieces.
func (o *octaves) both(p float64) (t, slope float64, ok bool) {
	c, x := o.piece(p)
	if c == nil {
		return 0, 0, false
	}
	// p in widths of its piece: a whole octave is 1<<mantissaBits of them.
	widths := float64(1<<mantissaBits+math.Float64bits(p)>>(52-mantissaBits)&(1<<mantissaBits-1)) + x
	return c[0] + x*(c[1]+x*c[2]), (c[1] + x*2*c[2]) * widths, true
}

// saturationAt inverts the logarithm of a saturation pressure.
func saturationAt(ln, slope func(float64) float64, lo, hi float64) func(p float64) (t, slope float64) {
	return func(p float64) (float64, float64) {
		target, a, b := math.Log(p), lo, hi
		t := 0.5 * (a + b)
		for range 80 {
			l := ln(t)
			if l > target {
				b = t
			} else {
				a = t
			}
			next := t - (l-target)/slope(t)
			if !(next >= a && next <= b) {
				next = 0.5 * (a + b)
			}
			if math.Abs(next-t) < 1e-12 {
				break
			}
			t = next
		}
		return t, 1 / (slope(t) * p)
	}
}

var (
	triplePressure = SatPressureWater(triplePoint)
	waterPoint     = newOctaves(triplePressure/2, SatPressureWater(maxT), saturationAt(lnWater, lnWaterSlope, -30, maxT+30))
	icePoint       = newOctaves(SatPressureIce(minSat+1), triplePressure, saturationAt(lnIce, lnIceSlope, minSat-5, triplePoint+5))
)
