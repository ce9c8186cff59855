package ingest

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

const raw = "../testdata/raw/"

// load reads one file, or a folder, as the program does.
func load(t testing.TB, o Options) (*Result, []*trend.Unit, error) {
	t.Helper()
	ctx := context.Background()
	r, err := Read(ctx, o)
	if err != nil {
		return nil, nil, err
	}
	defer r.Close()
	var units []*trend.Unit
	for i := range r.Units {
		u, _, err := r.Load(ctx, i)
		if err != nil {
			return r, units, err
		}
		units = append(units, u)
	}
	return r, units, nil
}

// Every fixture of testdata/raw, by what comes of it.
func TestFixtures(t *testing.T) {
	may1 := time.Date(2026, 5, 1, 0, 0, 0, 0, time.UTC)
	for _, c := range []struct {
		file  string
		rows  int
		sa    float64 // first supply temperature, degC
		start time.Time
	}{
		{"latin1.csv", 3, 18.5, may1},
		{"utf16.csv", 3, (55.1 - 32) / 1.8, may1},
		{"packed.csv.gz", 0, math.NaN(), time.Time{}},
		{"packed.csv.zst", 0, math.NaN(), time.Time{}},
		{"packed.parquet.gz", 0, math.NaN(), time.Time{}},
		{"micros.parquet", 0, math.NaN(), time.Time{}},
		{"millis.parquet", 0, math.NaN(), time.Time{}},
		{"nanos-local.parquet", 0, math.NaN(), time.Time{}},
		{"epoch.parquet", 0, math.NaN(), time.Time{}},
		{"int96.parquet", 0, math.NaN(), time.Time{}},
		{"text.parquet", 0, math.NaN(), time.Time{}},
		{"date-clock.parquet", 0, math.NaN(), time.Time{}},
	} {
		_, units, err := load(t, Options{Paths: []string{raw + c.file}})
		if err != nil || len(units) != 1 {
			t.Errorf("%s: %d units, %v", c.file, len(units), err)
			continue
		}
		u := units[0]
		if len(u.Roles()) < 3 || u.Axis.N < 3 {
			t.Errorf("%s: %d points, %d intervals", c.file, len(u.Roles()), u.Axis.N)
		}
		if c.rows > 0 && (u.Axis.N != c.rows || !u.Axis.Start.Equal(c.start)) {
			t.Errorf("%s: %d intervals from %v, want %d from %v", c.file, u.Axis.N, u.Axis.Start, c.rows, c.start)
		}
		if sa := u.Col(trend.SATemp); !math.IsNaN(c.sa) && (sa == nil || math.Abs(sa[0]-c.sa) > 1e-6) {
			t.Errorf("%s: supply temperature %v, want %v", c.file, sa, c.sa)
		}
	}
	// The same rows under every kind of time give the same unit.
	_, want, err := load(t, Options{Paths: []string{raw + "micros.parquet"}})
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range []string{"millis.parquet", "epoch.parquet", "int96.parquet"} {
		_, got, err := load(t, Options{Paths: []string{raw + f}})
		if err != nil {
			t.Fatal(err)
		}
		if a, b := got[0].Axis, want[0].Axis; !a.Start.Equal(b.Start) || a.N != b.N || a.Step != b.Step {
			t.Errorf("%s: axis %+v, want %+v", f, a, b)
		}
	}
	for _, f := range []string{"truncated.parquet", "corrupt.parquet"} {
		var ue *UnitError
		if _, _, err := load(t, Options{Paths: []string{raw + f}}); !errors.As(err, &ue) || Hint(err) == "" {
			t.Errorf("%s: %v, want an error of the unit with a hint", f, err)
		}
	}
	_, units, err := load(t, Options{Paths: []string{raw + "nested.parquet"}})
	if err == nil && !slices.ContainsFunc(units[0].Notes, func(n trend.Note) bool { return strings.Contains(n.Text, "nested") }) {
		t.Error("a nested column was left out without a word")
	}
}

// What a wide file brings, cell by cell.
func TestWideCSV(t *testing.T) {
	var b strings.Builder
	b.WriteString("\ufeffTime,SAT [degF], RAT (°C) ,OA-RH %,CHW Valve [%],SF Status,MAT [degC]\r\n")
	special := map[int]string{
		10: ",\"22.6\",51,0,off,NaN",
		11: "null,22.7,bad,100,true,-9999",
		12: "60.8,-,52,50 %,1,1.85e1",
	}
	for i := range 24 {
		if i == 13 {
			b.WriteString("torn\r\n")
		}
		row := special[i]
		if row == "" {
			row = "59,22.5,50,10,On,18"
		}
		fmt.Fprintf(&b, "2026-03-02T%02d:%02d:00Z,%s\r\n", i/12, i%12*5, row)
	}
	u := fromText(t, b.String())
	if u.Axis.N != 24 || u.Axis.Step != 5*time.Minute {
		t.Fatalf("axis %+v", u.Axis)
	}
	for role, want := range map[trend.Role][]float64{
		trend.SATemp: {15, nan, nan, 16}, trend.RATemp: {22.5, 22.6, 22.7, nan}, trend.OARH: {0.5, 0.51, nan, 0.52},
		trend.CoolValve: {0.1, 0, 1, 0.5}, trend.SAFanStatus: {1, 0, 1, 1}, trend.MATemp: {18, nan, nan, 18.5},
	} {
		got := u.Col(role)
		if got == nil {
			t.Errorf("%s was not mapped", role)
			continue
		}
		for i := range want {
			if x := got[9+i]; math.IsNaN(x) != math.IsNaN(want[i]) || math.Abs(x-want[i]) > 1e-9 {
				t.Errorf("%s: %v, want %v", role, got[9:13], want)
				break
			}
		}
	}
	if c := u.Cols[trend.OARH]; c == nil || c.Why == nil || c.Why[11] == trend.Present {
		t.Error("a cell that is no number has no reason")
	}
	if c := u.Cols[trend.SATemp]; c.Source.Measure == "" || c.Source.By != "guess" || c.Source.Ground == "" {
		t.Errorf("provenance %+v", c.Source)
	}
}

func fromText(t testing.TB, text string) *trend.Unit {
	t.Helper()
	_, units, err := load(t, Options{Paths: []string{"-"}, Stdin: strings.NewReader(text)})
	if err != nil || len(units) != 1 {
		t.Fatalf("%d units, %v", len(units), err)
	}
	return units[0]
}

// Day-first and month-first are told over the whole file, and where they cannot
// be told it is an error that says how to settle it.
func TestDayFirst(t *testing.T) {
	file := func(stamps ...string) string {
		s := "time,sa_temp [degC],ra_temp [degC],oa_temp [degC]\n"
		for _, x := range stamps {
			s += x + ",15,22,5\n"
		}
		return s
	}
	u := fromText(t, file("03/02/2026 00:00", "03/02/2026 12:00", "13/02/2026 00:00"))
	if want := time.Date(2026, 2, 3, 0, 0, 0, 0, time.UTC); !u.Axis.Start.Equal(want) {
		t.Errorf("starts at %v, want %v", u.Axis.Start, want)
	}
	u = fromText(t, file("02/03/2026 11:00 PM", "02/03/2026 11:05 PM", "02/03/2026 11:10 PM", "02/13/2026 12:00 AM"))
	if want := time.Date(2026, 2, 3, 23, 0, 0, 0, time.UTC); !u.Axis.Start.Equal(want) {
		t.Errorf("starts at %v, want %v", u.Axis.Start, want)
	}
	_, _, err := load(t, Options{Paths: []string{"-"}, Stdin: strings.NewReader(file("02/03/2026 00:00", "02/03/2026 00:05", "02/03/2026 00:10"))})
	if err == nil || !strings.Contains(err.Error()+Hint(err), "day_first") {
		t.Errorf("an ambiguous date: %v (%s)", err, Hint(err))
	}
}

// site.toml with every key of the documentation is read; each wrong one is an
// error that names file, line and key.
func TestSiteTOML(t *testing.T) {
	good := `[site]
name        = "Harbour Annex"
timezone    = "Europe/Lisbon"
altitude    = "40 m"
measure     = "ip"
currency    = "EUR"
step        = "5 min"
day_first   = true
rh_below_freezing = "ice"

[prices]
electricity = 0.18
heat        = 0.09
cooling_cop = 3.5

[schedule]
occupied    = ["Mon-Fri 07:00-19:00", "Sat 22:00-02:00"]
holidays    = ["2026-05-01"]

[accuracy]
temperature = "0.5 K"
rh          = "3 %"
ma_temp     = "1.8 °F"

[unit_defaults]
min_oa_fraction = 0.15

[unit.AHU-1]
train       = ["mixing", "preheat", "cooling", "fan", "heating"]
design_flow = "4.2 m3/s"
min_oa_fraction = 0.20
fan_heat    = "0.8 K"
high_limit  = "fixed-enthalpy 65 kJ/kg"
coil_kind   = { preheat = "steam", heating = "electric" }
serves      = "Lab wing, floors 1-2"

[unit.AHU-1.rules.oa-damper-stuck]
min_swing   = 0.3

[unit.AHU-2.rules.runs-unoccupied]
enabled     = false
reason      = "24 h laboratory"
`
	c, err := readSite("site.toml", []byte(good))
	if err != nil {
		t.Fatal(err)
	}
	if s := c.site; s.Name != "Harbour Annex" || s.Zone.String() != "Europe/Lisbon" || s.ZoneAssumed || math.Abs(s.PressurePa-100845) > 10 || s.Measure != "ip" || !s.RHOverIce {
		t.Errorf("site %+v", s)
	}
	if b := c.site.AccuracyByRole[trend.MATemp]; math.Abs(b.HalfWidth-1) > 1e-9 {
		t.Errorf("1.8 °F of accuracy is %v K", b.HalfWidth)
	}
	sunday := time.Date(2026, 5, 3, 1, 0, 0, 0, time.UTC)
	if !c.site.Schedule.Occupied(sunday) || c.site.Schedule.Occupied(sunday.Add(2*time.Hour)) {
		t.Error("a span over midnight is not split")
	}
	p := c.plants["AHU-1"]
	if p.DesignFlow != 4.2 || p.MinOAFraction != 0.20 || p.FanHeat != 0.8 || p.HighLimit.Kind != trend.FixedEnthalpy || p.HighLimit.Value != 65 || p.CoilKind[trend.Preheat] != "steam" || p.TrainAssumed {
		t.Errorf("plant %+v", p)
	}
	if r := c.plants["AHU-2"].Rules["runs-unoccupied"]; !r.Disabled || r.Reason != "24 h laboratory" {
		t.Errorf("rule setting %+v", r)
	}
	for _, bad := range []struct{ text, want string }{
		{"[site]\nname = 3\n", "site.toml:2"},
		{"[site]\n\naltitud = \"40 m\"\n", "site.toml:3"},
		{"[site]\ntimezone = \"Europe/Lisboa\"\n", "Lisboa"},
		{"[site]\naltitude = \"40 bananas\"\n", "bananas"},
		{"[site\n", "site.toml:1"},
		{"[schedule]\noccupied = [\"Mon-Fri 7-25\"]\n", "site.toml:2"},
		{"[unit.A]\ntrain = [\"mixing\", \"toaster\"]\n", "toaster"},
		{"[unit.A]\nmin_oa_fraction = 20\n", "min_oa_fraction"},
		{"[accuracy]\ntemprature = \"1 K\"\n", "temprature"},
	} {
		_, err := readSite("site.toml", []byte(bad.text))
		if err == nil || !strings.Contains(err.Error(), bad.want) || len(ConfigErrors(err)) == 0 || Hint(ConfigErrors(err)[0]) == "" && !strings.Contains(err.Error(), "try ") {
			t.Errorf("%q: %v, want %q and what to do", bad.text, err, bad.want)
		}
	}
}

func TestPointsCSV(t *testing.T) {
	for _, bad := range []struct{ text, want string }{
		{"", "points.csv"},
		{"unit,file,column,role,colour\n", "colour"},
		{"unit,file,column,role\nA,,x,supply_temp\n", "points.csv:2"},
		{"unit,file,column\nA,,x\n", "role"},
		{"unit,file,column,role,measure\nA,,x,sa_temp,furlong\n", "furlong"},
	} {
		if _, err := readPoints("points.csv", []byte(bad.text)); err == nil || !strings.Contains(err.Error(), bad.want) {
			t.Errorf("%q: %v, want %q", bad.text, err, bad.want)
		}
	}
	ps, err := readPoints("points.csv", []byte("unit,file,column,role,measure,scale,offset,accuracy,note\n*,,OAT,oa_temp,degF,,,0.5 K,roof\nAHU-1,AHU*.csv,Spare,-,,,,,\n"))
	if err != nil || len(ps) != 2 {
		t.Errorf("%d points, %v", len(ps), err)
	}
}

// A link inside a site does not lead out of it.
func TestLinksStayInside(t *testing.T) {
	outside, site := t.TempDir(), t.TempDir()
	secret := filepath.Join(outside, "secret.csv")
	if err := os.WriteFile(secret, []byte("time,sa_temp [degC]\n2026-03-02 00:00,1\n2026-03-02 00:05,1\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(filepath.Join(site, "trends"), 0o700); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink(secret, filepath.Join(site, "trends", "link.csv")); err != nil {
		t.Fatal(err)
	}
	r, units, err := load(t, Options{Paths: []string{site}})
	if len(units) > 0 || r != nil && len(r.Units) > 0 && r.Units[0].Err == nil {
		t.Errorf("a file outside the site was read (%v)", err)
	}
}

// swallow reads bytes as a file of the given name and only looks for panics,
// hangs and results that make no sense.
func swallow(t *testing.T, name string, data []byte) {
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	_, units, err := load(t, Options{Paths: []string{path}})
	if err != nil {
		var ue *UnitError
		if !errors.As(err, &ue) && len(ConfigErrors(err)) == 0 {
			t.Errorf("an error of no known kind: %v", err)
		}
	}
	for _, u := range units {
		if u.Axis.N <= 0 || u.Axis.Step <= 0 {
			t.Errorf("axis %+v", u.Axis)
		}
		for _, r := range u.Roles() {
			c := u.Cols[r]
			if len(c.Val) != u.Axis.N || c.Why != nil && len(c.Why) != u.Axis.N {
				t.Errorf("%s has %d values on an axis of %d", r, len(c.Val), u.Axis.N)
			}
			for i, v := range c.Val {
				if math.IsInf(v, 0) || math.IsNaN(v) && c.Why != nil && c.Why[i] == trend.Present {
					t.Errorf("%s: value %v without a reason", r, v)
					break
				}
			}
		}
	}
}

func FuzzCSVFile(f *testing.F) {
	f.Add([]byte("time,sa_temp [degC],ra_temp [degC]\n2026-03-02 00:00,15,22\n2026-03-02 00:05,15.1,22\n"))
	f.Add([]byte("Zeit;Zuluft (°C);Abluft (°C)\r\n02.03.2026 00:00;15,1;22,0\r\n13.03.2026 00:00;15,1;22,0\r\n"))
	f.Add([]byte("a,\"b\n\",c\n1,2,3\n"))
	f.Add([]byte{0xff, 0xfe, 't', 0, ',', 0, 'x', 0, '\n', 0})
	f.Add([]byte("time,sa_temp\n1e300,1\n-5,2\n99999999999999999999,3\n"))
	addHabits(f, ".csv", ".tsv", ".txt")
	f.Fuzz(func(t *testing.T, data []byte) { swallow(t, "f.csv", data) })
}

func FuzzParquetFile(f *testing.F) {
	for _, name := range []string{"micros.parquet", "text.parquet", "int96.parquet", "truncated.parquet", "corrupt.parquet"} {
		b, err := os.ReadFile(raw + name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(b)
	}
	addHabits(f, ".parquet")
	f.Fuzz(func(t *testing.T, data []byte) { swallow(t, "f.parquet", data) })
}

func FuzzZipFile(f *testing.F) {
	addHabits(f, ".zip")
	f.Fuzz(func(t *testing.T, data []byte) { swallow(t, "f.zip", data) })
}

// addHabits adds the fixtures of a kind as seeds.
func addHabits(f *testing.F, ends ...string) {
	files, err := os.ReadDir(habits)
	if err != nil {
		f.Fatal(err)
	}
	for _, e := range files {
		if !slices.Contains(ends, filepath.Ext(e.Name())) {
			continue
		}
		b, err := os.ReadFile(habits + e.Name())
		if err != nil {
			f.Fatal(err)
		}
		f.Add(b[:min(len(b), 1500)])
		if ends[0] != ".csv" {
			f.Add(b)
		}
	}
}

func FuzzSiteTOML(f *testing.F) {
	f.Add([]byte("[site]\nname = \"x\"\naltitude = \"40 m\"\n[unit.A.rules.b]\nc = 1\n"))
	f.Add([]byte("[schedule]\noccupied = [\"Mon-Fri 07:00-19:00\"]\n"))
	f.Add([]byte("[unit.A]\ncoil_kind = { preheat = \"steam\" }\nhigh_limit = \"dry-bulb 21 degC\"\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		if c, err := readSite("site.toml", data); err == nil && c.site.Zone == nil {
			t.Error("a site without a zone")
		}
	})
}

func FuzzPointsCSV(f *testing.F) {
	f.Add([]byte("unit,file,column,role,measure\nA,,x,sa_temp,degC\n"))
	f.Add([]byte("unit,column,role,scale\n*,\"y\nz\",-,1e3\n"))
	f.Fuzz(func(t *testing.T, data []byte) { _, _ = readPoints("points.csv", data) })
}
