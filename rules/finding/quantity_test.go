package finding

import (
	"math"
	"testing"
)

func TestPlusMinus(t *testing.T) {
	for _, c := range []struct {
		m    Measure
		v, u float64
		unit string
		want string
	}{
		{SI, 2.13, 1.57, "K", "2.1 ± 1.6 K"},
		{SI, -0.84, 0.31, "g/kg", "−0.8 ± 0.3 g/kg"},
		{SI, 0.38, 0.07, "fraction", "38 ± 7 %"},
		{SI, 172.25, 0.002, "h", "172 h"},
		{SI, 1.5, 0, "K", "1.5 K"},
		{SI, math.NaN(), 1, "K", "no figure"},
		{SI, 12345, 2100, "kWh", "12\u202f345 ± 2100 kWh"},
		{IP, 2, 1, "K", "3.6 ± 1.8 °F"},
		{IP, 1, 0.5, "g/kg", "7 ± 4 gr/lb"},
	} {
		if got := c.m.PlusMinus(c.v, c.u, c.unit); got != c.want {
			t.Errorf("%v ± %v %s: %q, want %q", c.v, c.u, c.unit, got, c.want)
		}
	}
}

// Conversions against NIST Special Publication 811 (2008), appendix B, and its
// definitions: 1 lb = 7000 gr, 1 Btu(IT)/lb = 2.326 kJ/kg exactly, 1 ft = 0.3048
// m exactly.
func TestConvert(t *testing.T) {
	for _, c := range []struct {
		unit     string
		si, want float64
	}{
		{"degC", 100, 212}, {"K", 5, 9}, {"kJ/kg", 2.326, 1}, {"kg/kg", 0.001, 7}, {"g/kg", 1, 7},
		{"m3/s", 0.0004719474, 1}, {"m/s", 0.00508, 1}, {"Pa", 249.0889, 1}, {"kPa", 3.386389, 1},
		{"kW", 0.2930711, 1}, {"L/s", 0.06309020, 1}, {"m", 0.3048, 1},
	} {
		got, _ := IP.Convert(c.si, c.unit)
		if math.Abs(got-c.want) > 2e-6*math.Abs(c.want) {
			t.Errorf("%v %s is %v in inch-pound units, want %v", c.si, c.unit, got, c.want)
		}
		if back, _ := SI.Convert(c.si, c.unit); c.unit != "kg/kg" && back != c.si {
			t.Errorf("%v %s in SI is %v", c.si, c.unit, back)
		}
	}
}

func TestSignificant(t *testing.T) {
	for _, c := range []struct {
		x    float64
		d    int
		want string
	}{
		{0, 2, "0"}, {3.14159, 3, "3.14"}, {0.00123, 2, "0.0012"}, {1234, 2, "1200"}, {99.96, 3, "100"}, {-2.5, 2, "−2.5"},
		{123456, 2, "120\u202f000"}, {0.0999, 2, "0.10"}, {math.NaN(), 2, "no figure"},
	} {
		if got := Significant(c.x, c.d); got != c.want {
			t.Errorf("%v to %d digits: %q, want %q", c.x, c.d, got, c.want)
		}
	}
}
