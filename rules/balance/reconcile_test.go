package balance_test

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
)

// unitMonth draws a unit, a month and sensors: any climate, season and usual train.
func unitMonth(seed uint64, offsets synth.Offsets, faults ...synth.Fault) *synth.Run {
	return unitMonthAt(seed, 15*time.Minute, offsets, faults...)
}

func unitMonthAt(seed uint64, step time.Duration, offsets synth.Offsets, faults ...synth.Fault) *synth.Run {
	rng := rand.New(rand.NewPCG(seed, 77))
	trains := [][]trend.Component{
		{trend.Mixing, trend.Preheat, trend.Cooling, trend.Fan, trend.Heating},
		{trend.Mixing, trend.Heating, trend.Cooling, trend.Fan},
		{trend.Mixing, trend.Cooling, trend.Heating, trend.Fan},
		{trend.Mixing, trend.Preheat, trend.Cooling, trend.Heating, trend.Fan},
	}
	spec := synth.Spec{
		Seed: seed, Climate: synth.Climate(rng.IntN(5)), Days: 28, Step: step, Variable: rng.IntN(2) == 0,
		Start:   time.Date(2026, time.Month(1+rng.IntN(12)), 1, 0, 0, 0, 0, time.UTC),
		Plant:   trend.Plant{Train: trains[rng.IntN(len(trains))]},
		Sensors: synth.Realistic(), Faults: faults,
	}
	spec.Sensors.Offsets = offsets
	spec.Trended = synth.DefaultPoints(spec.Plant.Train, spec.Variable)
	if rng.IntN(2) == 0 { // humidity in the mixing box, which half of the units have
		spec.Trended = append(spec.Trended, trend.MARH)
	}
	if rng.IntN(3) == 0 {
		spec.Trended = append(spec.Trended, trend.OAFlow)
	}
	return synth.Simulate(spec)
}

// A month's reconciliation is honest about its uncertainty: over 240 random units,
// months and seeds whose sensors are out by normal offsets of standard deviation a/√3,
// 95 % intervals hold 92 to 98 % of the truths; with offsets uniform in ±a, at least 92 %.
// And no sensor is accused of what its band allows in more than 2 % of them.
func TestReconciliationIsHonest(t *testing.T) {
	if testing.Short() {
		t.Skip("480 simulated months")
	}
	for _, c := range []struct {
		name    string
		offsets synth.Offsets
		seeds   uint64
		lo, hi  float64
	}{{"normal", synth.Normal, 240, 0.92, 0.98}, {"rectangular", synth.Rectangular, 240, 0.92, 1}} {
		type tally struct {
			n, in     int
			z2, share float64
		}
		by := map[trend.Role]*tally{}
		all := &tally{}
		accused, untestable := 0, 0
		for seed := uint64(1); seed <= c.seeds; seed++ {
			run := unitMonth(seed, c.offsets)
			rec := balance.Keep(run.Unit()).Reconcile()
			if rec == nil {
				untestable++
				continue
			}
			if len(rec.Suspects) > 0 {
				accused++
			}
			for _, o := range rec.Offsets {
				w := by[o.Role]
				if w == nil {
					w = &tally{}
					by[o.Role] = w
				}
				truth := run.Offsets[o.Role]
				if o.Role.Kind() == trend.AirFlow { // a share of the reading, here of a mean one
					truth = o.Prior * run.Offsets[o.Role] / (0.10 / math.Sqrt(3))
				}
				z := (o.Val - truth) / o.U
				for _, w := range []*tally{w, all} {
					w.n++
					w.z2 += z * z
					w.share += o.Share
					if math.Abs(z) <= 1.96 {
						w.in++
					}
				}
			}
		}
		for r, w := range by {
			t.Logf("%s: %-8v %4d, %.1f %% within, rms %.2f, determined to %.2f", c.name, r, w.n, 100*float64(w.in)/float64(w.n), math.Sqrt(w.z2/float64(w.n)), w.share/float64(w.n))
		}
		in := float64(all.in) / float64(all.n)
		t.Logf("%s: %d offsets, %.1f %% within their 95 %% intervals, rms %.2f; %d of %d units accuse a sensor; %d without a balance", c.name, all.n, 100*in, math.Sqrt(all.z2/float64(all.n)), accused, c.seeds, untestable)
		if in < c.lo || in > c.hi {
			t.Errorf("%s: %.1f %% of offsets within their 95 %% intervals, want %.0f to %.0f", c.name, 100*in, 100*c.lo, 100*c.hi)
		}
		if float64(accused) > 0.02*float64(c.seeds) {
			t.Errorf("%s: %d of %d units accuse a sensor that is within its band", c.name, accused, c.seeds)
		}
	}
}

// A single sensor out by more than 2.5 bands is named first in at least 85 % of the
// units whose data determine it, and a wrong one is accused in under 2 %. Named first
// with alternates that cannot be told apart is no accusation of the first alone.
func TestReconciliationNamesTheSensor(t *testing.T) {
	if testing.Short() {
		t.Skip("240 simulated months")
	}
	roles := []trend.Role{trend.OATemp, trend.RATemp, trend.MATemp, trend.SATemp, trend.OARH, trend.RARH, trend.SARH}
	half := map[trend.Role]float64{trend.OATemp: 0.5, trend.RATemp: 0.5, trend.MATemp: 1, trend.SATemp: 0.5, trend.OARH: 0.05, trend.RARH: 0.03, trend.SARH: 0.03}
	determined, first, wrong, silent, total := 0, 0, 0, 0, 0
	missed := map[trend.Role]int{}
	for seed := uint64(1001); seed <= 1240; seed++ {
		rng := rand.New(rand.NewPCG(seed, 5))
		role := roles[int(seed)%len(roles)]
		bands := 2.5 + 1.5*rng.Float64()
		if rng.IntN(2) == 0 {
			bands = -bands
		}
		run := unitMonth(seed, synth.Rectangular, synth.Fault{Kind: synth.SensorOffset, Role: role, Severity: bands * half[role]})
		rec := balance.Keep(run.Unit()).Reconcile()
		if rec == nil {
			continue
		}
		total++
		var share float64
		for _, o := range rec.Held {
			if o.Role == role {
				share = o.Share
			}
		}
		named := trend.NoRole
		alone := false
		if len(rec.Suspects) > 0 {
			named, alone = rec.Suspects[0].Role, len(rec.Suspects[0].Alternates) == 0
		}
		if share >= 0.8 {
			determined++
			switch {
			case named == role:
				first++
			case named == trend.NoRole:
				silent++
				missed[role]++
			}
		}
		if named != trend.NoRole && named != role && alone {
			wrong++
			t.Logf("seed %d: %v out by %.1f bands, %v accused: test %.1f, %.1f bands, chi2 %.0f of %d", seed, role, bands, named, rec.Suspects[0].Test, rec.Suspects[0].Bands, rec.Chi2, rec.Dof)
		}
	}
	t.Logf("%d units, %d determine the sensor: named first in %d, nobody named in %d %v; a wrong one accused alone in %d of all", total, determined, first, silent, missed, wrong)
	if float64(first) < 0.85*float64(determined) {
		t.Errorf("named first in %d of %d", first, determined)
	}
	if float64(wrong) >= 0.02*float64(total) {
		t.Errorf("a wrong sensor accused in %d of %d", wrong, total)
	}
	if determined < 60 {
		t.Errorf("only %d units determine the sensor", determined)
	}
}

// What no sensor explains is named as what it is: a heating valve that passes is heat
// over its section, and a damper that does not open is return air that passes it.
func TestReconciliationNamesTheAssumption(t *testing.T) {
	for _, c := range []struct {
		fault synth.Fault
		want  string
	}{
		{synth.Fault{Kind: synth.HeatValvePasses, Severity: 0.25}, "heat gained or lost"},
		{synth.Fault{Kind: synth.DamperStuck, Severity: 0.3}, "outdoor damper wide open"},
	} {
		found := 0
		for seed := uint64(1); seed <= 12; seed++ {
			rec := balance.Keep(unitMonth(seed, synth.Rectangular, c.fault).Unit()).Reconcile()
			if rec == nil {
				continue
			}
			for _, s := range rec.Suspects {
				named := strings.Contains(s.What, c.want)
				for _, a := range s.Alternates {
					named = named || strings.Contains(a.What, c.want)
				}
				if named {
					found++
					break
				}
			}
		}
		t.Logf("%+v: named in %d of 12", c.fault, found)
		if found < 4 { // some months never shut the coils or open the damper
			t.Errorf("%+v: named in %d of 12", c.fault, found)
		}
	}
}

// A unit without balances that must close has no reconciliation; one without sensors'
// disagreement accuses nobody and closes.
func TestReconciliationOfTheTruth(t *testing.T) {
	run := unitMonth(5, synth.NoOffsets)
	rec := balance.Keep(run.Unit()).Reconcile()
	if rec == nil || len(rec.Suspects) > 0 || rec.P < 0.01 {
		t.Fatalf("readings without offsets: %+v", rec)
	}
	for _, o := range rec.Offsets {
		if math.Abs(o.Val) > 2*o.U+0.3*o.Prior || o.U > o.Prior*1.0001 || o.Share < 0 || o.Share > 1 {
			t.Errorf("%+v of a sensor without an offset", o)
		}
	}
	u := run.Unit()
	for r := range u.Cols {
		if role := trend.Role(r); role != trend.OATemp && role != trend.SAFanStatus {
			u.Cols[r] = nil
		}
	}
	if rec := balance.Keep(u).Reconcile(); rec != nil {
		t.Errorf("one temperature cannot close anything: %+v", rec)
	}
}

// BenchmarkReconcile reconciles a month at 5 min whose balances have been struck.
func BenchmarkReconcile(b *testing.B) {
	u := unitMonthAt(3, 5*time.Minute, synth.Rectangular).Unit()
	for b.Loop() {
		b.StopTimer()
		books := balance.Keep(u)
		for _, d := range balance.Defs() {
			books.Get(d)
		}
		b.StartTimer()
		books.Reconcile()
	}
}
