package report

import (
	"io"
	"math"
	"sort"

	"dewledger/rules/finding"
)

// Index is the ranking of several units.
type Index struct {
	Site     string
	Sets     []*finding.Set
	Pages    []string // each set's page, relative to the index
	Failed   []FailedUnit
	Measure  finding.Measure
	Version  string
	Currency string
}

// FailedUnit is a unit that could not be analysed, and why.
type FailedUnit struct{ Unit, Reason string }

type indexRow struct {
	Unit, Page, Worth, Cost, Worst, Priority string
	Findings, Passed, Untested               int
	Usable                                   string
}

// IndexPage writes the ranking: the unit worth most first, then by its worst
// finding.
func IndexPage(w io.Writer, ix Index) error {
	order := make([]int, len(ix.Sets))
	for i := range order {
		order[i] = i
	}
	worst := func(s *finding.Set) int {
		if len(s.Findings) == 0 {
			return -1
		}
		return int(s.Findings[0].Priority)
	}
	worth := func(s *finding.Set) float64 {
		if math.IsNaN(s.Total.KWh) || len(s.Findings) == 0 {
			return 0
		}
		return s.Total.KWh
	}
	sort.SliceStable(order, func(a, b int) bool {
		x, y := ix.Sets[order[a]], ix.Sets[order[b]]
		if wx, wy := worst(x), worst(y); wx != wy {
			return wx > wy
		}
		if worth(x) != worth(y) {
			return worth(x) > worth(y)
		}
		return x.Unit < y.Unit
	})
	v := struct {
		Site, Version string
		Rows          []indexRow
		Failed        []FailedUnit
	}{Site: ix.Site, Version: ix.Version, Failed: ix.Failed}
	for _, i := range order {
		s := ix.Sets[i]
		r := indexRow{Unit: s.Unit, Page: ix.Pages[i], Findings: s.Open(), Usable: finding.Significant(100*s.UsableShare, 3) + " %", Worth: "–", Cost: "–", Worst: "nothing found", Priority: "–"}
		for _, c := range s.Coverage {
			switch c.Verdict {
			case finding.Pass:
				r.Passed++
			case finding.NotTestable:
				r.Untested++
			}
		}
		if len(s.Findings) > 0 {
			r.Worst, r.Priority = titleOf(s, s.Findings[0].Rule), s.Findings[0].Priority.String()
			if !math.IsNaN(s.Total.KWh) {
				r.Worth = finding.Range(s.Total.KWh, s.Total.Low, s.Total.High) + " kWh"
			}
			if !math.IsNaN(s.Total.Cost) {
				r.Cost = finding.Significant(s.Total.Cost, 2) + " " + s.Currency
			}
		}
		v.Rows = append(v.Rows, r)
	}
	return pages().ExecuteTemplate(w, "index.tmpl", v)
}
