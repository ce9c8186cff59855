package ingest

import (
	"math"
	"strings"
	"testing"

	"dewledger/ingest/trend"
)

func agrees(a, b, rel float64) bool {
	return math.Abs(a-b) <= rel*math.Max(math.Abs(a), math.Abs(b))
}

func TestParseQuantity(t *testing.T) {
	for _, tt := range []struct {
		in   string
		dim  Dimension
		want float64
		rel  float64
		from string
	}{
		{"40 m", Length, 40, 0, "identity"},
		{"40", Length, 40, 0, "a bare number is in the base unit"},
		{"131.2336 ft", Length, 40, 1e-6, "NIST SP 811 B.8: ft = 0.3048 m exactly"},
		{"100.8 kPa", Pressure, 100800, 1e-12, "SI prefix"},
		{"29.92126 inHg", Pressure, 101325, 1e-5, "standard atmosphere, NIST SP 811 B.8: 1 atm = 101325 Pa, inHg 3386.389 Pa"},
		{"1 inH2O", Pressure, 249.0889, 1e-7, "NIST SP 811 B.8"},
		{"1 in. w.c.", Pressure, 249.0889, 1e-7, "spelling"},
		{"14.69595 psi", Pressure, 101325, 1e-6, "NIST SP 811 B.8: psi = 6894.757 Pa"},
		{"70 degF", Temperature, 21.11111, 1e-6, "t/degC = (t/degF - 32)/1.8, NIST SP 811 B.8"},
		{"70 °F", Temperature, 21.11111, 1e-6, "spelling"},
		{"-40F", Temperature, -40, 1e-12, "the scales cross"},
		{"273.15 K", Temperature, 0, 0, "NIST SP 811 B.8"},
		{"21 degC", Temperature, 21, 0, "identity"},
		{"0.5 K", TempDifference, 0.5, 0, "identity"},
		{"0.9 °F", TempDifference, 0.5, 1e-12, "1 degF = 5/9 K"},
		{"1 degC", TempDifference, 1, 0, "a plain unit is a difference here"},
		{"3 %", Ratio, 0.03, 1e-12, "definition"},
		{"4.2 m3/s", Flow, 4.2, 0, "identity"},
		{"4.2 m³/s", Flow, 4.2, 0, "spelling"},
		{"1000 cfm", Flow, 0.4719474, 1e-6, "NIST SP 811 B.8: ft3/min = 4.719474E-04 m3/s"},
		{"15120 m3/h", Flow, 4.2, 1e-12, "definition"},
		{"1 gpm", Flow, 6.309020e-5, 1e-6, "NIST SP 811 B.8: gal/min = 6.309020E-05 m3/s"},
		{"200 fpm", Speed, 1.016, 1e-12, "NIST SP 811 B.8: ft/min = 5.08E-03 m/s"},
		{"1 ton", Power, 3.516853, 1e-7, "NIST SP 811 B.8: ton of refrigeration 3516.853 W"},
		{"1 hp", Power, 0.7456999, 1e-7, "NIST SP 811 B.8: horsepower (550 ft lbf/s)"},
		{"1000 Btu/h", Power, 0.2930711, 1e-7, "NIST SP 811 B.8: Btu(IT)/h"},
		{"7 gr/lb", Moisture, 0.001, 1e-12, "7000 gr = 1 lb"},
		{"8 g/kg", Moisture, 0.008, 1e-12, "definition"},
		// 28 Btu/lb and 47 kJ/kg stand side by side as the fixed-enthalpy high limit
		// of ANSI/ASHRAE/IES 90.1 (from memory): equal to the rounding of both.
		{"28 Btu/lb", Enthalpy, 47, 0.01, "ASHRAE 90.1 high-limit table, I-P and SI edition"},
		{"65 kJ/kg", Enthalpy, 65, 0, "identity"},
		{"5 min", Duration, 5.0 / 60, 1e-12, "definition"},
		{"2.5e1 m", Length, 25, 1e-12, "exponent"},
	} {
		got, err := ParseQuantity(tt.in, tt.dim)
		if err != nil || !agrees(got, tt.want, tt.rel) {
			t.Errorf("ParseQuantity(%q, %v) = %v, %v; want %v (%s)", tt.in, tt.dim, got, err, tt.want, tt.from)
		}
	}
}

func TestParseQuantityErrors(t *testing.T) {
	for _, tt := range []struct {
		in   string
		dim  Dimension
		says string
	}{
		{"", Length, "does not begin with a number"},
		{"forty m", Length, "does not begin with a number"},
		{"40 m", Pressure, "measures a length, not a pressure"},
		{"40 furlongs", Length, "not a known unit of length (try m, km, ft, in, mm, cm)"},
		{"1e999 m", Length, "is not a number"},
		{"-", Length, "is not a number"},
		{"3 %", TempDifference, "not a known unit of temperature difference"},
	} {
		_, err := ParseQuantity(tt.in, tt.dim)
		if err == nil || !strings.Contains(err.Error(), tt.says) {
			t.Errorf("ParseQuantity(%q, %v): error %v, want one saying %q", tt.in, tt.dim, err, tt.says)
		}
	}
}

// Dry air at 0 degF has zero enthalpy in I-P, and -17.88 kJ/kg in SI by h = 1.006 t
// (ASHRAE Handbook Fundamentals, psychrometrics chapter): the tables' 1.006
// against 0.240*4.1868 = 1.0048 leaves 0.02 kJ/kg.
func TestEnthalpyZero(t *testing.T) {
	h, err := ParseQuantity("0 Btu/lb", Enthalpy)
	if err != nil || math.Abs(h-1.006*(-32/1.8)) > 0.03 {
		t.Errorf("0 Btu/lb = %v kJ/kg, %v", h, err)
	}
}

func TestParseAccuracy(t *testing.T) {
	for _, tt := range []struct {
		in   string
		kind trend.Kind
		want trend.Band
		bad  string
	}{
		{"0.5 K", trend.Temperature, trend.Band{HalfWidth: 0.5}, ""},
		{"0.9 degF", trend.Temperature, trend.Band{HalfWidth: 0.5}, ""},
		{"3 %", trend.RelHumidity, trend.Band{HalfWidth: 0.03}, ""},
		{"10 %", trend.AirFlow, trend.Band{HalfWidth: 0.1, Relative: true}, ""},
		{"10 Pa", trend.Pressure, trend.Band{HalfWidth: 10}, ""},
		{"1 %", trend.Pressure, trend.Band{HalfWidth: 0.01, Relative: true}, ""},
		{"2 L/s", trend.WaterFlow, trend.Band{HalfWidth: 2}, ""},
		{"0 K", trend.Temperature, trend.Band{}, "above zero"},
		{"-1 K", trend.Temperature, trend.Band{}, "above zero"},
		{"3", trend.RelHumidity, trend.Band{}, "100 % or more"},
		{"3 bar", trend.RelHumidity, trend.Band{}, "not a fraction"},
	} {
		got, err := ParseAccuracy(tt.in, tt.kind)
		switch {
		case tt.bad != "":
			if err == nil || !strings.Contains(err.Error(), tt.bad) {
				t.Errorf("ParseAccuracy(%q): %v, want an error saying %q", tt.in, err, tt.bad)
			}
		case err != nil || !agrees(got.HalfWidth, tt.want.HalfWidth, 1e-12) || got.Relative != tt.want.Relative:
			t.Errorf("ParseAccuracy(%q, %v) = %+v, %v; want %+v", tt.in, tt.kind, got, err, tt.want)
		}
	}
}

func TestParseQuantityAs(t *testing.T) {
	for _, tt := range []struct {
		in, unit string
		want     float64
	}{
		{"30 min", "h", 0.5}, {"2 h", "min", 120}, {"5 %", "fraction", 0.05}, {"5 %", "%", 5}, {"0.05", "%", 0.05},
		{"1.8 degF", "K", 1}, {"64.4 degF", "degC", 18}, {"0.5 g/kg", "g/kg", 0.5}, {"7 gr/lb", "g/kg", 1},
	} {
		got, err := ParseQuantityAs(tt.in, tt.unit)
		if err != nil || math.Abs(got-tt.want) > 1e-9 {
			t.Errorf("ParseQuantityAs(%q, %q) = %v, %v; want %v", tt.in, tt.unit, got, err, tt.want)
		}
	}
	if _, err := ParseQuantityAs("5 m", "h"); err == nil {
		t.Error("a length was read as a time")
	}
}

// Every spelling in the table leads back to its own unit: no two share one.
func TestUnitSpellings(t *testing.T) {
	for i := range units {
		for _, n := range append([]string{units[i].Name}, units[i].also...) {
			if got := unitIndex[foldUnit(n)]; got != &units[i] {
				t.Errorf("%q of %s is read as %s", n, units[i].Name, got.Name)
			}
		}
	}
}

func FuzzParseQuantity(f *testing.F) {
	for _, s := range []string{"40 m", "100.8 kPa", "0.5 K", "3 %", "-40°F", "1e5 Pa", "1e", "+", ".", "28 Btu/lb", "5 min", "9e999 m"} {
		f.Add(s, uint8(Pressure))
	}
	f.Fuzz(func(t *testing.T, s string, d uint8) {
		if v, err := ParseQuantity(s, Dimension(d%uint8(numDimensions))); err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
			t.Errorf("%q gave %v", s, v)
		}
	})
}
