package trend

import (
	"time"
)

// Axis is a regular time axis: N half-open intervals of Step from Start.
type Axis struct {
	Start time.Time // start of the first interval, UTC
	Step  time.Duration
	N     int
}

// At is the start of interval i, in UTC.
func (a Axis) At(i int) time.Time { return a.Start.Add(time.Duration(i) * a.Step) }

// End is the end of the last interval, in UTC.
func (a Axis) End() time.Time { return a.At(a.N) }

// Index is the interval that holds t: negative or at least N outside the axis.
func (a Axis) Index(t time.Time) int {
	d := t.Sub(a.Start)
	i := int(d / a.Step)
	if d < 0 && d%a.Step != 0 {
		i--
	}
	return i
}

// Hours is the length of one interval in hours.
func (a Axis) Hours() float64 { return a.Step.Hours() }

// Intervals is how many whole intervals d holds, at least one.
func (a Axis) Intervals(d time.Duration) int { return max(1, int(d/a.Step)) }

// Reason says why an interval of a column has no value.
type Reason uint8

// The reasons for a missing value. Present is the zero value.
const (
	Present    Reason = iota
	Gap               // no sample fell into the interval
	BadQuality        // the export marked the sample as bad
	NotNumeric        // the cell held text that is no number
	OutOfRange        // outside what such an instrument can report
	Stale             // held past its age, or called stale by the export
	Overridden        // set by hand: no reading
	Disabled          // the export calls the point disabled or out of service
	Down              // the export calls the point down or its controller unreachable
	NumReasons
)

var reasons = [NumReasons]string{"present", "gap", "bad quality", "not numeric", "out of range", "stale", "overridden", "disabled", "down"}

// String is the reason in words.
func (r Reason) String() string { return reasons[r] }

// Provenance says where a column came from and who decided what it is.
type Provenance struct {
	File    string  // as given, relative to the site or the command line
	Column  string  // header as written in the file
	Measure string  // unit of measure read in the file, "degF"
	Scale   float64 // SI = raw*Scale + Shift after unit conversion; 1 and 0 by default
	Shift   float64
	By      string // "schedule" or "guess"
	Ground  string // what the guess rests on, in words
	Note    string // from points.csv
}

// Column is one point on the unit's axis.
type Column struct {
	Role       Role
	Val        []float64 // canonical unit of the role's kind; NaN where missing
	Why        []Reason  // nil where nothing is missing; else one a value
	Resolution float64   // smallest logged step, canonical unit; 0 unknown
	Accuracy   float64   // half-width of the maker's band, canonical unit; 0: the default of role and kind
	Relative   bool      // Accuracy is a fraction of the reading
	Source     Provenance
}

// Note is something about the input that a reader should know: an assumption,
// a loss, an oddity. Notes are deduplicated by code and column, and counted.
type Note struct {
	Code   string // short and stable: "bad-cell", "gap", "unit-assumed"
	File   string
	Column string
	Line   int // first place, 1-based; 0 where it has no line
	Count  int
	Text   string // a sentence
}

// Unit is one air-handling unit over one period.
type Unit struct {
	Name  string
	Axis  Axis
	Site  Site
	Plant Plant
	Cols  [NumRoles]*Column // nil: no such point
	Notes []Note
}

// Col returns the values of a role, or nil where the unit has no such point.
func (u *Unit) Col(r Role) []float64 {
	if c := u.Cols[r]; c != nil {
		return c.Val
	}
	return nil
}

// Has reports whether the unit has all of the roles.
func (u *Unit) Has(rs ...Role) bool {
	for _, r := range rs {
		if u.Cols[r] == nil {
			return false
		}
	}
	return true
}

// Roles lists the roles that the unit has, in the order of the constants.
func (u *Unit) Roles() []Role {
	var out []Role
	for r := NoRole + 1; r < NumRoles; r++ {
		if u.Cols[r] != nil {
			out = append(out, r)
		}
	}
	return out
}
