package synth

import (
	"math"
	"math/rand/v2"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// state is moist air at a place.
type state struct{ t, w float64 }

// sim is a run in the making.
type sim struct {
	run  *Run
	spec *Spec
	ax   trend.Axis
	air  psy.Model
	body body
	dt   float64 // s
	i    int

	to, wo []float64
	faults []active
	ctl    controls
	zone   zone
	coil   wetCoil
	st     [trend.NumStations]state
	flow   float64 // kg/s of dry air
	speed  float64 // of the supply fan, 0 to 1
	share  float64 // of outdoor air
	on     bool
	mode   mode
	occ    bool
	duct   *ar // turbulence of pressures, slow
	water  *ar // of water temperatures
	duty   struct{ heat, cool float64 }
	sense  sensors
}

// mode is what the schedule asks of the unit.
type mode uint8

const (
	off mode = iota
	warmup
	occupied
	night
)

// body is what the unit really is, whatever its site says of it.
type body struct {
	train                   []trend.Component
	design                  float64 // kg/s of dry air
	volume                  float64 // m3/s at design
	minShare, minDamper     float64
	fanRise                 float64 // K at full speed
	limit                   trend.HighLimit
	leak, most, bend        float64 // of the outdoor damper: share shut, share open, how S-shaped
	valve                   float64 // exponent of duty against position
	staticSP, filterClean   float64
	chw, hw                 float64 // water supply temperatures, degC
	preheat, heating, again heater
	allOutdoor              bool
	dries                   bool // holds a leaving temperature of the cooling coil while the air is humid
}

// heater is a heating coil: its duty at position u is
// g(u)·eff·(source − T_in), or g(u)·lift kelvin where it is electric or gas.
type heater struct {
	source, eff float64
	lift        float64
	steam       bool
}

// warm is the temperature rise at full opening, K, at a flow of so much of the
// design. Effectiveness falls slowly with flow (NTU near flow^-0.4: common
// practice, no source).
func (h heater) warm(tin, part float64) float64 {
	part = math.Max(part, 0.2)
	if h.lift > 0 {
		return h.lift / part
	}
	return math.Max(0, math.Min(0.9, h.eff*math.Pow(part, -0.4))*(h.source-tin))
}

func newHeater(kind string, eff float64) heater {
	switch kind {
	case "steam":
		return heater{source: 103, eff: 0.8 * eff, steam: true}
	case "electric", "gas":
		return heater{lift: 45 * eff}
	}
	return heater{source: 60, eff: eff}
}

func (s *sim) build() {
	p := s.spec.Plant
	rng := stream(s.spec.Seed, forPlant)
	draw := func(lo, hi float64) float64 { return lo + (hi-lo)*rng.Float64() }
	b := &s.body
	b.train = stated(p).Train
	b.volume = or(p.DesignFlow, 5)
	b.design = b.volume / s.air.Volume(16, 0.008)
	b.minShare = or(p.MinOAFraction, 0.2)
	b.fanRise = or(p.FanHeat, 1)
	b.limit = p.HighLimit
	if b.limit.Kind == trend.NoLimit {
		b.limit = trend.HighLimit{Kind: trend.FixedDryBulb, Value: 18}
	}
	b.leak, b.most, b.bend = draw(0.01, 0.04), draw(0.93, 0.98), draw(0.4, 0.8)
	b.valve = draw(0.9, 1.3)
	b.staticSP, b.filterClean = 10*math.Round(draw(25, 40)), draw(60, 90)
	b.chw, b.hw = draw(6, 7.5), 60
	b.preheat = newHeater(p.CoilKind[trend.Preheat], 0.5)
	b.heating = newHeater(p.CoilKind[trend.Heating], 0.35)
	b.again = newHeater(p.CoilKind[trend.Reheat], 0.3)
	pl := trend.Plant{Train: b.train}
	b.allOutdoor = !pl.In(trend.Mixing)
	b.dries = pl.In(trend.Cooling) && (b.allOutdoor || pl.In(trend.Reheat))
	b.minDamper = or(p.MinDamper, 0)
	if b.minDamper == 0 && !b.allOutdoor {
		lo, hi := 0.0, 1.0
		for range 30 {
			if m := (lo + hi) / 2; b.damperShare(m, b.leak) < b.minShare {
				lo = m
			} else {
				hi = m
			}
		}
		b.minDamper = math.Round(100*hi) / 100
	}
}

// damperShare is the share of outdoor air at a position: an S between the leak
// and somewhat less than all (the shape is common practice, no source).
func (b *body) damperShare(u, leak float64) float64 {
	return leak + (math.Max(b.most, leak)-leak)*(b.bend*u*u*(3-2*u)+(1-b.bend)*u)
}

// Simulate runs the unit. The same Spec gives the same Run, to the last bit on
// one kind of processor. It panics at a Spec that makes no sense.
func Simulate(spec Spec) *Run {
	spec = spec.settle()
	n := int(time.Duration(spec.Days) * 24 * time.Hour / spec.Step)
	r := &Run{Spec: spec, Axis: trend.Axis{Start: spec.Start.UTC(), Step: spec.Step, N: n}}
	s := &sim{run: r, spec: &r.Spec, ax: r.Axis, air: r.Air(), dt: spec.Step.Seconds()}
	s.build()
	s.schedule(spec.Faults)
	s.prepare()
	weather(spec.Climate, spec.WeatherSeed, r.Axis.Start, spec.Zone, spec.Step, s.air, s.to, s.wo)
	s.zone.begin(s)
	still := state{20, s.zone.w}
	for st := range s.st {
		s.st[st] = still
	}
	s.ctl.begin(s)
	rng := stream(spec.Seed, forPlant+100)
	s.duct, s.water = newAR(rng, spec.Step, 30*time.Minute), newAR(rng, spec.Step, 3*time.Hour)
	s.sense.begin(s)
	for s.i = 0; s.i < n; s.i++ {
		s.step()
		s.record()
	}
	return r
}

// prepare allocates the columns of the truth.
func (s *sim) prepare() {
	n := s.ax.N
	var stations []trend.Station
	stations = append(stations, trend.Outdoor, trend.Return, trend.Supply)
	for _, c := range s.body.train {
		switch c {
		case trend.Recovery:
			stations = append(stations, trend.Recovered)
		case trend.Mixing:
			stations = append(stations, trend.Mixed)
		case trend.Preheat:
			stations = append(stations, trend.AfterPreheat)
		case trend.Cooling:
			stations = append(stations, trend.AfterCooling)
		case trend.Heating:
			stations = append(stations, trend.AfterHeating)
		}
	}
	t := &Truth{}
	mixing := false
	for _, c := range s.body.train {
		mixing = mixing || c == trend.Mixing
	}
	for k, c := range s.body.train {
		if c == trend.Mixing || c == trend.Recovery && mixing && k == 0 {
			continue
		}
		t.Parts = append(t.Parts, Part{Component: c})
	}
	block := make([]float64, n*(2*len(stations)+3+7*len(t.Parts)))
	col := func() []float64 {
		c := block[:n:n]
		block = block[n:]
		return c
	}
	for _, st := range stations {
		t.T[st], t.W[st] = col(), col()
	}
	t.Flow, t.Fraction, t.Position = col(), col(), col()
	for k := range t.Parts {
		p := &t.Parts[k]
		p.TIn, p.WIn, p.TOut, p.WOut, p.Heat, p.Water, p.WaterHeat = col(), col(), col(), col(), col(), col(), col()
	}
	s.run.True = t
	s.to, s.wo = t.T[trend.Outdoor], t.W[trend.Outdoor]
}

// lead is how long before occupancy the unit starts, with its outdoor damper
// shut.
const lead = 90 * time.Minute

// step moves the unit on by one interval.
func (s *sim) step() {
	local := s.ax.At(s.i).In(s.spec.Zone)
	s.occ = s.spec.Schedule.Occupied(local)
	was := s.on
	switch {
	case s.occ:
		s.mode = occupied
	case s.spec.Schedule.Occupied(local.Add(lead)):
		s.mode = warmup
	default:
		s.mode = off
		if share, ok := s.fault(RunsAtNight, ""); ok && s.nightChance(local) < share {
			s.mode = night
		}
	}
	s.on = s.mode != off
	s.st[trend.Outdoor] = state{s.to[s.i], s.wo[s.i]}
	s.zone.load(s, local)
	s.st[trend.Return] = state{s.zone.t + 0.3 + 0.12*s.zone.swirl.next(), s.zone.w}
	s.duct.next()
	s.water.next()
	s.move()
	if s.on && !was {
		s.ctl.start(s)
	}
	s.ctl.act(s, !was)
	s.duty.heat, s.duty.cool = 0, 0
	if s.on {
		s.airPath()
	} else {
		s.stillAir(local)
	}
	s.zone.advance(s)
	s.sense.read(s)
}

// nightChance is a number from 0 to 1 that belongs to the night that local is
// in, noon to noon.
func (s *sim) nightChance(local time.Time) float64 {
	y, m, d := local.Add(-12 * time.Hour).Date()
	day := uint64(time.Date(y, m, d, 0, 0, 0, 0, time.UTC).Unix() / 86400)
	return rand.New(rand.NewPCG(s.spec.Seed, day<<12|forNights)).Float64()
}

// move sets the air flow.
func (s *sim) move() {
	if !s.on {
		s.flow, s.speed = 0, 0
		return
	}
	target := 1.0
	if s.spec.Variable {
		target = s.zone.wanted(s)
	}
	if s.speed == 0 {
		s.speed = target
	}
	s.speed += (target - s.speed) * s.ctl.quick
	s.flow = s.body.design * s.speed
}

// stillAir lets the air in the ducts of a unit at rest drift towards the plant
// room's, the mixing box's in part towards outdoors.
func (s *sim) stillAir(local time.Time) {
	k := 1 - math.Exp(-s.dt/2400)
	room := 21 + 0.8*math.Sin(2*math.Pi*(float64(local.Hour())-11)/24)
	for st := range s.st {
		goal := room
		switch trend.Station(st) {
		case trend.Outdoor, trend.Return:
			continue
		case trend.Mixed, trend.Recovered:
			goal = 0.75*room + 0.25*s.st[trend.Outdoor].t
		}
		x := &s.st[st]
		x.t += k * (goal - x.t)
		x.w += k * (math.Min(s.zone.w, s.air.HumRatio(x.t, 0.95)) - x.w)
	}
	s.share = 0
	if s.body.allOutdoor {
		s.share = 1
	}
}

// record writes the step into the truth.
func (s *sim) record() {
	t, i := s.run.True, s.i
	for st := range t.T {
		if t.T[st] != nil {
			t.T[st][i], t.W[st][i] = s.st[st].t, s.st[st].w
		}
	}
	t.Flow[i], t.Fraction[i], t.Position[i] = s.flow, s.share, s.ctl.pos.damper
	if s.on {
		return
	}
	for k := range t.Parts {
		p, x := &t.Parts[k], s.st[trend.Supply]
		p.TIn[i], p.WIn[i], p.TOut[i], p.WOut[i] = x.t, x.w, x.t, x.w
	}
}
