package ingest

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"dewledger/ingest/trend"
)

var (
	unitIndex       = indexUnits(units)
	differenceIndex = indexUnits(differenceUnits)
)

func indexUnits(table []Measure) map[string]*Measure {
	m := make(map[string]*Measure, 4*len(table))
	for i := range table {
		u := &table[i]
		for _, n := range append([]string{u.Name}, u.also...) {
			m[foldUnit(n)] = u
		}
	}
	return m
}

// foldUnit brings a spelling of a unit to one form: lower case, without blanks,
// full stops and underscores, superscripts as digits, degree signs as "deg".
func foldUnit(s string) string {
	var b strings.Builder
	b.Grow(len(s))
	for _, r := range s {
		switch r {
		case ' ', '.', '_', '^', '*', '\t', '\u00a0', '\u202f', '·', '[', ']', '(', ')':
		case '²', '₂':
			b.WriteByte('2')
		case '³':
			b.WriteByte('3')
		case '°', 'º', '˚':
			b.WriteString("deg")
		case '℃':
			b.WriteString("degc")
		case '℉':
			b.WriteString("degf")
		case '″', '”':
			b.WriteByte('"')
		case 'Δ', '∆':
			b.WriteString("delta")
		case '–':
			b.WriteByte('-')
		default:
			b.WriteString(strings.ToLower(string(r)))
		}
	}
	return b.String()
}

// LookupUnit finds a unit of measure by any of its spellings. "K" is the
// absolute temperature here; where a difference is meant ParseQuantity reads it
// as one.
func LookupUnit(name string) (Measure, bool) {
	u, ok := unitIndex[foldUnit(name)]
	if !ok {
		return Measure{}, false
	}
	return *u, true
}

// DimensionOf is the dimension of the readings of a kind of role.
func DimensionOf(k trend.Kind) Dimension {
	switch k {
	case trend.Temperature, trend.DewPoint, trend.WetBulb, trend.WaterTemp:
		return Temperature
	case trend.RelHumidity, trend.Position:
		return Ratio
	case trend.Enthalpy:
		return Enthalpy
	case trend.HumRatio:
		return Moisture
	case trend.AirFlow, trend.WaterFlow:
		return Flow
	case trend.Velocity:
		return Speed
	case trend.Pressure, trend.BaroPressure:
		return Pressure
	case trend.Power:
		return Power
	case trend.Concentration:
		return Concentration
	}
	return NoDimension
}

// toKind is the factor and shift from a unit's values to a kind's canonical
// unit, and whether such a unit can measure that kind at all.
func (u *Measure) toKind(k trend.Kind) (scale, shift float64, ok bool) {
	switch {
	case u.Dim == DimensionOf(k):
	case k == trend.Switch && u.Dim == Ratio:
		return u.Scale, 0, true
	case k == trend.Position && u.Dim == Frequency: // of a drive: a share of the mains' 60 Hz, or of 50 where it never goes beyond
		return u.Scale / 60, 0, true
	default:
		return 0, 0, false
	}
	if k == trend.WaterFlow { // canonical L/s, base m3/s
		return u.Scale * 1000, u.Shift * 1000, true
	}
	return u.Scale, u.Shift, true
}

// splitQuantity parts "40 m" into 40 and "m".
func splitQuantity(s string) (v float64, unit string, err error) {
	s = strings.TrimSpace(s)
	n := 0
	for n < len(s) {
		c := s[n]
		switch {
		case c >= '0' && c <= '9', c == '.', (c == '-' || c == '+') && n == 0:
			n++
			continue
		case (c == 'e' || c == 'E') && n > 0:
			m := n + 1 // an exponent needs a digit, or it begins the unit
			if m < len(s) && (s[m] == '-' || s[m] == '+') {
				m++
			}
			if m < len(s) && s[m] >= '0' && s[m] <= '9' {
				n = m
				continue
			}
		}
		break
	}
	if n == 0 {
		return 0, "", fmt.Errorf("%s does not begin with a number", quote(s))
	}
	v, perr := strconv.ParseFloat(s[:n], 64)
	if perr != nil || math.IsInf(v, 0) || math.IsNaN(v) {
		return 0, "", fmt.Errorf("%s is not a number", quote(s[:n]))
	}
	return v, strings.TrimSpace(s[n:]), nil
}

// ParseQuantity reads a number with a unit of measure, "100.8 kPa", and returns
// it in the base unit of d. A number without a unit is in the base unit. A
// temperature unit is read as a difference where d is TempDifference. The error
// says what is wrong with the text and which units would do; it does not say
// where the text came from.
func ParseQuantity(s string, d Dimension) (float64, error) {
	if d >= numDimensions {
		panic("ingest: ParseQuantity: no such dimension")
	}
	v, unit, err := splitQuantity(s)
	if err != nil {
		return 0, err
	}
	if unit == "" {
		return v, nil
	}
	u, err := unitFor(unit, d)
	if err != nil {
		return 0, err
	}
	x := v*u.Scale + u.Shift
	if math.IsInf(x, 0) {
		return 0, fmt.Errorf("%s is not a number", quote(s))
	}
	return x, nil
}

func unitFor(name string, d Dimension) (Measure, error) {
	f := foldUnit(name)
	if d == TempDifference {
		if u, ok := differenceIndex[f]; ok {
			return *u, nil
		}
		if u, ok := unitIndex[f]; ok && u.Dim == Temperature {
			return Measure{Name: u.Name, Dim: d, Scale: u.Scale}, nil
		}
	} else if u, ok := unitIndex[f]; ok {
		if u.Dim == d {
			return *u, nil
		}
		return Measure{}, fmt.Errorf("%s measures a %v, not a %v (try %s)", quote(name), u.Dim, d, unitNames(d))
	}
	return Measure{}, fmt.Errorf("%s is not a known unit of %v (try %s)", quote(name), d, unitNames(d))
}

// unitNames lists the units of a dimension for messages, in the table's order.
func unitNames(d Dimension) string {
	var out []string
	for _, table := range [][]Measure{differenceUnits, units} {
		for i := range table {
			if table[i].Dim == d {
				out = append(out, table[i].Name)
			}
		}
	}
	if len(out) > 6 {
		out = append(out[:6], "...")
	}
	return strings.Join(out, ", ")
}

// ParseQuantityAs reads a quantity into a named unit, as package finding names
// the units of rules' parameters: "30 min" as "h" is 0.5, "5 %" as "fraction"
// 0.05 and as "%" 5. A number without a unit is in that unit already.
func ParseQuantityAs(s, unit string) (float64, error) {
	v, given, err := splitQuantity(s)
	if err != nil {
		return 0, err
	}
	if given == "" {
		return v, nil
	}
	target, ok := differenceIndex[foldUnit(unit)]
	if !ok {
		target, ok = unitIndex[foldUnit(unit)]
	}
	if !ok {
		return 0, fmt.Errorf("%s has a unit, and this is a bare number", quote(s))
	}
	u, err := unitFor(given, target.Dim)
	if err != nil {
		return 0, err
	}
	if u.Name == target.Name {
		return v, nil
	}
	return (v*u.Scale + u.Shift - target.Shift) / target.Scale, nil
}

// ParseAccuracy reads the half-width of a maker's band for readings of a kind:
// "0.5 K", "3 %". A percentage is of the reading, except for quantities that are
// percentages themselves. The band must be positive.
func ParseAccuracy(s string, k trend.Kind) (trend.Band, error) {
	v, unit, err := splitQuantity(s)
	if err != nil {
		return trend.Band{}, err
	}
	b := trend.Band{HalfWidth: v}
	d := DimensionOf(k)
	if d == Temperature {
		d = TempDifference
	}
	if unit != "" {
		u, known := LookupUnit(unit)
		if known && u.Dim == Ratio && d != Ratio {
			b = trend.Band{HalfWidth: v * u.Scale, Relative: true}
		} else {
			if u, err = unitFor(unit, d); err != nil {
				return trend.Band{}, err
			}
			b.HalfWidth = v * u.Scale
			if k == trend.WaterFlow {
				b.HalfWidth *= 1000
			}
		}
	}
	return b, checkBand(b, k)
}

func checkBand(b trend.Band, k trend.Kind) error {
	if !(b.HalfWidth > 0) || math.IsInf(b.HalfWidth, 0) {
		return fmt.Errorf("an accuracy must be above zero")
	}
	if (b.Relative || DimensionOf(k) == Ratio) && b.HalfWidth >= 1 {
		return fmt.Errorf("an accuracy of %g is 100 %% or more (write \"3 %%\", or 0.03)", b.HalfWidth)
	}
	return nil
}

// quote shows a stranger's text in a message: quoted, and cut where it is long.
func quote(s string) string {
	if r := []rune(s); len(r) > 40 {
		s = string(r[:40]) + "..."
	}
	return strconv.Quote(s)
}
