package rules

import (
	"math"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var runsUnoccupied = &Rule{
	Name: "runs-unoccupied",
	Unit: "h",
	Harm: Wastes,
	Doc: Doc{
		Title: "Fan runs while nobody needs it",
		Text: "Counts the hours that the supply fan runs in each unoccupied stretch (a night, a weekend), leaving out the run-on after occupancy and the start before it, " +
			"which are questions of their own.",
		Formula: "effect = hours of fan in the unoccupied stretch, less run-on and start",
		When:    "unoccupied time",
		Says: "The fan ran for {effect} in a stretch in which nobody was in the building, {hours} hours in all, on {days} days; " +
			"an override, a wrong schedule or a night-time heating call would do this.",
		IfSo:   "it need not have run",
		Cannot: "Running that the night heating or cooling asked for, and uses of the building that the schedule does not know.",
		Sources: []string{
			"Common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		Roles:    []balance.Need{{What: "a sign that the fan runs", AnyOf: [][]trend.Role{{trend.SAFanStatus}, {trend.SAFanCmd}, {trend.SAFanSpeed}, {trend.SAFlow}, {trend.SAFanPower}}}},
		State:    true,
		Schedule: true,
	},
	Params: []Param{
		matters("h", 0.5, 0.1, 24, "shorter runs a night are purges or tests"),
		persist(30, "as long as what matters"),
		{Name: "run_on", Unit: "min", Default: 30, Min: 0, Max: 240, Why: "fans may run on to clear the building"},
		{Name: "start_early", Unit: "min", Default: 120, Min: 0, Max: 480, Why: "warm-up and pre-cooling; its length is a question of its own"},
	},
	Checks: []string{
		"Look for a manual override of the fan or of the occupied mode",
		"Compare the controller's schedule and clock with the hours of use",
		"See whether a night setback or freeze protection called for the fan",
	},
	Cause: "schedule or override",
	Cases: []Case{
		{"the fan runs every night", finding.Fault, month(synth.Marine, time.May, 1, synth.Fault{Kind: synth.RunsAtNight, Severity: 1})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"a laboratory without an unoccupied hour", finding.NotTestable, laboratory(synth.Marine, time.May, 3)},
	},
	Eval: func(p *Pass) []Evidence {
		on, occ := p.FanOn(), p.Occupied()
		known := p.Col(p.b.FanKnownBy())
		ax, n := p.Axis(), p.N()
		h := ax.Hours()
		after := int(time.Duration(p.Param("run_on")*float64(time.Minute)) / ax.Step)
		ahead := int(time.Duration(p.Param("start_early")*float64(time.Minute)) / ax.Step)
		s := &balance.Series{Name: "unoccupied_run_hours", Unit: "h", Val: nans(n), Off: make([]float64, n), Noise: make([]float64, n)}
		e := Evidence{Component: string(trend.Fan), Effect: s, Applies: make([]bool, n), Flags: make([]bool, n),
			Suspects: []string{"schedule", "sequence"}, Readings: []trend.Role{p.b.FanKnownBy(), trend.SATemp, trend.OATemp},
			What: "hours of fan in the unoccupied stretch", Pot: Running, Sees: p.Param(Matters) + h}
		for i := 0; i < n; {
			if occ[i] {
				i++
				continue
			}
			j := i
			for j < n && !occ[j] {
				j++
			}
			from, to := i+after, j-ahead
			if i == 0 {
				from = 0
			}
			if j == n {
				to = n
			}
			count := 0
			for k := from; k < to; k++ {
				if on[k] {
					count++
				}
			}
			ran := float64(count) * h
			for k := from; k < to; k++ {
				e.Applies[k] = true
				s.Noise[k] = h / math.Sqrt(3)
				if math.IsNaN(known[k]) {
					continue
				}
				s.Val[k] = ran
				e.Flags[k] = on[k] && ran > p.Param(Matters)
			}
			i = j
		}
		heat, cool := p.Duties()
		power := p.FanPower()
		if heat != nil || power != nil {
			e.Waste = func(i int, _ float64) Rate {
				var r Rate
				if heat != nil {
					r.Heat, r.Cool = heat[i], cool[i]
				}
				if power != nil {
					r.Motor = nz(power[i])
				}
				return r
			}
		}
		return []Evidence{e}
	},
	Cautions: []finding.Caution{finding.Ventilation},
}
