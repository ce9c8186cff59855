package synth

import (
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
)

// setpoint is the supply temperature asked for, reset by the outdoor reading:
// 18 degC in the cold, 13 in the warm.
func setpoint(outdoor float64) float64 {
	return 18 - 5*math.Min(math.Max((outdoor-4)/14, 0), 1)
}

// control moves the commands one step, by what the sensors tell.
func (p *plant) control(at time.Time, on, occupied bool, sens *sensors) {
	pl := &p.s.Plant
	to := sens.seen(trend.OATemp, p.out.T)
	set := setpoint(to)
	p.true[trend.SATempSP] = set
	if !on {
		p.demand, p.damper, p.heat, p.preheat, p.cool, p.humid = 0, 0, 0, 0, 0, 0
		return
	}
	mixing := slices.Contains(pl.Train, trend.Mixing)
	minimum := pl.MinDamper
	if !occupied {
		minimum = 0 // warm-up recirculates
	}
	_, off := p.s.active(EconomizerOff, at)
	tr := sens.seen(trend.RATemp, p.ret.T)
	econ := mixing && !off && occupied && pl.HighLimit > 0 && to < tr-1
	if p.econ {
		econ = econ && to < pl.HighLimit
	} else {
		econ = econ && to < pl.HighLimit-1
	}
	if econ != p.econ && p.demand > 0 { // keep the cooling valve where it is
		if econ {
			p.demand = 1 + p.cool
		} else {
			p.demand = p.cool
		}
	}
	p.econ = econ

	if p.sinceOn <= p.s.Step {
		p.demand = 0
	} else {
		// Integral action on the supply temperature, over a gain of about 20 K.
		err := set - sens.seen(trend.SATemp, p.duct.T)
		p.demand -= p.relax(12*time.Minute) * err / 20
	}
	top := 2.0
	if !econ {
		top = 1
	}
	p.demand = math.Min(math.Max(p.demand, -1), top)

	p.heat = math.Max(-p.demand, 0)
	p.cool, p.damper = 0, minimum
	switch {
	case econ && p.demand > 0:
		p.damper = minimum + (1-minimum)*math.Min(p.demand, 1)
		p.cool = math.Max(p.demand-1, 0)
	case p.demand > 0:
		p.cool = p.demand
	}
	if !slices.Contains(pl.Train, trend.Heating) {
		p.heat = 0
	}
	if !slices.Contains(pl.Train, trend.Cooling) {
		p.cool = 0
	}
	// Small commands do not lift a valve off its seat.
	for _, v := range []*float64{&p.heat, &p.cool} {
		if *v < 0.02 {
			*v = 0
		}
	}
	if !mixing {
		p.damper = 1
	}
	p.preheat = 0
	if slices.Contains(pl.Train, trend.Preheat) {
		in := p.true[trend.MATemp]
		if !mixing {
			in = p.out.T
		} else {
			in = p.damper*to + (1-p.damper)*tr
		}
		if need := 8 - in; need > 0 {
			p.preheat = math.Min((need+1.5)/pl.PreheatRise, 1)
		}
		if _, fails := p.s.active(PreheatFails, at); fails {
			p.preheat = math.Max(p.preheat, 0)
		}
	}
	p.humid = 0
	if slices.Contains(pl.Train, trend.Humidify) && occupied {
		p.humid = math.Min(math.Max((0.38-sens.seen(trend.RARH, p.psy.RelHumidity(p.ret.T, p.ret.W)))/0.10, 0), 1)
	}
}
