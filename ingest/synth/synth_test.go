package synth

import (
	"math"
	"slices"
	"testing"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

func officeSpec(seed uint64, climate string, month time.Month, faults ...Fault) Spec {
	return Spec{Name: "AHU-1", Seed: seed, Start: time.Date(2026, month, 1, 0, 0, 0, 0, time.UTC), Days: 28, Step: 5 * time.Minute,
		Climate: ClimateNamed(climate), Plant: OfficePlant(), Schedule: OfficeSchedule(), Sensors: Real, Faults: faults}
}

// The plant's own true states conserve energy and water at mixing and through
// every component.
func TestConservation(t *testing.T) {
	humid := OfficePlant()
	humid.Train = []trend.Component{trend.Mixing, trend.Preheat, trend.Heating, trend.Cooling, trend.Humidify, trend.Fan}
	humid.Humidifier = 0.004
	all := OfficePlant()
	all.Train = []trend.Component{trend.Preheat, trend.Cooling, trend.Fan, trend.Heating}
	for _, pl := range []Plant{OfficePlant(), humid, all} {
		for _, c := range Climates() {
			for _, month := range []time.Month{time.January, time.July} {
				s := officeSpec(3, c.Name, month, Fault{Kind: MoistureLeak, Severity: 1}, Fault{Kind: CarryOver, Severity: 0.5})
				s.Plant, s.Days = pl, 7
				r := Simulate(s)
				air := psy.Model{P: 101325}
				ran := 0
				for i, tr := range r.Truth {
					if !tr.On {
						continue
					}
					ran++
					if slices.Contains(pl.Train, trend.Mixing) {
						h := tr.Fraction*tr.Outdoor.H + (1-tr.Fraction)*tr.Return.H
						w := tr.Fraction*tr.Outdoor.W + (1-tr.Fraction)*tr.Return.W
						if math.Abs(h-air.Enthalpy(tr.Mixed.T, tr.Mixed.W)) > 1e-9*math.Max(1, math.Abs(h)) || math.Abs(w-tr.Mixed.W) > 1e-12 {
							t.Fatalf("%s step %d: mixing does not close", c.Name, i)
						}
					}
					h, w := tr.Mixed.H, tr.Mixed.W
					for _, f := range tr.Fluxes {
						h += f.Heat + f.Water*f.WaterH
						w += f.Water
					}
					end := air.Enthalpy(tr.Supply.T, tr.Supply.W)
					if math.Abs(h-end) > 1e-9*math.Max(1, math.Abs(h)) || math.Abs(w-tr.Supply.W) > 1e-12 {
						t.Fatalf("%s %v step %d: %v kJ/kg and %v kg/kg booked, %v and %v there", c.Name, month, i, h, w, end, tr.Supply.W)
					}
				}
				if ran < 500 {
					t.Fatalf("%s: the unit ran in %d steps only", c.Name, ran)
				}
			}
		}
	}
}

func TestSameSpecSameTrends(t *testing.T) {
	s := officeSpec(7, "marine", time.April)
	s.Days = 3
	a, b := Simulate(s), Simulate(s)
	for role := range a.Read {
		if !slices.Equal(a.Read[role], b.Read[role]) {
			t.Errorf("%s differs between two runs", trend.Role(role))
		}
	}
	s.Seed++
	if c := Simulate(s); slices.Equal(a.Read[trend.OATemp], c.Read[trend.OATemp]) {
		t.Error("another seed gives the same weather")
	}
}

// A healthy unit behaves like one: supply near its setpoint, every sequence
// visited over the year, air that can exist.
func TestHealthyUnitIsPlausible(t *testing.T) {
	for _, c := range Climates() {
		for _, month := range []time.Month{time.January, time.April, time.July} {
			s := officeSpec(11, c.Name, month)
			s.Sensors = Sensors{}
			r := Simulate(s)
			var off []float64
			for i, tr := range r.Truth {
				for _, st := range []State{tr.Outdoor, tr.Return, tr.Mixed, tr.Supply} {
					if !(st.T > -50 && st.T < 60 && st.W > 0 && st.W < 0.05) {
						t.Fatalf("%s %v step %d: %+v", c.Name, month, i, tr)
					}
				}
				if tr.On && i > 30 && r.Truth[i-24].On {
					off = append(off, math.Abs(tr.Supply.T-setpoint(tr.Outdoor.T)))
				}
			}
			slices.Sort(off)
			if med := off[len(off)/2]; med > 0.7 {
				t.Errorf("%s %v: supply is %.2f K from its setpoint half of the time", c.Name, month, med)
			}
			if p := off[len(off)*9/10]; p > 4 {
				t.Errorf("%s %v: supply is %.2f K from its setpoint a tenth of the time", c.Name, month, p)
			}
		}
	}
}

func TestFaultsAreBooked(t *testing.T) {
	kinds := []FaultKind{RHScaled, RHPinned, Frozen, MoistureLeak, CarryOver, DamperStuck, DamperLeaks, HeatValvePasses, CoolValvePasses, EconomizerOff, RunsAtNight, PreheatFails}
	for _, k := range kinds {
		if (Fault{Kind: k}).Rule() == "" {
			t.Errorf("%s has no rule", k)
		}
	}
	half := time.Date(2026, time.April, 15, 0, 0, 0, 0, time.UTC)
	s := officeSpec(5, "marine", time.April, Fault{Kind: DamperStuck, Severity: 0.5, From: half})
	healthy := officeSpec(5, "marine", time.April)
	a, b := Simulate(s), Simulate(healthy)
	before, after := 0.0, 0.0
	for i := range a.Truth {
		d := math.Abs(a.Truth[i].Fraction - b.Truth[i].Fraction)
		if a.Axis.At(i).Before(half) {
			before = math.Max(before, d)
		} else {
			after = math.Max(after, d)
		}
	}
	if before != 0 || after < 0.2 {
		t.Errorf("fraction moved by %v before and %v after the fault's start", before, after)
	}
}

func BenchmarkSimulateMonth(b *testing.B) {
	s := officeSpec(1, "marine", time.April)
	for b.Loop() {
		Simulate(s)
	}
}
