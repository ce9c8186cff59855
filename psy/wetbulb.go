package psy

import "math"

// The thermodynamic wet bulb: the temperature at which water brings air to
// saturation adiabatically,
//
//	h(t, W) + (Ws(t*) − W)·hw(t*) = h(t*, Ws(t*))
//
// Near 0 degC it is truly double-valued: over liquid and over ice. The liquid
// branch is taken at and above the triple point, the ice branch below; between
// the two curves lies a gap in which the triple point itself is returned.

// HumRatioWetBulb is the humidity ratio at dry bulb t and wet bulb twb. NaN where
// twb exceeds t, or outside the range of states.
//
// Source: ASHRAE Handbook of Fundamentals, psychrometrics chapter, equations 31
// to 35.
func (m Model) HumRatioWetBulb(t, twb float64) float64 {
	if !m.valid(t) || !m.valid(twb) || twb > t+1e-9 {
		return math.NaN()
	}
	return m.wetBulbHumRatio(t, twb, twb >= triplePoint)
}

func (m Model) wetBulbHumRatio(t, tw float64, water bool) float64 {
	ws := m.satHumRatio(tw, water)
	if m.Ideal {
		if water {
			return ((2501-2.326*tw)*ws - 1.006*(t-tw)) / (2501 + 1.86*t - 4.186*tw)
		}
		return ((2830-0.24*tw)*ws - 1.006*(t-tw)) / (2830 + 1.86*t - 2.1*tw)
	}
	hw := 4.186 * tw
	if !water {
		hw = -333.4 + 2.1*tw
	}
	// h(t, w) − w·hw = h(tw, ws) − ws·hw, a quadratic in w.
	a, b := m.enthalpyInW(t)
	return wOfEnthalpy(m.Enthalpy(tw, ws)-ws*hw, a, b-hw, hb3)
}

func (m Model) satHumRatio(t float64, water bool) float64 {
	return m.ratio(m.vapour(t, water))
}

// HumRatioWetBulbPartials is HumRatioWetBulb with its partial derivatives with
// respect to t (1/K), twb (1/K) and p (1/Pa). They follow from the implicit
// equation.
func (m Model) HumRatioWetBulbPartials(t, twb float64) (w, dt, dtwb, dp float64) {
	w = m.HumRatioWetBulb(t, twb)
	if math.IsNaN(w) {
		return nan4()
	}
	water := twb >= triplePoint
	s := m.vapour(twb, water)
	ws, dws, _, dwsp := m.fromVapour(s, m.vapourSlope(twb, s, water), 0, m.vapourSlopeP(twb, s))
	if m.Ideal {
		a, b, c, e := 2501.0, 2.326, 4.186, 1.86
		if !water {
			a, b, c = 2830, 0.24, 2.1
		}
		den := a + e*t - c*twb
		dt = (-1.006 - e*w) / den
		dtwb = (-b*ws + (a-b*twb)*dws + 1.006 + c*w) / den
		return w, dt, dtwb, (a - b*twb) * dwsp / den
	}
	hw, dhw := 4.186*twb, 4.186
	if !water {
		hw, dhw = -333.4+2.1*twb, 2.1
	}
	_, ht, hww := m.EnthalpyPartials(t, w)
	_, st, sw := m.EnthalpyPartials(twb, ws)
	den := hww - hw
	dt = -ht / den
	dtwb = (st + sw*dws - dws*hw - ws*dhw + w*dhw) / den
	// The enthalpies' own dependence on pressure: (h_p(t,w) − h_p(twb,ws)).
	hp := func(t, w float64) float64 { return (hb4*w + hc0 + hc1*t) / 1e5 }
	dp = (hp(twb, ws) + (sw-hw)*dwsp - hp(t, w)) / den
	return w, dt, dtwb, dp
}

// WetBulb is the thermodynamic wet bulb at dry bulb t and humidity ratio w. NaN
// for w that is negative or above saturation by more than 1 part in 1e6, and
// outside the range of states. See HumRatioWetBulb for the branches.
func (m Model) WetBulb(t, w float64) float64 {
	if !m.valid(t) || !(w >= 0) {
		return math.NaN()
	}
	water := t >= triplePoint
	if w > m.satHumRatio(t, water)*(1+1e-6) {
		return math.NaN()
	}
	lo, hi := minT, t
	if water {
		if m.wetBulbHumRatio(t, triplePoint, true) <= w {
			lo = triplePoint
		} else {
			water = false
			if hi = triplePoint; m.wetBulbHumRatio(t, triplePoint, false) < w {
				return triplePoint
			}
		}
	}
	// The humidity ratio rises with the wet bulb; bisection with secant steps.
	glo, ghi := m.wetBulbHumRatio(t, lo, water)-w, m.wetBulbHumRatio(t, hi, water)-w
	if glo > 0 {
		return math.NaN() // drier than the range of states lets the wet bulb be
	}
	for k := 0; k < 100 && hi-lo > 1e-10; k++ {
		x := lo - glo*(hi-lo)/(ghi-glo)
		if k%3 == 2 || !(x > lo && x < hi) {
			x = 0.5 * (lo + hi)
		}
		g := m.wetBulbHumRatio(t, x, water) - w
		if g <= 0 {
			lo, glo = x, g
		} else {
			hi, ghi = x, g
		}
		if math.Abs(g) < 1e-15 {
			return x
		}
	}
	return 0.5 * (lo + hi)
}
