// Package synth simulates an air-handling unit, its weather, its building, its
// controls and its sensors, healthy or with known faults. It is forward physics
// only and shares no code with the balances that are to find the faults: a test
// on its trends is a test, not an echo.
//
// The unit runs through quasi-steady states, one a step. The controls see the
// sensors, not the truth, so that a leaking valve is hidden by the other coil and
// a biased sensor misleads the sequence, as on a real unit. Sensors have constant
// offsets, noise and resolution.
package synth
