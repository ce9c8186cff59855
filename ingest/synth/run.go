package synth

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// State is the air at a station, per kg of dry air.
type State struct{ T, W, H float64 } // degC, kg/kg, kJ/kg

// Flux is what one component did to the air in a step: heat, and water with the
// enthalpy that it carried, per kg of dry air.
type Flux struct {
	Component trend.Component
	Heat      float64 // kJ/kg
	Water     float64 // kg/kg added
	WaterH    float64 // kJ per kg of that water
}

// Truth is the true state of one step.
type Truth struct {
	Outdoor, Return, Mixed, Supply State
	Fraction                       float64 // outdoor air by mass
	Flow                           float64 // kg dry air/s
	On                             bool
	Fluxes                         []Flux // in train order, downstream of mixing
}

// Run is a simulated month: what was true, and what the sensors read.
type Run struct {
	Spec  Spec
	Axis  trend.Axis
	Truth []Truth
	Read  [trend.NumRoles][]float64 // canonical units; nil where not trended
}

// Simulate runs a spec. A spec that makes no sense panics: it is written by a
// programmer, not read from a stranger.
func Simulate(s Spec) *Run {
	if s.Zone == nil {
		s.Zone = time.UTC
	}
	if s.PressurePa == 0 {
		s.PressurePa = 101325
	}
	if s.Trended == nil {
		s.Trended = DefaultPoints()
	}
	if s.Days <= 0 || s.Step <= 0 || s.Step > 15*time.Minute || len(s.Plant.Train) == 0 {
		panic(fmt.Sprintf("synth: spec %q has no days, no train, or no step up to 15 min", s.Name))
	}
	r := &Run{Spec: s, Axis: trend.Axis{Start: s.Start.UTC(), Step: s.Step}}
	end := s.Start.In(s.Zone).AddDate(0, 0, s.Days)
	r.Axis.N = int(end.Sub(s.Start) / s.Step)
	p := newPlant(&r.Spec)
	sens := newSensors(&r.Spec)
	r.Truth = make([]Truth, r.Axis.N)
	for _, role := range s.Trended {
		if p.has(role) {
			r.Read[role] = make([]float64, r.Axis.N)
		}
	}
	for i := range r.Axis.N {
		at := r.Axis.At(i)
		p.begin(at)
		r.Truth[i] = p.step(at, sens)
		for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
			if r.Read[role] != nil {
				r.Read[role][i] = sens.logged(role, p.true[role])
			}
		}
	}
	return r
}

// active is the severity of a fault at a time, and whether it is there.
func (s *Spec) active(kind FaultKind, at time.Time) (float64, bool) {
	for k := range s.Faults {
		if f := &s.Faults[k]; f.Kind == kind && f.at(at) {
			return f.Severity, true
		}
	}
	return 0, false
}

func (f *Fault) at(t time.Time) bool {
	return (f.From.IsZero() || !t.Before(f.From)) && (f.To.IsZero() || t.Before(f.To))
}

// Unit is the run as a loaded unit, its points mapped by a schedule.
func (r *Run) Unit() *trend.Unit {
	s := &r.Spec
	nan := math.NaN()
	u := &trend.Unit{
		Name: s.Name, Axis: r.Axis,
		Site: trend.Site{Name: "Simulated site", Zone: s.Zone, PressurePa: s.PressurePa, Measure: "si", Currency: s.Currency,
			Prices: s.Prices, Schedule: s.Schedule},
		Plant: trend.Plant{Train: s.Plant.Train, DesignFlow: s.Plant.DesignFlow, DuctArea: nan, MinOAFraction: nan, MinDamper: nan,
			FanHeat: nan, FanHeatU: nan, CoilKind: s.Plant.CoilKind},
	}
	if s.Plant.HighLimit > 0 {
		u.Plant.HighLimit = trend.HighLimit{Kind: trend.FixedDryBulb, Value: s.Plant.HighLimit}
	}
	for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
		if r.Read[role] == nil {
			continue
		}
		c := &trend.Column{Role: role, Val: append([]float64(nil), r.Read[role]...),
			Source: trend.Provenance{File: "simulated", Column: role.String(), Measure: role.Kind().Unit(), Scale: 1, By: "schedule"}}
		if s.Sensors.Round {
			c.Resolution = resolution(role)
		}
		u.Cols[role] = c
	}
	return u
}

// sensors are the errors of a unit's sensors.
type sensors struct {
	spec   *Spec
	rng    *rand.Rand
	offset [trend.NumRoles]float64
	strat  float64 // mixed air: share of the difference between the streams, at equal shares
	held   [trend.NumRoles]float64
	now    time.Time
	isHeld [trend.NumRoles]bool
}

// band is the half-width of the usual accuracy of a role's sensor.
func band(role trend.Role) float64 {
	switch role.Kind() {
	case trend.Temperature:
		switch {
		case role == trend.MATemp:
			return 1
		case role.Station() == trend.NoStation && role != trend.ZoneTemp:
			return 0 // a setpoint is what it is
		}
		return 0.5
	case trend.RelHumidity:
		if role.Station() == trend.Outdoor {
			return 0.05
		}
		return 0.03
	case trend.DewPoint, trend.WetBulb:
		return 1
	case trend.WaterTemp:
		return 0.3
	case trend.Concentration:
		return 50
	}
	return 0
}

func resolution(role trend.Role) float64 {
	switch role.Kind() {
	case trend.Temperature, trend.DewPoint, trend.WetBulb, trend.WaterTemp:
		return 0.1
	case trend.RelHumidity, trend.Position:
		return 0.001
	case trend.AirFlow, trend.Power:
		return 0.01
	case trend.Pressure, trend.Concentration:
		return 1
	case trend.HumRatio:
		return 1e-5
	}
	return 0
}

func newSensors(s *Spec) *sensors {
	rng := rand.New(rand.NewPCG(s.Seed, 0x5e45))
	x := &sensors{spec: s, rng: rng}
	for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
		n, e := rng.NormFloat64(), 2*rng.Float64()-1 // drawn always, so that seeds agree between specs
		a := band(role)
		switch s.Sensors.Offsets {
		case NormalOffsets:
			x.offset[role] = n * a / math.Sqrt(3)
		case EvenOffsets:
			x.offset[role] = e * a
		}
		if k := role.Kind(); (k == trend.AirFlow || k == trend.Power) && s.Sensors.Offsets != NoOffsets {
			x.offset[role] = e * 0.05 // of the reading
		}
	}
	if s.Sensors.Offsets != NoOffsets {
		x.strat = rng.NormFloat64() * 0.05 / math.Sqrt(3)
	}
	return x
}

// seen is what a sensor tells the controls: truth, offset and faults.
func (x *sensors) seen(role trend.Role, truth float64) float64 {
	v := truth + x.offset[role]
	if k := role.Kind(); k == trend.AirFlow || k == trend.Power {
		v = truth * (1 + x.offset[role])
	}
	frozen := false
	for k := range x.spec.Faults {
		f := &x.spec.Faults[k]
		if f.Role != role || !f.at(x.now) {
			continue
		}
		switch f.Kind {
		case Offset:
			v += f.Severity
		case RHScaled:
			v *= f.Severity
		case RHPinned:
			v = f.Severity
			frozen = true
		case Frozen:
			if !x.isHeld[role] {
				x.held[role], x.isHeld[role] = v, true
			}
			v, frozen = x.held[role], true
		}
	}
	if x.spec.Sensors.Noise && !frozen {
		v += x.rng.NormFloat64() * noise(role)
	}
	if role.Kind() == trend.RelHumidity {
		v = math.Max(v, 0)
	}
	return v
}

func noise(role trend.Role) float64 {
	switch role.Kind() {
	case trend.Temperature:
		if role.Station() == trend.NoStation && role != trend.ZoneTemp {
			return 0
		}
		return 0.06
	case trend.RelHumidity:
		return 0.003
	case trend.AirFlow:
		return 0.03
	case trend.Pressure:
		return 4
	case trend.Power:
		return 0.02
	case trend.WaterTemp:
		return 0.1
	case trend.Concentration:
		return 8
	}
	return 0
}

// logged is what the logger keeps of a reading.
func (x *sensors) logged(role trend.Role, truth float64) float64 {
	v := x.seen(role, truth)
	if q := resolution(role); x.spec.Sensors.Round && q > 0 {
		v = math.Round(v/q) * q
		v = math.Round(v*1e6) / 1e6
	}
	return v
}

func (p *plant) air(t, w float64) State { return State{t, w, p.psy.Enthalpy(t, w)} }

func (p *plant) fromHW(h, w float64) State { return State{p.psy.Temp(h, w), w, h} }

// psyModel is moist air at the site, relative humidity over water as sensors
// report it.
func psyModel(pa float64) psy.Model { return psy.Model{P: pa} }
