package balance

import (
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
)

// State is what the unit was doing in an interval.
type State uint8

// The operating states: which components the controls have asked for.
const (
	Unknown            State = iota // a command that would tell is missing
	Off                             // fan off
	Heating                         // a heating or preheat coil commanded on
	FreeCooling                     // damper above minimum, coils shut
	FreePlusMechanical              // damper above minimum, cooling on
	Mechanical                      // damper at minimum, cooling on
	Ventilating                     // fan on, coils shut, damper at minimum
	Recirculating                   // fan on, damper shut: warm-up, night
	HeatingAndCooling               // both commanded on
	NumStates
)

var stateNames = [NumStates]string{
	"unknown", "off", "heating", "free-cooling", "free-plus-mechanical", "mechanical",
	"ventilating", "recirculating", "heating-and-cooling",
}

// String is the state's name.
func (s State) String() string { return stateNames[s] }

// asked is what is asked of a part of the unit in an interval.
type asked uint8

const (
	absent  asked = iota // the train has no such part
	unknown              // no point, or its reading is missing
	no
	yes
)

// damper positions, in place of no and yes.
const (
	damperShut asked = iota + no
	damperMin
	damperOpen
)

// coilAsked is whether any of the coils is commanded on.
func (b *Books) coilAsked(cs ...trend.Component) []asked {
	out := make([]asked, b.n())
	for _, c := range cs {
		if !b.has(c) {
			continue
		}
		cmd := b.Command(c)
		for i := range out {
			a := unknown
			switch {
			case cmd == nil || cmd[i] != cmd[i]:
			case cmd[i] > runningAt:
				a = yes
			default:
				a = no
			}
			// One coil on settles it; else one unknown leaves it open.
			switch {
			case a == yes || out[i] == yes:
				out[i] = yes
			case a == unknown || out[i] == unknown:
				out[i] = unknown
			default:
				out[i] = a
			}
		}
	}
	return out
}

// damperAsked is where the outdoor damper is commanded: shut, at its minimum or
// above; unknown also where the minimum is not known and would matter.
func (b *Books) damperAsked() []asked {
	out := make([]asked, b.n())
	if !b.path.mixing {
		return out
	}
	cmd := b.Command(trend.Mixing)
	lowest := b.MinDamper()
	for i := range out {
		out[i] = unknown
		switch {
		case cmd == nil || cmd[i] != cmd[i]:
		case cmd[i] <= shutAt && !(lowest <= shutAt):
			out[i] = damperShut
		case cmd[i] <= lowest+atMinimum:
			out[i] = damperMin
		case cmd[i] > lowest+atMinimum:
			out[i] = damperOpen
		}
	}
	return out
}

// States is the operating state, from fan, valves, stages and damper. A state
// that hangs on a command which is not known is Unknown. Heating and cooling at
// once goes before a shut damper, and that before the rest. A train without
// mixing has no damper: it is mechanical when it cools, ventilating when its
// coils are shut.
func (b *Books) States() []State {
	return b.states.get(func() []State {
		fan := b.fanState()
		heat := b.coilAsked(trend.Preheat, trend.Heating, trend.Reheat)
		cool := b.coilAsked(trend.Cooling)
		damper := b.damperAsked()
		out := make([]State, b.n())
		for i := range out {
			out[i] = stateOf(fan.on[i], fan.known == nil || fan.known[i], heat[i], cool[i], damper[i])
		}
		return out
	})
}

func stateOf(on, known bool, heat, cool, damper asked) State {
	switch {
	case !known:
		return Unknown
	case !on:
		return Off
	case heat == yes && cool == yes:
		return HeatingAndCooling
	case heat == unknown || cool == unknown:
		return Unknown
	case damper == damperShut:
		return Recirculating
	case heat == yes:
		return Heating
	case damper == unknown:
		return Unknown
	case cool == yes && damper == damperOpen:
		return FreePlusMechanical
	case cool == yes:
		return Mechanical
	case damper == damperOpen:
		return FreeCooling
	}
	return Ventilating
}

// Settled is where the fan runs and what is asked of fan, coils and damper has
// not changed for the settling time. A part without any point is left out of
// the question (rules that need its command say so); a reading that goes missing
// breaks it.
func (b *Books) Settled() []bool {
	return b.settled.get(func() []bool {
		fan := b.fanState()
		heat := b.coilAsked(trend.Preheat, trend.Heating, trend.Reheat)
		cool := b.coilAsked(trend.Cooling)
		damper := b.damperAsked()
		gone := b.commandGone()
		out := make([]bool, b.n())
		wait := b.settlingIntervals()
		type code struct{ heat, cool, damper asked }
		var last code
		run := 0
		for i := range out {
			c := code{heat[i], cool[i], damper[i]}
			if !fan.on[i] || gone[i] {
				run = 0
			} else if run > 0 && c != last {
				run = 1
			} else {
				run++
			}
			last = c
			out[i] = run > wait
		}
		return out
	})
}

// commandGone is where a command that the unit has a point for is missing.
func (b *Books) commandGone() []bool {
	out := make([]bool, b.n())
	for _, c := range []trend.Component{trend.Mixing, trend.Preheat, trend.Heating, trend.Reheat, trend.Cooling} {
		if !b.has(c) {
			continue
		}
		for i, x := range b.Command(c) {
			if x != x {
				out[i] = true
			}
		}
	}
	return out
}

// How long the damper must hold a command for it to be a minimum, in one piece
// and in all.
const (
	minimumHeld  = 30 * time.Minute
	minimumTotal = 3 * time.Hour
	minimumBand  = 0.02
)

// MinDamper is the outdoor damper's minimum command, 0 to 1: the site's figure,
// else the lowest command over 2 % that was held within 2 % for half an hour at
// a time and three hours in all while the fan ran and the building was occupied.
// NaN where neither gives one.
func (b *Books) MinDamper() float64 {
	return b.minDamper.get(func() float64 {
		if m := b.u.Plant.MinDamper; m == m {
			return m
		}
		cmd := b.Command(trend.Mixing)
		if cmd == nil {
			return math.NaN()
		}
		on, occ := b.FanOn(), b.Occupied()
		held := b.u.Axis.Intervals(minimumHeld)
		type run struct {
			level float64
			n     int
		}
		var runs []run
		begin := 0
		lo, hi := math.Inf(1), math.Inf(-1)
		for i := 0; i <= len(cmd); i++ {
			if i < len(cmd) && on[i] && occ[i] && cmd[i] > shutAt {
				if l, h := min(lo, cmd[i]), max(hi, cmd[i]); h-l <= minimumBand {
					lo, hi = l, h
					continue
				}
			}
			if i-begin >= held {
				runs = append(runs, run{(lo + hi) / 2, i - begin})
			}
			begin, lo, hi = i+1, math.Inf(1), math.Inf(-1)
			if i < len(cmd) && on[i] && occ[i] && cmd[i] > shutAt {
				begin, lo, hi = i, cmd[i], cmd[i]
			}
		}
		slices.SortFunc(runs, func(a, b run) int {
			switch {
			case a.level < b.level:
				return -1
			case a.level > b.level:
				return 1
			}
			return 0
		})
		need := b.u.Axis.Intervals(minimumTotal)
		for k, r := range runs {
			total := 0
			var sum float64
			for _, x := range runs[k:] {
				if x.level > r.level+minimumBand {
					break
				}
				total += x.n
				sum += x.level * float64(x.n)
			}
			if total >= need {
				return sum / float64(total)
			}
		}
		return math.NaN()
	})
}
