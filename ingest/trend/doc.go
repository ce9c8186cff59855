// Package trend holds one unit's trends on one time axis: the types that the
// rest of the program computes with. It does no input or output and no
// physics.
//
// Time. An axis is regular. Its intervals are half-open, [start, start+step),
// and labelled by their start, in UTC. Local time appears only at the edges:
// when naive stamps are read, when a schedule is asked, when a page is written.
//
// Values. A column holds canonical SI: degC, fraction, kJ/kg, kg/kg, m3/s, Pa,
// kW. A missing value is NaN, and the column says beside it why it is missing.
// A column is read-only once it has left package ingest.
package trend
