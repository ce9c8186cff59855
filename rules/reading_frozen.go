package rules

import (
	"math"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// neighbour is a reading that moves a healthy one, and by how much it has to
// move for that.
type neighbour struct {
	role trend.Role
	by   float64
}

// frozenSpec says how a reading's standstill is known.
type frozenSpec struct {
	role       trend.Role
	steady     bool // controlled or slow: asked for four times as long
	always     bool // counts with the fan off as well
	neighbours []neighbour
}

// The readings, each with the neighbours that must move it. Relative humidity
// is rh-pinned's. Supply temperature is controlled but never to the last digit.
var frozenSpecs = []frozenSpec{
	{trend.OATemp, false, true, []neighbour{{trend.WXTemp, 2}, {trend.RETemp, 2}, {trend.MATemp, 3}}},
	{trend.MATemp, false, false, []neighbour{{trend.OATemp, 3}, {trend.OADamper, 0.2}, {trend.PHTemp, 2}}},
	{trend.PHTemp, false, false, []neighbour{{trend.MATemp, 2}, {trend.PreheatValve, 0.2}, {trend.OATemp, 4}}},
	{trend.CCTemp, false, false, []neighbour{{trend.MATemp, 2}, {trend.CoolValve, 0.2}}},
	{trend.HCTemp, false, false, []neighbour{{trend.MATemp, 2}, {trend.HeatValve, 0.2}}},
	{trend.SATemp, false, false, []neighbour{{trend.MATemp, 2}, {trend.CCTemp, 2}, {trend.HeatValve, 0.2}, {trend.CoolValve, 0.2}}},
	{trend.RATemp, true, false, []neighbour{{trend.OATemp, 4}, {trend.ZoneTemp, 1}, {trend.SATemp, 2}}},
	{trend.ZoneTemp, true, true, []neighbour{{trend.RATemp, 1}, {trend.OATemp, 5}}},
	{trend.OADewPoint, true, true, []neighbour{{trend.WXDewPoint, 3}, {trend.RADewPoint, 2}}},
	{trend.RADewPoint, true, false, []neighbour{{trend.OADewPoint, 4}, {trend.SADewPoint, 2}}},
	{trend.SAFlow, false, false, []neighbour{{trend.SAFanSpeed, 0.1}, {trend.SAStatic, 50}}},
	{trend.RAFlow, false, false, []neighbour{{trend.RAFanSpeed, 0.1}, {trend.SAFlow, 0.5}}},
	{trend.OAFlow, false, false, []neighbour{{trend.OADamper, 0.2}}},
	{trend.SAStatic, true, false, []neighbour{{trend.SAFanSpeed, 0.1}, {trend.SAFlow, 0.5}}},
	{trend.RACO2, true, true, []neighbour{{trend.OADamper, 0.3}, {trend.Occupied, 0.5}}},
}

var readingFrozen = &Rule{
	Name: "reading-frozen",
	Unit: "h",
	Harm: Misleads,
	Doc: Doc{
		Title: "Reading that does not move while its neighbours do",
		Text: "Asks whether a measured temperature, dew point, flow or pressure repeats one value to its last digit for hours while a reading that drives it moves. " +
			"Air in a running unit is never that steady. Slow or controlled readings (return, zone, static pressure) are given four times as long, and so are sensors logged in coarse steps.",
		Formula: "flag where max(reading) − min(reading) = 0 over at least the hours asked, while a neighbour moved",
		When:    "running time in which a neighbour of the reading moved",
		Says: "The {reading} reading repeated one value for {effect} at a stretch while its neighbours moved ({hours} of {tested} hours tested); " +
			"a failed sensor, a held value in the controller or a logger that repeats its last sample would do this.",
		Cannot: "A dead sensor, an override and a stalled logger look alike; several readings frozen over the same hours point to the logger.",
		Sources: []string{
			"Common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Roles: []balance.Need{{What: "a measured reading with a neighbour", AnyOf: [][]trend.Role{
			{trend.OATemp, trend.MATemp}, {trend.MATemp, trend.OADamper}, {trend.SATemp, trend.MATemp}, {trend.SATemp, trend.CoolValve},
			{trend.SATemp, trend.HeatValve}, {trend.SAFlow, trend.SAFanSpeed}, {trend.RATemp, trend.OATemp}, {trend.OATemp, trend.WXTemp},
		}}},
		Uses:  frozenUses(),
		State: true,
	},
	Params: []Param{
		matters("h", 6, 1, 168, "shorter standstills can be chance with a coarse sensor"),
		persist(360, "as long as what matters"),
		{Name: "coarse", Unit: "K", Default: 0.3, Min: 0.05, Max: 2, Why: "a temperature logged in coarser steps than this may well rest on one for hours"},
	},
	Checks: []string{
		"Look in the controller for a held, overridden or failed point",
		"Compare the live value with a hand-held thermometer at the sensor",
		"See whether other points of the same logger stand still over the same hours",
	},
	Cause:    "sensor or logger frozen",
	Cautions: []finding.Caution{finding.Isolate},
	Cases: []Case{
		{"mixed-air sensor repeats one value for days", finding.Fault, month(synth.Marine, time.May, 1, synth.Fault{Kind: synth.SensorFrozen, Severity: 1, Role: trend.MATemp, From: day(time.May, 6)})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"frozen for four hours only", finding.Pass, month(synth.Marine, time.May, 3, synth.Fault{Kind: synth.SensorFrozen, Severity: 1, Role: trend.MATemp, From: day(time.May, 6).Add(10 * time.Hour), To: day(time.May, 6).Add(14 * time.Hour)})},
	},
	Eval: func(p *Pass) []Evidence {
		var out []Evidence
		for _, sp := range frozenSpecs {
			c := p.Column(sp.role)
			if c == nil {
				continue
			}
			counted := always(p.N())
			if !sp.always {
				counted = p.FanOn()
			}
			least := p.intervals(p.Param(Matters))
			if sp.steady || sp.role.Kind() == trend.Temperature && c.Resolution > p.Param("coarse") {
				least *= 4
			}
			moves := func(i, j int) bool {
				for _, nb := range sp.neighbours {
					if v := p.Col(nb.role); v != nil && moved(v, counted, i, j) >= nb.by {
						return true
					}
				}
				return false
			}
			var found []run
			for _, r := range runs(c.Val, counted, 0, least) {
				if moves(r.i, r.j) {
					found = append(found, r)
				}
			}
			sees := nan()
			if couldTell(p.N(), least, moves) {
				sees = math.Max(p.Param(Matters), float64(least)*p.Axis().Hours())
			}
			e := standstill(p, sp.role.String()+"_still", c.Val, counted, found, sees)
			e.Component = sp.role.String()
			e.Suspects = []string{sp.role.String(), "logger"}
			e.Readings = []trend.Role{sp.role}
			e.Terms = []Term{{"reading", sp.role.Kind().Unit(), c.Val}}
			for _, nb := range sp.neighbours {
				if v := p.Col(nb.role); v != nil {
					e.Readings = append(e.Readings, nb.role)
				}
			}
			e.What = "hours for which the reading repeated one value"
			out = append(out, e)
		}
		return out
	},
}

func frozenUses() []trend.Role {
	var have [trend.NumRoles]bool
	for _, sp := range frozenSpecs {
		have[sp.role] = true
		for _, nb := range sp.neighbours {
			have[nb.role] = true
		}
	}
	var out []trend.Role
	for r := trend.NoRole; r < trend.NumRoles; r++ {
		if have[r] {
			out = append(out, r)
		}
	}
	return out
}
