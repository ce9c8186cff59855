package balance

import (
	"math"
	"slices"

	"dewledger/ingest/trend"
)

// Curve is the outdoor-air fraction against the damper command, as this unit
// shows it.
type Curve struct {
	Bins      []CurveBin // by rising command; those with too little time are left out
	FromHours float64    // settled hours behind it
}

// CurveBin is one step of the damper command.
type CurveBin struct {
	Command  float64 // median command in the bin, 0 to 1
	Fraction float64 // median outdoor-air fraction
	U        float64 // its standard uncertainty, offsets included
	Lo, Hi   float64 // 10th and 90th percentile of the fraction
	Hours    float64
}

const (
	curveBins     = 20  // of 5 % of command
	leastCurveBin = 0.5 // hours
)

// Curve is the outdoor-air fraction against damper command in settled time: by
// bins of 5 % of command, the median with its uncertainty and the spread. The
// standard error of a median is that of a mean times sqrt(π/2) (normal values;
// Kendall and Stuart). Nil where the unit has no damper point or no fraction.
func (b *Books) Curve() *Curve {
	return b.curve.get(func() *Curve {
		cmd := b.Command(trend.Mixing)
		if !b.path.mixing || cmd == nil || b.fraction().all.f == nil {
			return nil
		}
		f := b.express("oa_fraction", "fraction", b.fraction().all.f, 1)
		settled, h := b.Settled(), b.u.Axis.Hours()
		c := &Curve{}
		keep := make([]bool, b.n())
		var fs, cs []float64
		for k := range curveBins {
			lo, hi := float64(k)/curveBins, float64(k+1)/curveBins
			fs, cs = fs[:0], cs[:0]
			for i, x := range cmd {
				keep[i] = settled[i] && f.Val[i] == f.Val[i] && x >= lo && (x < hi || k == curveBins-1 && x <= 1.0001)
				if keep[i] {
					fs, cs = append(fs, f.Val[i]), append(cs, x)
				}
			}
			hours := float64(len(fs)) * h
			if hours < leastCurveBin {
				continue
			}
			m := f.Mean(0, b.n(), keep)
			slices.Sort(fs)
			slices.Sort(cs)
			c.Bins = append(c.Bins, CurveBin{
				Command: quantile(cs, 0.5), Fraction: quantile(fs, 0.5), U: math.Hypot(m.Off, math.Sqrt(math.Pi/2)*m.Noise),
				Lo: quantile(fs, 0.1), Hi: quantile(fs, 0.9), Hours: hours,
			})
			c.FromHours += hours
		}
		return c
	})
}
