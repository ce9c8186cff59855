// Package balance keeps a unit's moisture and energy books: for every interval
// the states along the air path, the outdoor-air fraction, and what each
// component added or took, each with the uncertainty that its sensors leave.
// Uncertainty is propagated here and nowhere else.
//
// The model (JCGM 100:2008). A reading is truth + offset + noise. The offset is
// constant over the period and independent between sensors; the noise is
// independent between sensors and enters every figure of its interval. Balances
// are linearised in the readings, so that a sensor which enters twice enters
// once, with its sensitivities summed, in the offset part and in the noise part
// alike. The site's pressure is taken as exact: it moves all stations' moisture
// together, by 1 % a kPa, and nearly cancels from differences.
package balance

import (
	"slices"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// Books are one unit's balances. Nothing is computed until it is asked for, and
// everything once. What they return is shared: do not write to it. Books are
// not safe for concurrent use.
type Books struct {
	u    *trend.Unit
	path path

	air   *psy.Model
	parts map[*Def][]*Part

	off    [trend.NumRoles][]float64
	noise  [trend.NumRoles]float64
	noised [trend.NumRoles]bool

	temp, hum, enth [trend.NumStations]memo[*form]
	capacity        [trend.NumStations]memo[[]float64]
	series          map[string]*Series

	fan        memo[fanState]
	settled    memo[[]bool]
	states     memo[[]State]
	occupied   memo[[]bool]
	dry        memo[[]bool]
	minDamper  memo[float64]
	commands   map[trend.Component][]float64
	shut       map[trend.Component][]bool
	running    map[trend.Component][]bool
	shutFor    map[trend.Component][]int32
	fractions  memo[*fractions]
	mixture    memo[*mixture]
	flow       memo[massFlow]
	fanRise    memo[*form]
	learnedFan memo[learned]
	curve      memo[*Curve]
	account    memo[[]Row]
	gains      memo[[]*Part]
	fanParts   memo[[]*Part]
	coilParts  memo[[]*Part]
	reconciled memo[*Reconciliation]
	scratch    []float64
	free       [][]float64 // buffers that nothing refers to
}

// memo holds what was computed once.
type memo[T any] struct {
	v    T
	done bool
}

func (m *memo[T]) get(make func() T) T {
	if !m.done {
		m.v, m.done = make(), true
	}
	return m.v
}

// Keep opens the books of a unit.
func Keep(u *trend.Unit) *Books {
	return &Books{
		u: u, path: pathOf(&u.Plant),
		parts:    map[*Def][]*Part{},
		series:   map[string]*Series{},
		commands: map[trend.Component][]float64{},
		shut:     map[trend.Component][]bool{},
		running:  map[trend.Component][]bool{},
		shutFor:  map[trend.Component][]int32{},
	}
}

// Unit is the unit whose books these are.
func (b *Books) Unit() *trend.Unit { return b.u }

func (b *Books) n() int { return b.u.Axis.N }

// Get is the balance at every place where this unit lets it be struck; nil
// where roles are missing or the train has no such place.
func (b *Books) Get(d *Def) []*Part {
	if ps, ok := b.parts[d]; ok {
		return ps
	}
	ps := d.keep(b)
	b.parts[d] = ps
	return ps
}

// standardAtmosphere is the pressure at sea level, Pa (ISO 2533:1975).
const standardAtmosphere = 101325.0

// Air is moist air at the site's pressure: the median of the site's barometer
// where there is one, else what the site stated or its altitude gives.
func (b *Books) Air() psy.Model {
	if b.air != nil {
		return *b.air
	}
	p := b.u.Site.PressurePa
	if v := b.u.Col(trend.WXPressure); v != nil {
		if m := median(b.sample(v, nil)); m > 0 {
			p = m
		}
	}
	if !(p > 0) {
		p = standardAtmosphere
	}
	b.air = &psy.Model{P: p, Ice: b.u.Site.RHOverIce}
	return *b.air
}

// named computes a public series once.
func (b *Books) named(name string, make func() *Series) *Series {
	if s, ok := b.series[name]; ok {
		return s
	}
	s := make()
	b.series[name] = s
	return s
}

func filled(n int, x float64) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = x
	}
	return v
}

// settlingIntervals is the settling time, in intervals.
func (b *Books) settlingIntervals() int { return b.u.Axis.Intervals(Settling) }

// has reports whether the train has the component.
func (b *Books) has(c trend.Component) bool { return slices.Contains(b.u.Plant.Train, c) }
