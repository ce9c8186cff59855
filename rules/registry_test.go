package rules

import (
	"os"
	"regexp"
	"strings"
	"testing"

	"dewledger/ingest/trend"
	"dewledger/rules/finding"
)

// The form of every rule, so that the thirtieth is written like the first.
func TestRegistry(t *testing.T) {
	name := regexp.MustCompile(`^[a-z]+(-[a-z]+)+$`)
	known := map[string]bool{"sequence": true, "schedule": true, "setpoint": true, "water-supply": true, "steam-supply": true,
		"linkage": true, "belt": true, "filter": true, "logger": true, "points-schedule": true}
	for _, c := range trend.Components() {
		known[string(c)] = true
	}
	for _, r := range trend.RoleNames() {
		known[r] = true
	}
	seen := map[string]bool{}
	for _, r := range All() {
		t.Run(r.Name, func(t *testing.T) {
			if !name.MatchString(r.Name) || seen[r.Name] {
				t.Errorf("name %q is malformed or taken", r.Name)
			}
			seen[r.Name] = true
			file := strings.ReplaceAll(r.Name, "-", "_") + ".go"
			src, err := os.ReadFile(file)
			if err != nil {
				t.Errorf("the rule's file: %v", err)
			} else if lines := strings.Count(string(src), "\n"); lines > 200 {
				t.Errorf("%s has %d lines; past 200 a balance is hiding in it", file, lines)
			}
			d := r.Doc
			for what, s := range map[string]string{"Title": d.Title, "Text": d.Text, "Formula": d.Formula, "When": d.When, "Says": d.Says, "Cannot": d.Cannot, "Since": d.Since, "Unit": r.Unit, "Cause": r.Cause} {
				if strings.TrimSpace(s) == "" {
					t.Errorf("%s is empty", what)
				}
			}
			if strings.HasSuffix(d.Title, ".") {
				t.Error("Title ends with a full stop")
			}
			for what, s := range map[string]string{"Text": d.Text, "Says": d.Says, "Cannot": d.Cannot} {
				if !strings.HasSuffix(s, ".") {
					t.Errorf("%s is no whole sentence: %q", what, s)
				}
			}
			if len(d.Sources) == 0 || len(r.Checks) == 0 {
				t.Error("no source, or nothing to check")
			}
			if finding.SI.Label(r.Unit) == "" {
				t.Errorf("effect in unknown unit %q", r.Unit)
			}
			if len(r.Params) < 2 || r.Params[0].Name != Matters || r.Params[1].Name != Persist {
				t.Fatal("the first two parameters are not matters and persist")
			}
			for _, p := range r.Params {
				if p.Why == "" || strings.HasSuffix(p.Why, ".") {
					t.Errorf("parameter %s: reason %q", p.Name, p.Why)
				}
				if !(p.Min <= p.Default && p.Default <= p.Max) || p.Min == p.Max {
					t.Errorf("parameter %s: %v is not within %v to %v", p.Name, p.Default, p.Min, p.Max)
				}
			}
			if len(r.Needs.Balances)+len(r.Needs.Roles) == 0 && r.Needs.RolesFor == nil {
				t.Error("needs nothing")
			}
			if m := regexp.MustCompile(`\{[a-z]+\}`).FindAllString(statement(d.Says, &finding.Finding{}, &Evidence{}, finding.SI, 0), -1); m != nil {
				t.Errorf("Says holds unknown placeholders %v", m)
			}
			wants := map[finding.Verdict]bool{}
			for _, c := range r.Cases {
				wants[c.Want] = true
			}
			if !wants[finding.Fault] || !wants[finding.Pass] || !wants[finding.NotTestable] && len(r.Cases) < 3 {
				t.Errorf("needs a case that fires, one that stays quiet and one within uncertainty; has %d", len(r.Cases))
			}
		})
	}
}

func TestCatalogueIsFresh(t *testing.T) {
	got, err := os.ReadFile("RULES.md")
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != Catalogue() {
		t.Error("RULES.md is stale: run `go generate ./rules`")
	}
}

func TestCheckSettings(t *testing.T) {
	set := func(v float64, param string) map[string]trend.RuleSetting {
		return map[string]trend.RuleSetting{"oa-damper-stuck": {Params: map[string]float64{param: v}}}
	}
	for _, c := range []struct {
		name     string
		settings map[string]trend.RuleSetting
		want     string
	}{
		{"none", nil, ""},
		{"good", set(0.4, "min_swing"), ""},
		{"unknown rule", map[string]trend.RuleSetting{"oa-damper-stick": {}}, "no such rule"},
		{"unknown parameter", set(0.4, "minimum_swing"), "no such parameter"},
		{"out of range", set(7, "min_swing"), "outside"},
		{"not a number", set(nan(), "min_swing"), "outside"},
	} {
		err := CheckSettings("AHU-1", c.settings)
		switch {
		case c.want == "" && err != nil:
			t.Errorf("%s: %v", c.name, err)
		case c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)):
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
}
