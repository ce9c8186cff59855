package report

import (
	"fmt"
	"math"
	"strings"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// sensorsView is what the balances, closed all at once, say of the sensors.
type sensorsView struct {
	Lead   []string
	Rows   []sensorRow
	Closed []closedRow
}

type sensorRow struct {
	Title, Role          string
	Offset, Band, Decide string
	Suspect              bool
}

type closedRow struct{ Title, Hours, Before, After string }

// sensorsOf words a reconciliation; nil where there is none.
func sensorsOf(b *balance.Books, k float64, m finding.Measure) *sensorsView {
	rec := b.Reconcile()
	if rec == nil {
		return nil
	}
	v := &sensorsView{}
	suspect := map[trend.Role]balance.Suspect{}
	for _, s := range rec.Suspects {
		if s.Role != trend.NoRole {
			suspect[s.Role] = s
		}
		v.Lead = append(v.Lead, suspectInWords(s, k, m))
	}
	switch {
	case rec.Remaining < 0.01 && len(v.Lead) > 0:
		v.Lead = append(v.Lead, "Even so the balances do not close within their uncertainty: more is wrong than this, and the offsets below are not to be relied on.")
	case rec.Remaining < 0.01:
		v.Lead = append(v.Lead, "The balances do not close within their uncertainty, and no single sensor or part explains it: the offsets below are not to be relied on.")
	case len(v.Lead) == 0:
		v.Lead = append(v.Lead, "No sensor has to be outside its accuracy for the balances to close.")
	}
	for _, o := range rec.Offsets {
		s, bad := suspect[o.Role]
		val, u := o.Val, o.U
		if bad {
			val, u = s.Val, s.U
		}
		v.Rows = append(v.Rows, sensorRow{
			Title: capital(o.Role.Title()), Role: o.Role.String(),
			Offset: offset(m, val, k*u, o.Role), Band: "± " + offset(m, o.Prior*math.Sqrt(3), 0, o.Role),
			Decide: finding.Significant(100*o.Share, 2) + " %", Suspect: bad,
		})
	}
	for _, c := range rec.Closed {
		// As many digits as the uncertainty deserves.
		after, step := c.After, math.Pow(10, math.Floor(math.Log10(k*c.U))-1)
		if step > 0 {
			after = step * math.Round(after/step)
		}
		v.Closed = append(v.Closed, closedRow{capital(c.Title), finding.Significant(c.Hours, 3), m.PlusMinus(c.Before, k*c.U, c.Unit), m.Value(after, c.Unit, 2)})
	}
	return v
}

// suspectInWords says what does not close, and all that would explain it.
func suspectInWords(s balance.Suspect, k float64, m finding.Measure) string {
	first := ""
	if s.Role == trend.NoRole {
		first = fmt.Sprintf("%s is %s, where %s is usual", s.What, m.PlusMinus(s.Val, k*s.U, s.Unit), m.PlusMinus(s.Usual, k*s.Prior, s.Unit))
	} else {
		way := "high"
		if s.Val < 0 {
			way = "low"
		}
		first = fmt.Sprintf("the %s reads %s too %s, %s times its accuracy", s.Role.Title(), offset(m, math.Abs(s.Val), k*s.U, s.Role), way, finding.Significant(math.Abs(s.Bands), 2))
	}
	if len(s.Alternates) == 0 {
		return "The balances close only if " + first + "."
	}
	var others []string
	for _, a := range s.Alternates {
		if a.Role != trend.NoRole {
			others = append(others, "the "+a.Role.Title()+" reads wrong")
		} else {
			others = append(others, "the usual figure for "+a.What+" does not hold")
		}
	}
	return "The balances do not close as they stand. Either " + first + ", or " + strings.Join(others, ", or ") + ": the data cannot tell which."
}

// offset words a sensor's offset: a difference in its own unit.
func offset(m finding.Measure, x, u float64, r trend.Role) string {
	unit, scale := finding.Difference(r.Kind().Unit())
	return m.PlusMinus(scale*x, scale*u, unit)
}
