package synth

import (
	"math"
	"reflect"
	"slices"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

var monday = time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC)

func TestSameSpecSameRun(t *testing.T) {
	spec := Spec{Seed: 5, Days: 3, Sensors: Realistic(), Variable: true}
	a, b := Simulate(spec), Simulate(spec)
	if !reflect.DeepEqual(a.Read, b.Read) || !reflect.DeepEqual(a.True, b.True) {
		t.Error("two runs of one spec differ")
	}
	spec.Seed = 6
	if reflect.DeepEqual(a.Read[trend.SATemp].Val, Simulate(spec).Read[trend.SATemp].Val) {
		t.Error("another seed gave the same supply temperatures")
	}
}

// What is trended changes no reading, so that taking a point away tests that and
// nothing else.
func TestPointsDoNotDisturb(t *testing.T) {
	spec := Spec{Seed: 5, Days: 2, Sensors: Realistic()}
	all := Simulate(spec)
	spec.Trended = []trend.Role{trend.SATemp, trend.OARH}
	few := Simulate(spec)
	if got := few.Unit().Roles(); !slices.Equal(got, spec.Trended) {
		t.Fatalf("trended %v", got)
	}
	for _, r := range spec.Trended {
		if !slices.Equal(all.Read[r].Val, few.Read[r].Val) {
			t.Errorf("%v reads otherwise when fewer points are trended", r)
		}
	}
}

func TestDefaultPoints(t *testing.T) {
	for name, train := range trains {
		r := Simulate(Spec{Seed: 1, Days: 1, Plant: trend.Plant{Train: train}, Sensors: Realistic()})
		n := len(r.Unit().Roles())
		least := 24
		if name == "neither coil" {
			least = 18
		}
		if n < least {
			t.Errorf("%s: %d points", name, n)
		}
		for _, role := range r.Spec.Trended {
			c := r.Read[role]
			if c == nil {
				t.Errorf("%s: %v is asked for and not trended", name, role)
				continue
			}
			for i, v := range c.Val {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%s: %v is %v at %d", name, role, v, i)
				}
			}
		}
	}
}

// Sensors without errors read the truth.
func TestPerfectSensors(t *testing.T) {
	r := Simulate(Spec{Seed: 8, Days: 2})
	for _, c := range []struct {
		role trend.Role
		want []float64
	}{
		{trend.OATemp, r.True.T[trend.Outdoor]}, {trend.MATemp, r.True.T[trend.Mixed]}, {trend.CCTemp, r.True.T[trend.AfterCooling]},
		{trend.SATemp, r.True.T[trend.Supply]}, {trend.RATemp, r.True.T[trend.Return]},
	} {
		if !slices.Equal(r.Read[c.role].Val, c.want) {
			t.Errorf("%v is not the truth", c.role)
		}
	}
	air := r.Air()
	for i, rh := range r.Read[trend.SARH].Val {
		near(t, "supply moisture", air.HumRatio(r.True.T[trend.Supply][i], rh), r.True.W[trend.Supply][i], 1e-12)
	}
}

// Offsets stay within the maker's band and spread as they should: a rectangle
// of half-width a has standard deviation a/√3 (JCGM 100:2008, 4.3.7).
func TestOffsets(t *testing.T) {
	for _, kind := range []Offsets{Rectangular, Normal} {
		var sum, sq, most float64
		const units = 400
		for seed := range uint64(units) {
			r := Simulate(Spec{Seed: seed, WeatherSeed: 1, Days: 1, Step: time.Hour, Trended: []trend.Role{trend.OATemp}, Sensors: SensorModel{Offsets: kind}})
			d := r.Read[trend.OATemp].Val[3] - r.True.T[trend.Outdoor][3]
			near(t, "offset over the day", r.Read[trend.OATemp].Val[20]-r.True.T[trend.Outdoor][20], d, 1e-12)
			sum += d
			sq += d * d
			most = math.Max(most, math.Abs(d))
		}
		// Four standard errors of a mean and of a standard deviation of 400.
		near(t, "mean offset, K", sum/units, 0, 4*0.29/20)
		near(t, "standard deviation, K", math.Sqrt(sq/units), 0.5/math.Sqrt(3), 4*0.29/math.Sqrt(2*units))
		if kind == Rectangular && (most > 0.5 || most < 0.48) {
			t.Errorf("the largest of 400 offsets is %.3f K; the band is 0.5 K", most)
		}
	}
}

func TestNoiseAndResolution(t *testing.T) {
	spec := Spec{Seed: 2, Days: 7, Sensors: SensorModel{Noise: true}}
	r := Simulate(spec)
	var sq float64
	for i, v := range r.Read[trend.OATemp].Val {
		sq += math.Pow(v-r.True.T[trend.Outdoor][i], 2)
	}
	near(t, "noise, K", math.Sqrt(sq/float64(r.Axis.N)), 0.07, 0.005)
	spec.Sensors = SensorModel{Quantise: true}
	for _, c := range Simulate(spec).Unit().Cols {
		if c == nil {
			continue
		}
		for _, v := range c.Val {
			if k := v / c.Resolution; math.Abs(k-math.Round(k)) > 1e-6 {
				t.Fatalf("%v reads %v, resolution %v", c.Role, v, c.Resolution)
			}
		}
	}
}

// The weather stays within what air can be, near the climate's own month, and
// its seed belongs to the site.
func TestWeather(t *testing.T) {
	for _, c := range Climates() {
		for month := time.January; month <= time.December; month += 3 {
			var mean float64
			const years = 12
			for seed := range uint64(years) {
				r := Simulate(Spec{Seed: 100 + seed, Climate: c, Start: time.Date(2026, month, 1, 0, 0, 0, 0, time.UTC), Days: 28, Step: time.Hour})
				air := r.Air()
				for i, x := range r.True.T[trend.Outdoor] {
					w := r.True.W[trend.Outdoor][i]
					if rh := air.RelHumidity(x, w); !(rh > 0.02 && rh <= 1) {
						t.Fatalf("%v, %v: %.1f degC at %.3f RH", c, month, x, rh)
					}
					mean += x / float64(years*r.Axis.N)
				}
			}
			// The synoptic process has some nine independent values a month: four
			// standard errors of twelve months' mean, and half a kelvin for the
			// month's own slope and the shape of the day.
			want := climates[c].temp[month-1]
			near(t, c.String()+" "+month.String()+", degC", mean, want, 4*climates[c].synoptic/math.Sqrt(9*years)+0.5)
		}
	}
	a := Simulate(Spec{Seed: 1, WeatherSeed: 9, Days: 2})
	b := Simulate(Spec{Seed: 2, WeatherSeed: 9, Days: 2})
	if !slices.Equal(a.True.T[trend.Outdoor], b.True.T[trend.Outdoor]) {
		t.Error("units of one site have different weather")
	}
}

// The unit runs by its schedule, starts ahead of it with its outdoor damper
// shut, and holds its supply temperature while it is in its stride.
func TestControls(t *testing.T) {
	for _, variable := range []bool{false, true} {
		r := Simulate(Spec{Seed: 4, Days: 14, Variable: variable})
		var errs []float64
		for i, m := range r.True.Flow {
			at := r.Axis.At(i)
			occ := r.Spec.Schedule.Occupied(at)
			soon := r.Spec.Schedule.Occupied(at.Add(lead))
			if on := m > 0; on != (occ || soon) {
				t.Fatalf("%v: fan on %v, occupied %v", at, on, occ)
			}
			if soon && !occ && i > 2 && r.True.Flow[i-1] > 0 && r.True.Position[i] > 0.05 {
				t.Errorf("%v: warm-up with the damper at %.2f", at, r.True.Position[i])
			}
			if occ && at.Hour() >= 10 {
				errs = append(errs, math.Abs(r.Read[trend.SATemp].Val[i]-r.Read[trend.SATempSP].Val[i]))
			}
		}
		slices.Sort(errs)
		if q := errs[len(errs)*9/10]; q > 1 {
			t.Errorf("variable %v: supply temperature is off its setpoint by %.2f K or more in a tenth of the hours", variable, q)
		}
	}
}

// After a wet coil's valve shuts the air takes its water back for some minutes,
// and then no more.
func TestWetCoilDries(t *testing.T) {
	r := Simulate(Spec{Seed: 3, Climate: HumidSubtropical, Start: time.Date(2026, 4, 20, 0, 0, 0, 0, time.UTC), Days: 14, Step: time.Minute, Schedule: Always()})
	p := r.True.Part(trend.Cooling)
	cmd := r.Read[trend.CoolValve].Val
	gained, late := 0.0, 0.0
	shut := 0
	for i := range p.Water {
		if shut++; cmd[i] > 0 {
			shut = 0
		}
		if p.Water[i] > 0 {
			gained += p.Water[i] * 60
			if shut > 60 {
				late += p.Water[i] * 60
			}
		}
	}
	if gained < 1 {
		t.Errorf("the coil gave %.2f kg back in a fortnight", gained)
	}
	if late > 0.05*gained {
		t.Errorf("%.2f of %.2f kg came back more than an hour after the valve had shut", late, gained)
	}
}

func TestPanicsAtNonsense(t *testing.T) {
	for name, s := range map[string]Spec{
		"step":                {Step: 7 * time.Minute},
		"climate":             {Climate: numClimates},
		"component":           {Plant: trend.Plant{Train: []trend.Component{"wheelbarrow"}}},
		"component twice":     {Plant: trend.Plant{Train: []trend.Component{trend.Fan, trend.Fan}}},
		"coil before mixing":  {Plant: trend.Plant{Train: []trend.Component{trend.Preheat, trend.Mixing}}},
		"fault without coil":  {Plant: trend.Plant{Train: []trend.Component{trend.Mixing, trend.Fan}}, Faults: []Fault{{Kind: CoolValvePasses}}},
		"fault without role":  {Faults: []Fault{{Kind: SensorFrozen}}},
		"damper beyond range": {Faults: []Fault{{Kind: DamperStuck, Severity: 40}}},
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			Simulate(s)
		}()
	}
}

func BenchmarkSimulate(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		Simulate(Spec{Seed: 1, Variable: true, Sensors: Realistic()})
	}
}
