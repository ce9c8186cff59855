package rules

import (
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var freezeDanger = &Rule{
	Name: "freeze-danger",
	Unit: "K",
	Harm: Freezes,
	Doc: Doc{
		Title: "Air near freezing meets a water coil",
		Text: "Asks whether the air that meets the first water coil without protection comes near freezing while the fan runs: air leaving preheat where the unit has a preheat coil, " +
			"else mixed air, else outdoor air. A frozen coil bursts, so the reading itself counts, without waiting for certainty; and a pass is given only where the reading less its uncertainty stays above the limit.",
		Formula: "effect = limit − T",
		When:    "time with the fan on and a reading of the air that meets the first water coil",
		Says: "With the fan on, {from} at the first water coil was {effect} below the safe limit, for {hours} hours; " +
			"water in that coil can freeze and burst it.",
		Cannot: "A sensor that reads low, stratified air (colder in places than the sensor says), and a coil protected by glycol or by flow.",
		Sources: []string{
			"A limit a few kelvin above freezing for low-temperature cut-outs: common practice, no source",
		},
		Since: "0.1",
	},
	Needs: Needs{
		RolesFor: func(u *trend.Unit) []balance.Need {
			st, ok := firstWaterCoil(&u.Plant)
			if !ok {
				return nil
			}
			return []balance.Need{{What: "temperature of " + st.Title(), AnyOf: [][]trend.Role{{st.DryBulb()}}}}
		},
		State: true,
	},
	Params: []Param{
		matters("K", 0, 0, 5, "the limit itself is what matters"),
		persist(5, "minutes are enough to freeze a still coil"),
		{Name: "limit", Unit: "degC", Default: 4, Min: 0, Max: 12, Why: "leaves room for stratification above the freezing point"},
	},
	Checks: []string{
		"See that the low-temperature cut-out works and is reset; do not bypass it",
		"Look at preheat valve, hot-water supply and outdoor damper in these hours",
		"Compare the sensor with a traverse: stratified air is colder in places",
	},
	Cause:    "air near freezing at a water coil",
	Cautions: []finding.Caution{finding.Freezing, finding.Isolate, finding.HotSurfaces},
	Cases: []Case{
		{"preheat lost in frost, all outdoor air", finding.Fault, laboratory(synth.Cold, time.January, 1, synth.Fault{Kind: synth.PreheatFails, Severity: 1})},
		{"healthy", finding.Pass, month(synth.Marine, time.May, 2)},
		{"healthy in frost, with thermometers good to 8 K", finding.NotTestable, accurate(laboratory(synth.Cold, time.January, 3), 0.03, 8)},
	},
	Eval: func(p *Pass) []Evidence {
		st, ok := firstWaterCoil(p.Plant())
		if !ok {
			return p.None("the train has no water coil")
		}
		role := st.DryBulb()
		t := p.Reading(role)
		return []Evidence{{
			Component: role.String(), Effect: t.Scaled("freeze_danger", "K", -1, p.Param("limit")), Applies: p.FanOn(), Ungated: true,
			Suspects: []string{"preheat", "oa_damper", role.String()}, Readings: []trend.Role{role, trend.OATemp, trend.PreheatValve, trend.OADamper},
			Says: "With the fan on, {from} at the first water coil was {effect} below the safe limit of " + p.words.Value(p.Param("limit"), "degC", 2) +
				", for {hours} hours; water in that coil can freeze and burst it.",
			What: "limit less the temperature of " + st.Title(), From: st.Title(),
			Terms: []Term{{st.Title(), "degC", t.Val}, {"outdoor air", "degC", p.TempAt(trend.Outdoor)}},
		}}
	},
}

// firstWaterCoil is the station whose air meets the first water coil that
// nothing upstream protects; false where the train has no water coil.
func firstWaterCoil(pl *trend.Plant) (trend.Station, bool) {
	at := trend.Outdoor
	for _, c := range pl.Train {
		switch c {
		case trend.Mixing:
			at = trend.Mixed
		case trend.Recovery:
			at = trend.Recovered
		case trend.Preheat:
			at = trend.AfterPreheat
		case trend.Cooling:
			if pl.CoilKind[c] != "refrigerant" {
				return at, true
			}
			at = trend.AfterCooling
		case trend.Heating, trend.Reheat:
			if k := pl.CoilKind[c]; k == "" || k == "water" {
				return at, true
			}
			at = trend.AfterHeating
		}
	}
	return trend.NoStation, false
}
