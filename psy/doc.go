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
//
// Model.Find and Model.At give a whole state. The methods of Model give one property
// each, with Partials its first derivatives, and in the plural whole columns at once.
//
// Accuracy, as measured by the package's tests against 250 real-gas states from -40
// to 60 degC and 70 to 103 kPa: humidity ratio 0.04 % above freezing and 0.05 %
// below, enthalpy 0.015 kJ/kg from -10 to 50 degC, volume 4e-5, dew point 0.007 K,
// wet bulb 0.006 K. The ideal model equals the handbook's equations to 1e-9. Columns
// equal the one-by-one forms within 1e-7.
package psy
