package synth_test

import (
	"context"
	"encoding/csv"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"dewledger/ingest"
	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// judge lists the rules that find a fault in the unit.
func judge(u *trend.Unit) []string {
	var out []string
	for _, c := range rules.Run(context.Background(), balance.Keep(u), rules.Options{}).Coverage {
		if c.Verdict == finding.Fault {
			out = append(out, c.Rule)
		}
	}
	return out
}

// expect reads truth.csv: the rules that should speak on each unit, none for a
// healthy one.
func expect(t *testing.T, dir string) map[string][]string {
	t.Helper()
	f, err := os.Open(filepath.Join(dir, "truth.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	out := map[string][]string{}
	for _, r := range rows[1:] {
		out[r[0]] = append(out[r[0]], r[2])
	}
	return out
}

// found reads a site from disk as a user's run does, and holds what the rules
// say against the truth beside it: each fault by the rule that should name it,
// nothing on a healthy unit, no note about the input.
func found(t *testing.T, dir string) {
	t.Helper()
	ctx := context.Background()
	want := expect(t, dir)
	in, err := ingest.Read(ctx, ingest.Options{Paths: []string{dir}})
	if err != nil {
		t.Fatal(err)
	}
	for _, n := range in.Notes {
		t.Errorf("note %s: %s", n.Code, n.Text)
	}
	if len(in.Units) != len(want) {
		t.Errorf("%d units are read, %d written", len(in.Units), len(want))
	}
	for i := range in.Units {
		u, _, err := in.Load(ctx, i)
		if err != nil {
			t.Fatal(err)
		}
		for _, n := range u.Notes {
			t.Errorf("%s: note %s: %s", u.Name, n.Code, n.Text)
		}
		got := judge(u)
		for _, rule := range want[u.Name] {
			if rule == "" && len(got) > 0 {
				t.Errorf("%s is healthy, and %v speak", u.Name, got)
			}
			if rule != "" && !slices.Contains(got, rule) {
				t.Errorf("%s: %s is silent; %v speak", u.Name, rule, got)
			}
		}
	}
}

func TestDemoIsFound(t *testing.T) {
	for _, format := range []string{"csv", "parquet"} {
		dir := filepath.Join(t.TempDir(), "demo")
		if err := synth.WriteSite(context.Background(), dir, synth.SiteOptions{Format: format}); err != nil {
			t.Fatal(err)
		}
		found(t, dir)
	}
}

func TestExamplesAreFound(t *testing.T) {
	for _, s := range synth.Stories() {
		found(t, filepath.Join("..", "..", "examples", s.Name))
	}
}

// Every kind of fault that the demo can write, by name of its rule. The healthy
// units are left out here: at k = 2 a rule speaks on a healthy month now and
// then.
func TestEveryDemoFaultIsFound(t *testing.T) {
	if testing.Short() {
		t.Skip("a month of a score of units")
	}
	seen := map[synth.FaultKind]bool{}
	for i := range synth.DemoKinds() {
		s, err := synth.DemoUnit(synth.SiteOptions{Count: synth.DemoKinds()}, i)
		if err != nil {
			t.Fatal(err)
		}
		for _, f := range s.Faults {
			seen[f.Kind] = true
			if got := judge(synth.Simulate(s).Unit()); !slices.Contains(got, f.Rule()) {
				t.Errorf("%s, %s: %s is silent; %v speak", s.Name, f.Kind, f.Rule(), got)
			}
		}
	}
	for _, k := range synth.FaultKinds() {
		if !seen[k.Kind] {
			t.Errorf("no unit of the demo has the fault %s", k.Name)
		}
	}
}

// Every rule that a fault names is in the catalogue.
func TestRulesExist(t *testing.T) {
	for _, k := range synth.FaultKinds() {
		if rules.Find(k.Rule) == nil {
			t.Errorf("fault %s names the rule %s, which there is not", k.Name, k.Rule)
		}
	}
}

// Column names are understood without a points schedule, whichever style they
// are written in.
func TestNamesAreUnderstood(t *testing.T) {
	ctx := context.Background()
	for _, train := range [][]trend.Component{
		nil,
		{trend.Preheat, trend.Cooling, trend.Heating, trend.Fan},
		{trend.Recovery, trend.Mixing, trend.Cooling, trend.Humidify, trend.Heating, trend.Fan},
	} {
		for _, h := range []synth.Header{synth.RoleNames, synth.TradeSI, synth.TradeIP} {
			r := synth.Simulate(synth.Spec{Seed: 1, Days: 7, Variable: true, Plant: trend.Plant{Train: train}, Sensors: synth.Realistic()})
			name := filepath.Join(t.TempDir(), "AHU-1.csv")
			f, err := os.Create(name)
			if err != nil {
				t.Fatal(err)
			}
			if err := r.WriteCSV(f, h); err != nil {
				t.Fatal(err)
			}
			if err := f.Close(); err != nil {
				t.Fatal(err)
			}
			in, err := ingest.Read(ctx, ingest.Options{Paths: []string{name}})
			if err != nil {
				t.Fatal(err)
			}
			u, _, err := in.Load(ctx, 0)
			if err != nil {
				t.Fatal(err)
			}
			for role, c := range r.Read {
				switch {
				case c == nil:
				case u.Cols[role] == nil:
					t.Errorf("style %d: %v is not found", h, trend.Role(role))
				default: // half a last digit apart, and a little for conversion
					for i, v := range c.Val {
						if d := u.Cols[role].Val[i] - v; !(d < 0.6*step(trend.Role(role)) && d > -0.6*step(trend.Role(role))) {
							t.Fatalf("style %d: %v reads %v, was written from %v", h, trend.Role(role), u.Cols[role].Val[i], v)
						}
					}
				}
			}
		}
	}
}

// step is the coarsest last digit that any style writes a role's kind with, in
// the canonical unit.
func step(r trend.Role) float64 {
	switch r.Kind() {
	case trend.RelHumidity, trend.Position:
		return 0.001
	case trend.AirFlow:
		return 0.01
	case trend.Power:
		return 0.01
	case trend.Pressure, trend.Concentration, trend.Switch:
		return 1
	}
	return 0.1
}
