package balance

import (
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
)

// The limits of a command, fractions: shut at or under the first, running over
// the second. What lies between is neither.
const (
	shutAt    = 0.02
	runningAt = 0.05
)

// atMinimum is how far above its minimum a damper command still counts as at
// minimum.
const atMinimum = 0.05

type fanState struct {
	on    []bool
	known []bool // nil: no fan point
	by    trend.Role
}

// FanOn is where the supply fan runs, by the first of status, command, speed,
// flow and power that the unit has; false where that reading is missing. Without
// any of them the fan is assumed to run: see FanKnownBy. Speed counts as running
// over 5 %, flow over a tenth and power over a twentieth of its upper range (95th
// percentile).
func (b *Books) FanOn() []bool { return b.fanState().on }

// FanKnownBy is the role by which FanOn knows, NoRole where it is assumed.
func (b *Books) FanKnownBy() trend.Role { return b.fanState().by }

func (b *Books) fanState() fanState {
	return b.fan.get(func() fanState {
		n := b.n()
		s := fanState{on: make([]bool, n)}
		for _, r := range []trend.Role{trend.SAFanStatus, trend.SAFanCmd, trend.SAFanSpeed, trend.SAFlow, trend.SAFanPower} {
			v := b.u.Col(r)
			if v == nil {
				continue
			}
			limit := 0.5
			switch r {
			case trend.SAFanSpeed:
				limit = runningAt
			case trend.SAFlow:
				limit = 0.10 * b.upper(v)
			case trend.SAFanPower:
				limit = 0.05 * b.upper(v)
			}
			s.by, s.known = r, make([]bool, n)
			for i, x := range v {
				s.on[i], s.known[i] = x > limit, x == x
			}
			return s
		}
		for i := range s.on {
			s.on[i] = true
		}
		return s
	})
}

// upper is the 95th percentile of the values that are there.
func (b *Books) upper(v []float64) float64 {
	s := b.sample(v, nil)
	slices.Sort(s)
	return quantile(s, 0.95)
}

// commandRoles lists the points that command a component, those that only
// report its position last.
func (b *Books) commandRoles(c trend.Component) []trend.Role {
	switch c {
	case trend.Mixing:
		return []trend.Role{trend.OADamper, trend.OADamperFB}
	case trend.Preheat:
		return []trend.Role{trend.PreheatValve, trend.PreheatValveFB}
	case trend.Cooling:
		return []trend.Role{trend.CoolValve, trend.CoolValveFB}
	case trend.Heating:
		return []trend.Role{trend.HeatValve, trend.HeatValveFB}
	case trend.Reheat:
		if !b.has(trend.Heating) {
			return []trend.Role{trend.HeatValve, trend.HeatValveFB}
		}
	case trend.Humidify:
		return []trend.Role{trend.Humidifier, trend.HumidifierFB}
	case trend.Evaporative:
		if !b.has(trend.Humidify) {
			return []trend.Role{trend.Humidifier, trend.HumidifierFB}
		}
	case trend.Fan:
		return []trend.Role{trend.SAFanSpeed, trend.SAFanCmd, trend.SAFanStatus}
	case trend.Recovery:
		return []trend.Role{trend.RecoveryCmd}
	}
	return nil
}

// stageRole is the staged coil that belongs to a component, NoRole for none. A
// unit with two heating coils has its stages on the second, if the first has a
// valve.
func (b *Books) stageRole(c trend.Component) trend.Role {
	switch c {
	case trend.Cooling:
		return trend.CoolStage
	case trend.Heating:
		if !b.has(trend.Reheat) || !b.u.Has(trend.HeatValve) {
			return trend.HeatStage
		}
	case trend.Reheat:
		if !b.has(trend.Heating) || b.u.Has(trend.HeatValve) {
			return trend.HeatStage
		}
	}
	return trend.NoRole
}

// Command is what the controls ask of a component, 0 to 1: the valve or damper
// command, else its reported position; where a coil has stages as well, the
// larger of the two. Mixing is the outdoor damper. Nil where the unit has no
// such point; NaN where a reading is missing.
func (b *Books) Command(c trend.Component) []float64 {
	if v, ok := b.commands[c]; ok {
		return v
	}
	var out []float64
	for _, r := range b.commandRoles(c) {
		if out = b.u.Col(r); out != nil {
			break
		}
	}
	if st := b.u.Col(b.stageRole(c)); st != nil {
		if out == nil {
			out = st
		} else {
			both := make([]float64, len(st))
			for i := range both {
				both[i] = math.Max(out[i], st[i])
			}
			out = both
		}
	}
	b.commands[c] = out
	return out
}

// Shut is where a component is commanded at most 2 % open and that is known. It
// is true everywhere for a component that the train has not, and false
// everywhere where there is no point to know it by.
func (b *Books) Shut(c trend.Component) []bool {
	if v, ok := b.shut[c]; ok {
		return v
	}
	out := make([]bool, b.n())
	if !b.has(c) {
		for i := range out {
			out[i] = true
		}
	} else {
		for i, x := range b.Command(c) {
			out[i] = x <= shutAt
		}
	}
	b.shut[c] = out
	return out
}

// Running is where a component is commanded over 5 %. It is false for a
// component that the train has not.
func (b *Books) Running(c trend.Component) []bool {
	if v, ok := b.running[c]; ok {
		return v
	}
	out := make([]bool, b.n())
	if b.has(c) {
		for i, x := range b.Command(c) {
			out[i] = x > runningAt
		}
	}
	b.running[c] = out
	return out
}

// ShutFor is for how many intervals, this one included, a component has been
// shut without a break; 0 where it is not. For a component that the train has
// not it is as large as can be.
func (b *Books) ShutFor(c trend.Component) []int32 {
	if v, ok := b.shutFor[c]; ok {
		return v
	}
	out := make([]int32, b.n())
	if !b.has(c) {
		for i := range out {
			out[i] = math.MaxInt32
		}
	} else {
		var run int32
		for i, s := range b.Shut(c) {
			if run++; !s {
				run = 0
			}
			out[i] = run
		}
	}
	b.shutFor[c] = out
	return out
}

// shutLong is where all of the components have been shut for longer than the
// settling time, so that what they still held is spent. Nil: no condition.
func (b *Books) shutLong(cs []trend.Component) []bool {
	var out []bool
	wait := int32(b.settlingIntervals())
	for _, c := range cs {
		if !b.has(c) {
			continue
		}
		if out == nil {
			out = make([]bool, b.n())
			for i := range out {
				out[i] = true
			}
		}
		for i, k := range b.ShutFor(c) {
			out[i] = out[i] && k > wait
		}
	}
	return out
}

// Dry is where the unit is settled and no wet component (cooling coil,
// humidifier, evaporative cooler) has run for the settling time: a coil gives
// its water back for some minutes after its valve shuts. It is false wherever a
// command is not known.
func (b *Books) Dry() []bool {
	return b.dry.get(func() []bool {
		out := slices.Clone(b.Settled())
		if idle := b.shutLong([]trend.Component{trend.Cooling, trend.Humidify, trend.Evaporative}); idle != nil {
			for i := range out {
				out[i] = out[i] && idle[i]
			}
		}
		return out
	})
}

// OccupiedKnown reports whether anything says when the building is occupied: a
// point, or the site's schedule.
func (b *Books) OccupiedKnown() bool {
	return b.u.Has(trend.Occupied) || b.u.Site.Schedule.Given
}

// Occupied is where the building is occupied: by the point where the unit has
// one, by the schedule otherwise and where the point is missing. Where nothing
// says, it is true.
func (b *Books) Occupied() []bool {
	return b.occupied.get(func() []bool {
		out := make([]bool, b.n())
		if b.u.Site.Schedule.Given {
			b.scheduled(out)
		} else {
			for i := range out {
				out[i] = true
			}
		}
		for i, x := range b.u.Col(trend.Occupied) {
			if x == x {
				out[i] = x > 0.5
			}
		}
		return out
	})
}

// scheduled asks the schedule day by day: a local day of 24 hours has its spans
// at fixed intervals; on the days of a clock change every interval asks.
func (b *Books) scheduled(out []bool) {
	ax, sch := b.u.Axis, &b.u.Site.Schedule
	zone := b.u.Site.Zone
	if zone == nil {
		zone = time.UTC
	}
	for i := 0; i < len(out); {
		y, m, d := ax.At(i).In(zone).Date()
		midnight := time.Date(y, m, d, 0, 0, 0, 0, zone)
		next := time.Date(y, m, d+1, 0, 0, 0, 0, zone)
		j := i + 1 + int((next.Sub(ax.At(i))-1)/ax.Step)
		j = min(j, len(out))
		if next.Sub(midnight) != 24*time.Hour {
			for k := i; k < j; k++ {
				out[k] = sch.Occupied(ax.At(k).In(zone))
			}
		} else if !sch.Holidays[midnight.Format(time.DateOnly)] {
			since := ax.At(i).Sub(midnight)
			for k := i; k < j; k++ {
				minute := int((since + time.Duration(k-i)*ax.Step) / time.Minute)
				for _, s := range sch.Spans[midnight.Weekday()] {
					out[k] = out[k] || minute >= s.From && minute < s.To
				}
			}
		}
		i = max(j, i+1)
	}
}
