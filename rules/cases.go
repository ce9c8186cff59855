package rules

import (
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
)

// Makers of the units that rules are tried on: two weeks of a simulated unit
// with noisy, rounded and lagging sensors whose offsets are drawn within their
// bands.

func spec(c synth.Climate, m time.Month, seed uint64, faults []synth.Fault) synth.Spec {
	return synth.Spec{Seed: seed, Start: day(m, 1), Days: 14, Climate: c, Sensors: synth.Realistic(), Variable: true, Faults: faults}
}

func day(m time.Month, d int) time.Time { return time.Date(2026, m, d, 0, 0, 0, 0, time.UTC) }

func month(c synth.Climate, m time.Month, seed uint64, faults ...synth.Fault) func() *trend.Unit {
	return func() *trend.Unit { return synth.Simulate(spec(c, m, seed, faults)).Unit() }
}

// humidified is a unit with a humidifier at its end.
func humidified(c synth.Climate, m time.Month, seed uint64, faults ...synth.Fault) func() *trend.Unit {
	return func() *trend.Unit {
		s := spec(c, m, seed, faults)
		s.Plant.Train = append(trend.DefaultTrain(), trend.Humidify)
		return synth.Simulate(s).Unit()
	}
}

// laboratory is a unit on outdoor air alone that never rests.
func laboratory(c synth.Climate, m time.Month, seed uint64, faults ...synth.Fault) func() *trend.Unit {
	return func() *trend.Unit {
		s := spec(c, m, seed, faults)
		s.Plant.Train = []trend.Component{trend.Preheat, trend.Cooling, trend.Fan, trend.Heating}
		s.Schedule = synth.Always()
		return synth.Simulate(s).Unit()
	}
}

// accurate states the sensors' accuracy: relative humidity as a fraction, and
// every temperature in K.
func accurate(mk func() *trend.Unit, rh, temp float64) func() *trend.Unit {
	return func() *trend.Unit {
		u := mk()
		u.Site.AccuracyByKind = map[trend.Kind]trend.Band{trend.RelHumidity: {HalfWidth: rh}, trend.Temperature: {HalfWidth: temp}}
		u.Site.AccuracyByRole = map[trend.Role]trend.Band{trend.MATemp: {HalfWidth: temp}, trend.OARH: {HalfWidth: rh}}
		return u
	}
}

// only keeps the named points.
func only(mk func() *trend.Unit, roles ...trend.Role) func() *trend.Unit {
	return func() *trend.Unit {
		u := mk()
		var cols [trend.NumRoles]*trend.Column
		for _, r := range roles {
			cols[r] = u.Cols[r]
		}
		u.Cols = cols
		return u
	}
}
