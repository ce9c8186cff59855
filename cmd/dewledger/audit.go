package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"time"

	"github.com/spf13/pflag"

	"dewledger/cmd/internal/fleet"
	"dewledger/ingest"
	"dewledger/ingest/trend"
	"dewledger/report"
	"dewledger/rules"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// audited is what one unit leaves behind once it is judged and written.
type audited struct {
	name    string
	set     finding.Set
	zone    *time.Location
	sources []ingest.Source
	notes   []trend.Note
	loading time.Duration
	judging time.Duration
	err     error
}

func audit(ctx context.Context, e env) error {
	var c common
	fs := pflag.NewFlagSet("audit", pflag.ContinueOnError)
	c.register(fs)
	if err := parse(e, fs, "TREND... [flags]"); err != nil {
		return err
	}
	if fs.NArg() == 0 {
		return usageErrorf("name a trend file, a folder of them or a site folder; - is standard input", "audit needs at least one TREND")
	}
	if err := c.check(); err != nil {
		return err
	}
	begun := time.Now()
	in, err := ingest.Read(ctx, c.ingest(e, fs.Args()))
	if err != nil {
		return err
	}
	defer in.Close()
	if err := checkSettings(in); err != nil {
		return err
	}
	if err := canWrite(c.out); err != nil {
		return err
	}
	if c.measure == "" {
		c.measure = in.Site.Measure
	}
	measure, _ := finding.ParseMeasure(c.measure)
	out := newOutput(c.out)

	units := make([]audited, len(in.Units))
	errs := fleet.Each(ctx, len(in.Units), c.jobs, func(ctx context.Context, i int) error {
		units[i].name = in.Units[i].Name
		return auditUnit(ctx, in, i, &units[i], out, &c, measure)
	})
	if err := ctx.Err(); err != nil {
		return err
	}
	failed := 0
	for i := range units {
		units[i].name = in.Units[i].Name
		if units[i].err = errs[i]; units[i].err != nil {
			failed++
			complain(e.stderr, units[i].name+": "+errs[i].Error(), ingest.Hint(errs[i]))
		}
	}
	progress := progress{w: e.stderr, quiet: c.quiet}
	sayNotes(progress, in, units, c.verbose)

	if err := writeLogs(out, units); err != nil {
		return err
	}
	if len(units) > 1 || failed == len(units) {
		if err := writeIndex(out, in, units, measure); err != nil {
			return err
		}
	}
	if err := writeRun(out, in, &c, units, begun); err != nil {
		return err
	}
	if !c.quiet {
		brief(e.stdout, units, measure, out)
	}
	if failed > 0 {
		return errUnits
	}
	return nil
}

// auditUnit loads, books, judges and writes one unit, and keeps what the logs
// need.
func auditUnit(ctx context.Context, in *ingest.Result, i int, a *audited, out *output, c *common, measure finding.Measure) error {
	begun := time.Now()
	u, sources, err := in.Load(ctx, i)
	if err != nil {
		return err
	}
	a.sources, a.notes, a.zone, a.loading = sources, u.Notes, u.Site.Zone, time.Since(begun)
	begun = time.Now()
	b := balance.Keep(u)
	a.set = rules.Run(ctx, b, rules.Options{Factor: c.factor, Measure: measure, Only: c.only})
	if err := ctx.Err(); err != nil {
		return err
	}
	page := "index.html"
	if len(in.Units) > 1 {
		page = filepath.Join("units", report.SafeName(u.Name)+".html")
	}
	err = out.write(page, func(w io.Writer) error {
		return report.UnitPage(w, report.UnitReport{Set: &a.set, Books: b, Sources: reportSources(sources), Measure: measure, Version: version(), Assumed: assumed(in, b), Notes: in.Notes})
	})
	if err != nil {
		return err
	}
	if c.ledger {
		err = out.write(filepath.Join("ledger", report.SafeName(u.Name)+".parquet"), func(w io.Writer) error {
			return report.LedgerParquet(w, b)
		})
	}
	// The traces hold the unit's columns; the logs do not need them.
	for k := range a.set.Findings {
		a.set.Findings[k].Trace = finding.Trace{}
	}
	a.judging = time.Since(begun)
	return err
}

// checkSettings brings every unit's rule settings to the units of their
// parameters and holds them against the registry.
func checkSettings(in *ingest.Result) error {
	for i := range in.Units {
		u := &in.Units[i]
		for name, set := range u.Plant.Rules {
			for param := range set.Params {
				setting, ok := settingOf(in, u.Name, name, param)
				if !ok {
					continue
				}
				if unit, ok := rules.ParamUnit(name, param); ok {
					v, err := setting.In(unit)
					if err != nil {
						return &ingest.ConfigError{File: setting.Pos, Field: "rules." + name + "." + param, Msg: err.Error(), Hint: "`dewledger rules " + name + "` gives its unit"}
					}
					set.Params[param] = v
				}
			}
		}
		err := rules.CheckSettings(u.Name, u.Plant.Rules)
		var se *rules.SettingError
		if errors.As(err, &se) {
			setting, _ := settingOf(in, se.Unit, se.Rule, se.Param)
			return &ingest.ConfigError{File: setting.Pos, Msg: se.Error(), Hint: se.Hint}
		}
	}
	return nil
}

// settingOf is a setting of the unit, or of all units' defaults.
func settingOf(in *ingest.Result, unit, rule, param string) (ingest.Setting, bool) {
	for _, name := range []string{unit, ""} {
		if s, ok := in.SettingPos[name][rule][param]; ok {
			return s, true
		}
	}
	return ingest.Setting{}, false
}

// assumed says in sentences what nobody stated.
func assumed(in *ingest.Result, b *balance.Books) []string {
	u := b.Unit()
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	if !in.ScheduleUsed {
		say("There was no points schedule: columns were mapped to their roles by name and unit. The table below says on what ground.")
	}
	if u.Site.ZoneAssumed {
		say("No time zone was given: times without one were read as UTC.")
	}
	if u.Site.PressureAssumed {
		say("No altitude or pressure was given: sea level was assumed.")
	}
	if u.Plant.TrainAssumed {
		var order []string
		for _, c := range u.Plant.Train {
			order = append(order, c.Title())
		}
		say("The order of components along the air was not given: %s was assumed.", join(order))
	}
	if b.FanKnownBy() == trend.NoRole {
		say("No point tells whether the fan runs: it was taken to run all the time.")
	}
	if u.Plant.FanHeat != u.Plant.FanHeat {
		say("The fan's heat was not given: 1.0 K with a standard uncertainty of 0.5 K was assumed.")
	}
	if !u.Site.Schedule.Given && u.Col(trend.Occupied) == nil {
		say("No schedule was given: what depends on occupancy could not be tested.")
	}
	return out
}

func join(words []string) string {
	switch n := len(words); n {
	case 0:
		return "nothing"
	case 1:
		return words[0]
	default:
		s := words[0]
		for _, w := range words[1 : n-1] {
			s += ", " + w
		}
		return s + " and " + words[n-1]
	}
}

// sayNotes warns of what the input lost or left open: the sum, or with verbose
// every note.
func sayNotes(p progress, in *ingest.Result, units []audited, verbose bool) {
	if !in.ScheduleUsed {
		p.say("there is no points schedule: columns were mapped by name and unit; the report's data section shows how")
	}
	n := len(in.Notes)
	all := in.Notes
	for _, u := range units {
		n += len(u.notes)
		all = append(all[:len(all):len(all)], u.notes...)
	}
	if n == 0 {
		return
	}
	if !verbose {
		p.say("%d notes about the input: see the report's data section, or run with --verbose", n)
		return
	}
	for _, note := range all {
		p.say("%s", noteLine(note))
	}
}

func noteLine(n trend.Note) string {
	s := ""
	if n.File != "" {
		s = n.File
		if n.Line > 0 {
			s += fmt.Sprintf(":%d", n.Line)
		}
		s += ": "
	}
	s += n.Text
	if n.Count > 1 {
		s += fmt.Sprintf(" (%d times)", n.Count)
	}
	return s
}
