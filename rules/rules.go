// Package rules asks questions of a unit's books and judges the answers. A rule
// is one literal in one file: what it asks, what it needs, its parameters with
// their reasons, its sources and its test cases. It says, interval by interval,
// how far the unit is from physics, how well that is known and where the
// question applied. It does not count minutes, join spans or rank: one judge
// does that for all (judge.go), so that a verdict means the same everywhere.
package rules

import (
	"fmt"
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// Rule is one question.
type Rule struct {
	Name     string
	Doc      Doc
	Unit     string // of the effect, as package finding names it
	Needs    Needs
	Params   []Param
	Harm     Harm
	Cautions []finding.Caution
	Checks   []string // what to look at, cheapest first
	Cause    string   // the usual cause in a few words, "heating valve passes"

	// Eval answers with one piece of evidence a place that it could look at.
	// An empty answer, with the needs met, means that the unit's train has no
	// such place; Pass.None says why.
	Eval func(p *Pass) []Evidence

	Cases []Case
}

// Doc is a rule in words.
type Doc struct {
	Title   string // no full stop
	Text    string // what it asks and why, in whole sentences
	Formula string
	When    string // where the question arises, a noun phrase: "settled running with the valve shut"
	Says    string // the statement of a finding, with {placeholders}; see wording.go
	IfSo    string // what the energy figure supposes: "it is the valve"; empty without energy
	Cannot  string // what it cannot tell apart
	Sources []string
	Since   string
}

// Needs is what a rule reads. It may read nothing else: Pass panics on it.
type Needs struct {
	Balances []*balance.Def
	Commands []trend.Component // needed where the train has them
	Roles    []balance.Need
	RolesFor func(u *trend.Unit) []balance.Need // needs that follow from the unit's train
	// CommandsFor are commands that follow from where the balances were struck.
	CommandsFor func(b *balance.Books) []trend.Component
	Uses        []trend.Role // read where present, never missed
	State       bool         // fan, operating state, settled
	Schedule    bool         // occupied or not, from a point or the schedule
}

// Param is one parameter of a rule, in canonical units.
type Param struct {
	Name, Unit        string
	Default, Min, Max float64
	Why               string
}

// The parameters that every rule has.
const (
	Matters = "matters" // the smallest effect worth a visit
	Persist = "persist" // how long it must last, minutes
)

// Harm is what a fault of this rule does; with size and days it sets the
// priority.
type Harm uint8

// The harms.
const (
	Bookkeeping Harm = iota // nothing but the record suffers
	Misleads                // a sensor that the controls believe
	Wastes                  // energy or comfort
	Wets                    // water where none should be
	Freezes                 // a coil, or people
)

// Evidence is a rule's answer at one place.
type Evidence struct {
	Component string            // train component, or role for a reading; empty for the unit as a whole
	Covers    []trend.Component // the components on which a pass here is a pass
	Effect    *balance.Series   // in the rule's unit, positive towards a fault
	Applies   []bool            // where the question applied; a NaN effect there is missing evidence
	Bound     bool              // Effect is a lower bound: silence within it proves little
	Ungated   bool              // the reading itself counts: no k·u gate, and a pass only where reading less k·u is sound
	Flags     []bool            // the rule's own decision, where an effect alone does not make it; nil: the judge's
	Sees      float64           // with Flags: the smallest effect that it would have flagged; NaN: not able to
	Suspects  []string
	Readings  []trend.Role
	Terms     []Term                           // for the worked figures
	What      string                           // what Effect is, in words
	Elsewhere bool                             // the same effect shows where this cause cannot be at work: the finding stands a step lower
	Short     string                           // why silence here would be no pass although something was tested; empty: it would be
	Blind     string                           // why an effect may be missing although the question applied, in words
	Says      string                           // replaces Doc.Says where the place changes the sentence
	From, To  string                           // stations in words, for {from} and {to}
	Waste     func(i int, effect float64) Rate // kW at an interval, for an effect of that size; nil: none
	Pot       Pot
}

// Term is one figure behind an effect, for the worked balance.
type Term struct {
	Label string
	Unit  string
	Val   []float64
}

// Rate is waste in kW: heat and cooling at the air, and motor electricity.
type Rate struct{ Heat, Cool, Motor float64 }

// Pot names a waste that several findings may describe; in the totals they
// share it.
type Pot uint8

// The pots.
const (
	NoPot      Pot = iota
	OutdoorAir     // too much or too little of it
	HeatCoil       // heat nobody asked for
	CoolCoil       // cooling nobody asked for
	Running        // everything spent while nobody needs the unit
	numPots
)

// Case is a unit on which the rule's verdict is known.
type Case struct {
	Name string
	Want finding.Verdict
	Make func() *trend.Unit
}

// Options are a run's settings.
type Options struct {
	Factor  float64 // coverage factor of every ±; 0 means 2
	Measure finding.Measure
	Only    []string // rule names; nil: all
}

// Pass is one rule's view of one unit: what it declared, and no more.
type Pass struct {
	rule   *Rule
	b      *balance.Books
	factor float64
	words  finding.Measure
	params map[string]float64
	why    string // condition that kept the rule from being asked
	seen   *seen
}

// seen notes what was read, for the test of declared needs.
type seen struct {
	balances map[*balance.Def]bool
	commands map[trend.Component]bool
	roles    map[trend.Role]bool
	state    bool
	schedule bool
}

func newPass(r *Rule, b *balance.Books, opt Options) *Pass {
	p := &Pass{rule: r, b: b, factor: opt.Factor, words: opt.Measure, params: map[string]float64{}, seen: &seen{
		balances: map[*balance.Def]bool{}, commands: map[trend.Component]bool{}, roles: map[trend.Role]bool{},
	}}
	for _, q := range r.Params {
		p.params[q.Name] = q.Default
	}
	for name, v := range b.Unit().Plant.Rules[r.Name].Params {
		if _, ok := p.params[name]; ok {
			p.params[name] = v
		}
	}
	return p
}

// Param is the value in force of the rule's parameter.
func (p *Pass) Param(name string) float64 {
	v, ok := p.params[name]
	if !ok {
		panic(fmt.Sprintf("rules: %s reads undeclared parameter %q", p.rule.Name, name))
	}
	return v
}

// Factor is the run's coverage factor.
func (p *Pass) Factor() float64 { return p.factor }

// N is the number of intervals.
func (p *Pass) N() int { return p.b.Unit().Axis.N }

// Axis is the unit's time axis.
func (p *Pass) Axis() trend.Axis { return p.b.Unit().Axis }

// Plant is what the site says of the unit.
func (p *Pass) Plant() *trend.Plant { return &p.b.Unit().Plant }

// Site is what the unit shares with others.
func (p *Pass) Site() *trend.Site { return &p.b.Unit().Site }

// None records why the question does not arise on this unit: "no water coil in
// the train". The judge reports it as a condition.
func (p *Pass) None(why string) []Evidence {
	p.why = why
	return nil
}

// Parts are the places where a declared balance was struck.
func (p *Pass) Parts(d *balance.Def) []*balance.Part {
	if !slices.Contains(p.rule.Needs.Balances, d) {
		panic(fmt.Sprintf("rules: %s reads undeclared balance %s", p.rule.Name, d.Name))
	}
	p.seen.balances[d] = true
	return p.b.Get(d)
}

// One is the series of a declared balance that has a single part, or nil.
func (p *Pass) One(d *balance.Def) *balance.Series {
	if ps := p.Parts(d); len(ps) > 0 {
		return ps[0].Series
	}
	return nil
}

func (p *Pass) declared(r trend.Role) bool {
	if slices.Contains(p.rule.Needs.Uses, r) {
		return true
	}
	for _, n := range p.rule.readings(p.b.Unit()) {
		for _, alt := range n.AnyOf {
			if slices.Contains(alt, r) {
				return true
			}
		}
	}
	return false
}

// Col is a declared reading, or nil where the unit has none.
func (p *Pass) Col(r trend.Role) []float64 {
	if !p.declared(r) {
		panic(fmt.Sprintf("rules: %s reads undeclared role %s", p.rule.Name, r))
	}
	p.seen.roles[r] = true
	return p.b.Unit().Col(r)
}

// Column is a declared reading with its resolution and origin, or nil.
func (p *Pass) Column(r trend.Role) *trend.Column {
	p.Col(r)
	return p.b.Unit().Cols[r]
}

// readings are the rule's needs of readings on this unit.
func (r *Rule) readings(u *trend.Unit) []balance.Need {
	if r.Needs.RolesFor == nil {
		return r.Needs.Roles
	}
	return append(slices.Clip(r.Needs.Roles), r.Needs.RolesFor(u)...)
}

// commands are the components whose commands the rule needs on this unit.
func (r *Rule) commands(b *balance.Books) []trend.Component {
	if r.Needs.CommandsFor == nil {
		return r.Needs.Commands
	}
	return append(slices.Clip(r.Needs.Commands), r.Needs.CommandsFor(b)...)
}

// Reading is a declared reading with its uncertainties, or nil.
func (p *Pass) Reading(r trend.Role) *balance.Series {
	if p.Col(r) == nil {
		return nil
	}
	return p.b.Reading(r)
}

// Reconcile closes all balances of the period at once. It reads whatever the unit has:
// a rule's needs name the least of it.
func (p *Pass) Reconcile() *balance.Reconciliation { p.state(); return p.b.Reconcile() }

func (p *Pass) command(c trend.Component) {
	if !slices.Contains(p.rule.commands(p.b), c) {
		panic(fmt.Sprintf("rules: %s reads undeclared command of %s", p.rule.Name, c))
	}
	p.seen.commands[c] = true
}

// Command is a component's command, 0 to 1, or nil.
func (p *Pass) Command(c trend.Component) []float64 { p.command(c); return p.b.Command(c) }

// Shut is where a component is commanded shut.
func (p *Pass) Shut(c trend.Component) []bool { p.command(c); return p.b.Shut(c) }

// Running is where a component is commanded on.
func (p *Pass) Running(c trend.Component) []bool { p.command(c); return p.b.Running(c) }

// Dry is where no wet component has run for half an hour and the unit is settled.
func (p *Pass) Dry() []bool {
	p.command(trend.Cooling)
	p.command(trend.Humidify)
	return p.b.Dry()
}

func (p *Pass) state() {
	if !p.rule.Needs.State {
		panic(fmt.Sprintf("rules: %s reads the operating state without declaring it", p.rule.Name))
	}
	p.seen.state = true
}

// Settled is where the fan is on and the operating state has held.
func (p *Pass) Settled() []bool { p.state(); return p.b.Settled() }

// FanOn is where the fan runs.
func (p *Pass) FanOn() []bool { p.state(); return p.b.FanOn() }

// States is the operating state.
func (p *Pass) States() []balance.State { p.state(); return p.b.States() }

// Occupied is where the building is occupied, by a point or the schedule.
func (p *Pass) Occupied() []bool {
	if !p.rule.Needs.Schedule {
		panic(fmt.Sprintf("rules: %s reads the schedule without declaring it", p.rule.Name))
	}
	p.seen.schedule = true
	return p.b.Occupied()
}

// The rest is for energy, which is an estimate beside the claim: it uses what
// the books have and is absent where they have nothing.

// Flow is the dry-air mass flow, kg/s, or nil.
func (p *Pass) Flow() *balance.Series { s, _ := p.b.MassFlow(); return s }

// EnthalpyAt is a station's enthalpy, kJ/kg, or nil.
func (p *Pass) EnthalpyAt(s trend.Station) []float64 { return vals(p.b.Enthalpy(s)) }

// TempAt is a station's temperature, degC, or nil.
func (p *Pass) TempAt(s trend.Station) []float64 { return vals(p.b.Temp(s)) }

// HumRatioAt is a station's humidity ratio, kg/kg, or nil.
func (p *Pass) HumRatioAt(s trend.Station) []float64 { return vals(p.b.HumRatio(s)) }

// FanRise is the expected rise over the supply fan, K, or nil.
func (p *Pass) FanRise() []float64 { return vals(p.b.ExpectedFanRise()) }

// FanPower is the metered electric power of the unit's fans, kW, or nil.
func (p *Pass) FanPower() []float64 {
	u := p.b.Unit()
	sa, ra := u.Col(trend.SAFanPower), u.Col(trend.RAFanPower)
	if sa == nil || ra == nil {
		if sa == nil {
			return ra
		}
		return sa
	}
	sum := make([]float64, len(sa))
	for i := range sum {
		sum[i] = sa[i] + ra[i]
	}
	return sum
}

// HeatAsked and CoolAsked say whether any heating or cooling coil is commanded
// on; false where not known.
func (p *Pass) HeatAsked(i int) bool {
	return p.b.Running(trend.Heating)[i] || p.b.Running(trend.Preheat)[i] || p.b.Running(trend.Reheat)[i]
}

// CoolAsked is described at HeatAsked.
func (p *Pass) CoolAsked(i int) bool { return p.b.Running(trend.Cooling)[i] }

// Duties are the coils' heating and cooling, kW each at least 0, or nil where
// no flow is known.
func (p *Pass) Duties() (heat, cool []float64) { return duties(p.b) }

func duties(b *balance.Books) (heat, cool []float64) {
	parts := b.Get(balance.CoilHeat)
	for _, q := range parts {
		if q.Unit != "kW" {
			return nil, nil
		}
	}
	if len(parts) == 0 {
		return nil, nil
	}
	n := b.Unit().Axis.N
	heat, cool = make([]float64, n), make([]float64, n)
	on := b.FanOn()
	for _, q := range parts {
		for i, v := range q.Val {
			switch {
			case math.IsNaN(v) || !on[i]:
			case v > 0:
				heat[i] += v
			default:
				cool[i] -= v
			}
		}
	}
	return heat, cool
}

func vals(s *balance.Series) []float64 {
	if s == nil {
		return nil
	}
	return s.Val
}

// CpAir is the specific heat of moist air near room conditions, kJ/(kg·K) per kg
// of dry air, for energy estimates (ASHRAE Handbook of Fundamentals,
// psychrometrics: 1.006 + 1.86 W at W = 0.008).
const CpAir = 1.02

// matters and persist are the parameters that every rule declares first.
func matters(unit string, def, lo, hi float64, why string) Param {
	return Param{Name: Matters, Unit: unit, Default: def, Min: lo, Max: hi, Why: why}
}

func persist(minutes float64, why string) Param {
	return Param{Name: Persist, Unit: "min", Default: minutes, Min: 1, Max: 7 * 24 * 60, Why: why}
}

func (p *Pass) persistence() time.Duration {
	return time.Duration(p.Param(Persist) * float64(time.Minute))
}

// and returns where all masks hold.
func and(masks ...[]bool) []bool {
	out := slices.Clone(masks[0])
	for _, m := range masks[1:] {
		for i := range out {
			out[i] = out[i] && m[i]
		}
	}
	return out
}

func nan() float64 { return math.NaN() }
