package finding

import (
	"math"
	"strconv"
	"strings"
)

// Measure is the system of units that a person reads: SI or IP. Files that
// machines read are SI always.
type Measure uint8

// The two systems.
const (
	SI Measure = iota
	IP
)

// ParseMeasure reads "si" or "ip".
func ParseMeasure(s string) (Measure, bool) {
	switch s {
	case "si":
		return SI, true
	case "ip":
		return IP, true
	}
	return SI, false
}

// String is "si" or "ip".
func (m Measure) String() string {
	if m == IP {
		return "ip"
	}
	return "si"
}

type shown struct {
	label        string
	scale, shift float64
}

// What a canonical unit is shown as. Differences have their own entries: K is
// a difference, degC a temperature. Conversion factors are those of NIST
// Special Publication 811 (2008), appendix B.
var shownAs = map[string][2]shown{
	"K":        {{"K", 1, 0}, {"°F", 1.8, 0}},
	"degC":     {{"°C", 1, 0}, {"°F", 1.8, 32}},
	"g/kg":     {{"g/kg", 1, 0}, {"gr/lb", 7, 0}}, // 7000 gr a pound
	"kg/kg":    {{"g/kg", 1000, 0}, {"gr/lb", 7000, 0}},
	"kJ/kg":    {{"kJ/kg", 1, 0}, {"Btu/lb", 1 / 2.326, 0}},
	"%":        {{"%", 1, 0}, {"%", 1, 0}},
	"fraction": {{"%", 100, 0}, {"%", 100, 0}},
	"Pa":       {{"Pa", 1, 0}, {"inH2O", 1 / 249.08891, 0}},
	"kPa":      {{"kPa", 1, 0}, {"inHg", 1 / 3.386389, 0}},
	"kW":       {{"kW", 1, 0}, {"MBH", 3.412142, 0}},
	"kW-el":    {{"kW", 1, 0}, {"kW", 1, 0}},
	"m3/s":     {{"m³/s", 1, 0}, {"cfm", 2118.880, 0}},
	"m/s":      {{"m/s", 1, 0}, {"fpm", 196.8504, 0}},
	"L/s":      {{"L/s", 1, 0}, {"gpm", 15.85032, 0}},
	"m":        {{"m", 1, 0}, {"ft", 1 / 0.3048, 0}},
	"kWh":      {{"kWh", 1, 0}, {"kWh", 1, 0}},
	"h":        {{"h", 1, 0}, {"h", 1, 0}},
	"1/h":      {{"per hour", 1, 0}, {"per hour", 1, 0}},
	"ppm":      {{"ppm", 1, 0}, {"ppm", 1, 0}},
	"min":      {{"min", 1, 0}, {"min", 1, 0}},
	"":         {{"", 1, 0}, {"", 1, 0}},
}

// Convert turns a value in a canonical unit into what a reader of measure m
// sees, with the label of its unit. An unknown unit is passed through.
func (m Measure) Convert(v float64, unit string) (float64, string) {
	s, ok := shownAs[unit]
	if !ok {
		return v, unit
	}
	return v*s[m].scale + s[m].shift, s[m].label
}

// Label is the unit's label in measure m.
func (m Measure) Label(unit string) string {
	_, l := m.Convert(0, unit)
	return l
}

// Scale is the factor from the canonical unit to the shown one, for
// differences and uncertainties.
func (m Measure) Scale(unit string) float64 {
	s, ok := shownAs[unit]
	if !ok {
		return 1
	}
	return s[m].scale
}

// Difference is the unit in which a difference of readings in a canonical unit is told,
// and the factor to it: K for degC, g/kg for kg/kg.
func Difference(unit string) (string, float64) {
	switch unit {
	case "degC":
		return "K", 1
	case "kg/kg":
		return "g/kg", 1000
	}
	return unit, 1
}

// Value words a value without an uncertainty: "4.2 K", "no figure" for NaN.
// It keeps the given number of significant digits, at least those of the whole
// part up to four.
func (m Measure) Value(v float64, unit string, digits int) string {
	if math.IsNaN(v) {
		return "no figure"
	}
	x, l := m.Convert(v, unit)
	return withUnit(Significant(x, digits), l)
}

// PlusMinus words a value with its expanded uncertainty, with the digits that
// the uncertainty deserves: "2.1 ± 1.6 K". Without an uncertainty (NaN or 0)
// it words the value alone; so it does where the uncertainty is under half a
// percent of the value, which nobody acts on.
func (m Measure) PlusMinus(v, u float64, unit string) string {
	if math.IsNaN(v) {
		return "no figure"
	}
	if math.IsNaN(u) || u <= 0 {
		return m.Value(v, unit, 2)
	}
	if u < 0.005*math.Abs(v) {
		return m.Value(v, unit, 3)
	}
	x, l := m.Convert(v, unit)
	u *= m.Scale(unit)
	d := decimals(u)
	return withUnit(Grouped(x, d)+" ± "+Grouped(u, d), l)
}

func withUnit(n, label string) string {
	switch label {
	case "":
		return n
	case "%":
		return n + " %"
	}
	return n + " " + label
}

// decimals is how many decimals show u with two significant digits when it
// begins with 1 or 2, else one, between 0 and 4.
func decimals(u float64) int {
	if u <= 0 || math.IsInf(u, 0) {
		return 0
	}
	e := int(math.Floor(math.Log10(u)))
	lead := u / math.Pow(10, float64(e))
	d := -e
	if lead < 2.95 {
		d++
	}
	return min(max(d, 0), 4)
}

// Significant words x with that many significant digits, never in exponent
// form, thousands thin-spaced.
func Significant(x float64, digits int) string {
	if math.IsNaN(x) {
		return "no figure"
	}
	if x == 0 || math.IsInf(x, 0) {
		return strconv.FormatFloat(x, 'f', 0, 64)
	}
	e := int(math.Floor(math.Log10(math.Abs(x))))
	if p := math.Pow(10, float64(digits-1-e)); math.Round(math.Abs(x)*p) >= math.Pow(10, float64(digits)) {
		e++ // rounding carries into a new digit
	}
	d := digits - 1 - e
	if d < 0 { // round the whole part
		p := math.Pow(10, float64(-d))
		x, d = math.Round(x/p)*p, 0
	}
	return Grouped(x, min(d, 6))
}

// Grouped words x with d decimals and a thin space between groups of three
// digits from 10 000 up; a minus is a true minus.
func Grouped(x float64, d int) string {
	s := strconv.FormatFloat(math.Abs(x), 'f', d, 64)
	whole, frac, _ := strings.Cut(s, ".")
	if len(whole) > 4 {
		var b strings.Builder
		for i, r := range whole {
			if i > 0 && (len(whole)-i)%3 == 0 {
				b.WriteRune('\u202f')
			}
			b.WriteRune(r)
		}
		whole = b.String()
	}
	if d > 0 {
		whole += "." + frac
	}
	if x < 0 && strings.Trim(s, "0.") != "" {
		return "−" + whole
	}
	return whole
}

// Range words a figure with its low and high, two digits each.
func Range(mid, lo, hi float64) string {
	return Significant(mid, 2) + " (" + Significant(lo, 2) + " to " + Significant(hi, 2) + ")"
}
