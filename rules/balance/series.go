package balance

import (
	"math"

	"dewledger/ingest/trend"
)

// Series is one balance over the unit's axis: its value and how well the
// readings let us know it. Off and Noise are standard uncertainties (JCGM
// 100:2008) of a single interval: Off from the sensors' constant offsets, fully
// correlated in time, Noise from what varies from interval to interval. All
// three are NaN where the value cannot be had.
type Series struct {
	Name  string // ledger column
	Unit  string // as package finding names it: "K", "g/kg", "fraction", "kW"
	Val   []float64
	Off   []float64
	Noise []float64
	Terms []Term
}

// Term is one sensor's part in Off: G[i] is the series' sensitivity to that
// sensor in interval i times the standard uncertainty of the sensor's offset,
// with its sign. Off[i]² is the sum of G[i]² over the terms. A sensor that
// enters a balance twice has one term, its sensitivities summed.
type Term struct {
	Role trend.Role
	G    []float64
}

// Mean is the mean of the series over the intervals that keep holds, with its
// standard uncertainty from offsets (each sensor's mean contribution, in full)
// and the standard deviation and lag-1 autocorrelation that set the noise part.
type Mean struct {
	N     int
	Val   float64
	Off   float64
	Noise float64 // of the mean
	NEff  float64
}

// U is the standard uncertainty of the mean.
func (m Mean) U() float64 { return math.Hypot(m.Off, m.Noise) }
