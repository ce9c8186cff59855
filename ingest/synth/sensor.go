package synth

import (
	"math"
	"math/rand/v2"
	"time"

	"dewledger/ingest/trend"
)

// Offsets is how sensors are out of calibration.
type Offsets uint8

// The kinds of offset, drawn once a sensor.
const (
	NoOffsets   Offsets = iota
	Rectangular         // uniform within the maker's band ±a
	Normal              // of standard deviation a/√3, the rectangle's
)

// SensorModel says how readings depart from the truth. The zero value reads
// the truth.
type SensorModel struct {
	Offsets        Offsets
	Noise          bool // white, from one interval to the next
	Lag            bool // temperatures follow in 90 s, humidities in 3 min
	Quantise       bool // to the logged resolution
	Stratification bool // the mixed-air element sees up to 5 % of |To − Tr| too much of one stream, most at an even mixture
}

// Realistic is the sensor model with everything in it.
func Realistic() SensorModel {
	return SensorModel{Offsets: Rectangular, Noise: true, Lag: true, Quantise: true, Stratification: true}
}

// grade is what a role's sensor can do, in canonical units.
type grade struct {
	band       float64 // half-width of the maker's accuracy
	relative   bool
	noise      float64 // standard deviation; relative likewise
	resolution float64
	lag        time.Duration
}

// gradeOf gives the accuracies that makers state and controllers log (common
// practice, no source).
func gradeOf(r trend.Role) grade {
	if setpoint(r) {
		return grade{resolution: resolutionOf(r)}
	}
	g := grade{resolution: resolutionOf(r)}
	switch r.Kind() {
	case trend.Temperature:
		g.band, g.noise, g.lag = 0.5, 0.07, 90*time.Second
		if r == trend.MATemp {
			g.band = 1
		}
	case trend.RelHumidity:
		g.band, g.noise, g.lag = 0.03, 0.004, 3*time.Minute
		if r.Station() == trend.Outdoor {
			g.band = 0.05
		}
	case trend.DewPoint, trend.WetBulb:
		g.band, g.noise = 1, 0.1
	case trend.Enthalpy:
		g.band, g.noise = 3.5, 0.3
	case trend.HumRatio:
		g.band, g.noise = 0.0004, 4e-5
	case trend.AirFlow, trend.Velocity:
		g.band, g.noise, g.relative = 0.10, 0.015, true
	case trend.Pressure:
		g.band, g.noise = 10, 2.5
	case trend.BaroPressure:
		g.band, g.noise = 100, 10
	case trend.Position:
		if feedback(r) {
			g.band, g.noise = 0.01, 0.003
		}
	case trend.Power:
		g.band, g.noise, g.relative = 0.05, 0.01, true
	case trend.WaterTemp:
		g.band, g.noise = 0.3, 0.05
	case trend.WaterFlow:
		g.band, g.noise, g.relative = 0.05, 0.01, true
	case trend.Concentration:
		g.band, g.noise = 50, 8
	}
	return g
}

func resolutionOf(r trend.Role) float64 {
	switch r.Kind() {
	case trend.RelHumidity, trend.Position:
		return 0.001
	case trend.AirFlow, trend.Velocity, trend.Power, trend.WaterFlow:
		return 0.01
	case trend.HumRatio:
		return 1e-5
	case trend.Pressure, trend.Concentration, trend.Switch:
		return 1
	case trend.BaroPressure:
		return 1
	}
	return 0.1
}

func setpoint(r trend.Role) bool {
	switch r {
	case trend.SATempSP, trend.SATempSPHeat, trend.SATempSPCool, trend.SAStaticSP, trend.RARHSP, trend.SARHSP, trend.MATempSP, trend.OAFlowSP, trend.ZoneTempSP:
		return true
	}
	return false
}

func feedback(r trend.Role) bool {
	switch r {
	case trend.OADamperFB, trend.RADamperFB, trend.EADamperFB, trend.PreheatValveFB, trend.HeatValveFB, trend.CoolValveFB, trend.HumidifierFB:
		return true
	}
	return false
}

// seen are the readings that the controls use, trended or not.
var seen = []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.RETemp, trend.PHTemp, trend.CCTemp, trend.SATemp, trend.RARH, trend.SARH}

// sensors are all sensors of the unit.
type sensors struct {
	list  []sensor
	now   [trend.NumRoles]float64
	strat *ar
	bias  float64
}

type sensor struct {
	role    trend.Role
	grade   grade
	offset  float64
	rng     *rand.Rand
	inverse float64 // of the resolution
	follow  float64 // of the way that the element goes in one step
	inner   float64 // the element's own state
	begun   bool
	out     []float64
}

func (q *sensors) begin(s *sim) {
	for r := range q.now {
		q.now[r] = math.NaN()
	}
	want := map[trend.Role]bool{}
	for _, r := range s.spec.Trended {
		want[r] = true
	}
	model := s.spec.Sensors
	add := func(r trend.Role) {
		if math.IsNaN(s.value(r)) {
			return // the train has no such place
		}
		x := sensor{role: r, grade: gradeOf(r), rng: stream(s.spec.Seed, uint64(r)), follow: 1}
		x.inverse = math.Round(1 / x.grade.resolution)
		draw := stream(s.spec.Seed, forOffsets+uint64(r))
		switch model.Offsets {
		case Rectangular:
			x.offset = x.grade.band * (2*draw.Float64() - 1)
		case Normal:
			x.offset = x.grade.band / math.Sqrt(3) * draw.NormFloat64()
		}
		s.run.Offsets[r] = x.offset
		if model.Lag && x.grade.lag > 0 {
			x.follow = 1 - math.Exp(-s.dt/x.grade.lag.Seconds())
		}
		if want[r] {
			x.out = make([]float64, s.ax.N)
			s.run.Read[r] = &trend.Column{Role: r, Val: x.out, Resolution: x.grade.resolution,
				Source: trend.Provenance{File: "simulated", Column: r.String(), Measure: r.Kind().Unit(), Scale: 1, By: "schedule"}}
		}
		q.list = append(q.list, x)
	}
	inSeen := map[trend.Role]bool{}
	for _, r := range seen {
		inSeen[r] = true
	}
	for r := trend.NoRole + 1; r < trend.NumRoles; r++ {
		if want[r] || inSeen[r] {
			add(r)
		}
	}
	rng := stream(s.spec.Seed, forOffsets+500)
	q.bias = 2*rng.Float64() - 1
	q.strat = newAR(rng, s.spec.Step, 45*time.Minute)
}

// read takes all readings of this interval.
func (q *sensors) read(s *sim) {
	model := s.spec.Sensors
	lean := 0.7*q.bias + 0.3*math.Tanh(q.strat.next())
	for k := range q.list {
		x := &q.list[k]
		v := s.value(x.role)
		if x.role == trend.MATemp && model.Stratification && s.on {
			v += 0.05 * lean * 4 * s.share * (1 - s.share) * (s.st[trend.Outdoor].t - s.st[trend.Return].t)
		}
		if !x.begun || x.follow == 1 {
			x.inner, x.begun = v, true
		}
		x.inner += x.follow * (v - x.inner)
		v = x.inner
		if x.grade.relative {
			v *= 1 + x.offset
		} else {
			v += x.offset
		}
		if model.Noise && x.grade.noise > 0 {
			e := x.grade.noise * x.rng.NormFloat64()
			if x.grade.relative {
				e *= v
			}
			v += e
		}
		v = x.clip(v)
		v = s.spoil(x.role, v)
		if model.Quantise {
			v = math.Round(v*x.inverse) / x.inverse // exact decimals
		}
		q.now[x.role] = v
		if x.out != nil {
			x.out[s.i] = v
		}
	}
}

// clip keeps a reading in its instrument's range.
func (x *sensor) clip(v float64) float64 {
	switch x.role.Kind() {
	case trend.RelHumidity, trend.Position:
		return math.Min(1, math.Max(0, v))
	case trend.AirFlow, trend.Velocity, trend.Power, trend.WaterFlow, trend.Concentration:
		return math.Max(0, v)
	case trend.Pressure:
		if x.role != trend.BuildingDP {
			return math.Max(0, v)
		}
	}
	return v
}

// spoil applies the faults of this reading.
func (s *sim) spoil(r trend.Role, v float64) float64 {
	for n := range s.faults {
		f := &s.faults[n]
		if f.Role != r || s.i < f.i || s.i >= f.j {
			continue
		}
		switch f.Kind {
		case SensorOffset:
			v += f.Severity
			if r.Kind() == trend.RelHumidity {
				v = math.Min(1, math.Max(0, v))
			}
		case SensorScale:
			v *= f.Severity
		case SensorCeiling:
			v = math.Min(v, f.Severity)
		case SensorFrozen:
			if s.i == f.i {
				f.held = v
			}
			v = f.held
		}
	}
	return v
}
