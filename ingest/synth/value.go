package synth

import (
	"math"

	"dewledger/ingest/trend"
)

// value is the truth behind a role at this interval, NaN where the unit has no
// such thing.
func (s *sim) value(r trend.Role) float64 {
	st := r.Station()
	if st == trend.Weather {
		st = trend.Outdoor
	}
	if setpoint(r) {
		return s.setpointOf(r)
	}
	switch r.Kind() {
	case trend.Temperature, trend.RelHumidity, trend.DewPoint, trend.WetBulb, trend.Enthalpy, trend.HumRatio:
		if r == trend.ZoneTemp {
			return s.zone.t
		}
		if s.run.True.T[st] == nil {
			return math.NaN()
		}
		x := s.st[st]
		switch r.Kind() {
		case trend.Temperature:
			return x.t
		case trend.RelHumidity:
			return s.air.RelHumidity(x.t, x.w)
		case trend.DewPoint:
			return s.air.DewPoint(x.w)
		case trend.WetBulb:
			return s.air.WetBulb(x.t, x.w)
		case trend.Enthalpy:
			return s.air.Enthalpy(x.t, x.w)
		}
		return x.w
	case trend.Position:
		return s.position(r)
	case trend.Switch:
		switch r {
		case trend.Occupied:
			return flag(s.occ)
		case trend.SAFanCmd, trend.SAFanStatus, trend.RAFanCmd, trend.RAFanStatus:
			return flag(s.on)
		}
	case trend.AirFlow, trend.Velocity:
		return s.airFlow(r)
	case trend.Pressure:
		return s.pressure(r)
	case trend.BaroPressure:
		return s.spec.PressurePa
	case trend.Power:
		// 90 % of the motor's power becomes heat in the air stream at full speed.
		kw := s.flow * 1.02 * s.body.fanRise * s.speed * s.speed / 0.9
		if r == trend.RAFanPower {
			kw *= 0.35
		}
		return kw
	case trend.WaterTemp, trend.WaterFlow:
		return s.waterSide(r)
	case trend.Concentration:
		if r == trend.RACO2 {
			return s.zone.co2
		}
		return 420
	}
	return math.NaN()
}

func flag(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

func (s *sim) setpointOf(r trend.Role) float64 {
	switch r {
	case trend.SATempSP, trend.SATempSPHeat, trend.SATempSPCool:
		return s.ctl.sp
	case trend.SAStaticSP:
		return s.body.staticSP
	case trend.RARHSP:
		return 0.35
	case trend.SARHSP:
		return 0.85
	case trend.MATempSP:
		return mixedLimit
	case trend.OAFlowSP:
		return s.body.minShare * s.body.volume
	}
	return (heatingSP + coolingSP) / 2
}

func (s *sim) position(r trend.Role) float64 {
	cmd, pos := &s.ctl.cmd, &s.ctl.pos
	mixing := func(v float64) float64 {
		if s.body.allOutdoor {
			return math.NaN()
		}
		return v
	}
	of := func(v float64, cs ...trend.Component) float64 {
		for _, c := range cs {
			if s.has(c) {
				return v
			}
		}
		return math.NaN()
	}
	switch r {
	case trend.OADamper, trend.EADamper:
		return mixing(cmd.damper)
	case trend.OADamperFB, trend.EADamperFB:
		return mixing(pos.damper)
	case trend.RADamper:
		return mixing(1 - cmd.damper)
	case trend.RADamperFB:
		return mixing(1 - pos.damper)
	case trend.PreheatValve:
		return of(cmd.preheat, trend.Preheat)
	case trend.PreheatValveFB:
		return of(pos.preheat, trend.Preheat)
	case trend.HeatValve, trend.HeatValveFB, trend.HeatStage:
		u, c := cmd.heat, trend.Heating
		if !s.has(trend.Heating) || r == trend.HeatStage && s.has(trend.Reheat) {
			u, c = cmd.reheat, trend.Reheat
		} else if r == trend.HeatValveFB {
			u = pos.heat
		}
		return of(u, c)
	case trend.CoolValve, trend.CoolStage:
		return of(cmd.cool, trend.Cooling)
	case trend.CoolValveFB:
		return of(pos.cool, trend.Cooling)
	case trend.Humidifier:
		return of(cmd.humidifier, trend.Humidify, trend.Evaporative)
	case trend.HumidifierFB:
		return of(pos.humidifier, trend.Humidify, trend.Evaporative)
	case trend.SAFanSpeed:
		return s.speed
	case trend.RAFanSpeed:
		return 0.95 * s.speed
	case trend.RecoveryCmd:
		return of(cmd.recovery, trend.Recovery)
	case trend.RecoveryBypass:
		return of(1-cmd.recovery, trend.Recovery)
	}
	return math.NaN()
}

func (s *sim) airFlow(r trend.Role) float64 {
	at := func(m float64, st trend.Station) float64 {
		return m * s.air.Volume(s.st[st].t, s.st[st].w)
	}
	switch r {
	case trend.SAFlow:
		return at(s.flow, trend.Supply)
	case trend.RAFlow:
		return at(0.95*s.flow, trend.Return)
	case trend.OAFlow:
		return at(s.flow*s.share, trend.Outdoor)
	case trend.EAFlow:
		return at(math.Max(0, s.flow*(s.share-0.05)), trend.Return)
	case trend.SAVelocity:
		if area := s.spec.Plant.DuctArea; area > 0 {
			return at(s.flow, trend.Supply) / area
		}
	}
	return math.NaN()
}

// pressure gives duct, filter and building pressures: a duct under control
// holds its setpoint, any other follows flow squared; the filter loads by the
// day and follows flow to the 1.5 (common practice, no source).
func (s *sim) pressure(r trend.Role) float64 {
	switch r {
	case trend.SAStatic:
		if !s.on {
			return 0
		}
		if s.spec.Variable {
			return s.body.staticSP + 6*s.duct.x
		}
		return s.body.staticSP*s.speed*s.speed + 4*s.duct.x
	case trend.FilterDP:
		days := float64(s.i) * s.dt / 86400
		return (s.body.filterClean + 1.2*days) * math.Pow(s.speed, 1.5)
	case trend.BuildingDP:
		return 6*flag(s.on) + 2*s.duct.x
	}
	return math.NaN()
}

// waterSide gives the coils' water: flow by valve, return temperature by duty.
func (s *sim) waterSide(r trend.Role) float64 {
	sup, flow, duty, full := s.body.chw+0.3*s.water.x, s.ctl.pos.cool, s.duty.cool, 30*s.body.design/(waterCp*6)
	switch r {
	case trend.HWSupplyTemp, trend.HWReturnTemp, trend.HWFlow:
		if !s.has(trend.Heating) && !s.has(trend.Reheat) && !s.has(trend.Preheat) {
			return math.NaN()
		}
		sup, flow, duty, full = s.body.hw+1.5*s.water.x, math.Max(s.ctl.pos.heat, math.Max(s.ctl.pos.preheat, s.ctl.pos.reheat)), -s.duty.heat, 16*s.body.design/(waterCp*15)
	default:
		if !s.has(trend.Cooling) {
			return math.NaN()
		}
	}
	switch r {
	case trend.CHWSupplyTemp, trend.HWSupplyTemp:
		return sup
	case trend.CHWFlow, trend.HWFlow:
		return full * flow
	}
	if flow < 0.02 {
		return sup
	}
	return sup + duty/(waterCp*full*flow)
}
