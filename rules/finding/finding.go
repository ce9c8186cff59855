// Package finding holds what a run concludes, in types that explain
// themselves: a set read a year later still says what each rule asked. It
// computes nothing but the wording of quantities, and knows neither the rules
// nor the pages.
package finding

import "time"

// Priority is how soon a person should look.
type Priority uint8

// The priorities, least first.
const (
	Low Priority = iota
	Medium
	High
	Urgent
)

var priorities = [...]string{"low", "medium", "high", "urgent"}

// String is the priority in a word.
func (p Priority) String() string { return priorities[p] }

// Verdict is what a rule says of a unit over the period.
type Verdict uint8

// The verdicts.
const (
	NotTestable Verdict = iota
	Pass
	Fault
)

var verdicts = [...]string{"not-testable", "pass", "fault"}

// String is the verdict as coverage.csv spells it.
func (v Verdict) String() string { return verdicts[v] }

// Span is one stretch of flagged time, [Start, End).
type Span struct {
	Start, End  time.Time
	I, J        int     // the same as intervals of the unit's axis, [I, J)
	Effect      float64 // mean over the flagged intervals, in the finding's unit
	Uncertainty float64 // expanded: at the run's coverage factor
}

// Energy is waste over the period, kWh and money, with low and high at the
// run's coverage factor. All NaN where the rule has no energy.
type Energy struct {
	KWh, Low, High             float64
	Heat, Cooling, Electricity float64 // kWh at the air or the motor, parts of KWh before the COP
	Cost, CostLow, CostHigh    float64
	Share                      float64 // of the flagged hours that could be priced, 0 to 1
	Note                       string  // what the figure leaves out or assumes, a sentence; may be empty
}

// Finding is one fault: a unit, a rule and a component, over the period.
type Finding struct {
	Unit      string
	Rule      string
	Component string // train component, or role for a reading; empty for the unit as a whole
	Priority  Priority

	Start, End  time.Time
	FaultHours  float64
	TestedHours float64
	Magnitude   float64 // mean effect over the flagged time
	Uncertainty float64 // expanded, same unit
	UnitOf      string  // unit of both, canonical: "K", "g/kg", ...
	Matters     float64 // smallest effect worth a visit, same unit
	Confidence  float64 // 0 to 1
	Suspects    []string
	Energy      Energy
	Statement   string   // one sentence a facility manager can read
	Check       string   // what to look at first
	Checks      []string // all checks, cheapest first; Check is the first
	Lookalikes  string   // what else looks the same, a sentence
	Cause       string
	ExplainedBy string // role of the sensor whose offset explains it; empty: nothing does
	Cautions    []Caution
	Spans       []Span
	Trace       Trace `json:"-"`
}

// Caution names one of the report's safety notes.
type Caution string

// The safety notes that a rule can ask for.
const (
	Isolate     Caution = "isolate"     // opening equipment: isolate and lock out
	HotSurfaces Caution = "hot"         // steam and hot surfaces
	Stagnant    Caution = "stagnant"    // standing water, microbial growth
	Ventilation Caution = "ventilation" // outdoor air is a code matter
	Freezing    Caution = "freezing"    // a coil can freeze and burst
)

// Trace is the evidence behind a finding, for the chart: columns on the unit's
// axis.
type Trace struct {
	Effect   []float64 // the residual, in the finding's unit; NaN where there is none
	Expanded []float64 // its expanded uncertainty, interval by interval; may be nil
	Applies  []bool    // where the rule's question applied
	Matters  float64
	What     string   // what Effect is: "supply air temperature less mixed air and fan heat"
	Formula  string   // how it follows from the readings, in symbols
	Worked   string   // the same with this unit's mean numbers over the flagged time put in
	Readings []string // roles behind it, for the panel below the residual
}

// Coverage is what one rule could and could not say about a unit.
type Coverage struct {
	Unit        string
	Rule        string
	Verdict     Verdict
	TestedHours float64
	PeriodHours float64
	Detectable  float64 // smallest effect that 95 % of such months would have flagged; NaN where not testable
	UnitOf      string
	Reason      string   // for not-testable: "missing: ...", "condition: ...", "uncertainty: ...", "disabled: ..."
	Missing     []string // roles that would make it testable, where Reason is "missing: ..."
	Parts       []CoveragePart
}

// CoveragePart is the verdict on one component, where a rule looks at several.
type CoveragePart struct {
	Component   string
	Verdict     Verdict
	TestedHours float64
	Detectable  float64
	Reason      string
}

// RuleDoc is a rule's own words, carried along so that results explain
// themselves.
type RuleDoc struct {
	Name    string
	Title   string
	Text    string
	Formula string
	Cannot  string // what it cannot tell apart
	Sources []string
	Since   string
	Unit    string // of its effect
	Params  []ParamDoc
	Needs   []string // in words, one a need
	Safety  []Caution
}

// ParamDoc is one parameter of a rule, with the value in force.
type ParamDoc struct {
	Name, Unit        string
	Value             float64 // in force
	Default, Min, Max float64
	Why               string
}

// Set is everything a run says about one unit.
type Set struct {
	Unit        string
	Findings    []Finding  // in report order
	Coverage    []Coverage // one a rule, in registry order
	Rules       []RuleDoc  // in registry order
	Factor      float64    // coverage factor of every ± in the set
	PeriodHours float64
	FanHours    float64
	UsableShare float64 // of the period: intervals in which some balance could be tested
	Currency    string
	Total       Energy // no kilowatt-hour counted twice
	OneMore     []OneMore
}

// OneMore is a missing role and the rules that it would open.
type OneMore struct {
	Role  string
	Rules []string
}

// Open counts the findings that nothing else explains.
func (s *Set) Open() int {
	n := 0
	for k := range s.Findings {
		if s.Findings[k].ExplainedBy == "" {
			n++
		}
	}
	return n
}
