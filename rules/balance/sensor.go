package balance

import (
	"math"
	"time"

	"dewledger/ingest/trend"
)

// Settling is how long an operating state must have held before temperatures
// are believed.
const Settling = 30 * time.Minute

// Half-widths of the accuracy that a reading is taken to have where neither
// points.csv nor [accuracy] says otherwise, in the kind's canonical unit: common
// practice for commercial sensors, no single source.
var defaultBands = map[trend.Kind]trend.Band{
	trend.Temperature:   {HalfWidth: 0.5},
	trend.RelHumidity:   {HalfWidth: 0.03},
	trend.DewPoint:      {HalfWidth: 1},
	trend.WetBulb:       {HalfWidth: 1},
	trend.Enthalpy:      {HalfWidth: 3.5},
	trend.HumRatio:      {HalfWidth: 0.0008},
	trend.AirFlow:       {HalfWidth: 0.10, Relative: true},
	trend.Velocity:      {HalfWidth: 0.10, Relative: true},
	trend.Pressure:      {HalfWidth: 10},
	trend.BaroPressure:  {HalfWidth: 300},
	trend.Position:      {HalfWidth: 0.01},
	trend.Power:         {HalfWidth: 0.05, Relative: true},
	trend.WaterTemp:     {HalfWidth: 0.3},
	trend.WaterFlow:     {HalfWidth: 0.05, Relative: true},
	trend.Concentration: {HalfWidth: 75},
}

// defaultRoleBands are defaults that differ from their kind's.
var defaultRoleBands = map[trend.Role]trend.Band{
	trend.MATemp: {HalfWidth: 1.0}, // a mixing box; stratification comes on top
	trend.OARH:   {HalfWidth: 0.05},
	trend.WXRH:   {HalfWidth: 0.05},
}

// stratification is how far apart, as a share of the difference between the
// streams, a mixed-air sensor may stand from the mean when both are equal.
const stratification = 0.05

// The range in which a humidity sensor keeps its stated band; outside it the
// band doubles.
const rhWetEnd, rhDryEnd = 0.90, 0.10

var sqrt3 = math.Sqrt(3)

// band is the half-width of a role's accuracy: points.csv, then [accuracy] by
// role, then by kind, then the defaults.
func (b *Books) band(r trend.Role) trend.Band {
	if c := b.u.Cols[r]; c != nil && c.Accuracy > 0 {
		return trend.Band{HalfWidth: c.Accuracy, Relative: c.Relative}
	}
	if w, ok := b.u.Site.AccuracyByRole[r]; ok {
		return w
	}
	if w, ok := b.u.Site.AccuracyByKind[r.Kind()]; ok {
		return w
	}
	if w, ok := defaultRoleBands[r]; ok {
		return w
	}
	return defaultBands[r.Kind()]
}

// OffsetU is the standard uncertainty of a reading's offset in every interval,
// in the role's canonical unit: a/√3 for a band of half-width a (rectangular,
// JCGM 100:2008, 4.3.7). Above 90 % and below 10 % relative humidity the band
// doubles. A band that is a share of the reading keeps a tenth of what it is at
// the reading's 95th percentile. A mixed-air temperature carries, in quadrature, a stratification of
// half-width 0.05·4f(1-f)·|To - Tr| where both streams are read. Nil for a role
// that the unit has not.
func (b *Books) OffsetU(r trend.Role) []float64 {
	if b.off[r] != nil {
		return b.off[r]
	}
	v := b.u.Col(r)
	if v == nil || r == trend.NoRole {
		return nil
	}
	w := b.band(r)
	u := w.HalfWidth / sqrt3
	out := make([]float64, len(v))
	switch {
	case w.Relative:
		share, least := b.relative(r)
		for i, x := range v {
			if x == x {
				out[i] = math.Max(share*math.Abs(x), least)
			}
		}
	case r.Kind() == trend.RelHumidity:
		for i, x := range v {
			out[i] = u
			if x > rhWetEnd || x < rhDryEnd {
				out[i] = 2 * u
			}
		}
	case r == trend.MATemp:
		b.stratified(out, v, u)
	default:
		for i := range out {
			out[i] = u
		}
	}
	b.off[r] = out
	return out
}

// leastRelative is what share of its uncertainty at the upper end of its range
// a relative reading keeps at zero: a flow that reads 0 is not known exactly
// (common practice, no source).
const leastRelative = 0.1

// relative is the standard uncertainty of a reading whose band is a share of it:
// that share, and the least it may be, from the reading's 95th percentile. Both
// are 0 where the band is absolute.
func (b *Books) relative(r trend.Role) (share, least float64) {
	w := b.band(r)
	if !w.Relative {
		return 0, 0
	}
	share = w.HalfWidth / sqrt3
	if top := b.upper(b.u.Col(r)); top > 0 {
		least = leastRelative * share * top
	}
	return share, least
}

func (b *Books) stratified(out, tm []float64, u float64) {
	to, tr := b.u.Col(b.path.inlet.DryBulb()), b.u.Col(trend.RATemp)
	if to == nil || tr == nil || !b.path.mixing {
		for i := range out {
			out[i] = u
		}
		return
	}
	for i := range out {
		out[i] = u
		d := tr[i] - to[i]
		// 4f(1-f)·d with f = (Tr-Tm)/d
		s := stratification * 4 * (tr[i] - tm[i]) * (tm[i] - to[i]) / d / sqrt3
		if s*d > 0 { // the mixture lies between its streams
			out[i] = math.Sqrt(u*u + s*s)
		}
	}
}

// sameOffset is the standard uncertainty of a reading's offset where it is the
// same in every interval; 1 for what is no reading.
func (b *Books) sameOffset(r trend.Role) (u float64, same bool) {
	if r == trend.NoRole {
		return 1, true
	}
	if w := b.band(r); !w.Relative && r.Kind() != trend.RelHumidity && r != trend.MATemp {
		return w.HalfWidth / sqrt3, true
	}
	return 0, false
}

// leastForNoise is how many settled first differences a noise figure needs;
// with fewer, unsettled ones serve as well.
const leastForNoise = 48

// NoiseU is the standard noise of one interval of a reading, in the role's
// canonical unit: the median absolute first difference in settled time, scaled
// to a standard deviation and divided by √2, and at least half the logged
// resolution over √3. It holds real changes within an interval as well, and so
// errs on the large side. 0 for a role that the unit has not.
func (b *Books) NoiseU(r trend.Role) float64 {
	if b.noised[r] || b.u.Cols[r] == nil || r == trend.NoRole {
		return b.noise[r]
	}
	c := b.u.Cols[r]
	u := 0.0
	if r.Analogue() {
		d := b.differences(c.Val, b.Settled())
		if len(d) < leastForNoise {
			d = b.differences(c.Val, nil)
		}
		if len(d) > 0 {
			u = median(d) * madScale / math.Sqrt2
		}
	}
	u = math.Max(u, c.Resolution/2/sqrt3)
	b.noise[r], b.noised[r] = u, true
	return u
}

// differences samples absolute first differences within kept time, thinned to
// sampleSize.
func (b *Books) differences(v []float64, keep []bool) []float64 {
	if b.scratch == nil {
		b.scratch = make([]float64, 0, sampleSize)
	}
	out := b.scratch[:0]
	stride := max(1, (len(v)-1+sampleSize-1)/sampleSize)
	if keep != nil {
		kept := 0
		for _, k := range keep {
			if k {
				kept++
			}
		}
		stride = max(1, (kept+sampleSize-1)/sampleSize)
	}
	k := 0
	for i := 1; i < len(v); i++ {
		if keep != nil && !(keep[i] && keep[i-1]) {
			continue
		}
		d := math.Abs(v[i] - v[i-1])
		if d != d {
			continue
		}
		if k == 0 {
			out = append(out, d)
		}
		if k++; k >= stride {
			k = 0
		}
	}
	b.scratch = out
	return out
}

// Reading is a reading as it stands, in the role's canonical unit, with its
// offset and noise; nil where the unit has no such point.
func (b *Books) Reading(r trend.Role) *Series {
	return b.named(r.String(), func() *Series { return b.express(r.String(), r.Kind().Unit(), b.reading(r), 1) })
}
