package report

import (
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"flag"
	"io"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/parquet/file"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

var update = flag.Bool("update", false, "rewrite the goldens; the run still fails")

// stuckUnit is four days of a unit whose damper stands still.
func stuckUnit() *trend.Unit {
	return synth.Simulate(synth.Spec{
		Name: "AHU-7", Seed: 4, Start: time.Date(2026, time.April, 13, 0, 0, 0, 0, time.UTC), Days: 4, Step: 15 * time.Minute,
		Climate: synth.Marine, Sensors: synth.Realistic(), Variable: true, Currency: "EUR",
		Prices: trend.Prices{Electricity: 0.2, Heat: 0.1, CoolingCOP: 3.5},
		Faults: []synth.Fault{{Kind: synth.DamperStuck, Severity: 0.5}},
	}).Unit()
}

func reportOf(u *trend.Unit, m finding.Measure) UnitReport {
	b := balance.Keep(u)
	set := rules.Run(context.Background(), b, rules.Options{Measure: m})
	return UnitReport{Set: &set, Books: b, Measure: m, Version: "test", Sources: []SourceFile{{Name: "AHU-7.csv", Bytes: 12345, Rows: 384}}}
}

func pageOf(t *testing.T, r UnitReport) string {
	t.Helper()
	var b bytes.Buffer
	if err := UnitPage(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// golden compares with testdata/name. Charts are compared on one architecture
// only: others may fuse a multiplication with an addition.
func golden(t *testing.T, name, got string) {
	t.Helper()
	path := filepath.Join("testdata", name)
	raw, err := os.ReadFile(path)
	want := string(raw)
	if err == nil && runtime.GOARCH != "amd64" {
		got, want = withoutCharts(got), withoutCharts(want)
	}
	if err == nil && got == want {
		return
	}
	g, w := strings.Split(got, "\n"), strings.Split(want, "\n")
	for i := range g {
		if i >= len(w) || g[i] != w[i] {
			line := ""
			if i < len(w) {
				line = w[i]
			}
			t.Errorf("%s, line %d:\n got %.300q\nwant %.300q", name, i+1, g[i], line)
			break
		}
	}
	if len(g) < len(w) {
		t.Errorf("%s: %d lines, want %d", name, len(g), len(w))
	}
	if err != nil {
		t.Error(err)
	}
	if *update {
		if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
			t.Error(err)
		}
	}
}

func withoutCharts(s string) string {
	return regexp.MustCompile(`(?s)<svg.*?</svg>`).ReplaceAllString(s, "<svg>")
}

func TestUnitPageGolden(t *testing.T) {
	r := reportOf(stuckUnit(), finding.SI)
	if len(r.Set.Findings) == 0 {
		t.Fatal("nothing found: the golden would show no finding")
	}
	golden(t, "unit.html", pageOf(t, r))
}

func TestIndexGolden(t *testing.T) {
	r := reportOf(stuckUnit(), finding.SI)
	var b bytes.Buffer
	err := IndexPage(&b, Index{Site: "Site", Sets: []*finding.Set{r.Set}, Pages: []string{"units/AHU-7.html"}, Failed: []FailedUnit{{"AHU-8", "AHU-8.csv: it is empty"}}, Version: "test", Currency: "EUR"})
	if err != nil {
		t.Fatal(err)
	}
	golden(t, "index.html", b.String())
}

// The page fetches nothing and needs no script.
func TestSelfContained(t *testing.T) {
	page := pageOf(t, reportOf(stuckUnit(), finding.SI))
	for _, bad := range []string{"http:", "https:", "<script", "<link", "@import", "url(", "src=", "<?xml", "#NaN", "NaN"} {
		if strings.Contains(page, bad) {
			t.Errorf("the page holds %q", bad)
		}
	}
	ids := map[string]bool{}
	for _, m := range regexp.MustCompile(`\sid="([^"]*)"`).FindAllStringSubmatch(page, -1) {
		if ids[m[1]] {
			t.Errorf("id %q stands twice", m[1])
		}
		ids[m[1]] = true
	}
	for _, m := range regexp.MustCompile(`href="#([^"]*)"`).FindAllStringSubmatch(page, -1) {
		if !ids[m[1]] {
			t.Errorf("a link leads to %q, which is not there", m[1])
		}
	}
	if left := regexp.MustCompile(`#A[0-9A-F]1[0-9A-F]{3}`).FindString(page); left != "" {
		t.Errorf("a token colour %s is left in a chart", left)
	}
}

// Names from strangers' files stay text.
func TestHostileNames(t *testing.T) {
	evil := `<script>alert(1)</script>"'&` + "\u202e=1+1"
	u := stuckUnit()
	u.Name, u.Site.Name, u.Plant.Serves = evil, evil, evil
	for _, r := range u.Roles() {
		c := *u.Cols[r]
		c.Source.Column, c.Source.File, c.Source.Ground, c.Source.Note, c.Source.By = evil, evil, evil, evil, "guess"
		u.Cols[r] = &c
	}
	u.Notes = []trend.Note{{Code: "x", File: evil, Column: evil, Text: evil, Count: 2}}
	r := reportOf(u, finding.SI)
	r.Sources, r.Assumed = []SourceFile{{Name: evil}}, []string{evil}
	page := pageOf(t, r)
	if strings.Contains(page, "<script") || strings.Contains(page, `alert(1)</script>`) {
		t.Error("markup from a name got through")
	}
	r.Set.Unit = `=HYPERLINK("x")`
	for i := range r.Set.Findings {
		r.Set.Findings[i].Unit, r.Set.Findings[i].Component, r.Set.Findings[i].Statement = "=1+1", "@cmd", "-2+3"
	}
	var b bytes.Buffer
	if err := FindingsCSV(&b, []finding.Set{*r.Set}, time.UTC); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range rows[1:] {
		for i, c := range row {
			if c != "" && strings.ContainsRune("=+@\t\r", rune(c[0])) {
				t.Errorf("column %s begins a formula: %q", rows[0][i], c)
			}
		}
	}
}

// No page, whatever is missing, fails or shows a figure that is not there.
func TestBarePages(t *testing.T) {
	whole := stuckUnit()
	for name, change := range map[string]func(u *trend.Unit){
		"no point at all": func(u *trend.Unit) { u.Cols = [trend.NumRoles]*trend.Column{} },
		"one point": func(u *trend.Unit) {
			c := u.Cols[trend.SATemp]
			u.Cols = [trend.NumRoles]*trend.Column{}
			u.Cols[trend.SATemp] = c
		},
		"every value absent": func(u *trend.Unit) { blank(u) },
		"one interval": func(u *trend.Unit) {
			u.Axis.N = 1
			for _, r := range u.Roles() {
				c := *u.Cols[r]
				c.Val = c.Val[:1]
				u.Cols[r] = &c
			}
		},
	} {
		u := *whole
		change(&u)
		page := pageOf(t, reportOf(&u, finding.SI))
		if strings.Contains(page, "NaN") || strings.Contains(page, "Inf") {
			t.Errorf("%s: the page shows NaN or Inf", name)
		}
	}
}

func blank(u *trend.Unit) {
	for _, r := range u.Roles() {
		c := *u.Cols[r]
		c.Val = make([]float64, u.Axis.N)
		for i := range c.Val {
			c.Val[i] = math.NaN()
		}
		u.Cols[r] = &c
	}
}

// An inch-pound page shows no SI unit to its reader, and the reverse.
func TestMeasures(t *testing.T) {
	text := func(m finding.Measure) string {
		page := pageOf(t, reportOf(stuckUnit(), m))
		page, _, _ = strings.Cut(page, `<section id="data">`) // the file's own units are the file's
		return regexp.MustCompile(`<style>.*?</style>`).ReplaceAllString(page, "")
	}
	for _, unit := range []string{"°C", " K<", " K,", " K;", "g/kg", "kJ/kg", "m³/s", "kPa"} {
		if strings.Contains(text(finding.IP), unit) {
			t.Errorf("an inch-pound page holds %q", unit)
		}
	}
	for _, unit := range []string{"°F", "gr/lb", "Btu", "cfm", "inHg"} {
		if strings.Contains(text(finding.SI), unit) {
			t.Errorf("an SI page holds %q", unit)
		}
	}
}

func TestWriteFile(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "page.html")
	if err := WriteFile(path, func(w io.Writer) error { _, err := io.WriteString(w, "one"); return err }); err != nil {
		t.Fatal(err)
	}
	broken := errors.New("broken")
	if err := WriteFile(path, func(w io.Writer) error { io.WriteString(w, "tw"); return broken }); !errors.Is(err, broken) {
		t.Errorf("error %v, want the writer's", err)
	}
	func() {
		defer func() { _ = recover() }()
		_ = WriteFile(path, func(w io.Writer) error { io.WriteString(w, "th"); panic("three") })
	}()
	if got, _ := os.ReadFile(path); string(got) != "one" {
		t.Errorf("the file holds %q after failed writes, want what it held", got)
	}
	if left, _ := os.ReadDir(dir); len(left) != 1 {
		t.Errorf("%d files are left, want 1", len(left))
	}
	if err := os.Mkdir(filepath.Join(dir, "taken"), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := WriteFile(filepath.Join(dir, "taken"), func(io.Writer) error { return nil }); err == nil {
		t.Error("a folder was replaced by a file")
	}
}

func TestSafeName(t *testing.T) {
	seen := map[string]string{}
	for _, name := range []string{"AHU-1", "AHU_1", "AHU 1", "AHU/1", "../../etc/passwd", "..", ".", "", "CON", "con.txt", "nul", "Ünit", "Unit", "a\x00b", ".hidden", "x.", strings.Repeat("x", 500), strings.Repeat("x", 501)} {
		s := SafeName(name)
		if s == "" || strings.ContainsAny(s, `/\:*?"<>|`+"\x00") || strings.HasPrefix(s, ".") || len(s) > 100 || !filepath.IsLocal(s+".html") {
			t.Errorf("%q becomes %q", name, s)
		}
		if other, ok := seen[s]; ok {
			t.Errorf("%q and %q share %q", name, other, s)
		}
		seen[s] = name
	}
	if SafeName("AHU-1") != "AHU-1" {
		t.Error("a plain name was changed")
	}
}

// What is written as Parquet is read back by another library.
func TestParquetLogs(t *testing.T) {
	r := reportOf(stuckUnit(), finding.SI)
	dir := t.TempDir()
	for name, write := range map[string]func(io.Writer) error{
		"findings.parquet": func(w io.Writer) error { return FindingsParquet(w, []finding.Set{*r.Set}, time.UTC) },
		"ledger.parquet":   func(w io.Writer) error { return LedgerParquet(w, r.Books) },
		"empty.parquet":    func(w io.Writer) error { return FindingsParquet(w, nil, time.UTC) },
	} {
		path := filepath.Join(dir, name)
		if err := WriteFile(path, write); err != nil {
			t.Fatal(err)
		}
		f, err := file.OpenParquetFile(path, false)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		want := map[string]int64{"findings.parquet": int64(len(r.Set.Findings)), "ledger.parquet": 384, "empty.parquet": 0}[name]
		if f.NumRows() != want {
			t.Errorf("%s: %d rows, want %d", name, f.NumRows(), want)
		}
		if name == "findings.parquet" {
			for i, c := range findingColumns {
				if got := f.MetaData().Schema.Column(i).Name(); got != c {
					t.Errorf("column %d is %s, want %s", i, got, c)
				}
			}
		}
		f.Close()
	}
}

func TestLogsHoldEveryRow(t *testing.T) {
	r := reportOf(stuckUnit(), finding.SI)
	count := func(write func(io.Writer) error) int {
		var b bytes.Buffer
		if err := write(&b); err != nil {
			t.Fatal(err)
		}
		rows, err := csv.NewReader(&b).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		return len(rows) - 1
	}
	sets := []finding.Set{*r.Set}
	spans := 0
	for _, f := range r.Set.Findings {
		spans += len(f.Spans)
	}
	if n := count(func(w io.Writer) error { return FindingsCSV(w, sets, time.UTC) }); n != len(r.Set.Findings) {
		t.Errorf("%d findings written of %d", n, len(r.Set.Findings))
	}
	if n := count(func(w io.Writer) error { return SpansCSV(w, sets, time.UTC) }); n != spans {
		t.Errorf("%d spans written of %d", n, spans)
	}
	if n := count(func(w io.Writer) error { return CoverageCSV(w, sets) }); n != len(rules.All()) {
		t.Errorf("%d verdicts written of %d", n, len(rules.All()))
	}
}

func BenchmarkUnitPage(b *testing.B) {
	s := synth.Spec{Days: 28, Sensors: synth.Realistic(), Variable: true, Faults: []synth.Fault{{Kind: synth.DamperStuck, Severity: 0.5}}}
	r := reportOf(synth.Simulate(s).Unit(), finding.SI)
	for b.Loop() {
		if err := UnitPage(io.Discard, r); err != nil {
			b.Fatal(err)
		}
	}
}
