// Package psy computes moist-air properties and their sensitivities.
//
// Units: temperature degC, absolute pressure Pa, relative humidity as a
// fraction (0 to 1, more is representable), humidity ratio kg of water per kg of
// dry air, enthalpy kJ per kg of dry air, specific volume m³ per kg of dry air.
// Outside a function's range the result is NaN; nothing is clamped, and no
// argument makes a function panic or loop without a bound.
//
// Range of states: -60 to 90 degC, 50 to 110 kPa. Saturation pressure: -100 to
// 200 degC. Ice and liquid water meet at the triple point, 0.01 degC, for
// pressure, dew point and wet bulb alike.
package psy
