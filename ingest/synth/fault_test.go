package synth

import (
	"math"
	"slices"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

func TestFaultTable(t *testing.T) {
	names := map[string]bool{}
	for i, f := range FaultKinds() {
		if f.Kind != FaultKind(i+1) || f.Name == "" || f.Means == "" || f.Typical == 0 || f.Rule == "" {
			t.Errorf("fault %d is not told in full: %+v", i+1, f)
		}
		if names[f.Name] {
			t.Errorf("two faults are named %s", f.Name)
		}
		names[f.Name] = true
	}
}

// Nothing differs before a fault begins; something does after.
func TestFaultsBegin(t *testing.T) {
	train := []trend.Component{trend.Mixing, trend.Preheat, trend.Cooling, trend.Humidify, trend.Fan, trend.Heating}
	from := monday.AddDate(0, 0, 2)
	spec := Spec{Seed: 4, Start: monday, Days: 5, Plant: trend.Plant{Train: train}, Sensors: Realistic(), Climate: Continental}
	cool := Simulate(spec)
	spec.Climate = HotDry
	hot := Simulate(spec)
	whole := cool
	at := whole.Axis.Index(from)
	for _, f := range everyFault(train, from) {
		spec.Climate, whole = Continental, cool
		switch f.Kind {
		case PreheatFails:
			continue // behind a mixing box the coil has nothing to do in March
		case CarryOver:
			spec.Climate, whole = HotDry, hot // the cooling coil must run
		case SensorCeiling:
			f.Role, f.Severity = trend.OARH, 0.5 // these days are dry
		}
		spec.Faults = []Fault{f}
		r := Simulate(spec)
		same, differs := true, false
		for role := range r.Read {
			if r.Read[role] == nil {
				continue
			}
			a, b := whole.Read[role].Val, r.Read[role].Val
			same = same && slices.Equal(a[:at], b[:at])
			differs = differs || !slices.Equal(a[at:], b[at:])
		}
		if !same {
			t.Errorf("%v: a reading differs before the fault begins", f.Kind)
		}
		if !differs {
			t.Errorf("%v: no reading differs after it began", f.Kind)
		}
		if r.True.T[trend.Outdoor][at+5] != whole.True.T[trend.Outdoor][at+5] {
			t.Errorf("%v changes the weather", f.Kind)
		}
	}
}

// What each fault does to the truth, in the unit of its severity.
func TestSeverities(t *testing.T) {
	train := []trend.Component{trend.Mixing, trend.Heating, trend.Cooling, trend.Humidify, trend.Fan}
	run := func(c Climate, f Fault) *Run {
		return Simulate(Spec{Seed: 4, Start: monday, Days: 5, Plant: trend.Plant{Train: train}, Climate: c, Faults: []Fault{f}})
	}
	eachOn := func(r *Run, check func(i int)) {
		n := 0
		for i, m := range r.True.Flow {
			if m > 0 && i > 0 && r.True.Flow[i-1] > 0 {
				check(i)
				n++
			}
		}
		if n < 100 {
			t.Fatalf("%v: the fan ran in %d intervals", r.Spec.Faults[0].Kind, n)
		}
	}
	r := run(Marine, Fault{Kind: CoilLeak, Severity: 2})
	eachOn(r, func(i int) {
		fullOr(t, r, r.True.Part(trend.Heating), i, 2)
	})
	r = run(Marine, Fault{Kind: DamperStuck, Severity: 0.6})
	eachOn(r, func(i int) { near(t, "position", r.True.Position[i], 0.6, 0) })
	r = run(Marine, Fault{Kind: DamperLeaks, Severity: 0.3})
	eachOn(r, func(i int) {
		if r.True.Position[i] < 0.001 {
			near(t, "share shut", r.True.Fraction[i], 0.3, 0.001)
		}
	})
	r = run(Marine, Fault{Kind: EconomizerOff, Severity: 1})
	least := slices.Max(r.Read[trend.OADamper].Val)
	if f := slices.Max(r.True.Fraction); math.Abs(f-0.2) > 0.01 {
		t.Errorf("an economizer that is off takes a share of %.3f at command %.2f", f, least)
	}
	r = run(Marine, Fault{Kind: HeatValvePasses, Severity: 0.2})
	eachOn(r, func(i int) {
		p := r.True.Part(trend.Heating)
		// A fifth of 0.35·(60 − T_in): effectiveness times the approach.
		if r.Read[trend.HeatValve].Val[i] == 0 && r.Read[trend.HeatValve].Val[i-1] == 0 {
			if rise := p.TOut[i] - p.TIn[i]; rise < 0.19*0.35*(60-p.TIn[i]) {
				t.Errorf("a passing valve warms air of %.1f degC by %.2f K", p.TIn[i], rise)
			}
		}
	})
	r = run(HotDry, Fault{Kind: HumidifierPasses, Severity: 1.5})
	eachOn(r, func(i int) {
		if r.Read[trend.Humidifier].Val[i] == 0 && r.Read[trend.Humidifier].Val[i-1] == 0 {
			fullOr(t, r, r.True.Part(trend.Humidify), i, 1.5)
		}
	})
}

// fullOr checks that a part adds so much moisture, or as much as the air takes.
func fullOr(t *testing.T, r *Run, p *Part, i int, want float64) {
	t.Helper()
	gain := 1000 * (p.WOut[i] - p.WIn[i])
	full := r.Air().RelHumidity(p.TOut[i], p.WOut[i]) > fullest-1e-3
	if !full && math.Abs(gain-want) > 0.01 || gain > want+0.01 || gain < 0 {
		t.Fatalf("%s adds %.3f g/kg, want %.1f; the air leaves at %.3f RH", p.Component, gain, want, r.Air().RelHumidity(p.TOut[i], p.WOut[i]))
	}
}

func TestReadingFaults(t *testing.T) {
	run := func(role trend.Role, f Fault) (bad, good []float64) {
		f.Role, f.From = role, monday.AddDate(0, 0, 1)
		spec := Spec{Seed: 4, Start: monday, Days: 3, Sensors: SensorModel{Noise: true}}
		g := Simulate(spec)
		spec.Faults = []Fault{f}
		r := Simulate(spec)
		k := g.Axis.Index(f.From)
		return r.Read[role].Val[k:], g.Read[role].Val[k:]
	}
	bad, good := run(trend.OATemp, Fault{Kind: SensorOffset, Severity: -2})
	for i := range bad {
		near(t, "offset", bad[i]-good[i], -2, 1e-9)
	}
	bad, good = run(trend.OARH, Fault{Kind: SensorScale, Severity: 1.5})
	for i := range bad {
		near(t, "scale", bad[i], 1.5*good[i], 1e-9)
	}
	bad, good = run(trend.OARH, Fault{Kind: SensorCeiling, Severity: 0.8})
	for i := range bad {
		near(t, "ceiling", bad[i], math.Min(good[i], 0.8), 1e-9)
	}
	bad, good = run(trend.OATemp, Fault{Kind: SensorFrozen, Severity: 1})
	for i := range bad {
		near(t, "frozen", bad[i], good[0], 1e-9)
	}
}

// The fan's nights: all of them at severity 1, none at 0, and some between.
func TestRunsAtNight(t *testing.T) {
	nights := func(severity float64) int {
		r := Simulate(Spec{Seed: 9, Start: monday, Days: 28, Step: time.Hour, Faults: []Fault{{Kind: RunsAtNight, Severity: severity}}})
		n := 0
		for i, m := range r.True.Flow {
			if r.Axis.At(i).Hour() == 2 && m > 0 {
				n++
			}
		}
		return n
	}
	if got := nights(1); got != 28 {
		t.Errorf("severity 1: %d of 28 nights", got)
	}
	if got := nights(1e-9); got != 0 {
		t.Errorf("severity near 0: %d nights", got)
	}
	if got := nights(0.5); got < 6 || got > 22 { // three standard deviations of 28 throws
		t.Errorf("severity 0.5: %d of 28 nights", got)
	}
}
