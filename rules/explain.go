package rules

import (
	"fmt"
	"math"
	"slices"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// A sensor that is far out makes balances fail that have nothing to do with it but its
// reading: a mixed-air sensor reads high, and a valve behind it seems to leak. Where the
// sensor has been named, the rules are asked again of a unit whose reading has the offset
// taken off. A finding that is gone then is explained by the sensor: it stays in the
// report, as low, without a price, and says what explains it.

// corrected is a unit's books with the accused sensors' offsets taken off, each with the
// accuracy that its offset is known to; nil where no sensor is accused.
func corrected(b *balance.Books, p *Pass) (*balance.Books, []trend.Role) {
	rec := b.Reconcile()
	if rec == nil {
		return nil, nil
	}
	u := *b.Unit()
	var roles []trend.Role
	for _, s := range rec.Suspects {
		a := rec.Accused(s.Role)
		determined := slices.ContainsFunc(rec.Held, func(o balance.Offset) bool { return o.Role == s.Role && o.Share >= p.Param("determined") })
		if a == nil || !determined || math.Abs(a.Bands) < p.Param(Matters) || s.Role.Kind() == trend.AirFlow {
			continue
		}
		old := u.Cols[s.Role]
		c := *old
		c.Val = make([]float64, len(old.Val))
		for i, v := range old.Val {
			c.Val[i] = v - a.Val
		}
		c.Accuracy, c.Relative = a.U*math.Sqrt(3), false
		u.Cols[s.Role] = &c
		roles = append(roles, s.Role)
	}
	if roles == nil {
		return nil, nil
	}
	return balance.Keep(&u), roles
}

// explained is the sensor that explains a faulty ruling: it reads it, and the fault is
// gone without its offset. NoRole where none does. What can freeze is never explained
// away.
func explained(p *Pass, r *ruling, fixed *balance.Books, roles []trend.Role, opt Options) trend.Role {
	if fixed == nil || p.rule == sensorOffset || p.rule.Harm == Freezes {
		return trend.NoRole
	}
	at := slices.IndexFunc(roles, func(x trend.Role) bool { return slices.Contains(r.e.Readings, x) })
	if at < 0 {
		return trend.NoRole
	}
	_, again := ask(newPass(p.rule, fixed, opt))
	for k := range again {
		if again[k].verdict == finding.Fault && again[k].e.Component == r.e.Component {
			return trend.NoRole
		}
	}
	return roles[at]
}

// explainedBy turns a finding into one that a sensor explains.
func explainedBy(f finding.Finding, role trend.Role) finding.Finding {
	f.Priority, f.ExplainedBy = finding.Low, role.String()
	f.Cause = role.Title() + " sensor out of calibration"
	f.Suspects = []string{role.String()}
	f.Statement += fmt.Sprintf(" The offset found for the %s explains it: with that taken off, nothing is left.", role.Title())
	return f
}
