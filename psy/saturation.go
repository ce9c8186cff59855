package psy

import "math"

const (
	kelvin      = 273.15
	triplePoint = 0.01 // degC
	minSat      = -100.0
	maxSat      = 200.0
)

// SatPressure is the saturation pressure of water vapour at t, Pa: over ice
// below the triple point, over liquid water from there on. NaN outside -100 to
// 200 degC.
//
// Source: Hyland and Wexler 1983, as printed in the ASHRAE Handbook of
// Fundamentals, psychrometrics chapter, equations 5 and 6.
func SatPressure(t float64) float64 {
	if t < triplePoint {
		return SatPressureIce(t)
	}
	return SatPressureWater(t)
}

// SatPressureWater is the saturation pressure over liquid water, Pa; below the
// triple point over supercooled water, by the same equation extrapolated. NaN
// outside -100 to 200 degC. Source: as SatPressure, equation 6.
func SatPressureWater(t float64) float64 {
	if !(t >= minSat && t <= maxSat) {
		return math.NaN()
	}
	return math.Exp(lnWater(t))
}

// SatPressureIce is the saturation pressure over ice, Pa. NaN outside -100 to
// 0.01 degC. Source: as SatPressure, equation 5.
func SatPressureIce(t float64) float64 {
	if !(t >= minSat && t <= triplePoint) {
		return math.NaN()
	}
	return math.Exp(lnIce(t))
}

// lnWater and lnIce are the logarithm of the pressure in Pa, anywhere; the slopes
// are its derivative with temperature, 1/K.
func lnWater(t float64) float64 {
	const c8, c9, c10, c11, c12, c13 = -5.8002206e3, 1.3914993, -4.8640239e-2, 4.1764768e-5, -1.4452093e-8, 6.5459673
	x := t + kelvin
	return c8/x + c9 + x*(c10+x*(c11+x*c12)) + c13*math.Log(x)
}

func lnWaterSlope(t float64) float64 {
	const c8, c10, c11, c12, c13 = -5.8002206e3, -4.8640239e-2, 4.1764768e-5, -1.4452093e-8, 6.5459673
	x := 1 / (t + kelvin)
	return x*(c13-c8*x) + c10 + (t+kelvin)*(2*c11+(t+kelvin)*3*c12)
}

func lnIce(t float64) float64 {
	const c1, c2, c3, c4, c5, c6, c7 = -5.6745359e3, 6.3925247, -9.6778430e-3, 6.2215701e-7, 2.0747825e-9, -9.4840240e-13, 4.1635019
	x := t + kelvin
	return c1/x + c2 + x*(c3+x*(c4+x*(c5+x*c6))) + c7*math.Log(x)
}

func lnIceSlope(t float64) float64 {
	const c1, c3, c4, c5, c6, c7 = -5.6745359e3, -9.6778430e-3, 6.2215701e-7, 2.0747825e-9, -9.4840240e-13, 4.1635019
	x := t + kelvin
	return -c1/(x*x) + c3 + x*(2*c4+x*(3*c5+x*4*c6)) + c7/x
}

// satPressure is the saturation pressure at a t of the states' range, over liquid
// water alone where water is set.
func satPressure(t float64, water bool) float64 {
	if t < triplePoint && !water {
		return math.Exp(lnIce(t))
	}
	return math.Exp(lnWater(t))
}

// satSlope is the derivative of the pressure's logarithm, 1/K.
func satSlope(t float64, water bool) float64 {
	if t < triplePoint && !water {
		return lnIceSlope(t)
	}
	return lnWaterSlope(t)
}

// PressureAtAltitude is the pressure of the standard atmosphere at z metres
// above sea level, Pa. NaN outside -5000 to 11000 m.
//
// Source: ASHRAE Handbook of Fundamentals, psychrometrics chapter, equation 3.
func PressureAtAltitude(z float64) float64 {
	if !(z >= -5000 && z <= 11000) {
		return math.NaN()
	}
	return 101325 * math.Pow(1-2.25577e-5*z, 5.2559)
}

// AltitudeAtPressure is the inverse of PressureAtAltitude, m.
func AltitudeAtPressure(p float64) float64 {
	z := (1 - math.Pow(p/101325, 1/5.2559)) / 2.25577e-5
	if !(z >= -5001 && z <= 11001) {
		return math.NaN()
	}
	return z
}
