package synth

import (
	"math"
	"math/rand/v2"
	"slices"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// plant is the unit, its building and its controls while they run.
type plant struct {
	s       *Spec
	psy     psy.Model
	rng     *rand.Rand
	weather *weather
	load    *wander
	hours   float64

	out, ret State
	demand   float64 // of the sequence: -1..0 heating, 0..1 damper, 1..2 cooling
	econ     bool    // the damper takes part in the sequence
	damper   float64 // command
	heat     float64
	preheat  float64
	cool     float64
	humid    float64
	wetness  float64 // water that the coil holds, kg per kg/s of air and minute
	sinceOn  time.Duration
	duct     State // air standing in the unit while it is off
	true     [trend.NumRoles]float64
}

func newPlant(s *Spec) *plant {
	rng := rand.New(rand.NewPCG(s.Seed, 0xa1))
	p := &plant{s: s, psy: psyModel(s.PressurePa), rng: rng, hours: s.Step.Hours(), weather: newWeather(s.Climate, rng), load: newWander(rng, 0.5, 6)}
	p.begin(s.Start)
	p.ret = p.air(21, math.Min(p.out.W+0.001, 0.010))
	p.duct = p.ret
	return p
}

// has reports whether the plant has what a role is about.
func (p *plant) has(role trend.Role) bool {
	in := func(c trend.Component) bool { return slices.Contains(p.s.Plant.Train, c) }
	switch role {
	case trend.MATemp, trend.MARH, trend.RADamper, trend.OADamper:
		return in(trend.Mixing)
	case trend.PHTemp, trend.PreheatValve:
		return in(trend.Preheat)
	case trend.CCTemp, trend.CCRH, trend.CoolValve, trend.CHWSupplyTemp:
		return in(trend.Cooling)
	case trend.HCTemp, trend.HeatValve, trend.HWSupplyTemp:
		return in(trend.Heating)
	case trend.Humidifier:
		return in(trend.Humidify)
	}
	return true
}

// begin moves the weather to a time.
func (p *plant) begin(at time.Time) {
	t, td := p.weather.next(at.In(p.s.Zone), p.hours)
	p.out = p.air(t, p.psy.HumRatioDewPoint(td))
}

// relax is the share of a difference that goes in one step.
func (p *plant) relax(tau time.Duration) float64 {
	return 1 - math.Exp(-float64(p.s.Step)/float64(tau))
}

func (p *plant) step(at time.Time, sens *sensors) Truth {
	sens.now = at
	local := at.In(p.s.Zone)
	occupied := p.s.Schedule.Occupied(local) || !p.s.Schedule.Given
	on := occupied || p.s.Schedule.Occupied(local.Add(75*time.Minute))
	if _, night := p.s.active(RunsAtNight, at); night {
		on = true
	}
	gain := 0.0
	if occupied {
		gain = 1
	}
	load := p.load.next(p.hours)
	tr := Truth{Outdoor: p.out, Return: p.ret, On: on}
	pl := &p.s.Plant
	speed := 0.0
	if on {
		speed = 1
		if pl.VAV {
			speed = math.Min(math.Max(0.72+0.012*(p.out.T-12)+0.06*load, 0.5), 1)
		}
		p.sinceOn += p.s.Step
	} else {
		p.sinceOn = 0
	}

	p.control(at, on, occupied, sens)
	path := p.duct
	if on {
		path = p.through(at, &tr, speed)
	} else {
		d := p.relax(90 * time.Minute)
		p.duct = p.air(p.duct.T+d*(0.7*p.ret.T+0.3*p.out.T-p.duct.T), p.duct.W+d*(p.ret.W-p.duct.W))
		tr.Mixed, tr.Supply = p.duct, p.duct
		for _, role := range []trend.Role{trend.MATemp, trend.PHTemp, trend.CCTemp, trend.HCTemp} {
			p.true[role] = p.duct.T
		}
		p.wetness = 0
	}
	tr.Supply = path
	p.readings(&tr, on, occupied, speed, load, sens)
	p.building(&tr, on, gain, load)
	return tr
}

// through takes the air through the train and books every component.
func (p *plant) through(at time.Time, tr *Truth, speed float64) State {
	pl := &p.s.Plant
	// A damper moves little air at first and little more at last.
	f := 1.0
	x := p.out
	leak := 0.02
	if sev, ok := p.s.active(DamperLeaks, at); ok {
		leak = sev
	}
	position := p.damper
	if sev, ok := p.s.active(DamperStuck, at); ok {
		position = sev
	}
	f = leak + (0.97-leak)*(0.45*position+0.55*0.5*(1-math.Cos(math.Pi*position)))
	if slices.Contains(pl.Train, trend.Mixing) {
		x = p.fromHW(f*p.out.H+(1-f)*p.ret.H, f*p.out.W+(1-f)*p.ret.W)
	} else {
		f = 1
	}
	tr.Fraction, tr.Mixed = f, x
	p.true[trend.MATemp] = x.T
	flow := pl.DesignFlow * speed
	tr.Flow = flow / p.psy.Volume(18, 0.008)
	leaked := false
	for _, c := range pl.Train {
		in := x
		fl := Flux{Component: c}
		switch c {
		case trend.Mixing, trend.Recovery:
			continue
		case trend.Preheat, trend.Heating, trend.Reheat:
			v, rise := p.heat, pl.HeatRise
			if c == trend.Preheat {
				v, rise = p.preheat, pl.PreheatRise
				if _, ok := p.s.active(PreheatFails, at); ok {
					v = 0
				}
			} else if sev, ok := p.s.active(HeatValvePasses, at); ok {
				v = sev + (1-sev)*v
			}
			// Less air warms more, if not in full proportion.
			fl.Heat = 1.02 * rise * v / math.Pow(math.Max(speed, 0.3), 0.5)
			if sev, ok := p.s.active(MoistureLeak, at); ok && !leaked {
				leaked = true
				fl.Water, fl.WaterH = sev/1000, 2676 // steam near 100 degC
			}
			x = p.fromHW(in.H+fl.Heat+fl.Water*fl.WaterH, in.W+fl.Water)
			p.true[map[bool]trend.Role{true: trend.PHTemp, false: trend.HCTemp}[c == trend.Preheat]] = x.T
		case trend.Cooling:
			x = p.coolingCoil(at, in, &fl)
			p.true[trend.CCTemp] = x.T
			p.true[trend.CCRH] = p.psy.RelHumidity(x.T, x.W)
		case trend.Humidify:
			fl.Water, fl.WaterH = p.humid*pl.Humidifier, 2676
			x = p.fromHW(in.H+fl.Water*fl.WaterH, in.W+fl.Water)
		case trend.Evaporative:
		case trend.Fan:
			fl.Heat = 1.02 * pl.FanRise * speed * speed
			x = p.fromHW(in.H+fl.Heat, in.W)
		}
		tr.Fluxes = append(tr.Fluxes, fl)
	}
	p.duct = x
	return x
}

// coolingCoil cools by contact with a surface that the valve makes colder: what
// touches it leaves at the surface's temperature, saturated if it was more humid
// than that. A coil that has been wet gives its water back when it warms.
func (p *plant) coolingCoil(at time.Time, in State, fl *Flux) State {
	pl := &p.s.Plant
	v := p.cool
	if sev, ok := p.s.active(CoolValvePasses, at); ok {
		v = sev + (1-sev)*v
	}
	minutes := p.s.Step.Minutes()
	if v > 0.005 {
		surface := in.T - v*math.Max(in.T-pl.CoolADP, 0)
		ws := p.psy.SatHumRatio(surface)
		out := p.air(in.T-pl.Contact*(in.T-surface), in.W-pl.Contact*math.Max(in.W-ws, 0))
		fl.Water, fl.WaterH = out.W-in.W, psy.WaterEnthalpy(surface)
		if fl.Water < -2e-4 {
			p.wetness = math.Min(p.wetness-fl.Water*minutes, 0.012)
		}
		if sev, ok := p.s.active(CarryOver, at); ok {
			// Droplets evaporate behind the coil, up to saturation.
			add := math.Min(sev/1000-fl.Water, math.Max(p.psy.SatHumRatio(out.T)-out.W, 0)*0.5+sev/1000)
			w := out.W + add
			h := out.H + add*psy.WaterEnthalpy(surface)
			out = p.fromHW(h, w)
			fl.Water = out.W - in.W
		}
		fl.Heat = out.H - in.H - fl.Water*fl.WaterH
		return out
	}
	if p.wetness > 1e-5 {
		give := math.Min(p.wetness*p.relax(6*time.Minute)/minutes, 0.5*math.Max(p.psy.SatHumRatio(in.T)-in.W, 0))
		p.wetness -= give * minutes
		fl.Water, fl.WaterH = give, psy.WaterEnthalpy(in.T-2)
		return p.fromHW(in.H+give*fl.WaterH, in.W+give)
	}
	p.wetness = 0
	return in
}

// readings sets what the sensors would read if they were perfect.
func (p *plant) readings(tr *Truth, on, occupied bool, speed, load float64, sens *sensors) {
	t := &p.true
	rh := func(s State) float64 { return p.psy.RelHumidity(s.T, s.W) }
	t[trend.OATemp], t[trend.OARH] = tr.Outdoor.T, rh(tr.Outdoor)
	t[trend.RATemp], t[trend.RARH] = tr.Return.T, rh(tr.Return)
	t[trend.MARH] = rh(tr.Mixed)
	t[trend.SATemp], t[trend.SARH] = tr.Supply.T, rh(tr.Supply)
	for _, x := range []struct {
		dp, w trend.Role
		s     State
	}{{trend.OADewPoint, trend.OAHumRatio, tr.Outdoor}, {trend.RADewPoint, trend.RAHumRatio, tr.Return}, {trend.SADewPoint, trend.SAHumRatio, tr.Supply}} {
		t[x.dp], t[x.w] = p.psy.DewPoint(x.s.W), x.s.W
	}
	t[trend.MADewPoint] = p.psy.DewPoint(tr.Mixed.W)
	if on {
		t[trend.MATemp] += sens.strat * 4 * tr.Fraction * (1 - tr.Fraction) * (tr.Outdoor.T - tr.Return.T)
	}
	t[trend.OADamper], t[trend.RADamper], t[trend.EADamper] = p.damper, 1-p.damper, p.damper
	t[trend.HeatValve], t[trend.PreheatValve], t[trend.CoolValve], t[trend.Humidifier] = p.heat, p.preheat, p.cool, p.humid
	t[trend.SAFanStatus], t[trend.SAFanCmd], t[trend.RAFanStatus] = b2f(on), b2f(on), b2f(on)
	t[trend.SAFanSpeed] = speed
	t[trend.SAFanPower] = 0.9 * p.s.Plant.DesignFlow * math.Pow(speed, 2.7)
	v := p.psy.Volume(tr.Supply.T, tr.Supply.W)
	t[trend.SAFlow] = tr.Flow * v
	t[trend.OAFlow] = tr.Flow * tr.Fraction * p.psy.Volume(tr.Outdoor.T, tr.Outdoor.W)
	t[trend.SAStatic] = 280 * speed
	t[trend.Occupied] = b2f(occupied)
	t[trend.ZoneTemp] = p.ret.T - 0.4
	t[trend.RACO2] = 430
	if on && occupied {
		t[trend.RACO2] = 430 + 120*(1+0.2*load)/math.Max(tr.Fraction, 0.1)
	}
	t[trend.CHWSupplyTemp] = 7 + 0.4*load
	t[trend.HWSupplyTemp] = 55 - 0.8*tr.Outdoor.T
}

func b2f(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

// building moves the return air: its heat and moisture gains, and the supply
// that carries them off.
func (p *plant) building(tr *Truth, on bool, gain, load float64) {
	if !on {
		d, w := p.relax(9*time.Hour), p.relax(14*time.Hour)
		p.ret = p.air(p.ret.T+d*(16+0.3*p.out.T-p.ret.T), p.ret.W+w*(p.out.W+0.0006-p.ret.W))
	} else {
		// The zones hold their setpoint with what terminal units add.
		goal := 22 + 0.05*(p.out.T-12) + 0.8*gain + 0.35*load
		d, w := p.relax(50*time.Minute), p.relax(25*time.Minute)
		moist := tr.Supply.W + (0.0003+0.0009*gain)*(1+0.25*load)
		p.ret = p.air(p.ret.T+d*(goal-p.ret.T), p.ret.W+w*(moist-p.ret.W))
	}
	if most := 0.92 * p.psy.SatHumRatio(p.ret.T); p.ret.W > most {
		p.ret = p.air(p.ret.T, most)
	}
}
