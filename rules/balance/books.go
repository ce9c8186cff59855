// Package balance keeps a unit's moisture and energy books: for every interval
// the states along the air path, the outdoor-air fraction, and what each
// component added or took, each with the uncertainty that its sensors leave.
// Uncertainty is propagated here and nowhere else.
package balance

import "dewledger/ingest/trend"

// Books are one unit's balances. Nothing is computed until it is asked for, and
// everything once. Books are not safe for concurrent use.
type Books struct {
	u *trend.Unit
}

// Keep opens the books of a unit.
func Keep(u *trend.Unit) *Books { return &Books{u: u} }

// Unit is the unit whose books these are.
func (b *Books) Unit() *trend.Unit { return b.u }
