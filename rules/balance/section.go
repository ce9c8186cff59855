package balance

import (
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
)

// The fan's heat where the site does not say: 1.0 K with a standard uncertainty
// of 0.5 K. Δp/(ρ·cp·η) gives 0.8 K at 500 Pa and 1.4 K at 1000 Pa with η near
// 0.6 (common practice, no source).
const (
	priorFanRise  = 1.0
	priorFanRiseU = 0.5
	statedFanU    = 0.2 // of a stated rise without an uncertainty, K (common practice, no source)
)

// ExpectedFanRise is the temperature rise over the supply fan that the site
// states, or the prior of 1.0 ± 0.5 K (standard uncertainty), K; 0 while the fan
// is off. It falls with the square of the speed where that is known; its
// uncertainty falls with the speed alone, since a duct held at a set pressure
// keeps the fan from following the square. It is never learned from this unit's
// hours.
func (b *Books) ExpectedFanRise() *Series {
	return b.named("fan_rise_expected", func() *Series { return b.express("fan_rise_expected", "K", b.fanRiseForm(), 1) })
}

func (b *Books) fanRiseForm() *form {
	return b.fanRise.get(func() *form {
		rise, u := priorFanRise, priorFanRiseU
		if h := b.u.Plant.FanHeat; h == h {
			rise, u = h, b.u.Plant.FanHeatU
			if !(u > 0) {
				u = statedFanU
			}
		}
		n := b.n()
		val, d := make([]float64, n), make([]float64, n)
		on, speed := b.FanOn(), b.u.Col(trend.SAFanSpeed)
		for i := range val {
			if !on[i] {
				continue
			}
			s := 1.0
			if speed != nil && speed[i] == speed[i] {
				s = math.Min(math.Max(speed[i], 0), 1)
			}
			val[i], d[i] = rise*s*s, u*s
		}
		return &form{val: val, sens: []sens{{role: trend.NoRole, c: 1, d: d}}}
	})
}

// riseOver is the temperature rise over a section less the fan's where the fan
// is in it, as a form.
func (b *Books) riseOver(s section) *form {
	r := b.minus(b.tempForm(s.to), b.tempForm(s.from))
	if slices.Contains(s.between, trend.Fan) {
		r = b.minus(r, b.fanRiseForm())
	}
	return r
}

func (b *Books) hasTemp(s trend.Station) bool { return b.u.Has(s.DryBulb()) }

func (b *Books) hasMoisture(s trend.Station) bool { return moistureWay(b.u, s) != nil }

// tempSections are the sections whose temperature rise means something: those
// without a recovery or an evaporative cooler in them, whose doings no
// temperature at the ends can tell from a coil's.
func (b *Books) tempSections() []section {
	return slices.DeleteFunc(b.path.sections(b.hasTemp), func(s section) bool {
		return slices.Contains(s.between, trend.Recovery) || slices.Contains(s.between, trend.Evaporative)
	})
}

// The spread of a section where too few shut hours show it, K (common practice,
// no source), and how many intervals it takes.
const (
	unseenSpread   = 0.5
	leastForSpread = 24
)

// spread is the robust spread of a section's rise in settled time with its
// coils shut, K: what stratification, fan and duct do to a healthy unit. A leak
// must not pass for spread and so hide itself. The period is cut into weeks (a
// third of it, and at least a day, where it has under three); each week gives the
// scale of its shortest half, which leaves out whatever happens in less than
// half of its time; and the spread is the mean of the lower half of those. A leak
// that comes or goes within the month widens one week of them, one that lasts all
// month none, one that comes and goes every day at most doubles or trebles it.
func (b *Books) spread(r *form, s section) float64 {
	keep := kept(b.Settled(), b.shutLong(coils(s.between)))
	n, day := b.n(), b.u.Axis.Intervals(24*time.Hour)
	length := max(day, min(7*day, n/3))
	var scales []float64
	for i := 0; i < n; i += length {
		j := min(i+length, n)
		v := b.sample(r.val[i:j], keep[i:j])
		if len(v) < leastForSpread {
			continue
		}
		_, scale := shortest(v)
		scales = append(scales, scale)
	}
	if len(scales) == 0 {
		return unseenSpread
	}
	slices.Sort(scales)
	lower := scales[:(len(scales)+1)/2]
	var sum float64
	for _, x := range lower {
		sum += x
	}
	return sum / float64(len(lower))
}

func keepTempRise(b *Books) []*Part {
	var out []*Part
	for _, s := range b.tempSections() {
		r := b.riseOver(s)
		roles := rolesOf(r)
		r.sens = append(r.sens, sens{role: trend.NoRole, c: b.spread(r, s)})
		name := "temp_rise_" + s.from.String() + "_" + s.to.String()
		out = append(out, &Part{
			Series: b.express(name, "K", r, 1), Component: aboutOne(s.between),
			From: s.from, To: s.to, Between: s.between, Readings: roles,
		})
	}
	return out
}

// aboutOne is the one component, the fan aside, that lies in a section; the fan
// where it is alone; empty for several.
func aboutOne(between []trend.Component) trend.Component {
	var one trend.Component
	for _, c := range between {
		switch {
		case c == trend.Fan:
		case one != "":
			return ""
		default:
			one = c
		}
	}
	if one == "" && len(between) > 0 {
		return trend.Fan
	}
	return one
}

// moisturePlace is one place where moisture in is held against moisture out.
type moisturePlace struct {
	name   string
	s      section
	in     *form // kg/kg; nil for a bound
	bound  bool
	lo, hi *form // the streams, for a bound
	out    *form
}

// moisturePlaces lists the places of the moisture balances: consecutive stations
// whose moisture is read; the whole path where more than one section is in it;
// and, where the mixture's moisture is not read, the path from the computed
// mixture, and from the bound that the two streams are.
func (b *Books) moisturePlaces() []moisturePlace {
	var out []moisturePlace
	secs := slices.DeleteFunc(b.path.sections(b.hasMoisture), func(s section) bool {
		return slices.Contains(s.between, trend.Recovery)
	})
	for _, s := range secs {
		out = append(out, moisturePlace{name: s.from.String() + "_" + s.to.String(), s: s, in: b.humRatio(s.from), out: b.humRatio(s.to)})
	}
	w, ok := b.path.whole(b.hasMoisture)
	if !ok || slices.Contains(w.between, trend.Recovery) {
		return out
	}
	if b.hasMoisture(b.path.first) {
		if len(secs) > 1 {
			out = append(out, moisturePlace{name: w.from.String() + "_" + w.to.String(), s: w, in: b.humRatio(w.from), out: b.humRatio(w.to)})
		}
		return out
	}
	lo, hi := b.humRatio(b.path.inlet), b.humRatio(trend.Return)
	if !b.path.mixing || lo == nil || hi == nil {
		return out
	}
	if m := b.mixed(); m.dry != nil {
		out = append(out, moisturePlace{name: "mix_" + w.to.String(), s: w, in: m.dry, out: b.humRatio(w.to)})
	}
	out = append(out, moisturePlace{name: "bound_" + w.to.String(), s: w, bound: true, lo: lo, hi: hi, out: b.humRatio(w.to)})
	return out
}

func keepMoistureGain(b *Books) []*Part { return b.moistureGains() }
func keepMoistureLoss(b *Books) []*Part { return b.moistureParts(-1) }

func (b *Books) moistureGains() []*Part {
	return b.gains.get(func() []*Part { return b.moistureParts(1) })
}

// moistureParts are gains (sign 1) or losses (sign -1), g/kg.
func (b *Books) moistureParts(sign float64) []*Part {
	prefix := "moisture_gain_"
	if sign < 0 {
		prefix = "moisture_loss_"
	}
	var gains []*Part
	if sign < 0 {
		gains = b.moistureGains()
	}
	var out []*Part
	for k, p := range b.moisturePlaces() {
		var s *Series
		var roles []trend.Role
		switch {
		case p.bound:
			f := b.beyond(p.out, p.lo, p.hi, sign)
			s, roles = b.express(prefix+p.name, "g/kg", f, 1000), rolesOf(p.out, p.lo, p.hi)
		case sign < 0:
			s, roles = gains[k].Scaled(prefix+p.name, "g/kg", -1, 0), gains[k].Readings
		default:
			f := b.minus(p.out, p.in)
			s, roles = b.express(prefix+p.name, "g/kg", f, 1000), rolesOf(f)
		}
		out = append(out, &Part{
			Series: s, Component: aboutOne(p.s.between), From: p.s.from, To: p.s.to, Between: p.s.between, Bound: p.bound, Readings: roles,
		})
	}
	return out
}

// beyond is how far x lies above the larger (sign 1) or below the smaller (sign
// -1) of o and r.
func (b *Books) beyond(x, o, r *form, sign float64) *form {
	val, wo, wr := b.buffer(), b.buffer(), b.buffer()
	for i := range val {
		wo[i], wr[i] = 0, 0
		y, z := sign*o.val[i], sign*r.val[i]
		if y > z {
			val[i], wo[i] = sign*x.val[i]-y, -sign
		} else {
			val[i], wr[i] = sign*x.val[i]-z, -sign
		}
		if y != y {
			val[i] = y
		}
	}
	return &form{val: val, sens: b.merge(weigh{f: x, c: sign}, weigh{f: o, w: wo, own: true}, weigh{f: r, w: wr, own: true})}
}

// fanSection is the tightest section that holds the fan and, beside it, coils at
// most; false where there is none.
func (b *Books) fanSection() (section, bool) {
	for _, s := range b.tempSections() {
		if slices.Contains(s.between, trend.Fan) && !slices.Contains(s.between, trend.Humidify) {
			return s, true
		}
	}
	return section{}, false
}

func keepFanRise(b *Books) []*Part { return b.fanRises() }

func (b *Books) fanRises() []*Part {
	return b.fanParts.get(b.strikeFanRise)
}

func (b *Books) strikeFanRise() []*Part {
	s, ok := b.fanSection()
	if !ok {
		return nil
	}
	r := b.minus(b.tempForm(s.to), b.tempForm(s.from))
	keep, idle := b.Settled(), b.shutLong(coils(s.between))
	val := make([]float64, b.n())
	for i := range val {
		val[i] = math.NaN()
		if keep[i] && (idle == nil || idle[i]) {
			val[i] = r.val[i]
		}
	}
	f := &form{val: val, sens: r.sens}
	return []*Part{{
		Series: b.express("fan_rise", "K", f, 1), Component: trend.Fan,
		From: s.from, To: s.to, Between: s.between, Readings: rolesOf(f),
	}}
}

type learned struct{ val, u, hours float64 }

// LearnedFanRise is the rise over the supply fan that this unit shows in settled
// hours with the coils around the fan shut, K: the middle of the shortest half,
// so that what happens in less than half of those hours leaves it alone; its
// standard uncertainty, offsets included; and the hours. NaN where there are
// under two hours. It is for display and for other balances; no rule expects it
// of the hours that it tests.
func (b *Books) LearnedFanRise() (rise, u, hours float64) {
	l := b.learnedFan.get(func() learned {
		ps := b.fanRises()
		if ps == nil {
			return learned{math.NaN(), math.NaN(), 0}
		}
		v := b.sample(ps[0].Val, nil)
		m := ps[0].Mean(0, b.n(), nil)
		h := float64(m.N) * b.u.Axis.Hours()
		if len(v) < leastForSpread {
			return learned{math.NaN(), math.NaN(), h}
		}
		mid, scale := shortest(v)
		return learned{mid, math.Hypot(m.Off, scale/math.Sqrt(m.NEff)), h}
	})
	return l.val, l.u, l.hours
}
