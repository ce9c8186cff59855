package psy

import "math"

// pieces is a saturation pressure on a regular grid of half a kelvin, a cubic a
// piece that meets the pressure and its slope at both ends (Hermite): its relative
// error is (d ln p/dT)⁴·h⁴/384, 4e-9 at room temperature and 5e-8 at -60 degC. The
// triple point is on the grid, so that no piece straddles it.
type pieces [512][4]float64 // a power of two spares the index check

const (
	gridFrom   = triplePoint - 61 // below the range of states
	gridScale  = 2                // pieces a kelvin
	gridTriple = 61 * gridScale   // the first piece above the triple point
	gridSize   = 304              // pieces, to 91 degC
)

func newPieces(water bool) *pieces {
	p := new(pieces)
	for i := range gridSize {
		ln, slope := lnWater, lnWaterSlope
		if !water && i < gridTriple {
			ln, slope = lnIce, lnIceSlope
		}
		end := func(i int) (v, d float64) {
			t := gridFrom + float64(i)/gridScale
			v = math.Exp(ln(t))
			return v, v * slope(t) / gridScale
		}
		a, da := end(i)
		b, db := end(i + 1)
		p[i] = [4]float64{a, da, 3*(b-a) - 2*da - db, da + db - 2*(b-a)}
	}
	return p
}

var (
	overWater = newPieces(true)
	overIce   = newPieces(false) // below the triple point; over water from there on
)

// place is the piece of t, in the range of states, and the place in it, 0 to 1.
func (p *pieces) place(t float64) (c *[4]float64, x float64) {
	x = (t - gridFrom) * gridScale
	i := int(x)
	return &p[uint(i)%uint(len(p))], x - float64(i)
}

// at is the pressure at t, in the range of states.
func (p *pieces) at(t float64) float64 {
	c, x := p.place(t)
	return c[0] + x*(c[1]+x*(c[2]+x*c[3]))
}

// both is the pressure at t and its slope.
func (p *pieces) both(t float64) (v, slope float64) {
	c, x := p.place(t)
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), (c[1] + x*(2*c[2]+x*3*c[3])) * gridScale
}

// curve is the pressure at t, its slope and its second derivative.
func (p *pieces) curve(t float64) (v, slope, curve float64) {
	c, x := p.place(t)
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), (c[1] + x*(2*c[2]+x*3*c[3])) * gridScale, (2*c[2] + x*6*c[3]) * gridScale * gridScale
}

// dewTable is the dew point as a function of the vapour pressure over the
// enhancement's constant term, pws(t)·(1 + bend·t²): in pieces that are even in the
// pressure's mantissa, whose exponent and first bits are their index.
type dewTable struct {
	bend       float64
	water, ice octaves
}

type octaves struct {
	least uint64 // index of the first piece
	c     [][4]float64
}

const (
	pieceBits  = 6 // 64 pieces an octave
	pieceShift = 52 - pieceBits
)

func newDewTable(bend float64) *dewTable {
	d := &dewTable{bend: bend}
	triple := SatPressureWater(triplePoint)
	d.water = newOctaves(triple/2, SatPressureWater(maxT)*(1+bend*maxT*maxT), d.inverse(lnWater, lnWaterSlope, -30, maxT+30))
	d.ice = newOctaves(SatPressureIce(minSat+1), triple, d.inverse(lnIce, lnIceSlope, minSat-5, triplePoint+5))
	return d
}

func newOctaves(lo, hi float64, f func(p float64) (t, slope float64)) octaves {
	index := func(p float64) uint64 { return math.Float64bits(p) >> pieceShift }
	o := octaves{least: index(lo)}
	for k := o.least; k <= index(hi); k++ {
		a, b := math.Float64frombits(k<<pieceShift), math.Float64frombits((k+1)<<pieceShift)
		va, da := f(a)
		vb, db := f(b)
		da, db = da*(b-a), db*(b-a)
		o.c = append(o.c, [4]float64{va, da, 3*(vb-va) - 2*da - db, da + db - 2*(vb-va)})
	}
	return o
}

// inverse is the temperature at a p of the table and its slope, by Newton's method
// in the logarithm.
func (d *dewTable) inverse(ln, slope func(float64) float64, lo, hi float64) func(p float64) (t, dt float64) {
	return func(p float64) (float64, float64) {
		target, a, b := math.Log(p), lo, hi
		t := 0.5 * (a + b)
		for range 80 {
			off := ln(t) + math.Log1p(d.bend*t*t) - target
			if off > 0 {
				b = t
			} else {
				a = t
			}
			next := t - off/(slope(t)+2*d.bend*t/(1+d.bend*t*t))
			if !(next >= a && next <= b) {
				next = 0.5 * (a + b)
			}
			if math.Abs(next-t) < 1e-12 {
				break
			}
			t = next
		}
		return t, 1 / (p * (slope(t) + 2*d.bend*t/(1+d.bend*t*t)))
	}
}

// at is the temperature at p and its slope with ln p, K; false outside the pieces.
func (o *octaves) at(p float64) (t, slope float64, ok bool) {
	bits := math.Float64bits(p)
	i := bits>>pieceShift - o.least // wraps far up for what is too small
	if i >= uint64(len(o.c)) {
		return 0, 0, false
	}
	c := &o.c[i]
	// The mantissa bits below the index, as a fraction of the piece.
	x := float64(bits&(1<<pieceShift-1)) * (1.0 / (1 << pieceShift))
	// p in widths of its piece: a whole octave is 1<<pieceBits of them.
	widths := float64(1<<pieceBits+bits>>pieceShift&(1<<pieceBits-1)) + x
	return c[0] + x*(c[1]+x*(c[2]+x*c[3])), (c[1] + x*(2*c[2]+x*3*c[3])) * widths, true
}

var (
	idealDew = newDewTable(0)
	realDew  = newDewTable(enhancementT2 / (enhancement0 + enhancementP*101325))
)
