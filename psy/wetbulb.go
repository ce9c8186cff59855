package psy

import "math"

// The thermodynamic wet bulb: the temperature at which water brings air to
// saturation adiabatically,
//
//	h(t, W) + (Ws(t*) − W)·hw(t*) = h(t*, Ws(t*))
//
// Near 0 degC it is truly double-valued: air a little too dry for a wet bulb of
// 0 degC over ice still has one over liquid. Both solve the equation; they lie about
// 0.07 K apart for each kelvin of dry bulb. Given a wet bulb, liquid is meant from
// the triple point on and ice below. Asked for one, the package gives that over
// liquid wherever there is one: as the air dries, the wet bulb falls to the triple
// point and from there jumps to the branch over ice.

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
	h0, h1 := m.wetBulbWater(water)
	hw := h0 + h1*tw
	ws := m.satHumRatio(tw, water)
	// h(t, w) − w·hw = h(tw, ws) − ws·hw, a quadratic in w.
	a, b, c := m.enthalpyInW(t)
	return wOfEnthalpy(m.Enthalpy(tw, ws)-ws*hw, a, b-hw, c)
}

// wetBulbWater is the enthalpy h0 + h1·t of the water that a wet bulb evaporates,
// liquid or ice, kJ/kg. An ideal model's ice has the handbook's 2830 kJ/kg of
// sublimation less its 2501 of evaporation.
func (m Model) wetBulbWater(water bool) (h0, h1 float64) {
	switch {
	case water:
		return 0, 4.186
	case m.Ideal:
		return -329, 2.1
	}
	return -333.4, 2.1
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
	h0, h1 := m.wetBulbWater(water)
	hw := h0 + h1*twb
	_, ht, hww := m.EnthalpyPartials(t, w)
	_, st, sw := m.EnthalpyPartials(twb, ws)
	den := hww - hw
	dt = -ht / den
	dtwb = (st + (sw-hw)*dws - (ws-w)*h1) / den
	dp = (m.enthalpySlopeP(twb, ws) + (sw-hw)*dwsp - m.enthalpySlopeP(t, w)) / den
	return w, dt, dtwb, dp
}

// WetBulbPartials is WetBulb with its partial derivatives with respect to t (1), w
// (K) and p (K/Pa), along its branch.
func (m Model) WetBulbPartials(t, w float64) (twb, dt, dw, dp float64) {
	twb = m.WetBulb(t, w)
	_, wt, wtwb, wp := m.HumRatioWetBulbPartials(t, twb)
	return twb, -wt / wtwb, 1 / wtwb, -wp / wtwb
}

// tempWetBulb is the dry bulb of air with wet bulb twb and humidity ratio w.
func (m Model) tempWetBulb(twb, w float64) float64 {
	if !m.valid(twb) {
		return math.NaN()
	}
	water := twb >= triplePoint
	h0, h1 := m.wetBulbWater(water)
	ws := m.satHumRatio(twb, water)
	t := m.Temp(m.Enthalpy(twb, ws)+(w-ws)*(h0+h1*twb), w)
	if t < twb-1e-9 {
		return math.NaN()
	}
	return t
}

// WetBulb is the thermodynamic wet bulb at dry bulb t and humidity ratio w. NaN
// for w that is negative or above saturation by more than 1 part in 1e6, and
// outside the range of states. Near freezing it is the wet bulb over liquid where
// there is one, and over ice else.
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
			water, hi = false, triplePoint
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
