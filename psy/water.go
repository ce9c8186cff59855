package psy

import "math"

// WaterEnthalpy is the enthalpy of water at t, kJ/kg: liquid at saturation from the
// triple point on, and ice below, -333.4 + 2.1·t. NaN outside -100 to 200 degC.
//
// Source: liquid, IAPWS SR1-86(1992), equations 3, 4 and 6, h = α + T/ρ′·dp/dT; to
// 90 degC by a polynomial fitted to it, within 0.006 kJ/kg as measured. Ice: ASHRAE
// Handbook of Fundamentals, psychrometrics chapter, at the thermodynamic wet bulb.
func WaterEnthalpy(t float64) float64 {
	switch {
	case !(t >= minSat && t <= maxSat):
		return math.NaN()
	case t < triplePoint:
		return -333.4 + 2.1*t
	case t <= maxT:
		return -0.03586013569097635 + t*(4.217280107778628+t*(-0.0013996011716167981+
			t*(2.421519704902304e-05+t*(-1.9705228666439667e-07+t*7.003027176759153e-10))))
	}
	alpha, slope, liquid, _ := saturatedWater(t)
	return alpha + (t+kelvin)*slope/liquid/1e3
}

// SteamEnthalpy is the enthalpy of saturated steam at t, kJ/kg, as a steam
// humidifier gives it to the air. NaN outside 0 to 200 degC. It is 0.15 kJ/kg
// above the handbook's table of water at saturation at 30 degC and 0.20 at 110
// degC, as measured: the table follows a later formulation.
//
// Source: IAPWS SR1-86(1992), equations 3 (steam density), 4 (the auxiliary
// quantity α) and 7: h = α + T/ρ″·dp/dT.
func SteamEnthalpy(t float64) float64 {
	if !(t >= 0 && t <= maxSat) {
		return math.NaN()
	}
	alpha, slope, _, steam := saturatedWater(t)
	return alpha + (t+kelvin)*slope/steam/1e3
}

// saturatedWater is what the enthalpies of water at saturation follow from: α in
// kJ/kg, the slope of its pressure in Pa/K, and the densities of its liquid and
// its steam in kg/m³. Source: IAPWS SR1-86(1992), equations 1 to 4; α is
// -11.529101 J/kg at the triple point, where the liquid's enthalpy is 0.611786
// J/kg.
func saturatedWater(t float64) (alpha, slope, liquid, steam float64) {
	const (
		tc, pc, rc = 647.096, 22.064e6, 322.0

		a1, a2, a3, a4, a5, a6 = -7.85951783, 1.84408259, -11.7866497, 22.6807411, -15.9618719, 1.80122502
		b1, b2, b3, b4, b5, b6 = 1.99274064, 1.09965342, -0.510839303, -1.75493479, -45.5170352, -6.74694450e5
		c1, c2, c3, c4, c5, c6 = -2.03150240, -2.68302940, -5.38626492, -17.2991605, -44.7586581, -63.9201063
		d0, d1, d2, d3, d4, d5 = -1135.905627715, -5.65134998e-8, 2690.66631, 127.287297, -135.003439, 0.981825814
	)
	x := t + kelvin
	theta := x / tc
	tau := 1 - theta
	root := math.Sqrt(tau)
	cube := math.Cbrt(tau)
	t2, t3 := tau*tau, tau*tau*tau

	lnp := (a1*tau + a2*tau*root + a3*t3 + a4*t3*root + a5*t2*t2 + a6*t2*t2*t3*root) / theta
	slope = -pc * math.Exp(lnp) / x *
		(lnp + a1 + 1.5*a2*root + 3*a3*t2 + 3.5*a4*t2*root + 4*a5*t3 + 7.5*a6*t3*t3*root)
	liquid = rc * (1 + cube*(b1+cube*(b2+tau*(b3))) +
		b4*math.Pow(cube, 16) + b5*math.Pow(cube, 43) + b6*math.Pow(cube, 110))
	steam = rc * math.Exp(c1*cube+c2*cube*cube+c3*tau*cube+c4*t3+c5*t3*t3*math.Sqrt(cube)+c6*t3*t3*t3*t2*math.Pow(tau, 5.0/6))
	alpha = d0 + d1*math.Pow(theta, -19) + d2*theta + d3*math.Pow(theta, 4.5) + d4*math.Pow(theta, 5) + d5*math.Pow(theta, 54.5)
	return alpha, slope, liquid, steam
}
