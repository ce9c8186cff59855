package synth

import (
	"bytes"
	"context"
	"encoding/csv"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

// files reads a folder's files, name under it to content.
func files(t *testing.T, dir string) map[string][]byte {
	t.Helper()
	out := map[string][]byte{}
	err := filepath.WalkDir(dir, func(name string, d os.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		rel, err := filepath.Rel(dir, name)
		if err != nil {
			return err
		}
		out[filepath.ToSlash(rel)], err = os.ReadFile(name)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func TestWriteSite(t *testing.T) {
	for _, format := range []string{"csv", "parquet"} {
		dir := filepath.Join(t.TempDir(), "deep", "demo")
		o := SiteOptions{Days: 2, Step: 15 * time.Minute, Format: format}
		if err := WriteSite(context.Background(), dir, o); err != nil {
			t.Fatal(err)
		}
		got := files(t, dir)
		if len(got) != 3+6 {
			t.Errorf("%s: %d files", format, len(got))
		}
		rows, err := csv.NewReader(bytes.NewReader(got["truth.csv"])).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		if h := strings.Join(rows[0], ","); h != "unit,fault,rule,start,end,severity" {
			t.Errorf("truth.csv has the columns %s", h)
		}
		healthy := 0
		rules := map[string]bool{}
		for _, r := range rows[1:] {
			if r[2] == "" {
				healthy++
			}
			rules[r[2]] = true
			for _, stamp := range r[3:5] {
				if _, err := time.Parse(time.RFC3339, stamp); err != nil {
					t.Errorf("truth.csv: %v", err)
				}
			}
			if _, ok := got["trends/"+r[0]+"."+format]; !ok {
				t.Errorf("unit %s has no trend file", r[0])
			}
			if !bytes.Contains(got["site.toml"], []byte("[unit."+r[0]+"]")) {
				t.Errorf("unit %s is not in site.toml", r[0])
			}
		}
		if healthy < 2 || len(rules) < 5 {
			t.Errorf("%d healthy units, rules %v", healthy, rules)
		}
		again := filepath.Join(t.TempDir(), "again")
		if err := os.Mkdir(again, 0o755); err != nil { // an empty folder is as good as none
			t.Fatal(err)
		}
		if err := WriteSite(context.Background(), again, o); err != nil {
			t.Fatal(err)
		}
		for name, b := range files(t, again) {
			if !bytes.Equal(b, got[name]) {
				t.Errorf("%s: %s differs between two runs with the same options", format, name)
			}
		}
	}
}

func TestWriteSiteRefuses(t *testing.T) {
	dir := t.TempDir()
	mine := filepath.Join(dir, "mine.txt")
	if err := os.WriteFile(mine, []byte("mine"), 0o644); err != nil {
		t.Fatal(err)
	}
	err := WriteSite(context.Background(), dir, SiteOptions{Days: 1})
	if err == nil || !strings.Contains(err.Error(), "not empty") {
		t.Errorf("a folder with files in it: %v", err)
	}
	if err := WriteSite(context.Background(), mine, SiteOptions{Days: 1}); err == nil {
		t.Error("a file was taken for a folder")
	}
	if got := files(t, dir); len(got) != 1 || string(got["mine.txt"]) != "mine" {
		t.Errorf("a refused folder now holds %d files", len(got))
	}
	for name, o := range map[string]SiteOptions{
		"count": {Count: -1}, "days": {Days: -3}, "step": {Step: 7 * time.Minute}, "short step": {Step: time.Second}, "format": {Format: "xlsx"},
	} {
		to := filepath.Join(t.TempDir(), "x")
		if err := WriteSite(context.Background(), to, o); err == nil || dirExists(to) {
			t.Errorf("%s: %v", name, err)
		}
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	parent := t.TempDir()
	if err := WriteSite(ctx, filepath.Join(parent, "x"), SiteOptions{Days: 1}); err == nil {
		t.Error("a cancelled context wrote a site")
	}
	if left, _ := os.ReadDir(parent); len(left) != 0 {
		t.Errorf("a cancelled run left %s", left[0].Name())
	}
}

// The unit of measure in a header is the one that the values are in.
func TestMeasures(t *testing.T) {
	for _, c := range []struct {
		role   trend.Role
		header Header
		in     float64
		want   float64
	}{
		// By definition: 0 degC is 32 degF, 1 inH2O at 4 degC 249.0889 Pa, 1 ft 0.3048 m,
		// 1 Btu/lb 2.326 kJ/kg, 7000 grains a pound (NIST SP 811, appendix B).
		{trend.OATemp, TradeIP, 25, 77},
		{trend.OATemp, TradeSI, 25.04, 25},
		{trend.OARH, TradeSI, 0.4567, 45.7},
		{trend.SAFlow, TradeIP, 1, 2119},
		{trend.SAFlow, TradeSI, 1.5, 5400},
		{trend.SAStatic, TradeIP, 249.0889, 1},
		{trend.OAHumRatio, TradeIP, 0.01, 70},
		{trend.OAHumRatio, TradeSI, 0.01, 10},
		// Dry air at 0 degC: 0 kJ/kg, and 0.240·32 = 7.68 Btu/lb above 0 degF.
		{trend.OAEnthalpy, TradeIP, 0, 7.68},
		{trend.WXPressure, TradeSI, 101325, 101.33},
	} {
		m := measureOf(c.role, c.header)
		near(t, c.role.String()+", "+m.unit, m.written(c.in), c.want, 1e-9)
	}
	if s := m0(); s != "0.0" {
		t.Errorf("a rounded nothing is written as %s", s)
	}
}

// m0 writes a temperature a hair under zero.
func m0() string {
	r := &Run{Spec: Spec{Zone: time.UTC}, Axis: trend.Axis{Start: monday, Step: time.Hour, N: 1}}
	r.Read[trend.OATemp] = &trend.Column{Role: trend.OATemp, Val: []float64{-0.01}}
	var b bytes.Buffer
	if err := r.WriteCSV(&b, TradeSI); err != nil {
		return err.Error()
	}
	_, cell, _ := strings.Cut(strings.TrimSpace(strings.SplitN(b.String(), "\n", 2)[1]), ",")
	return cell
}

// Naive local stamps where they say enough, an offset where the clock changes.
func TestStamps(t *testing.T) {
	z, err := time.LoadLocation("Europe/Lisbon")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		start time.Time
		naive bool
	}{
		{time.Date(2026, 3, 2, 0, 0, 0, 0, z), true},
		{time.Date(2026, 3, 23, 0, 0, 0, 0, z), false}, // clocks change on 29 March
	} {
		r := Simulate(Spec{Seed: 1, Start: c.start, Days: 7, Step: time.Hour, Zone: z})
		if got := r.stamps() == "2006-01-02 15:04:05"; got != c.naive {
			t.Errorf("%v: naive %v", c.start, got)
		}
	}
}

// The committed examples are what the generator writes, on the kind of
// processor that wrote them: others fuse multiplications and round otherwise.
func TestExamplesAreFresh(t *testing.T) {
	if runtime.GOARCH != "amd64" {
		if os.Getenv("DEWLEDGER_NO_SKIP") != "" {
			t.Fatal("this check has to run on amd64")
		}
		t.Skip("written on amd64")
	}
	for _, s := range Stories() {
		fresh := filepath.Join(t.TempDir(), s.Name)
		if err := s.Write(context.Background(), fresh); err != nil {
			t.Fatal(err)
		}
		home := filepath.Join("..", "..", "examples", s.Name)
		kept := files(t, home)
		if _, ok := kept["README.md"]; !ok {
			t.Errorf("%s has no README.md", s.Name)
		}
		delete(kept, "README.md")
		want := files(t, fresh)
		if len(kept) != len(want) {
			t.Errorf("%s holds %d files, the generator writes %d", s.Name, len(kept), len(want))
		}
		for name, b := range want {
			if !bytes.Equal(b, kept[name]) {
				t.Errorf("%s/%s is not what the generator writes; run go run ./examples/make.go", s.Name, name)
			}
			if len(b) > 3<<20 {
				t.Errorf("%s/%s has %d bytes", s.Name, name, len(b))
			}
		}
	}
}
