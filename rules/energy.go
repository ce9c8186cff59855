package rules

import (
	"math"

	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// defaultCOP turns cooling at the air into electricity where the site gives no
// figure (common practice for a chilled-water plant or a packaged unit, no
// source).
const defaultCOP = 3.5

// tally adds up waste so that no kilowatt-hour counts twice: findings of one
// pot share the larger, pots add up, and what is spent while nobody needs the
// unit contains all other waste of that time.
type tally struct {
	heat, cool, motor [numPots][]float64 // kW by interval
	hours             float64
	cop               float64
	low, high         float64 // sum of the findings' spreads below and above, in quadrature
	any               bool
	whole             float64 // the unit's own energy; NaN until asked for
}

func newTally(b *balance.Books) *tally {
	t := &tally{hours: b.Unit().Axis.Hours(), cop: b.Unit().Site.Prices.CoolingCOP, whole: math.NaN()}
	if !(t.cop > 0) {
		t.cop = defaultCOP
	}
	return t
}

// unpriced is no figure at all.
func unpriced() finding.Energy {
	return finding.Energy{KWh: nan(), Low: nan(), High: nan(), Heat: nan(), Cooling: nan(), Electricity: nan(), Cost: nan(), CostLow: nan(), CostHigh: nan()}
}

// add integrates a ruling's waste over its flagged intervals. The low and high
// come from the effect's expanded uncertainty and the flow's, in quadrature.
// Where some flagged intervals could not be priced the figure is scaled by
// their share, and Note says so.
func (t *tally) add(p *Pass, r *ruling) finding.Energy {
	if r.e.Waste == nil {
		return unpriced()
	}
	shift := p.factor * r.u
	var mid, lo, hi Rate
	priced := 0
	pot := r.e.Pot
	if t.heat[pot] == nil {
		n := p.N()
		t.heat[pot], t.cool[pot], t.motor[pot] = make([]float64, n), make([]float64, n), make([]float64, n)
	}
	for i, on := range r.flagged {
		if !on {
			continue
		}
		v := r.e.Effect.Val[i]
		m := r.e.Waste(i, v)
		if math.IsNaN(m.Heat + m.Cool + m.Motor) {
			continue
		}
		priced++
		mid.add(m)
		lo.add(r.e.Waste(i, math.Max(0, v-shift)))
		hi.add(r.e.Waste(i, v+shift))
		t.heat[pot][i] = math.Max(t.heat[pot][i], m.Heat)
		t.cool[pot][i] = math.Max(t.cool[pot][i], m.Cool)
		t.motor[pot][i] = math.Max(t.motor[pot][i], m.Motor)
	}
	if priced == 0 {
		return unpriced()
	}
	t.any = true
	scale := t.hours * float64(r.nflagged) / float64(priced)
	en := finding.Energy{
		Heat: mid.Heat * scale, Cooling: mid.Cool * scale, Electricity: mid.Motor * scale,
		Share: float64(priced) / float64(r.nflagged),
	}
	en.KWh = t.kwh(mid) * scale
	flow := 0.0
	if s := p.Flow(); s != nil {
		if m := s.Mean(0, p.N(), r.flagged); m.N > 0 && m.Val > 0 {
			flow = p.factor * m.U() / m.Val
		}
	}
	en.Low = math.Max(0, en.KWh-math.Hypot(en.KWh-t.kwh(lo)*scale, flow*en.KWh))
	en.High = en.KWh + math.Hypot(t.kwh(hi)*scale-en.KWh, flow*en.KWh)
	if en.Share < 0.995 {
		en.Note = "The figure is scaled from the " + finding.Significant(100*en.Share, 2) + " % of that time for which flow and streams were known."
	}
	t.low = math.Hypot(t.low, en.KWh-en.Low)
	t.high = math.Hypot(t.high, en.High-en.KWh)
	t.price(p.b, &en)
	return en
}

func (r *Rate) add(x Rate) { r.Heat += x.Heat; r.Cool += x.Cool; r.Motor += x.Motor }

func (t *tally) kwh(r Rate) float64 { return r.Heat + r.Cool/t.cop + r.Motor }

// price puts money on energy; low and high scale with the energy's.
func (t *tally) price(b *balance.Books, en *finding.Energy) {
	pr := b.Unit().Site.Prices
	en.Cost, en.CostLow, en.CostHigh = nan(), nan(), nan()
	electric := en.Cooling/t.cop + en.Electricity
	if math.IsNaN(pr.Heat) && en.Heat > 0 || math.IsNaN(pr.Electricity) && electric > 0 {
		return
	}
	en.Cost = nz(pr.Heat)*en.Heat + nz(pr.Electricity)*electric
	if en.KWh > 0 {
		en.CostLow, en.CostHigh = en.Cost*en.Low/en.KWh, en.Cost*en.High/en.KWh
	} else {
		en.CostLow, en.CostHigh = 0, 0
	}
}

// total is the unit's waste with no kilowatt-hour counted twice.
func (t *tally) total(b *balance.Books) finding.Energy {
	en := finding.Energy{KWh: nan(), Low: nan(), High: nan(), Cost: nan(), CostLow: nan(), CostHigh: nan()}
	if !t.any {
		return en
	}
	var sum Rate
	for i := range b.Unit().Axis.N {
		var all Rate
		for pot := NoPot; pot < numPots; pot++ {
			if pot != Running && t.heat[pot] != nil {
				all.add(Rate{t.heat[pot][i], t.cool[pot][i], t.motor[pot][i]})
			}
		}
		if t.heat[Running] != nil {
			all.Heat = math.Max(all.Heat, t.heat[Running][i])
			all.Cool = math.Max(all.Cool, t.cool[Running][i])
			all.Motor = math.Max(all.Motor, t.motor[Running][i])
		}
		sum.add(all)
	}
	en.Heat, en.Cooling, en.Electricity, en.Share = sum.Heat*t.hours, sum.Cool*t.hours, sum.Motor*t.hours, 1
	en.KWh = t.kwh(sum) * t.hours
	en.Low, en.High = math.Max(0, en.KWh-t.low), en.KWh+t.high
	t.price(b, &en)
	return en
}

// unitEnergy is what the unit spent in the period, kWh as the site pays it:
// heat, cooling over COP and fan power; 0 where no flow is known.
func (t *tally) unitEnergy(b *balance.Books) float64 {
	if !math.IsNaN(t.whole) {
		return t.whole
	}
	t.whole = 0
	heat, cool := duties(b)
	if heat == nil {
		return 0
	}
	power := (&Pass{b: b}).FanPower()
	for i := range heat {
		t.whole += (heat[i] + cool[i]/t.cop) * t.hours
		if power != nil {
			t.whole += nz(power[i]) * t.hours
		}
	}
	return t.whole
}
