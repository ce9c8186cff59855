package ingest

import (
	"fmt"
	"maps"
	"strings"

	"dewledger/ingest/trend"
)

// readPlant reads a [unit.NAME] or [unit_defaults] table over what p holds.
func (c *siteConfig) readPlant(t *table, p *trend.Plant, unit string) {
	if s, ok := t.str("serves"); ok {
		p.Serves = s
	}
	if names, ok := t.strs("train"); ok {
		c.readTrain(t, p, names)
	}
	set := func(key string, dst *float64, d Dimension, lo, hi float64) bool {
		v, ok := t.quantity(key, d, lo, hi)
		if ok {
			*dst = v
		}
		return ok
	}
	set("design_flow", &p.DesignFlow, Flow, 0.01, 1000)
	set("duct_area", &p.DuctArea, Area, 0.001, 100)
	set("min_oa_fraction", &p.MinOAFraction, Ratio, 0, 1)
	set("min_damper", &p.MinDamper, Ratio, 0, 1)
	if set("fan_heat", &p.FanHeat, TempDifference, 0, 10) {
		p.FanHeatU = fanHeatU(p.FanHeat)
	}
	if s, ok := t.str("high_limit"); ok {
		h, err := parseHighLimit(s)
		if err != nil {
			t.fail("high_limit", `write "dry-bulb 21 degC", "fixed-enthalpy 65 kJ/kg", "differential-dry-bulb" or "differential-enthalpy"`, "%v", err)
		} else {
			p.HighLimit = h
		}
	}
	if k, ok := t.sub("coil_kind"); ok {
		kinds := map[trend.Component]string{}
		maps.Copy(kinds, p.CoilKind)
		for _, coil := range []trend.Component{trend.Preheat, trend.Heating, trend.Reheat} {
			readCoil(k, coil, kinds, "water", "steam", "electric", "gas")
		}
		readCoil(k, trend.Cooling, kinds, "water", "refrigerant")
		p.CoilKind = kinds
		k.done()
	}
	if r, ok := t.sub("rules"); ok {
		c.readRules(r, p, unit)
	}
	t.done()
}

func readCoil(t *table, coil trend.Component, into map[trend.Component]string, kinds ...string) {
	s, ok := t.str(string(coil))
	if !ok {
		return
	}
	for _, k := range kinds {
		if s == k {
			into[coil] = s
			return
		}
	}
	t.fail(string(coil), "a "+coil.Title()+" is one of: "+strings.Join(kinds, ", "), "%s is no kind of %s", quote(s), coil.Title())
}

func (c *siteConfig) readTrain(t *table, p *trend.Plant, names []string) {
	known := trend.Components()
	var all []string
	for _, k := range known {
		all = append(all, string(k))
	}
	seen := map[string]bool{}
	var train []trend.Component
	for _, n := range names {
		found := false
		for _, k := range known {
			found = found || string(k) == n
		}
		switch {
		case !found:
			hint := didYouMean(n, all)
			if hint == "" {
				hint = "components are: " + strings.Join(all, ", ")
			}
			t.fail("train", hint, "%s is no component", quote(n))
			return
		case seen[n]:
			t.fail("train", "name each component once, in the order that the air meets them", "%s stands twice", quote(n))
			return
		}
		seen[n] = true
		train = append(train, trend.Component(n))
	}
	for i, k := range train {
		if k == trend.Mixing && i > 0 && train[i-1] != trend.Recovery {
			t.fail("train", "only recovery may stand before mixing", "mixing stands after %s", train[i-1])
			return
		}
		if k == trend.Reheat && !seen[string(trend.Heating)] {
			t.fail("train", "the first heating coil along the air is named heating", "reheat stands without heating")
			return
		}
	}
	p.Train, p.TrainAssumed = train, false
}

// parseHighLimit reads "dry-bulb 21 degC" and its like.
func parseHighLimit(s string) (trend.HighLimit, error) {
	word, rest, _ := strings.Cut(strings.TrimSpace(s), " ")
	rest = strings.TrimSpace(rest)
	h := trend.HighLimit{}
	switch word {
	case "differential-dry-bulb", "differential-enthalpy":
		if rest != "" {
			return h, fmt.Errorf("%s takes no value", word)
		}
		h.Kind = trend.DifferentialDryBulb
		if word == "differential-enthalpy" {
			h.Kind = trend.DifferentialEnthalpy
		}
		return h, nil
	case "dry-bulb", "fixed-dry-bulb":
		v, err := ParseQuantity(rest, Temperature)
		if err == nil && (v < -10 || v > 45) {
			err = fmt.Errorf("%.4g degC is no limit for outdoor air", v)
		}
		return trend.HighLimit{Kind: trend.FixedDryBulb, Value: v}, err
	case "fixed-enthalpy", "enthalpy":
		v, err := ParseQuantity(rest, Enthalpy)
		if err == nil && (v < 0 || v > 120) {
			err = fmt.Errorf("%.4g kJ/kg is no limit for outdoor air", v)
		}
		return trend.HighLimit{Kind: trend.FixedEnthalpy, Value: v}, err
	}
	return h, fmt.Errorf("%s is no kind of high limit", quote(word))
}

// readRules reads [unit.NAME.rules.RULE] tables. Names and ranges are the
// rules' to check; the lines are kept for that.
func (c *siteConfig) readRules(t *table, p *trend.Plant, unit string) {
	rules := maps.Clone(p.Rules)
	if rules == nil {
		rules = map[string]trend.RuleSetting{}
	}
	pos := map[string]map[string]Setting{}
	for r, m := range c.settings[""] { // those of [unit_defaults] hold here too
		pos[r] = maps.Clone(m)
	}
	for _, name := range t.keys() {
		r, ok := t.sub(name)
		if !ok {
			continue
		}
		set := rules[name]
		set.Params = maps.Clone(set.Params)
		at := pos[name]
		if at == nil {
			at = map[string]Setting{}
			pos[name] = at
		}
		at[""] = Setting{Pos: place1(t.d.file, t.lineOf(name))}
		for _, key := range r.keys() {
			line := place1(t.d.file, r.lineOf(key))
			switch key {
			case "enabled":
				on, ok := r.boolean(key)
				if ok {
					set.Disabled = !on
				}
			case "reason":
				set.Reason, _ = r.str(key)
			default:
				s := Setting{Pos: line}
				switch v := r.m[key].(type) {
				case int64:
					s.Value = float64(v)
				case float64:
					s.Value = v
				case string:
					x, u, err := splitQuantity(v)
					if err != nil {
						r.fail(key, "a parameter is a number, or a text with a number and a unit", "%v", err)
						continue
					}
					s.Text, s.Value = v, x
					if u != "" {
						unit, ok := LookupUnit(u)
						if !ok {
							r.fail(key, "", "%s is not a known unit of measure", quote(u))
							continue
						}
						s.Value = x*unit.Scale + unit.Shift
					}
				default:
					r.fail(key, "a parameter is a number, or a text with a number and a unit", "must be a number, not %s", typeName(v))
					continue
				}
				if set.Params == nil {
					set.Params = map[string]float64{}
				}
				set.Params[key] = s.Value
				at[key] = s
			}
		}
		if set.Disabled && set.Reason == "" {
			r.fail("enabled", `add reason = "..."; the report prints it`, "a rule that is switched off needs a reason")
		}
		rules[name] = set
	}
	p.Rules = rules
	c.settings[unit] = pos
}

func place1(file string, line int) string { return fmt.Sprintf("%s:%d", file, line) }
