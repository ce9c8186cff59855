package trend

import "time"

// Component is a part of the unit that a train may name.
type Component string

// The components, in no order: the train gives that.
const (
	Recovery    Component = "recovery"
	Mixing      Component = "mixing"
	Preheat     Component = "preheat"
	Cooling     Component = "cooling"
	Heating     Component = "heating"
	Reheat      Component = "reheat"
	Humidify    Component = "humidifier"
	Evaporative Component = "evaporative"
	Fan         Component = "fan"
)

// Components lists every component a train may name.
func Components() []Component {
	return []Component{Recovery, Mixing, Preheat, Cooling, Heating, Reheat, Humidify, Evaporative, Fan}
}

// Title is the component in words.
func (c Component) Title() string {
	switch c {
	case Recovery:
		return "heat recovery"
	case Mixing:
		return "mixing box"
	case Preheat:
		return "preheat coil"
	case Cooling:
		return "cooling coil"
	case Heating:
		return "heating coil"
	case Reheat:
		return "reheat coil"
	case Evaporative:
		return "evaporative cooler"
	case Fan:
		return "supply fan"
	}
	return string(c)
}

// SensibleOnly reports whether the component can change the air's temperature
// and never its moisture.
func (c Component) SensibleOnly() bool {
	switch c {
	case Preheat, Heating, Reheat, Fan:
		return true
	}
	return false
}

// DefaultTrain is the order along the air where site.toml gives none.
func DefaultTrain() []Component {
	return []Component{Mixing, Preheat, Cooling, Fan, Heating}
}

// LimitKind is how an economizer decides that outdoor air is welcome.
type LimitKind uint8

// The kinds of high limit; NoLimit means that the site did not say.
const (
	NoLimit LimitKind = iota
	FixedDryBulb
	FixedEnthalpy
	DifferentialDryBulb
	DifferentialEnthalpy
)

// HighLimit is the economizer's high limit. Value is degC for FixedDryBulb,
// kJ/kg for FixedEnthalpy, and unused otherwise.
type HighLimit struct {
	Kind  LimitKind
	Value float64
}

// Plant is what the site says about one unit. The zero value of a field means
// that it was not said; DesignFlow, FanHeat and the fractions are NaN then.
type Plant struct {
	Serves        string
	Train         []Component // DefaultTrain where the site gave none
	TrainAssumed  bool
	DesignFlow    float64 // m3/s
	DuctArea      float64 // m2, for velocity
	MinOAFraction float64 // by mass
	MinDamper     float64 // fraction of command
	FanHeat       float64 // K over the supply fan
	FanHeatU      float64 // standard uncertainty of FanHeat, K
	HighLimit     HighLimit
	CoilKind      map[Component]string // water, steam, electric, gas; cooling: water, refrigerant
	Rules         map[string]RuleSetting
}

// RuleSetting is a [unit.NAME.rules.RULE] table of site.toml.
type RuleSetting struct {
	Disabled bool
	Reason   string
	Params   map[string]float64 // canonical units
}

// In reports whether the train has the component.
func (p *Plant) In(c Component) bool {
	for _, x := range p.Train {
		if x == c {
			return true
		}
	}
	return false
}

// Prices per kWh delivered to the air or the motor; NaN: not said.
type Prices struct {
	Electricity float64
	Heat        float64
	CoolingCOP  float64
}

// Site is what all units of a site share.
type Site struct {
	Name            string
	Zone            *time.Location
	ZoneAssumed     bool
	PressurePa      float64 // absolute, from altitude or stated
	PressureAssumed bool
	Measure         string // "si" or "ip"
	Currency        string
	Prices          Prices
	Schedule        Schedule
	RHOverIce       bool          // sensors report over ice below 0 degC; default over water
	AccuracyByKind  map[Kind]Band // [accuracy] entries that name a kind
	AccuracyByRole  map[Role]Band // [accuracy] entries that name a role
}

// Band is the half-width of a maker's stated accuracy.
type Band struct {
	HalfWidth float64 // canonical unit, or a fraction of the reading
	Relative  bool
}

// Schedule says when the building is occupied, in local time. The zero value
// says nothing.
type Schedule struct {
	Spans    [7][]DaySpan    // by time.Weekday
	Holidays map[string]bool // "2006-01-02"
	Given    bool
}

// DaySpan is [From, To) in minutes after local midnight; To may be 1440.
type DaySpan struct{ From, To int }

// Occupied reports whether t falls into an occupied span of the schedule; t is
// in local time.
func (s *Schedule) Occupied(t time.Time) bool {
	if s.Holidays[t.Format("2006-01-02")] {
		return false
	}
	m := t.Hour()*60 + t.Minute()
	for _, d := range s.Spans[t.Weekday()] {
		if m >= d.From && m < d.To {
			return true
		}
	}
	return false
}
