package rules

import (
	"math"
	"strings"

	"dewledger/ingest/trend"
	"dewledger/rules/finding"
)

// statement fills a rule's sentence. Placeholders: {effect} with its
// uncertainty, {hours} flagged of {tested}, {component}, {reading}, {from} and
// {to} (stations), {matters}, {days}.
func statement(text string, f *finding.Finding, e *Evidence, m finding.Measure, days int) string {
	name := e.Component
	for _, c := range trend.Components() {
		if string(c) == e.Component {
			name = c.Title()
		}
	}
	reading := e.Component
	if r, ok := trend.ParseRole(e.Component); ok {
		reading = r.Title()
	}
	return strings.NewReplacer(
		"{effect}", m.PlusMinus(f.Magnitude, f.Uncertainty, f.UnitOf),
		"{matters}", m.Value(f.Matters, f.UnitOf, 2),
		"{hours}", finding.Significant(f.FaultHours, 3),
		"{tested}", finding.Significant(f.TestedHours, 3),
		"{component}", name,
		"{reading}", reading,
		"{from}", e.From,
		"{to}", e.To,
		"{days}", finding.Grouped(float64(days), 0),
	).Replace(text)
}

// worth words the energy of a finding: "If it is the valve: 340 kWh (80 to
// 600), 31 EUR." It is empty where there is no figure.
func worth(ifSo string, en finding.Energy, currency string) string {
	if ifSo == "" || math.IsNaN(en.KWh) {
		return ""
	}
	if en.High < 1 {
		return "If " + ifSo + ", the waste is under 1 kWh in this period."
	}
	s := "If " + ifSo + ": " + finding.Range(en.KWh, en.Low, en.High) + " kWh"
	if !math.IsNaN(en.Cost) {
		s += ", " + finding.Significant(en.Cost, 2) + " " + currency
	}
	s += " in this period."
	if en.Note != "" {
		s += " " + en.Note
	}
	return s
}

// worked words the balance with this unit's mean numbers over the flagged time.
func worked(e *Evidence, f *finding.Finding, flagged []bool, m finding.Measure) string {
	var parts []string
	for _, t := range e.Terms {
		var sum float64
		var n int
		for i, on := range flagged {
			if on && t.Val != nil && !math.IsNaN(t.Val[i]) {
				sum += t.Val[i]
				n++
			}
		}
		if n > 0 {
			parts = append(parts, t.Label+" "+m.Value(sum/float64(n), t.Unit, 3))
		}
	}
	if len(parts) == 0 {
		return ""
	}
	return "Mean over the flagged time: " + strings.Join(parts, "; ") + "; effect " +
		m.PlusMinus(f.Magnitude, f.Uncertainty, f.UnitOf) + "."
}
