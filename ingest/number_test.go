package ingest

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"dewledger/ingest/trend"
)

func TestParseCell(t *testing.T) {
	miss := func(r trend.Reason) float64 { return missing(r) }
	for _, tt := range []struct {
		in   string
		mark byte
		want float64
		unit string
	}{
		{"72.3", '.', 72.3, ""}, {"-0.5", '.', -0.5, ""}, {"+4", '.', 4, ""}, {" 21.0 ", '.', 21, ""}, {"1e3", '.', 1000, ""}, {"1.5E-2", '.', 0.015, ""},
		{".5", '.', 0.5, ""}, {"5.", '.', 5, ""}, {"21,5", ',', 21.5, ""}, {"21,5", '.', 21.5, ""}, {"21.5", ',', 21.5, ""},
		{"1,234.5", '.', 1234.5, ""}, {"1.234,5", ',', 1234.5, ""}, {"1,234", '.', 1234, ""}, {"1,234,567", '.', 1234567, ""}, {"1 234,5", ',', 1234.5, ""}, {"1'234.5", '.', 1234.5, ""}, {"1\u202f234,5", ',', 1234.5, ""},
		{"−3.5", '.', -3.5, ""}, {"12345678901234567890", '.', 12345678901234567890, ""},
		{"45%", '.', 45, "%"}, {"45 %", '.', 45, "%"}, {"72.3 °F", '.', 72.3, "°F"}, {"21,5 °C", ',', 21.5, "°C"}, {"350 cfm", '.', 350, "cfm"},
		{"on", '.', 1, ""}, {"OFF", '.', 0, ""}, {"True", '.', 1, ""}, {"false", '.', 0, ""}, {"Ein", '.', 1, ""}, {"arrêt", '.', 0, ""}, {"Occupied", '.', 1, ""},
		{"", '.', miss(trend.Gap), ""}, {"  ", '.', miss(trend.Gap), ""}, {"-", '.', miss(trend.Gap), ""}, {"--", '.', miss(trend.Gap), ""}, {"NaN", '.', miss(trend.Gap), ""}, {"null", '.', miss(trend.Gap), ""}, {"N/A", '.', miss(trend.Gap), ""},
		{"Bad", '.', miss(trend.BadQuality), ""}, {"#VALUE!", '.', miss(trend.BadQuality), ""}, {"inf", '.', miss(trend.BadQuality), ""},
		{"hello", '.', miss(trend.NotNumeric), ""}, {"12abc", '.', miss(trend.NotNumeric), ""}, {"1.2.3", '.', miss(trend.NotNumeric), ""}, {"1,2,3", '.', miss(trend.NotNumeric), ""}, {"0x10", '.', miss(trend.NotNumeric), ""},
		{"1e999", '.', miss(trend.NotNumeric), ""}, {strings.Repeat("9", 100), '.', miss(trend.NotNumeric), ""},
	} {
		got := parseCell([]byte(tt.in), tt.mark)
		if math.Float64bits(got.val) != math.Float64bits(tt.want) || string(got.unit) != tt.unit {
			t.Errorf("parseCell(%q, %q) = %v (%v) %q, want %v (%v) %q", tt.in, tt.mark, got.val, reasonOf(got.val), got.unit, tt.want, reasonOf(tt.want), tt.unit)
		}
	}
}

// The parser's numbers are those of strconv, to the last bit.
func FuzzNumber(f *testing.F) {
	for _, s := range []string{"72.3", "-0.05", "123456789012345", "0.000001", "1e-7", "-", "9007199254740993", "1,234.5", "12 %", "−1", "1 2", "\xe2\x80", "on", "1e5%"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		for _, mark := range []byte{'.', ','} {
			x := parseCell([]byte(s), mark)
			if math.IsInf(x.val, 0) {
				t.Fatalf("%q is infinite", s)
			}
		}
		v, next := cellNumber([]byte(s), 0, ';', '.')
		if next < 0 {
			return
		}
		want, err := strconv.ParseFloat(s[:next], 64)
		if err != nil || want != v {
			t.Errorf("cellNumber(%q) = %v, strconv says %v, %v", s, v, want, err)
		}
		if w, ok := plainNumber([]byte(s[:next]), '.'); ok && w != want {
			t.Errorf("plainNumber(%q) = %v, strconv says %v", s[:next], w, want)
		}
	})
}

func TestResolution(t *testing.T) {
	for _, tt := range []struct {
		in   []float64
		want float64
	}{
		{[]float64{20.1, 20.2, 20.5, 21.7}, 0.1},
		{[]float64{20, 20.5, 22, 21.5}, 0.5},
		{[]float64{20.25, 20.5, 22}, 0.25},
		{[]float64{45, 46, 49}, 1},
		{[]float64{0, 10, 20}, 1}, // a point that rests at few values
		{[]float64{20.12, 20.13, 20.15}, 0.01},
		{[]float64{float64(float32(20.1)), float64(float32(20.2)), float64(float32(20.4))}, 0.1},
		{[]float64{20.123456, 20.7891234}, 0},
		{[]float64{20, 20, 20}, 0},
		{[]float64{math.NaN(), 20.1, math.NaN(), 20.2}, 0.1},
		{nil, 0},
	} {
		if got := resolution(tt.in); math.Abs(got-tt.want) > 1e-12 {
			t.Errorf("resolution(%v) = %v, want %v", tt.in, got, tt.want)
		}
	}
}
