package rules

import (
	"fmt"
	"sort"
	"strconv"
	"strings"

	"dewledger/ingest/trend"
)

//go:generate go run gen.go

// Text is a rule in plain text for a terminal: question, formula, needs,
// parameters with their reasons, what it cannot tell apart, checks, cautions
// and sources.
func (r *Rule) Text() string {
	d := r.Describe(nil)
	var b strings.Builder
	fmt.Fprintf(&b, "%s: %s\n\n%s\n", d.Name, d.Title, wrap(d.Text, ""))
	fmt.Fprintf(&b, "\nWhere      %s\n", wrap(r.Doc.When, "           "))
	fmt.Fprintf(&b, "Effect     in %s; %s\n", unitWord(r.Unit), wrap(d.Formula, "           "))
	list(&b, "Needs      ", d.Needs)
	b.WriteString("Parameters\n")
	for _, q := range d.Params {
		fmt.Fprintf(&b, "  %-18s %s %s (%s to %s)\n      %s\n", q.Name, num(q.Default), q.Unit, num(q.Min), num(q.Max), wrap(q.Why, "      "))
	}
	fmt.Fprintf(&b, "Cannot tell apart\n      %s\n", wrap(d.Cannot, "      "))
	list(&b, "Check      ", r.Checks)
	if len(d.Safety) > 0 {
		b.WriteString("Cautions\n")
		for _, c := range d.Safety {
			fmt.Fprintf(&b, "      %s\n", wrap(c.Text(), "      "))
		}
	}
	list(&b, "Sources    ", d.Sources)
	fmt.Fprintf(&b, "Set a parameter in site.toml, under [unit.NAME.rules.%s].\n", r.Name)
	return b.String()
}

func list(b *strings.Builder, head string, items []string) {
	for i, s := range items {
		if i > 0 {
			head = strings.Repeat(" ", len(head))
		}
		fmt.Fprintf(b, "%s%s\n", head, wrap(s, strings.Repeat(" ", len(head))))
	}
}

// wrap folds text at 92 columns; lines after the first begin with indent.
func wrap(text, indent string) string {
	var b strings.Builder
	col := len(indent)
	for i, w := range strings.Fields(text) {
		n := len([]rune(w))
		switch {
		case i == 0:
		case col+1+n > 92:
			b.WriteString("\n" + indent)
			col = len(indent)
		default:
			b.WriteByte(' ')
			col++
		}
		b.WriteString(w)
		col += n
	}
	return b.String()
}

func num(x float64) string { return strconv.FormatFloat(x, 'g', 4, 64) }

func unitWord(u string) string {
	switch u {
	case "fraction":
		return "a fraction, 0 to 1"
	case "h":
		return "hours"
	}
	return u
}

// Catalogue is every rule in Markdown: the text of RULES.md.
func Catalogue() string {
	var b strings.Builder
	b.WriteString("# The rules\n\nGenerated from the registry by `go generate ./rules`; do not edit. `dewledger rules NAME` prints the same.\n\n" +
		"A finding needs an effect above both what matters and k times its uncertainty, for at least as long as it must persist. " +
		"A pass says that twice what matters would have been seen in 95 % of such months; what could not be seen is *not testable*, with the reason.\n\n")
	for _, r := range All() {
		fmt.Fprintf(&b, "- [`%s`](#%s): %s\n", r.Name, r.Name, r.Doc.Title)
	}
	for _, r := range All() {
		d := r.Describe(nil)
		fmt.Fprintf(&b, "\n## `%s`\n\n**%s.** %s\n\n", d.Name, d.Title, d.Text)
		fmt.Fprintf(&b, "- Where: %s\n- Effect (%s): %s\n", r.Doc.When, unitWord(r.Unit), d.Formula)
		fmt.Fprintf(&b, "- Needs: %s\n", strings.Join(d.Needs, "; "))
		fmt.Fprintf(&b, "- Cannot tell apart: %s\n", d.Cannot)
		fmt.Fprintf(&b, "- Check: %s\n", strings.Join(r.Checks, "; "))
		fmt.Fprintf(&b, "- Sources: %s\n\n", strings.Join(d.Sources, "; "))
		b.WriteString("| parameter | default | range | why |\n| --- | --- | --- | --- |\n")
		for _, q := range d.Params {
			fmt.Fprintf(&b, "| `%s` | %s %s | %s to %s | %s |\n", q.Name, num(q.Default), q.Unit, num(q.Min), num(q.Max), q.Why)
		}
	}
	return b.String()
}

// SettingError is a rule setting of site.toml that no rule knows or allows.
type SettingError struct {
	Unit, Rule, Param string // Param is empty where the rule itself is unknown
	Msg, Hint         string
}

// Error says what is wrong with the setting.
func (e *SettingError) Error() string {
	key := "unit." + e.Unit + ".rules." + e.Rule
	if e.Param != "" {
		key += "." + e.Param
	}
	return key + ": " + e.Msg
}

// CheckSettings holds a unit's rule settings against the registry: unknown
// rules, unknown parameters and values out of range.
func CheckSettings(unit string, settings map[string]trend.RuleSetting) error {
	names := make([]string, 0, len(settings))
	for name := range settings {
		names = append(names, name)
	}
	sort.Strings(names)
	for _, name := range names {
		r := Find(name)
		if r == nil {
			return &SettingError{Unit: unit, Rule: name, Msg: "there is no such rule", Hint: "`dewledger rules` lists them"}
		}
		params := make([]string, 0, len(settings[name].Params))
		for q := range settings[name].Params {
			params = append(params, q)
		}
		sort.Strings(params)
		for _, q := range params {
			p := r.param(q)
			if p == nil {
				return &SettingError{Unit: unit, Rule: name, Param: q, Msg: "the rule has no such parameter", Hint: "`dewledger rules " + name + "` lists them"}
			}
			if v := settings[name].Params[q]; !(v >= p.Min && v <= p.Max) {
				return &SettingError{Unit: unit, Rule: name, Param: q,
					Msg:  fmt.Sprintf("%s is outside %s to %s %s", num(v), num(p.Min), num(p.Max), p.Unit),
					Hint: "`dewledger rules " + name + "` says why"}
			}
		}
	}
	return nil
}

// ParamUnit is the unit of a rule's parameter, and whether there is one.
func ParamUnit(rule, param string) (string, bool) {
	if r := Find(rule); r != nil {
		if p := r.param(param); p != nil {
			return p.Unit, true
		}
	}
	return "", false
}

func (r *Rule) param(name string) *Param {
	for i := range r.Params {
		if r.Params[i].Name == name {
			return &r.Params[i]
		}
	}
	return nil
}
