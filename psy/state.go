package psy

import (
	"fmt"
	"math"
)

// Property is one of the quantities that fix a state of moist air, two at a time.
type Property int

// The properties, with the units in which State.Of and Model.Find have them.
const (
	DryBulb     Property = iota // degC
	HumRatio                    // kg per kg of dry air
	RelHumidity                 // fraction, in the model's convention below freezing
	DewPoint                    // degC; the frost point below 0.01 degC
	WetBulb                     // degC, thermodynamic
	Enthalpy                    // kJ per kg of dry air
	Volume                      // m³ per kg of dry air
)

var propertyNames = [...]string{"dry bulb", "humidity ratio", "relative humidity", "dew point", "wet bulb", "enthalpy", "specific volume"}

// String is the property's name in words.
func (p Property) String() string {
	if p < 0 || int(p) >= len(propertyNames) {
		return fmt.Sprintf("property %d", int(p))
	}
	return propertyNames[p]
}

// State is all that is known of moist air at a model's pressure. What does not
// exist is NaN: the dew point of dry air, the wet bulb of supersaturated air.
type State struct {
	T          float64 // dry bulb, degC
	W          float64 // humidity ratio, kg per kg of dry air
	RH         float64 // relative humidity, fraction
	DewPoint   float64 // degC
	WetBulb    float64 // degC
	Enthalpy   float64 // kJ per kg of dry air
	Volume     float64 // m³ per kg of dry air
	Density    float64 // kg of moist air per m³
	Saturation float64 // degree of saturation, W/Ws
}

// At is the state at dry bulb t and humidity ratio w. Every field is NaN where t
// lies outside the range of states.
func (m Model) At(t, w float64) State {
	if !m.valid(t) {
		t, w = math.NaN(), math.NaN()
	}
	return State{
		T: t, W: w,
		RH: m.RelHumidity(t, w), DewPoint: m.DewPoint(w), WetBulb: m.WetBulb(t, w),
		Enthalpy: m.Enthalpy(t, w), Volume: m.Volume(t, w), Density: m.Density(t, w), Saturation: m.Saturation(t, w),
	}
}

// Of is the value of p in the state.
func (s State) Of(p Property) float64 {
	switch p {
	case DryBulb:
		return s.T
	case HumRatio:
		return s.W
	case RelHumidity:
		return s.RH
	case DewPoint:
		return s.DewPoint
	case WetBulb:
		return s.WetBulb
	case Enthalpy:
		return s.Enthalpy
	case Volume:
		return s.Volume
	}
	return math.NaN()
}

// Find is the state at which property a is x and property b is y, in either order.
//
// It takes every pair that fixes a state: dry bulb, humidity ratio, relative
// humidity or volume with any other; dew point with any but humidity ratio; wet
// bulb or enthalpy with any but each other, whose lines lie too close together.
// The error says that a pair fixes nothing, or that no air in the range of states
// has the values. Supersaturated air is found, as a sensor may report it; air with
// a negative humidity ratio is not.
//
// Accuracy: the two values come back within 1e-9 relative, or 1e-6 K. Only a wet
// bulb given just below the triple point, of air that also has one over liquid, comes
// back as that one (see WetBulb).
func (m Model) Find(a Property, x float64, b Property, y float64) (State, error) {
	t, w, err := m.solve(a, x, b, y)
	if err != nil {
		return State{}, err
	}
	if !(w >= 0) || !m.valid(t) {
		return State{}, fmt.Errorf("psy: no moist air from %g to %g degC at %.0f Pa has %s %g and %s %g", minT, maxT, m.P, a, x, b, y)
	}
	return m.At(t, w), nil
}

// solve is the dry bulb and humidity ratio of Find, NaN where there are none.
func (m Model) solve(a Property, x float64, b Property, y float64) (t, w float64, err error) {
	for _, p := range [...]Property{a, b} {
		if p < 0 || int(p) >= len(propertyNames) {
			return 0, 0, fmt.Errorf("psy: %s does not exist", p)
		}
	}
	given := [2]Property{a, b}
	if b < a {
		a, x, b, y = b, y, a, x
	}
	if a == DewPoint { // a dew point is a humidity ratio
		a, x = HumRatio, m.HumRatioDewPoint(x)
	}
	if b == DewPoint {
		b, y = HumRatio, m.HumRatioDewPoint(y)
		if b < a {
			a, x, b, y = b, y, a, x
		}
	}
	if a == b || a == WetBulb && b == Enthalpy {
		return 0, 0, fmt.Errorf("psy: %s and %s do not fix a state: give two properties of which neither follows from the other", given[0], given[1])
	}

	// One property gives the humidity ratio at any dry bulb, and the other leaves a
	// gap there that changes one way with it.
	lo, rising, unknown := minT, true, 1.0
	var line func(t float64) float64
	switch a {
	case DryBulb:
		return x, m.humRatioOf(x, b, y), nil
	case HumRatio:
		line = func(float64) float64 { return x }
		switch b {
		case WetBulb:
			return m.tempWetBulb(y, x), x, nil
		case Enthalpy:
			return m.Temp(y, x), x, nil
		}
		rising = b == Volume // relative humidity falls
	case RelHumidity:
		line = func(t float64) float64 { return m.HumRatio(t, x) }
	case WetBulb:
		line = func(t float64) float64 { return m.HumRatioWetBulb(t, x) }
		lo = x
	case Enthalpy:
		line = func(t float64) float64 { return m.HumRatioEnthalpy(t, x) }
		unknown = -1 // it ends where the air would be too cold
	}
	var gap func(t float64) float64
	switch b {
	case RelHumidity:
		gap = func(t float64) float64 { return m.RelHumidity(t, line(t)) - y }
	case WetBulb:
		gap = func(t float64) float64 { return line(t) - m.HumRatioWetBulb(t, y) }
		lo = y
	case Enthalpy:
		gap = func(t float64) float64 { return m.Enthalpy(t, line(t)) - y }
	case Volume:
		gap = func(t float64) float64 { return m.Volume(t, line(t)) - y }
	}
	t = root(lo, maxT, func(t float64) float64 {
		g := gap(t)
		if math.IsNaN(g) {
			return unknown
		}
		if !rising {
			return -g
		}
		return g
	})
	return t, line(t), nil
}

// humRatioOf is the humidity ratio at dry bulb t where p is y.
func (m Model) humRatioOf(t float64, p Property, y float64) float64 {
	switch p {
	case HumRatio:
		return y
	case RelHumidity:
		return m.HumRatio(t, y)
	case WetBulb:
		return m.HumRatioWetBulb(t, y)
	case Enthalpy:
		return m.HumRatioEnthalpy(t, y)
	}
	return m.humRatioVolume(t, y)
}

// humRatioVolume inverts Volume by Newton's method; it is nearly linear in W.
func (m Model) humRatioVolume(t, v float64) float64 {
	w := 0.0
	for range 20 {
		x, _, dw := m.VolumePartials(t, w)
		step := (x - v) / dw
		w -= step
		if math.Abs(step) <= 1e-14 {
			return w
		}
	}
	return math.NaN()
}

// root is where a rising f crosses 0 between lo and hi, NaN where it does not.
func root(lo, hi float64, f func(float64) float64) float64 {
	if !(lo <= hi && f(lo) <= 0 && f(hi) >= 0) {
		return math.NaN()
	}
	for range 80 { // halves 150 K to the last bit
		mid := 0.5 * (lo + hi)
		if f(mid) <= 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return 0.5 * (lo + hi)
}
