package main

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"time"

	"dewledger/ingest"
	"dewledger/ingest/trend"
	"dewledger/report"
	"dewledger/rules/finding"
)

// output is the folder that a run writes, and the list of what it wrote.
type output struct {
	dir   string
	mu    sync.Mutex
	files []string
}

func newOutput(dir string) *output { return &output{dir: dir} }

// write writes one file whole or not at all, name relative to the folder.
func (o *output) write(name string, write func(io.Writer) error) error {
	path := filepath.Join(o.dir, name)
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		return err
	}
	if err := report.WriteFile(path, write); err != nil {
		return err
	}
	o.mu.Lock()
	o.files = append(o.files, filepath.ToSlash(name))
	o.mu.Unlock()
	return nil
}

// dropStale removes what an earlier run wrote here and this one did not, so that
// no old page passes for a new one. It removes only what the earlier run.json
// lists, and only below the folder.
func (o *output) dropStale() {
	raw, err := os.ReadFile(filepath.Join(o.dir, "run.json"))
	if err != nil {
		return
	}
	var old struct{ Files []string }
	if json.Unmarshal(raw, &old) != nil {
		return
	}
	for _, f := range old.Files {
		if filepath.IsLocal(f) && !slices.Contains(o.files, f) {
			_ = os.Remove(filepath.Join(o.dir, filepath.FromSlash(f))) // gone already is as good
		}
	}
	for _, d := range []string{"units", "ledger"} {
		_ = os.Remove(filepath.Join(o.dir, d)) // only if empty
	}
}

// writeLogs writes the findings, spans and coverage of all units.
func writeLogs(o *output, units []audited) error {
	var sets []finding.Set
	for _, u := range units {
		if u.err == nil {
			sets = append(sets, u.set)
		}
	}
	zone := time.UTC
	for _, u := range units {
		if u.zone != nil {
			zone = u.zone
			break
		}
	}
	for _, f := range []struct {
		name  string
		write func(io.Writer) error
	}{
		{"findings.csv", func(w io.Writer) error { return report.FindingsCSV(w, sets, zone) }},
		{"findings.json", func(w io.Writer) error { return report.FindingsJSON(w, sets, zone) }},
		{"findings.parquet", func(w io.Writer) error { return report.FindingsParquet(w, sets, zone) }},
		{"spans.csv", func(w io.Writer) error { return report.SpansCSV(w, sets, zone) }},
		{"coverage.csv", func(w io.Writer) error { return report.CoverageCSV(w, sets) }},
	} {
		if err := o.write(f.name, f.write); err != nil {
			return err
		}
	}
	return nil
}

// runRecord is run.json.
type runRecord struct {
	Program  string         `json:"program"`
	Version  string         `json:"version"`
	Begun    time.Time      `json:"begun"`
	Seconds  float64        `json:"seconds"`
	Settings settingsRecord `json:"settings"`
	Site     string         `json:"site,omitempty"`
	Units    []unitRecord   `json:"units"`
	Notes    []noteRecord   `json:"notes"`
	Files    []string       `json:"files"`
}

type settingsRecord struct {
	Out            string   `json:"out"`
	SiteFile       string   `json:"site_file,omitempty"`
	PointsFile     string   `json:"points_file,omitempty"`
	From           string   `json:"from,omitempty"`
	To             string   `json:"to,omitempty"`
	Rules          []string `json:"rules,omitempty"`
	Measure        string   `json:"measure"`
	CoverageFactor float64  `json:"coverage_factor"`
	Ledger         bool     `json:"ledger"`
}

type unitRecord struct {
	Unit           string         `json:"unit"`
	Error          string         `json:"error,omitempty"`
	Findings       int            `json:"findings"`
	Passed         int            `json:"passed"`
	NotTestable    int            `json:"not_testable"`
	PeriodHours    float64        `json:"period_hours"`
	UsableShare    float64        `json:"usable_share"`
	SecondsLoading float64        `json:"seconds_loading"`
	SecondsJudging float64        `json:"seconds_judging"`
	Inputs         []sourceRecord `json:"inputs"`
	Notes          []noteRecord   `json:"notes"`
}

type sourceRecord struct {
	Name    string         `json:"name"`
	Bytes   int64          `json:"bytes"`
	SHA256  string         `json:"sha256"`
	Rows    int            `json:"rows"`
	Skipped map[string]int `json:"skipped,omitempty"`
}

type noteRecord struct {
	Code   string `json:"code"`
	File   string `json:"file,omitempty"`
	Column string `json:"column,omitempty"`
	Line   int    `json:"first_line,omitempty"`
	Count  int    `json:"count"`
	Text   string `json:"text"`
}

// writeRun writes run.json, last: it is what makes the folder whole.
func writeRun(o *output, in *ingest.Result, c *common, units []audited, begun time.Time) error {
	r := runRecord{
		Program: "dewledger", Version: version(), Begun: begun.UTC(), Seconds: seconds(time.Since(begun)), Site: in.Site.Name,
		Settings: settingsRecord{Out: c.out, SiteFile: in.SiteFile, PointsFile: in.PointsFile, From: c.from, To: c.to,
			Rules: c.only, Measure: c.measure, CoverageFactor: c.factor, Ledger: c.ledger},
		Notes: noteRecords(in.Notes), Units: []unitRecord{},
	}
	for _, u := range units {
		rec := unitRecord{Unit: u.name, SecondsLoading: seconds(u.loading), SecondsJudging: seconds(u.judging), Notes: noteRecords(u.notes), Inputs: []sourceRecord{}}
		if u.err != nil {
			rec.Error = u.err.Error()
		} else {
			rec.Findings, rec.PeriodHours, rec.UsableShare = len(u.set.Findings), u.set.PeriodHours, math.Round(u.set.UsableShare*1e4)/1e4
			_, rec.Passed, rec.NotTestable = verdicts(&u.set)
		}
		for _, s := range u.sources {
			rec.Inputs = append(rec.Inputs, sourceRecord{Name: s.Name, Bytes: s.Bytes, SHA256: s.SHA256, Rows: s.Rows, Skipped: s.Skipped})
		}
		r.Units = append(r.Units, rec)
	}
	o.dropStale()
	r.Files = slices.Clone(o.files)
	slices.Sort(r.Files)
	return o.write("run.json", func(w io.Writer) error { return report.JSON(w, r) })
}

func seconds(d time.Duration) float64 { return math.Round(d.Seconds()*1000) / 1000 }

func noteRecords(notes []trend.Note) []noteRecord {
	out := []noteRecord{}
	for _, n := range notes {
		out = append(out, noteRecord{Code: n.Code, File: n.File, Column: n.Column, Line: n.Line, Count: n.Count, Text: n.Text})
	}
	return out
}

func verdicts(s *finding.Set) (faults, passed, untested int) {
	for _, c := range s.Coverage {
		switch c.Verdict {
		case finding.Fault:
			faults++
		case finding.Pass:
			passed++
		default:
			untested++
		}
	}
	return
}

func reportSources(ss []ingest.Source) []report.SourceFile {
	var out []report.SourceFile
	for _, s := range ss {
		out = append(out, report.SourceFile{Name: s.Name, Bytes: s.Bytes, Rows: s.Rows})
	}
	return out
}

// writeIndex writes the ranking of several units.
func writeIndex(o *output, in *ingest.Result, units []audited, measure finding.Measure) error {
	ix := report.Index{Site: in.Site.Name, Measure: measure, Version: version(), Currency: in.Site.Currency}
	for i := range units {
		u := &units[i]
		if u.err != nil {
			ix.Failed = append(ix.Failed, report.FailedUnit{Unit: u.name, Reason: u.err.Error()})
			continue
		}
		ix.Sets = append(ix.Sets, &u.set)
		ix.Pages = append(ix.Pages, "units/"+report.SafeName(u.name)+".html")
	}
	return o.write("index.html", func(w io.Writer) error { return report.IndexPage(w, ix) })
}

// brief prints the result that a person reads in the terminal.
func brief(w io.Writer, units []audited, measure finding.Measure, o *output) {
	const most = 5
	for i := range units {
		u := &units[i]
		if u.err != nil {
			fmt.Fprintf(w, "%s: could not be analysed\n\n", u.name)
			continue
		}
		s := &u.set
		_, passed, untested := verdicts(s)
		fmt.Fprintf(w, "%s: %s in %s hours; %d rules passed, %d could not be tested\n", u.name,
			count(s.Open(), "finding"), finding.Grouped(s.PeriodHours, 0), passed, untested)
		if len(units) <= most {
			for k := range s.Findings {
				f := &s.Findings[k]
				fmt.Fprintf(w, "\n  %-7s %s\n", f.Priority, fold(f.Statement, 10, 92))
				if f.ExplainedBy == "" {
					fmt.Fprintf(w, "          Check first: %s\n", fold(f.Check, 10, 92))
				}
			}
		} else if len(s.Findings) > 0 {
			f := &s.Findings[0]
			fmt.Fprintf(w, "  %-7s %s\n", f.Priority, fold(f.Statement, 10, 92))
		}
		if k := s.Total.KWh; !math.IsNaN(k) && len(s.Findings) > 0 {
			fmt.Fprintf(w, "\n  In all %s kWh", finding.Range(k, s.Total.Low, s.Total.High))
			if !math.IsNaN(s.Total.Cost) {
				fmt.Fprintf(w, ", %s %s", finding.Significant(s.Total.Cost, 2), s.Currency)
			}
			fmt.Fprintln(w, "; no kilowatt-hour counted twice")
		}
		fmt.Fprintln(w)
	}
	fmt.Fprintf(w, "Report: %s\n", filepath.Join(o.dir, "index.html"))
}

func count(n int, what string) string {
	switch n {
	case 0:
		return "no " + what + "s"
	case 1:
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}

// fold breaks text at the given column; lines after the first are indented.
func fold(text string, indent, width int) string {
	var b strings.Builder
	col := indent
	for i, word := range strings.Fields(text) {
		n := len([]rune(word))
		switch {
		case i == 0:
		case col+1+n > width:
			b.WriteString("\n" + strings.Repeat(" ", indent))
			col = indent
		default:
			b.WriteByte(' ')
			col++
		}
		b.WriteString(word)
		col += n
	}
	return b.String()
}
