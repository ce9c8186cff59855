package balance

import "dewledger/ingest/trend"

// Def is one balance of the books: what it is, what it needs, where it comes
// from. Books.Get computes it once a unit, on demand.
type Def struct {
	Name    string // ledger column, or its prefix where the balance has several parts
	Title   string // in words
	Unit    string // as package finding names it
	Formula string // in symbols, for the report and the catalogue
	Source  string
	needs   func(u *trend.Unit) []Need
	keep    func(b *Books) []*Part
}

// Need is one thing that a balance cannot do without: any one of the
// alternatives, each a set of roles. The first alternative is the usual one.
type Need struct {
	What  string // in words: "outdoor humidity"
	AnyOf [][]trend.Role
}

// Part is one place where a balance was struck: a section of the air path
// between two stations, or the one place of a balance that has no more.
type Part struct {
	*Series
	Component trend.Component   // the component that the part is about; empty for the unit as a whole
	From, To  trend.Station     // NoStation where it has none; From Mixed may be a computed mixture
	Between   []trend.Component // all components between From and To, in train order
	Bound     bool              // a bound that the truth cannot be under, not an estimate: silence within it proves little
	Readings  []trend.Role      // the readings behind it, for charts
}
