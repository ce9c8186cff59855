package rules

import (
	"math"

	"dewledger/ingest/trend"
)

// excessOutdoorAir prices a share of outdoor air above what was asked for, at
// an interval (kW at the air; ASHRAE Handbook of Fundamentals, psychrometrics
// chapter, for the balances):
//
//	heating  m·cp·Δf·(T_r − T_o), never above the duty that the heating gave
//	cooling  m·Δf·(h_o − h_r) over a cooling coil, never above its duty
//
// It is nil where no flow is known.
func excessOutdoorAir(p *Pass) func(i int, excess float64) Rate {
	flow := p.Flow()
	to, tr := p.TempAt(trend.Outdoor), p.TempAt(trend.Return)
	if flow == nil || to == nil || tr == nil {
		return nil
	}
	ho, hr := p.EnthalpyAt(trend.Outdoor), p.EnthalpyAt(trend.Return)
	heat, cool := p.Duties()
	return func(i int, excess float64) Rate {
		var r Rate
		switch {
		case p.HeatAsked(i):
			r.Heat = capped(flow.Val[i]*CpAir*excess*math.Max(0, tr[i]-to[i]), heat, i)
		case p.CoolAsked(i):
			dh := CpAir * (to[i] - tr[i])
			if ho != nil && hr != nil && !math.IsNaN(ho[i]+hr[i]) {
				dh = ho[i] - hr[i]
			}
			r.Cool = capped(flow.Val[i]*excess*math.Max(0, dh), cool, i)
		}
		return r
	}
}

// missedFreeCooling prices a share of outdoor air that was to be had and was
// not taken while the cooling coil ran: m·Δf·(h_r − h_o), never above the
// coil's duty. It is nil where no flow is known.
func missedFreeCooling(p *Pass) func(i int, missed float64) Rate {
	flow := p.Flow()
	to, tr := p.TempAt(trend.Outdoor), p.TempAt(trend.Return)
	if flow == nil || to == nil || tr == nil {
		return nil
	}
	ho, hr := p.EnthalpyAt(trend.Outdoor), p.EnthalpyAt(trend.Return)
	_, cool := p.Duties()
	return func(i int, missed float64) Rate {
		if !p.CoolAsked(i) {
			return Rate{}
		}
		dh := CpAir * (tr[i] - to[i])
		if ho != nil && hr != nil && !math.IsNaN(ho[i]+hr[i]) {
			dh = hr[i] - ho[i]
		}
		return Rate{Cool: capped(flow.Val[i]*missed*math.Max(0, dh), cool, i)}
	}
}

// capped limits a waste to the duty that was given, where that is known.
func capped(kw float64, duty []float64, i int) float64 {
	if duty == nil || math.IsNaN(duty[i]) {
		return kw
	}
	return math.Min(kw, duty[i])
}
