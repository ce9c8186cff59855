package psy

import "math"

// The slice forms do a whole column at once, without allocation, and equal the
// scalar forms within 1e-7 relative. A destination may be one of its sources.
// Different lengths panic: a caller's mistake.

// knots is ln pws on a half-kelvin grid, with its slope, so that a cubic Hermite
// piece gives it between; water and ice have a grid each, so that no piece
// straddles the triple point.
type knots struct {
	from float64
	l, d []float64
}

const grid = 0.5 // K

func newKnots(from, to float64, f func(float64) (float64, float64)) *knots {
	k := &knots{from: from}
	for i := range int(math.Round((to-from)/grid)) + 1 {
		l, d := f(math.Min(from+grid*float64(i), to)) // rounding must not leave f's range
		k.l, k.d = append(k.l, l), append(k.d, d*grid)
	}
	return k
}

var (
	waterKnots = newKnots(minT-1, maxT+1, lnSatWater)
	iceKnots   = newKnots(minSat+triplePoint, triplePoint, lnSatIce)
)

// at is ln pws and its derivative with temperature; t lies on the grid.
func (k *knots) at(t float64) (l, dt float64) {
	x := (t - k.from) / grid
	i := int(x)
	if i >= len(k.l)-1 {
		i = len(k.l) - 2
	}
	x -= float64(i)
	a, b, da, db := k.l[i], k.l[i+1], k.d[i], k.d[i+1]
	c := 3*(b-a) - 2*da - db
	e := da + db - 2*(b-a)
	return a + x*(da+x*(c+x*e)), (da + x*(2*c+x*3*e)) / grid
}

func (m Model) fastVapour(t float64, water bool) (e, dt float64) {
	k := waterKnots
	if t < triplePoint && !water {
		k = iceKnots
	}
	l, dl := k.at(t)
	p := math.Exp(l)
	f := m.Enhancement(t)
	return f * p, p * (m.enhancementSlope(t) + f*dl)
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
	s, _ := m.fastVapour(t, !m.Ice)
	e := rh * s
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
	for i, x := range w {
		dst[i] = m.dewPoint(x)
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
