package synth

import (
	"math"
	"time"

	"dewledger/ingest/trend"
)

// zone is the building behind the unit: one well-mixed space with gains by
// people, plant and sun, losses through its shell, and terminals that hold its
// heating setpoint. All figures are per kg/s of design flow (common practice,
// no source).
type zone struct {
	t, w, co2   float64
	people      float64 // 0 to 1
	gain        float64 // kW
	busy, swirl *ar
}

const (
	zoneUA     = 0.15  // kW/K
	zoneC      = 21600 // kJ/K
	zoneAir    = 2400  // kg of dry air, with what walls and furniture hold of moisture
	zoneLeak   = 0.03  // kg/s of infiltration
	peopleHeat = 6.5   // kW, with plugs and light
	peopleWet  = 8e-4  // kg/s
	heatingSP  = 21.3  // degC
	coolingSP  = 23.0
)

func (z *zone) begin(s *sim) {
	rng := stream(s.spec.Seed, forZone)
	z.busy, z.swirl = newAR(rng, s.spec.Step, 2*time.Hour), newAR(rng, s.spec.Step, 15*time.Minute)
	z.t, z.co2 = 21, 450
	z.w = math.Min(math.Max(s.wo[0]+0.0008, 0.003), 0.0105)
}

// load sets people and gains.
func (z *zone) load(s *sim, local time.Time) {
	hour := float64(local.Hour()) + float64(local.Minute())/60
	goal := 0.03
	if s.occ {
		goal = 0.9
		if hour >= 12 && hour < 13 {
			goal = 0.65
		}
		if hour < 6 || hour > 21 || local.Weekday() == time.Saturday || local.Weekday() == time.Sunday {
			goal = 0.3
		}
	}
	z.people += (goal - z.people) * (1 - math.Exp(-s.dt/2700))
	season := 0.6 - 0.4*math.Cos(2*math.Pi*float64(local.YearDay()-10)/365)
	sun := 2.2 * season * math.Max(0, math.Cos(2*math.Pi*(hour-14)/26))
	z.gain = math.Max(0.3, 0.8+(peopleHeat*z.people+sun)*(1+0.08*z.busy.next()))
}

// wanted is the air flow, as a share of design, that holds the cooling
// setpoint.
func (z *zone) wanted(s *sim) float64 {
	lift := math.Max(4, z.t-s.st[trend.Supply].t)
	load := z.gain + zoneUA*(s.st[trend.Outdoor].t-z.t) + zoneC/7200*(z.t-coolingSP)
	return math.Min(1, math.Max(0.45, load/(1.02*lift)))
}

// advance moves the zone on by one interval: each of its quantities relaxes
// exponentially towards where its present fluxes would take it.
func (z *zone) advance(s *sim) {
	m := s.flow / s.body.design
	sup := s.st[trend.Supply]
	out := s.st[trend.Outdoor]
	relax := func(x, source, rate, capacity float64) float64 {
		goal := source / rate
		return goal + (x-goal)*math.Exp(-s.dt*rate/capacity)
	}
	cp := 1.02 * m
	t := relax(z.t, cp*sup.t+zoneUA*out.t+z.gain, cp+zoneUA, zoneC)
	// Terminal heating holds the setpoint while the unit runs for people, and
	// frost protection of the building does at night.
	floor := 16.0
	if s.mode == occupied || s.mode == warmup {
		floor = heatingSP
	}
	if t < floor {
		t = math.Min(floor, math.Max(t, z.t)+2*s.dt/3600)
	}
	z.t = t
	gain := peopleWet * z.people
	z.w = relax(z.w, m*sup.w+zoneLeak*out.w+gain, m+zoneLeak, zoneAir)
	z.w = math.Min(z.w, s.air.HumRatio(z.t, 0.95))
	fresh := m*s.share + zoneLeak
	z.co2 = relax(z.co2, fresh*420+110*z.people, fresh, 900)
}
