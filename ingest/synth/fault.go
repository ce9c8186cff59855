package synth

import (
	"fmt"
	"slices"
	"time"

	"dewledger/ingest/trend"
)

// Fault is something wrong with the unit from From up to To; a zero time means
// from the start, or up to the end.
type Fault struct {
	Kind     FaultKind
	Severity float64         // in the kind's own unit; see FaultKinds
	Role     trend.Role      // which reading, for the kinds that are about one
	At       trend.Component // which coil, for the kinds that may be at several
	From, To time.Time
}

// FaultKind is a kind of fault.
type FaultKind uint8

// The kinds of fault.
const (
	NoFault FaultKind = iota
	SensorOffset
	SensorScale
	SensorCeiling
	SensorFrozen
	CoilLeak
	CarryOver
	HumidifierPasses
	DamperStuck
	DamperLeaks
	HeatValvePasses
	CoolValvePasses
	EconomizerOff
	RunsAtNight
	PreheatFails
	numFaults
)

// FaultInfo tells about a kind of fault.
type FaultInfo struct {
	Kind    FaultKind
	Name    string
	Means   string  // what the severity is
	Unit    string  // and its unit
	Typical float64 // a severity that should be seen
	Rule    string  // the rule that should name it; what it is for SensorOffset depends on the reading: see Fault.Rule
}

var faultKinds = [numFaults]FaultInfo{
	NoFault:          {NoFault, "none", "", "", 0, ""},
	SensorOffset:     {SensorOffset, "sensor-offset", "what is added to the reading", "as the reading", 3, "mixed-temp-outside-streams"},
	SensorScale:      {SensorScale, "sensor-scale", "what the reading is multiplied by; humidities are not held under 100 %", "ratio", 1.8, "rh-impossible"},
	SensorCeiling:    {SensorCeiling, "sensor-ceiling", "the value over which the reading does not go", "as the reading", 0.925, "rh-pinned"},
	SensorFrozen:     {SensorFrozen, "reading-frozen", "1: the reading repeats the value that it had", "", 1, "reading-frozen"},
	CoilLeak:         {CoilLeak, "coil-leak", "moisture that the preheat or heating coil leaks into the air at design flow, steam where it is a steam coil, else hot water", "g/kg", 2, "moisture-gain-in-sensible-coil"},
	CarryOver:        {CarryOver, "drain-pan-water", "moisture that water standing behind the cooling coil gives to the air while the coil runs", "g/kg", 1.5, "moisture-gain-in-cooling-coil"},
	HumidifierPasses: {HumidifierPasses, "humidifier-passes", "moisture that the shut humidifier adds at design flow", "g/kg", 2, "moisture-gain-in-sensible-coil"},
	DamperStuck:      {DamperStuck, "damper-stuck", "where the outdoor damper stands, whatever its command", "fraction", 0.6, "oa-damper-stuck"},
	DamperLeaks:      {DamperLeaks, "damper-leaks", "share of outdoor air with the damper shut", "fraction", 0.3, "oa-damper-leaks"},
	HeatValvePasses:  {HeatValvePasses, "heat-valve-passes", "share of the heating coil's duty that comes with its valve shut", "fraction", 0.2, "heat-valve-passes"},
	CoolValvePasses:  {CoolValvePasses, "cool-valve-passes", "share of the cooling coil's duty that comes with its valve shut", "fraction", 0.3, "cool-valve-passes"},
	EconomizerOff:    {EconomizerOff, "economizer-off", "1: the damper never opens beyond its minimum", "", 1, "free-cooling-missed"},
	RunsAtNight:      {RunsAtNight, "runs-at-night", "share of the nights in which the fan runs on", "fraction", 1, "runs-unoccupied"},
	PreheatFails:     {PreheatFails, "preheat-fails", "share of the preheat coil's duty that is lost", "fraction", 1, "freeze-danger"},
}

// FaultKinds is the table of faults, in the order of their constants, without
// NoFault.
func FaultKinds() []FaultInfo { return slices.Clone(faultKinds[1:]) }

// Info tells about the kind.
func (k FaultKind) Info() FaultInfo {
	if k >= numFaults {
		panic(fmt.Sprintf("synth: there is no fault kind %d", uint8(k)))
	}
	return faultKinds[k]
}

// String is the kind's name.
func (k FaultKind) String() string {
	if k >= numFaults {
		return fmt.Sprintf("fault(%d)", uint8(k))
	}
	return faultKinds[k].Name
}

// Rule is the rule that should name the fault, empty where none of today's
// would.
func (f Fault) Rule() string {
	switch {
	case f.Kind == SensorOffset && f.Role.Kind() == trend.RelHumidity && f.Role.Station() == trend.Supply:
		if f.Severity > 0 {
			return "moisture-gain-in-sensible-coil"
		}
		return "moisture-loss-in-sensible-coil"
	case f.Kind == SensorOffset && f.Role != trend.MATemp:
		return ""
	case f.Kind == HeatValvePasses && f.At == trend.Preheat:
		return ""
	}
	return f.Kind.Info().Rule
}

// check panics where the fault needs what the train has not.
func (f Fault) check(train []trend.Component) {
	info := f.Kind.Info()
	need := func(ok bool, what string) {
		if !ok {
			panic(fmt.Sprintf("synth: fault %s needs %s; the train is %v", info.Name, what, train))
		}
	}
	has := func(c trend.Component) bool { return slices.Contains(train, c) }
	switch f.Kind {
	case SensorOffset, SensorScale, SensorCeiling, SensorFrozen:
		need(f.Role != trend.NoRole, "a role")
	case CoilLeak, HeatValvePasses:
		need(has(f.coil()), "its coil")
	case CarryOver, CoolValvePasses:
		need(has(trend.Cooling), "a cooling coil")
	case HumidifierPasses:
		need(has(trend.Humidify), "a humidifier")
	case DamperStuck, DamperLeaks, EconomizerOff:
		need(has(trend.Mixing), "a mixing box")
		need(f.Severity >= 0 && f.Severity <= 1, "a severity from 0 to 1")
	case PreheatFails:
		need(has(trend.Preheat), "a preheat coil")
	}
}

// coil is where a coil's fault is: the heating coil unless it says otherwise.
func (f Fault) coil() trend.Component {
	if f.At == "" {
		return trend.Heating
	}
	return f.At
}

// active is a fault with the intervals in which it holds.
type active struct {
	Fault
	i, j int
	held float64 // the value of a frozen reading
}

func (s *sim) schedule(fs []Fault) {
	for _, f := range fs {
		a := active{Fault: f, j: s.ax.N}
		if !f.From.IsZero() {
			a.i = max(0, s.ax.Index(f.From))
		}
		if !f.To.IsZero() {
			a.j = min(a.j, s.ax.Index(f.To.Add(s.ax.Step-1)))
		}
		s.faults = append(s.faults, a)
	}
}

// fault is the severity of a kind of fault now, and whether it holds.
func (s *sim) fault(k FaultKind, at trend.Component) (float64, bool) {
	for n := range s.faults {
		f := &s.faults[n]
		if f.Kind == k && s.i >= f.i && s.i < f.j && (at == "" || f.coil() == at) {
			return f.Severity, true
		}
	}
	return 0, false
}
