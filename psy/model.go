package psy

import "math"

// The ranges of states.
const (
	minT, maxT = -60.0, 90.0
	minP, maxP = 50e3, 110e3

	// maxW bounds what has an enthalpy as a real gas: the polynomial in W turns
	// over far beyond it, and would give a false root near boiling.
	maxW = 3.0
)

// eps is the ratio of the molar masses of water and dry air. Source: ASHRAE
// Handbook of Fundamentals, psychrometrics chapter.
const eps = 0.621945

// Model is moist air at one pressure, and the conventions of a calculation. The
// zero value of the flags is real gas, and relative humidity over liquid water
// at all temperatures, as sensors report it.
type Model struct {
	P     float64 // absolute pressure, Pa
	Ideal bool    // the handbook's ideal-gas equations, without enhancement
	Ice   bool    // relative humidity below the triple point is over ice
}

func (m Model) valid(t float64) bool {
	return t >= minT && t <= maxT && m.P >= minP && m.P <= maxP
}

const enhancement0, enhancementP, enhancementT2 = 1.00062, 3.14e-8, 5.6e-7

// Enhancement is the factor by which air raises the saturation pressure of
// water vapour, f(p, t) = 1.00062 + 3.14e-8·p + 5.6e-7·t². 1 for an ideal model.
//
// Source: CIPM-2007 (Picard et al., Metrologia 45, 2008), equation A1.2;
// extended here over the package's range, see the accuracy of HumRatio.
func (m Model) Enhancement(t float64) float64 {
	if m.Ideal {
		return 1
	}
	return enhancement0 + enhancementP*m.P + enhancementT2*t*t
}

func (m Model) enhancementSlope(t float64) float64 {
	if m.Ideal {
		return 0
	}
	return 2 * enhancementT2 * t
}

// vapour is f·pws at t, over liquid water alone where water is set.
func (m Model) vapour(t float64, water bool) float64 {
	return m.Enhancement(t) * satPressure(t, water)
}

// vapourSlope is vapour's derivative with temperature, given vapour.
func (m Model) vapourSlope(t, s float64, water bool) float64 {
	return s * (satSlope(t, water) + m.enhancementSlope(t)/m.Enhancement(t))
}

// ratio is the humidity ratio at a vapour pressure.
func (m Model) ratio(e float64) float64 {
	if d := m.P - e; d > 0 {
		return eps * e / d
	}
	return math.NaN()
}

// HumRatio is the humidity ratio at dry bulb t and relative humidity rh:
// W = 0.621945·φ·f·pws / (p − φ·f·pws). NaN where the vapour would exceed the
// pressure, for rh that is not finite, or outside the range of states. Negative
// rh gives a negative W: a sensor may report it.
//
// Source: ASHRAE Handbook of Fundamentals, psychrometrics chapter, equations 20
// and 22, with Enhancement.
func (m Model) HumRatio(t, rh float64) float64 {
	if !m.valid(t) || math.IsInf(rh, 0) {
		return math.NaN()
	}
	return m.ratio(rh * m.vapour(t, !m.Ice))
}

// HumRatioPartials is HumRatio with its partial derivatives with respect to t
// (1/K), rh (1) and p (1/Pa).
func (m Model) HumRatioPartials(t, rh float64) (w, dt, drh, dp float64) {
	if !m.valid(t) || math.IsInf(rh, 0) {
		return nan4()
	}
	s := m.vapour(t, !m.Ice)
	return m.fromVapour(rh*s, rh*m.vapourSlope(t, s, !m.Ice), s, rh*m.vapourSlopeP(t, s))
}

// vapourSlopeP is the derivative of f·pws with pressure.
func (m Model) vapourSlopeP(t, s float64) float64 {
	if m.Ideal {
		return 0
	}
	return s / m.Enhancement(t) * enhancementP
}

func (m Model) fromVapour(e, de1, de2, dep float64) (w, d1, d2, dp float64) {
	d := m.P - e
	if !(d > 0) {
		return nan4()
	}
	k := eps * m.P / (d * d) // dW/de
	return eps * e / d, k * de1, k * de2, k*dep - eps*e/(d*d)
}

func nan4() (a, b, c, d float64) {
	n := math.NaN()
	return n, n, n, n
}

// SatHumRatio is the humidity ratio of saturated air at t, over ice below the
// triple point.
func (m Model) SatHumRatio(t float64) float64 { return m.HumRatioDewPoint(t) }

// HumRatioDewPoint is the humidity ratio of air with dew point (frost point
// below 0.01 degC) td.
func (m Model) HumRatioDewPoint(td float64) float64 {
	if !m.dewPointValid(td) {
		return math.NaN()
	}
	return m.ratio(m.vapour(td, false))
}

func (m Model) dewPointValid(td float64) bool {
	return td >= minSat && td <= maxT && m.P >= minP && m.P <= maxP
}

// HumRatioDewPointPartials is HumRatioDewPoint with its partial derivatives with
// respect to td (1/K) and p (1/Pa).
func (m Model) HumRatioDewPointPartials(td float64) (w, dtd, dp float64) {
	if !m.dewPointValid(td) {
		return math.NaN(), math.NaN(), math.NaN()
	}
	s := m.vapour(td, false)
	w, dtd, _, dp = m.fromVapour(s, m.vapourSlope(td, s, false), 0, m.vapourSlopeP(td, s))
	return w, dtd, dp
}

// RelHumidity is the relative humidity at t and w, in the model's convention
// below freezing; over 1 where supersaturated.
func (m Model) RelHumidity(t, w float64) float64 {
	if !m.valid(t) || !(w > -eps) || math.IsInf(w, 0) {
		return math.NaN()
	}
	return m.P * w / (eps + w) / m.vapour(t, !m.Ice)
}

// RelHumidityPartials is RelHumidity with its partial derivatives with respect to
// t (1/K), w (1) and p (1/Pa).
func (m Model) RelHumidityPartials(t, w float64) (rh, dt, dw, dp float64) {
	rh = m.RelHumidity(t, w)
	s := m.vapour(t, !m.Ice)
	dt = -rh * m.vapourSlope(t, s, !m.Ice) / s
	dw = m.P * eps / ((eps + w) * (eps + w)) / s
	dp = rh * (1/m.P - m.vapourSlopeP(t, s)/s)
	return rh, dt, dw, dp
}

// Saturation is the degree of saturation W/Ws at t.
func (m Model) Saturation(t, w float64) float64 { return w / m.SatHumRatio(t) }

// DewPoint is the dew point (frost point below 0.01 degC) of air with humidity
// ratio w. NaN for w that is not positive, or beyond -100 to 90 degC.
func (m Model) DewPoint(w float64) float64 {
	if !(w > 0) || math.IsInf(w, 0) || !(m.P >= minP && m.P <= maxP) {
		return math.NaN()
	}
	target := math.Log(m.P * w / (eps + w))
	// Newton in the logarithm, which is nearly linear in 1/T; the branch is known
	// beforehand, and each is smooth.
	ln, slope := lnWater, lnWaterSlope
	lo, hi := triplePoint, maxT
	above := lnWater(triplePoint) + math.Log(m.Enhancement(triplePoint)) - target
	if above > 0 {
		ln, slope = lnIce, lnIceSlope
		lo, hi = minSat, triplePoint
	}
	t := math.Min(math.Max(triplePoint-above*14, lo), hi)
	for range 60 {
		f := m.Enhancement(t)
		g := ln(t) + math.Log(f) - target
		if g > 0 {
			hi = t
		} else {
			lo = t
		}
		next := t - g/(slope(t)+m.enhancementSlope(t)/f)
		if !(next >= lo && next <= hi) {
			next = 0.5 * (lo + hi)
		}
		if math.Abs(next-t) < 1e-11 {
			t = next
			break
		}
		t = next
	}
	if g := ln(t) + math.Log(m.Enhancement(t)) - target; !(math.Abs(g) < 1e-9) {
		return math.NaN() // beyond the ends of the range
	}
	return t
}

// DewPointPartials is DewPoint with its partial derivatives with respect to w
// (K) and p (K/Pa).
func (m Model) DewPointPartials(w float64) (td, dw, dp float64) {
	td = m.DewPoint(w)
	_, dtd, wp := m.HumRatioDewPointPartials(td)
	return td, 1 / dtd, -wp / dtd
}

// The enthalpy of moist air,
//
//	h = a1·t + a2·t² + W·(b0 + b1·t + b2·t² + b3·W + b4·p) + (c0 + c1·t)·(p − p0)
//
// with p in units of 100 kPa and p0 = 1.01325. The coefficients are a least
// squares fit to every second of the real-gas states in testdata
// (real-gas-states.csv); the others check it.
const (
	ha1, ha2 = 1.0059945781748454, 1.4245941565110612e-05
	hb0, hb1 = 2504.008237041386, 1.7650574697511265
	hb2, hb3 = 0.001493280803698179, -19.348915099950077
	hb4      = -3.504342231552355
	hc0, hc1 = -0.2695267302859432, 0.00225561541875215
)

// Enthalpy is the enthalpy of moist air at t and w, with dry air and liquid
// water at 0 degC as zero (at 101.325 kPa). For an ideal model
// h = 1.006·t + W·(2501 + 1.86·t).
//
// NaN outside the range of states and, for a real gas, for w over 3.
//
// Source: ideal, ASHRAE Handbook of Fundamentals, psychrometrics chapter,
// equation 30; real, a polynomial fitted to real-gas states (see the package's
// tests), within 0.015 kJ/kg from -10 to 50 degC and 70 to 103 kPa as measured.
// The states reach w = 0.19; well beyond, the error grows.
func (m Model) Enthalpy(t, w float64) float64 {
	if !m.valid(t) || math.IsInf(w, 0) {
		return math.NaN()
	}
	if w > maxW && !m.Ideal {
		return math.NaN()
	}
	a, b, c := m.enthalpyInW(t)
	return a + w*(b+c*w)
}

// enthalpyInW is the enthalpy at t as a polynomial in W, a + b·W + c·W².
func (m Model) enthalpyInW(t float64) (a, b, c float64) {
	if m.Ideal {
		return 1.006 * t, 2501 + 1.86*t, 0
	}
	q := m.P / 1e5
	return t*(ha1+ha2*t) + (hc0+hc1*t)*(q-1.01325), hb0 + t*(hb1+t*hb2) + hb4*q, hb3
}

// wOfEnthalpy solves a + b·w + c·w² = h for the root that tends to (h − a)/b as c
// goes to 0. NaN where there is none.
func wOfEnthalpy(h, a, b, c float64) float64 {
	return 2 * (h - a) / (b + math.Sqrt(b*b+4*c*(h-a)))
}

// enthalpySlopeP is the derivative of the enthalpy with pressure, kJ/(kg·Pa).
func (m Model) enthalpySlopeP(t, w float64) float64 {
	if m.Ideal {
		return 0
	}
	return (hb4*w + hc0 + hc1*t) / 1e5
}

// EnthalpyPartials is Enthalpy with its partial derivatives with respect to t
// (kJ/(kg·K)) and w (kJ/kg).
func (m Model) EnthalpyPartials(t, w float64) (h, dt, dw float64) {
	if !m.valid(t) || math.IsInf(w, 0) {
		return math.NaN(), math.NaN(), math.NaN()
	}
	if m.Ideal {
		return 1.006*t + w*(2501+1.86*t), 1.006 + 1.86*w, 2501 + 1.86*t
	}
	if w > maxW {
		return math.NaN(), math.NaN(), math.NaN()
	}
	a, b, c := m.enthalpyInW(t)
	dt = ha1 + 2*ha2*t + w*(hb1+2*hb2*t) + hc1*(m.P/1e5-1.01325)
	return a + w*(b+c*w), dt, b + 2*c*w
}

// Temp is the dry bulb at enthalpy h and humidity ratio w: the inverse of
// Enthalpy. NaN outside the range of states, and where Enthalpy is.
func (m Model) Temp(h, w float64) float64 {
	var t float64
	if m.Ideal {
		t = (h - 2501*w) / (1.006 + 1.86*w)
	} else if w > maxW {
		return math.NaN()
	} else {
		q := m.P / 1e5
		d := q - 1.01325
		a := ha2 + w*hb2
		b := ha1 + w*hb1 + hc1*d
		c := w*(hb0+hb3*w+hb4*q) + hc0*d - h
		// The root that tends to -c/b as a goes to 0.
		t = -2 * c / (b + math.Sqrt(b*b-4*a*c))
	}
	if !m.valid(t) {
		return math.NaN()
	}
	return t
}

// TempPartials is Temp with its partial derivatives with respect to h (K·kg/kJ) and
// w (K).
func (m Model) TempPartials(h, w float64) (t, dh, dw float64) {
	t = m.Temp(h, w)
	_, ht, hw := m.EnthalpyPartials(t, w)
	return t, 1 / ht, -hw / ht
}

// HumRatioEnthalpy is the humidity ratio at dry bulb t and enthalpy h, the inverse
// of Enthalpy: negative where h is less than dry air's. NaN outside the range of
// states, and where no air has that enthalpy.
func (m Model) HumRatioEnthalpy(t, h float64) float64 {
	if !m.valid(t) || math.IsInf(h, 0) {
		return math.NaN()
	}
	a, b, c := m.enthalpyInW(t)
	w := wOfEnthalpy(h, a, b, c)
	if w > maxW && !m.Ideal {
		return math.NaN()
	}
	return w
}

// HumRatioEnthalpyPartials is HumRatioEnthalpy with its partial derivatives with
// respect to t (1/K) and h (kg/kJ).
func (m Model) HumRatioEnthalpyPartials(t, h float64) (w, dt, dh float64) {
	w = m.HumRatioEnthalpy(t, h)
	_, ht, hw := m.EnthalpyPartials(t, w)
	return w, -ht / hw, 1 / hw
}

// The compressibility of moist air, 1 + q·(z0 + z1·t + z2·t² + x·(z3 + z4·t + z5·x))
// with q = p/100 kPa and x the mole fraction of water.
const (
	z0, z1, z2 = -5.846196370915645e-04, 1.3662010707752765e-05, -9.232742043330814e-08
	z3, z4, z5 = -5.0296642559906814e-03, 6.630270405450272e-05, -2.7390206116189673e-02
)

// Volume is the specific volume, m³ per kg of dry air:
// v = 0.287042·T·(1 + 1.607858·W)/p times a compressibility near 1, which is 1 for
// an ideal model. NaN outside the range of states.
//
// Source: ASHRAE Handbook of Fundamentals, psychrometrics chapter, equation 26;
// the compressibility is a fit to every second of the real-gas states in
// testdata, within 4e-5 as measured on all.
func (m Model) Volume(t, w float64) float64 {
	if !m.valid(t) || math.IsInf(w, 0) {
		return math.NaN()
	}
	v := 287.042 * (t + kelvin) * (1 + 1.607858*w) / m.P
	if m.Ideal {
		return v
	}
	x := 1.607858 * w / (1 + 1.607858*w)
	return v * (1 + m.P/1e5*(z0+t*(z1+t*z2)+x*(z3+z4*t+z5*x)))
}

// VolumePartials is Volume with its partial derivatives with respect to t
// (m³/(kg·K)) and w (m³/kg).
func (m Model) VolumePartials(t, w float64) (v, dt, dw float64) {
	v = m.Volume(t, w)
	d := 1 + 1.607858*w
	dt, dw = v/(t+kelvin), 1.607858*v/d
	if m.Ideal {
		return v, dt, dw
	}
	q := m.P / 1e5
	x := 1 - 1/d
	z := 1 + q*(z0+t*(z1+t*z2)+x*(z3+z4*t+z5*x))
	dt += v / z * q * (z1 + 2*z2*t + x*z4)
	dw += v / z * q * (z3 + z4*t + 2*z5*x) * 1.607858 / (d * d)
	return v, dt, dw
}

// Density is the density of moist air, kg/m³: (1 + W)/v.
func (m Model) Density(t, w float64) float64 { return (1 + w) / m.Volume(t, w) }
