package synth

import (
	"math"

	"dewledger/ingest/trend"
)

// Enthalpies of water that enters or leaves the air, kJ/kg above liquid at
// 0 degC.
const (
	steamH   = 2675.6 // saturated steam at 100 degC (IAPWS-IF97 steam tables)
	waterCp  = 4.186  // kJ/(kg·K), liquid (handbook value near 20 degC)
	hotLeakT = 60     // degC, of water that leaks from a hot-water coil
)

// airPath takes the air through the train, from positions to states.
func (s *sim) airPath() {
	t := s.run.True
	x := s.st[trend.Outdoor]
	s.share = 1
	part := 0
	next := func() *Part {
		part++
		return &t.Parts[part-1]
	}
	for k, c := range s.body.train {
		switch {
		case c == trend.Mixing:
			x = s.mix(x)
			s.st[trend.Mixed] = x
			continue
		case c == trend.Recovery && !s.body.allOutdoor && k == 0:
			x.t = s.recovered(x.t)
			s.st[trend.Recovered] = x
			continue
		}
		p := next()
		p.TIn[s.i], p.WIn[s.i] = x.t, x.w
		x = s.through(c, x, p)
		p.TOut[s.i], p.WOut[s.i] = x.t, x.w
		switch c {
		case trend.Recovery:
			s.st[trend.Recovered] = x
		case trend.Preheat:
			s.st[trend.AfterPreheat] = x
		case trend.Cooling:
			s.st[trend.AfterCooling] = x
		case trend.Heating:
			s.st[trend.AfterHeating] = x
		}
	}
	s.st[trend.Supply] = x
}

// mix is the adiabatic mixture of the outdoor stream and return air, exact in
// enthalpy and moisture (ASHRAE Handbook of Fundamentals, psychrometrics
// chapter, adiabatic mixing).
func (s *sim) mix(o state) state {
	leak := s.body.leak
	if v, ok := s.fault(DamperLeaks, ""); ok {
		leak = v
	}
	f := s.body.damperShare(s.ctl.pos.damper, leak)
	s.share = f
	r := s.st[trend.Return]
	h := f*s.air.Enthalpy(o.t, o.w) + (1-f)*s.air.Enthalpy(r.t, r.w)
	w := f*o.w + (1-f)*r.w
	return state{s.air.Temp(h, w), w}
}

// recovered is the outdoor air's temperature behind a sensible heat recovery of
// 70 % at full command.
func (s *sim) recovered(to float64) float64 {
	return to + 0.7*s.ctl.pos.recovery*(s.st[trend.Return].t-to)
}

// through takes air through one component and books what that gave and took.
func (s *sim) through(c trend.Component, x state, p *Part) state {
	part := s.flow / s.body.design
	switch c {
	case trend.Preheat:
		full := s.body.preheat.warm(x.t, part)
		if v, ok := s.fault(PreheatFails, ""); ok {
			full *= 1 - v
		}
		return s.heat(c, x, p, &s.body.preheat, full, s.ctl.pos.preheat)
	case trend.Heating:
		return s.heat(c, x, p, &s.body.heating, s.body.heating.warm(x.t, part), s.ctl.pos.heat)
	case trend.Reheat:
		return s.heat(c, x, p, &s.body.again, s.body.again.warm(x.t, part), s.ctl.pos.reheat)
	case trend.Recovery:
		return s.warmTo(x, s.recovered(x.t), p)
	case trend.Fan:
		// The whole motor's heat goes into the air: rise near speed squared.
		return s.warmTo(x, x.t+s.body.fanRise*s.speed*s.speed, p)
	case trend.Cooling:
		return s.cool(x, p)
	case trend.Humidify:
		add := 0.004 * s.ctl.pos.humidifier / part
		if v, ok := s.fault(HumidifierPasses, ""); ok {
			add += v / 1000 / part
		}
		return s.wet(x, add, steamH, p)
	case trend.Evaporative:
		// Along the wet-bulb line, 80 % of the way to saturation at full command.
		if s.ctl.pos.humidifier > 0 {
			twb := s.air.WetBulb(x.t, x.w)
			add := 0.8 * s.ctl.pos.humidifier * (s.air.SatHumRatio(twb) - x.w)
			return s.wet(x, add, waterCp*twb, p)
		}
	}
	return s.warmTo(x, x.t, p)
}

// warmTo changes the temperature only.
func (s *sim) warmTo(x state, t float64, p *Part) state {
	y := state{t, x.w}
	p.Heat[s.i] += s.flow * (s.air.Enthalpy(y.t, y.w) - s.air.Enthalpy(x.t, x.w))
	return y
}

// fullest is the relative humidity over which air takes no more water in the
// moment that it spends in a unit.
const fullest = 0.97

// wet adds water or steam of enthalpy hw, as much of add (kg/kg) as the air
// takes, without other heat.
func (s *sim) wet(x state, add, hw float64, p *Part) state {
	if !(add > 0) {
		return x
	}
	h := s.air.Enthalpy(x.t, x.w)
	after := func() state { return state{s.air.Temp(h+add*hw, x.w+add), x.w + add} }
	y := after()
	if y.w > s.air.HumRatio(y.t, fullest) {
		lo, hi := 0.0, add
		for range 24 {
			add = (lo + hi) / 2
			if y = after(); y.w > s.air.HumRatio(y.t, fullest) {
				hi = add
			} else {
				lo = add
			}
		}
		if add = lo; add == 0 {
			return x
		}
		y = after()
	}
	p.Water[s.i] += s.flow * add
	p.WaterHeat[s.i] += s.flow * add * hw
	return y
}

// opened is the effective opening of a valve that passes.
func opened(u, passes float64) float64 { return passes + (1-passes)*u }

func (s *sim) heat(c trend.Component, x state, p *Part, coil *heater, full, u float64) state {
	g := math.Pow(u, s.body.valve)
	if v, ok := s.fault(HeatValvePasses, c); ok {
		g = opened(g, v)
	}
	y := s.warmTo(x, x.t+g*full, p)
	s.duty.heat += p.Heat[s.i]
	if v, ok := s.fault(CoilLeak, c); ok {
		hw := waterCp * hotLeakT
		if coil.steam {
			hw = steamH
		}
		y = s.wet(y, v/1000*s.body.design/s.flow, hw, p)
	}
	return y
}

// wetCoil is the water that a cooling coil holds.
type wetCoil struct {
	film float64 // kg per (kg/s of design flow)
}

// What a wet coil holds, and how fast a dry air stream takes it back: most of it
// within a quarter of an hour (common practice, no source).
const (
	filmFull = 0.5   // kg per (kg/s)
	filmRate = 0.7   // share of the way to saturation
	filmMost = 0.002 // kg/kg
)

// cool is a cooling coil by apparatus dew point and bypass (contact) factor: a
// share of the air leaves as saturated at the surface's temperature, the rest
// as it came (ASHRAE Handbook of Fundamentals and HVAC Systems and Equipment,
// air-cooling coils; the surface's temperature against valve position is our
// own simplification). Condensate leaves at the surface's temperature.
func (s *sim) cool(x state, p *Part) state {
	g := math.Pow(s.ctl.pos.cool, s.body.valve)
	if v, ok := s.fault(CoolValvePasses, ""); ok {
		g = opened(g, v)
	}
	part := s.flow / s.body.design
	contact := s.body.contact(part)
	coldest := s.body.chw + 0.3*s.water.x + 2.5
	surface := x.t - g*math.Max(0, x.t-coldest)
	y := state{x.t - contact*(x.t-surface), x.w}
	hc := waterCp * math.Max(surface, 0)
	if ws := s.air.SatHumRatio(surface); g > 0 && ws < x.w {
		y.w = x.w - contact*(x.w-ws)
	}
	if g > 0 {
		// Entering air near saturation would leave above it: the excess drains.
		y.w = math.Min(y.w, math.Max(s.air.HumRatio(y.t, 0.985), 0))
	}
	y.w = math.Min(y.w, x.w)
	drained := x.w - y.w
	p.Water[s.i], p.WaterHeat[s.i] = -s.flow*drained, -s.flow*drained*hc
	p.Heat[s.i] = s.flow * (s.air.Enthalpy(y.t, y.w) - s.air.Enthalpy(x.t, x.w) + drained*hc)
	s.duty.cool += -p.Heat[s.i]

	c := &s.coil
	if drained > 0 {
		c.film = math.Min(filmFull, c.film+drained*part*s.dt)
	} else if c.film > 1e-4 && s.ctl.pos.cool < 0.02 {
		twb := s.air.WetBulb(y.t, y.w)
		add := math.Min(filmMost, filmRate*(s.air.SatHumRatio(twb)-y.w))
		add = math.Min(add, c.film/(part*s.dt))
		was := p.Water[s.i]
		y = s.wet(y, add, waterCp*twb, p)
		c.film = math.Max(0, c.film-(p.Water[s.i]-was)/s.flow*part*s.dt)
	}
	if v, ok := s.fault(CarryOver, ""); ok && s.ctl.pos.cool > 0.05 {
		y = s.wet(y, v/1000/part, waterCp*y.t, p)
	}
	return y
}

// contact is the share of the air that meets the coil's surface.
func (b *body) contact(part float64) float64 {
	return 1 - math.Pow(0.12, math.Pow(math.Max(part, 0.2), -0.4))
}
