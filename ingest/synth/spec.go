package synth

import (
	"time"

	"dewledger/ingest/trend"
)

// Spec says what to simulate. The same spec gives the same trends.
type Spec struct {
	Name       string
	Seed       uint64
	Start      time.Time // local midnight of the first day
	Days       int
	Step       time.Duration // at most 15 min
	Zone       *time.Location
	Climate    Climate
	PressurePa float64
	Plant      Plant
	Schedule   trend.Schedule
	Prices     trend.Prices
	Currency   string
	Trended    []trend.Role // nil: DefaultPoints
	Sensors    Sensors
	Faults     []Fault
}

// Plant is the simulated unit.
type Plant struct {
	Train       []trend.Component
	DesignFlow  float64 // m3/s at the supply fan
	VAV         bool
	MinDamper   float64
	HighLimit   float64 // degC, fixed dry bulb; 0: no economizer
	HeatRise    float64 // K that the heating coil gives at design flow, valve open
	PreheatRise float64
	CoolADP     float64 // degC, coldest apparatus dew point
	Contact     float64 // 1 - bypass factor of the cooling coil
	FanRise     float64 // K at full speed
	Humidifier  float64 // kg/kg that the humidifier adds, full on
	CoilKind    map[trend.Component]string
}

// Sensors says how the sensors err.
type Sensors struct {
	Offsets OffsetKind
	Noise   bool
	Round   bool // to the resolution of the logger
}

// OffsetKind is how constant offsets are drawn: none, normal with the standard
// uncertainty of the maker's band, or evenly within the band.
type OffsetKind uint8

// The kinds of offsets.
const (
	NoOffsets OffsetKind = iota
	NormalOffsets
	EvenOffsets
)

// Real sensors, the default of a spec that says nothing, err in all three ways.
var Real = Sensors{Offsets: NormalOffsets, Noise: true, Round: true}

// FaultKind names a simulated fault.
type FaultKind string

// The faults. What Severity means stands beside each.
const (
	RHScaled        FaultKind = "rh-scaled"         // Role reads this many times the truth
	RHPinned        FaultKind = "rh-pinned"         // Role reads this fraction, whatever the truth
	Frozen          FaultKind = "frozen"            // Role holds the value of the fault's start
	Offset          FaultKind = "offset"            // Role reads this much high, canonical unit
	MoistureLeak    FaultKind = "moisture-leak"     // g/kg added at the first sensible coil
	CarryOver       FaultKind = "carry-over"        // g/kg of droplets that leave the cooling coil in use
	DamperStuck     FaultKind = "damper-stuck"      // the damper stands at this position
	DamperLeaks     FaultKind = "damper-leaks"      // fraction of outdoor air with the damper shut
	HeatValvePasses FaultKind = "heat-valve-passes" // fraction of the coil's capacity
	CoolValvePasses FaultKind = "cool-valve-passes" // likewise
	EconomizerOff   FaultKind = "economizer-off"    // 1
	RunsAtNight     FaultKind = "runs-at-night"     // 1
	PreheatFails    FaultKind = "preheat-fails"     // 1: its valve stays shut; without a preheat coil the damper opens for free cooling in frost
)

// namedBy is the rule that should name a fault.
var namedBy = map[FaultKind]string{
	RHScaled: "rh-impossible", RHPinned: "rh-pinned", Frozen: "reading-frozen",
	MoistureLeak: "moisture-gain-in-sensible-coil", CarryOver: "moisture-gain-in-cooling-coil",
	DamperStuck: "oa-damper-stuck", DamperLeaks: "oa-damper-leaks",
	HeatValvePasses: "heat-valve-passes", CoolValvePasses: "cool-valve-passes",
	EconomizerOff: "free-cooling-missed", RunsAtNight: "runs-unoccupied", PreheatFails: "freeze-danger",
}

// Fault is one fault. A zero From or To is the start or end of the period.
type Fault struct {
	Kind     FaultKind
	Role     trend.Role // of a sensor's fault
	Severity float64
	From, To time.Time
}

// Rule is the rule that should name the fault; empty where none does yet.
func (f Fault) Rule() string {
	if f.Kind == Offset {
		switch {
		case f.Role == trend.MATemp:
			return "mixed-temp-outside-streams"
		case f.Role == trend.SARH && f.Severity < 0:
			return "moisture-loss-in-sensible-coil"
		case f.Role == trend.SARH:
			return "moisture-gain-in-sensible-coil"
		}
		return ""
	}
	return namedBy[f.Kind]
}

// DefaultPoints are the points trended where a spec names none.
func DefaultPoints() []trend.Role {
	return []trend.Role{
		trend.OATemp, trend.OARH, trend.RATemp, trend.RARH, trend.MATemp, trend.SATemp, trend.SARH,
		trend.PHTemp, trend.CCTemp, trend.SATempSP, trend.SAFlow, trend.SAStatic,
		trend.OADamper, trend.RADamper, trend.EADamper, trend.PreheatValve, trend.HeatValve, trend.CoolValve,
		trend.SAFanStatus, trend.SAFanSpeed, trend.SAFanPower, trend.RAFanStatus, trend.Occupied, trend.ZoneTemp, trend.RACO2,
		trend.CHWSupplyTemp, trend.HWSupplyTemp,
	}
}

// OfficePlant is an ordinary unit: mixing box, preheat, cooling, fan, heating.
func OfficePlant() Plant {
	return Plant{
		Train: trend.DefaultTrain(), DesignFlow: 5, VAV: true, MinDamper: 0.25, HighLimit: 21,
		HeatRise: 22, PreheatRise: 25, CoolADP: 8.5, Contact: 0.88, FanRise: 1.2,
	}
}

// OfficeSchedule is Monday to Friday, 07:00 to 19:00.
func OfficeSchedule() trend.Schedule {
	s := trend.Schedule{Given: true, Holidays: map[string]bool{}}
	for d := time.Monday; d <= time.Friday; d++ {
		s.Spans[d] = []trend.DaySpan{{From: 7 * 60, To: 19 * 60}}
	}
	return s
}
