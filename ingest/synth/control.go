package synth

import (
	"math"

	"dewledger/ingest/trend"
)

// positions are commands, or what the actuators make of them, 0 to 1.
type positions struct {
	damper, preheat, heat, cool, reheat, humidifier, recovery float64
}

// controls hold the supply temperature through a sequence of heating coil,
// outdoor damper and cooling coil. They see readings, never the truth.
type controls struct {
	cmd, pos positions
	sp       float64 // supply temperature setpoint, degC
	trim     float64 // of the preheat coil's feed-forward, K
	lowLimit float64 // what the mixed air's low limit leaves of the damper, 0 to 1
	econ     bool    // outdoor air is welcome
	drying   bool
	loop     float64 // share of an error that one step takes away
	quick    float64 // of the way to their command that actuators and fan go in one step
}

// The supply temperature loop takes out an error with a time constant of eight
// minutes; actuators follow in one and a half (common practice, no source).
func (c *controls) begin(s *sim) {
	c.loop = 1 - math.Exp(-s.dt/480)
	c.quick = 1 - math.Exp(-s.dt/90)
	c.sp, c.lowLimit = 16, 1
}

// The mixed air's low limit, the setpoint behind preheat and that of a coil
// that dries, degC.
const (
	mixedLimit = 8
	preheatSP  = 12
	dryingSP   = 12
	leastOpen  = 0.03
)

// start sets the unit going: valves near where they will be wanted, so that a
// coil does not see cold air for want of a loop that has yet to wind up.
func (c *controls) start(s *sim) {
	c.cmd = positions{damper: c.floor(s)}
	c.trim, c.lowLimit, c.econ, c.drying = 0, 1, false, false
	c.setpoint(s)
	x := s.st[trend.Outdoor].t
	if !s.body.allOutdoor {
		f := s.body.damperShare(c.cmd.damper, s.body.leak)
		x = f*x + (1-f)*s.st[trend.Return].t
	}
	c.preheat(s, x)
	if u := c.cmd.preheat; u > 0 {
		x += math.Pow(u, s.body.valve) * s.body.preheat.warm(x, 1)
	}
	c.shift(s, c.sp-(x+s.body.fanRise*s.speed*s.speed), x)
	c.pos = c.cmd
}

// floor is the least damper command of the present mode.
func (c *controls) floor(s *sim) float64 {
	if s.mode == occupied && !s.body.allOutdoor {
		return s.body.minDamper
	}
	return 0
}

// act is one step of the controls; fresh says that the unit has just started.
func (c *controls) act(s *sim, fresh bool) {
	if !s.on {
		c.cmd = positions{}
		c.follow(s)
		return
	}
	if !fresh {
		c.setpoint(s)
		c.welcome(s)
		r := &s.sense.now
		inlet := r[trend.MATemp]
		if s.body.allOutdoor {
			inlet = r[trend.OATemp]
			if x := r[trend.RETemp]; x == x {
				inlet = x
			}
		}
		if x := r[trend.PHTemp]; x == x {
			c.trim = math.Min(8, math.Max(-8, c.trim+c.loop*(preheatSP-x)))
			if c.cmd.preheat == 0 {
				c.trim = 0
			}
			c.preheat(s, inlet)
			inlet = x
		}
		c.lowLimit = math.Min(1, math.Max(0, c.lowLimit+c.loop*(r[trend.MATemp]-mixedLimit)/8))
		if s.body.allOutdoor {
			c.lowLimit = 1
		}
		c.dry(s)
		c.shift(s, c.loop*(c.sp-r[trend.SATemp]), inlet)
		c.humidity(s)
	}
	c.cmd.damper = math.Min(c.cmd.damper, math.Max(c.lowLimit, 0))
	if s.body.allOutdoor {
		c.cmd.damper = 1
	}
	c.follow(s)
}

// follow lets the actuators go after their commands.
func (c *controls) follow(s *sim) {
	if !s.on {
		c.pos = positions{}
	}
	k := c.quick
	for _, x := range []struct {
		pos *float64
		cmd float64
	}{
		{&c.pos.damper, c.cmd.damper}, {&c.pos.preheat, c.cmd.preheat}, {&c.pos.heat, c.cmd.heat}, {&c.pos.cool, c.cmd.cool},
		{&c.pos.reheat, c.cmd.reheat}, {&c.pos.humidifier, c.cmd.humidifier}, {&c.pos.recovery, c.cmd.recovery},
	} {
		*x.pos += k * (x.cmd - *x.pos)
		if x.cmd == 0 && *x.pos < 0.005 {
			*x.pos = 0
		}
	}
	if v, ok := s.fault(DamperStuck, ""); ok {
		c.pos.damper = v
	}
}

// setpoint resets the supply temperature: by outdoor air where the air flow
// follows the load, by the return's where it does not; warm in warm-up.
func (c *controls) setpoint(s *sim) {
	r := &s.sense.now
	to, tr := r[trend.OATemp], r[trend.RATemp]
	if math.IsNaN(to + tr) {
		to, tr = s.st[trend.Outdoor].t, s.st[trend.Return].t
	}
	var sp float64
	switch {
	case s.mode == warmup && tr < heatingSP:
		sp = 26
	case s.mode == warmup:
		sp = math.Max(16, tr)
	case s.body.allOutdoor:
		sp = 20 - 0.15*math.Min(20, math.Max(0, to-5))
	case s.spec.Variable:
		sp = 17 - 0.25*math.Min(16, math.Max(0, to-4))
	default:
		sp = 17.5 - 2.2*(tr-22.5)
	}
	sp = math.Min(27, math.Max(12.5, sp))
	c.sp += (sp - c.sp) * (1 - math.Exp(-s.dt/1200))
}

// welcome decides whether outdoor air is to cool, with a hysteresis of half a
// kelvin, and what the recovery is to do.
func (c *controls) welcome(s *sim) {
	r := &s.sense.now
	to, tr := r[trend.OATemp], r[trend.RATemp]
	margin := 0.25
	if c.econ {
		margin = -0.25
	}
	l := s.body.limit
	ok := to < tr-1-margin
	switch l.Kind {
	case trend.FixedDryBulb:
		ok = ok && to < l.Value-margin
	case trend.FixedEnthalpy:
		ok = ok && s.air.Enthalpy(to, s.st[trend.Outdoor].w) < l.Value-margin
	case trend.DifferentialEnthalpy:
		ok = ok && s.air.Enthalpy(to, s.st[trend.Outdoor].w) < s.air.Enthalpy(tr, s.st[trend.Return].w)-margin
	}
	if _, bad := s.fault(EconomizerOff, ""); bad || s.body.allOutdoor || s.mode == warmup {
		ok = false
	}
	c.econ = ok
	c.cmd.recovery = math.Min(1, math.Max(0, (preheatSP-to)/(0.7*math.Max(1, tr-to))))
	if to > tr+1 {
		c.cmd.recovery = 1
	}
}

// preheat opens the coil by the temperature of the air that meets it, and trims
// by what leaves.
func (c *controls) preheat(s *sim, in float64) {
	lift := preheatSP + c.trim - in
	full := s.body.preheat.warm(in, s.flow/s.body.design)
	if in > preheatSP+1 || lift <= 0 || full <= 0 {
		c.cmd.preheat = 0
		return
	}
	c.cmd.preheat = tidy(math.Pow(math.Min(1, lift/full), 1/s.body.valve))
}

// tidy shuts a valve that is asked for next to nothing.
func tidy(u float64) float64 {
	switch {
	case u < 0.5*leastOpen:
		return 0
	case u > 1:
		return 1
	}
	return math.Max(u, leastOpen)
}

// dry holds the cooling coil's leaving temperature while the air that meets it
// is humid, on units that can warm the air again.
func (c *controls) dry(s *sim) {
	if !s.body.dries {
		return
	}
	r := &s.sense.now
	in := s.st[trend.Outdoor].w
	if !s.body.allOutdoor {
		in = s.st[trend.Mixed].w
	}
	limit := s.air.SatHumRatio(dryingSP)
	if c.drying {
		limit *= 0.92
	}
	c.drying = in > limit && s.mode != warmup
	if c.drying {
		full := math.Max(4, s.body.contact(1)*(s.st[trend.Outdoor].t-s.body.chw))
		c.cmd.cool = tidy(c.cmd.cool + c.loop*(r[trend.CCTemp]-dryingSP)/full)
	}
}

// shift moves the supply temperature by so many kelvin through the sequence:
// what works against the wish goes first, then what is next in line.
func (c *controls) shift(s *sim, want, inlet float64) {
	heating, reheat := s.has(trend.Heating), s.has(trend.Reheat)
	cooling := s.has(trend.Cooling) && s.mode != warmup
	if !cooling {
		c.cmd.cool = 0
	}
	part := s.flow / s.body.design
	warm := math.Max(3, s.body.heating.warm(inlet, part))
	again := math.Max(3, s.body.again.warm(inlet, part))
	cold := math.Max(3, s.body.contact(part)*(inlet-s.body.chw-2.5))
	take := func(u *float64, full, to float64) { // the rest of want after u has moved towards to
		d := want / full
		if d < 0 {
			d = math.Min(0, math.Max(d, to-*u))
		} else {
			d = math.Max(0, math.Min(d, to-*u))
		}
		*u += d
		want -= d * full
	}
	floor := c.floor(s)
	mix := 0.0
	if !s.body.allOutdoor {
		mix = 0.9 * (s.st[trend.Return].t - s.st[trend.Outdoor].t)
		if !c.econ {
			step := 0.3 * math.Min(1, s.dt/300)
			c.cmd.damper = math.Max(floor, c.cmd.damper-step)
		}
		c.cmd.damper = math.Max(c.cmd.damper, floor)
		// Free cooling takes over what the coil does while there is more of it to
		// be had.
		if c.econ && mix > 1 && c.cmd.damper < c.lowLimit && !c.drying {
			hand := math.Min(c.cmd.cool, 0.1*math.Min(1, s.dt/300))
			c.cmd.cool -= hand
			c.cmd.damper = math.Min(1, c.cmd.damper+hand*cold/mix)
		}
	}
	if want < 0 { // cool down
		if reheat {
			take(&c.cmd.reheat, again, 0)
		}
		if heating {
			take(&c.cmd.heat, warm, 0)
		}
		if c.econ && mix > 1 && want < 0 {
			take(&c.cmd.damper, -mix, 1)
		}
		if cooling && !c.drying && want < 0 && (c.cmd.cool > 0 || want < -0.35*c.loop) {
			take(&c.cmd.cool, -cold, 1)
		}
	} else {
		if cooling && !c.drying {
			take(&c.cmd.cool, -cold, 0)
		}
		if mix > 1 && want > 0 && c.cmd.damper > floor {
			take(&c.cmd.damper, -mix, floor)
		}
		open := c.cmd.heat > 0 || c.cmd.reheat > 0 || want > 0.35*c.loop
		if heating && want > 0 && open {
			take(&c.cmd.heat, warm, 1)
		}
		if reheat && want > 0 && open {
			take(&c.cmd.reheat, again, 1)
		}
	}
	if !c.drying {
		c.cmd.cool = tidy(c.cmd.cool)
	}
	c.cmd.heat, c.cmd.reheat = tidy(c.cmd.heat), tidy(c.cmd.reheat)
}

// humidity runs a humidifier to 35 % RH in the return air, no further than 85 %
// in the duct, and an evaporative cooler above its cooling setpoint.
func (c *controls) humidity(s *sim) {
	r := &s.sense.now
	switch {
	case s.has(trend.Humidify):
		err := 0.35 - r[trend.RARH]
		if x := r[trend.SARH]; x > 0.85 {
			err = math.Min(err, 0.85-x)
		}
		if s.mode != occupied {
			err = -1
		}
		c.cmd.humidifier = tidy(c.cmd.humidifier + 4*err*math.Min(1, s.dt/1800))
	case s.has(trend.Evaporative):
		c.cmd.humidifier = tidy((r[trend.OATemp] - 24) / 4)
	}
}

func (s *sim) has(c trend.Component) bool {
	for _, x := range s.body.train {
		if x == c {
			return true
		}
	}
	return false
}
