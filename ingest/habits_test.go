package ingest

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

const habits = raw + "habits/"

// The record that every file of testdata/raw/habits holds (testdata/raw/habits.go).
var habitsBegin = time.Date(2026, 5, 21, 13, 0, 0, 0, time.UTC)

func habitRecord(r trend.Role, i int) float64 {
	switch r {
	case trend.SATemp:
		return 13 + float64(i%7)/10
	case trend.RATemp:
		return 22 + float64(i%5)/2
	case trend.OATemp:
		return 9.5 + float64(i)/10
	case trend.CoolValve:
		return float64(i*100/60) / 100
	case trend.SAFanStatus:
		return float64(b2i(i >= 10))
	case trend.SAFlow:
		return (12000 + float64(i)) / 3600
	}
	return math.NaN()
}

// gone is the interval and role of a reading that must be missing, and why.
type gone struct {
	role trend.Role
	at   int
	why  trend.Reason
}

// Every manner of export comes to the same record, and says what it lost.
func TestHabits(t *testing.T) {
	for _, c := range []struct {
		file  string
		units []string // names, where they matter
		notes []string // codes that must be there
		gone  []gone
		flow  bool
		ip    bool // ±0.001 K through another unit
		skip  map[string]int
	}{
		{file: "comma.csv"}, {file: "semicolon.csv"}, {file: "tab.tsv"}, {file: "pipe.txt"}, {file: "crlf.csv"}, {file: "cr.csv"},
		{file: "bom.csv"}, {file: "utf16le.csv"}, {file: "utf16be.csv"}, {file: "utf16-no-mark.csv"}, {file: "latin1.csv"}, {file: "utf8.csv"},
		{file: "thousands.csv", flow: true}, {file: "thousands-comma.csv", flow: true},
		{file: "quoted.csv"}, {file: "newlines.csv"}, {file: "preamble.csv"}, {file: "units-row.csv"},
		{file: "repeated-header.csv", notes: []string{"header-repeated"}, skip: map[string]int{"repeated header": 2}},
		{file: "changed-header.csv", notes: []string{"header-changed"}, skip: map[string]int{"repeated header": 1}},
		{file: "trailing.csv"}, {file: "trailing-header.csv"}, {file: "stray-spaces.csv"},
		{file: "same-name.csv", notes: []string{"column-repeated"}},
		{file: "footer.csv", notes: []string{"ragged-row"}, skip: map[string]int{"ragged": 2}},
		{file: "long.csv"}, {file: "long-grouped.csv"}, {file: "long-bare.csv"},
		{file: "long-status.csv", notes: []string{"status-bad quality", "status-overridden", "status-stale", "status-down", "status-disabled", "overridden"},
			gone: []gone{{trend.SATemp, 7, trend.BadQuality}, {trend.RATemp, 8, trend.Overridden}, {trend.OATemp, 9, trend.Stale}, {trend.OATemp, 10, trend.Down}, {trend.OATemp, 11, trend.Disabled}}},
		{file: "long-unit.csv", ip: true},
		{file: "long-equipment.csv", units: []string{"AHU-4", "AHU-5"}},
		{file: "fleet.csv", units: []string{"AHU-4", "AHU-5"}},
		{file: "one-a-point", units: []string{"AHU-4"}},
		{file: "parts", units: []string{"AHU-4"}},
		{file: "parts.zip", units: []string{"AHU-4"}},
		{file: "value-words.csv"},
		{file: "value-missing.csv", notes: []string{"marker", "bad-cell"}, gone: []gone{{trend.SATemp, 0, trend.Gap}, {trend.SATemp, 5, trend.Gap}, {trend.SATemp, 7, trend.OutOfRange}, {trend.SATemp, 8, trend.OutOfRange},
			{trend.SATemp, 1, trend.Gap}, {trend.SATemp, 2, trend.Gap}, {trend.SATemp, 3, trend.Gap}, {trend.SATemp, 4, trend.Gap}, {trend.SATemp, 6, trend.Gap}, {trend.SATemp, 9, trend.Gap}, {trend.SATemp, 10, trend.BadQuality}, {trend.SATemp, 11, trend.NotNumeric}}},
		{file: "status-column.csv", notes: []string{"status-down", "status-stale", "overridden"}, gone: []gone{{trend.RATemp, 6, trend.Down}, {trend.RATemp, 7, trend.Stale}}},
		{file: "status-cell.csv", gone: []gone{{trend.RATemp, 6, trend.BadQuality}, {trend.RATemp, 7, trend.Stale}}},
		{file: "torn.csv", notes: []string{"ragged-row", "bad-time"}, skip: map[string]int{"ragged": 2, "bad time": 2},
			gone: []gone{{trend.SATemp, 5, trend.Gap}, {trend.RATemp, 5, trend.Gap}, {trend.OATemp, 5, trend.Gap}, {trend.CoolValve, 5, trend.Gap}, {trend.SAFanStatus, 5, trend.Gap}}},
		{file: "time-iso-offset.csv"}, {file: "time-day-first.csv"}, {file: "time-month-first.csv"}, {file: "time-short-year.csv"}, {file: "time-month-word.csv"},
		{file: "time-seconds.csv"}, {file: "time-millis.csv"}, {file: "time-serial.csv"}, {file: "time-beside.csv"}, {file: "drifting.csv"},
		{file: "snappy.parquet"}, {file: "zstd.parquet"}, {file: "gzip.parquet"}, {file: "plain.parquet"}, {file: "brotli.parquet"}, {file: "delta.parquet"}, {file: "pages-v2.parquet"},
		{file: "long.parquet", notes: []string{"status-bad quality"}, gone: []gone{{trend.RATemp, 8, trend.BadQuality}}},
	} {
		t.Run(c.file, func(t *testing.T) {
			r, err := Read(t.Context(), Options{Paths: []string{habits + c.file}})
			if err != nil {
				t.Fatal(err)
			}
			defer r.Close()
			want := c.units
			if want == nil {
				want = make([]string, 1)
			}
			if len(r.Units) != len(want) {
				t.Fatalf("%d units, want %d: %v", len(r.Units), len(want), r.Units)
			}
			for k, name := range want {
				if name != "" && r.Units[k].Name != name {
					t.Errorf("unit %q, want %q", r.Units[k].Name, name)
				}
				u, src, err := r.Load(t.Context(), k)
				if err != nil {
					t.Fatalf("%v %+v", err, r.Units[k].Mapping)
				}
				if u.Axis.N != 60 || u.Axis.Step != 5*time.Minute || !u.Axis.Start.Equal(habitsBegin) {
					t.Fatalf("axis %+v", u.Axis)
				}
				roles := []trend.Role{trend.SATemp, trend.RATemp, trend.OATemp, trend.CoolValve, trend.SAFanStatus}
				if c.flow {
					roles = append(roles, trend.SAFlow)
				}
				tol := 1e-9
				if c.ip {
					tol = 1e-3
				}
				for _, role := range roles {
					col := u.Cols[role]
					if col == nil {
						t.Errorf("%v is not there: %+v", role, r.Units[k].Mapping)
						continue
					}
					for i, got := range col.Val {
						why := trend.Present
						if col.Why != nil {
							why = col.Why[i]
						}
						miss := trend.Present
						for _, g := range c.gone {
							if g.role == role && g.at == i {
								miss = g.why
							}
						}
						if miss != trend.Present {
							if why != miss {
								t.Errorf("%v at %d is %v (%v), want it missing: %v", role, i, got, why, miss)
							}
						} else if !(math.Abs(got-habitRecord(role, i)) <= tol) {
							t.Errorf("%v at %d is %v (%v), want %v", role, i, got, why, habitRecord(role, i))
							break
						}
					}
				}
				for _, code := range c.notes {
					if noted(u.Notes, code) == nil {
						t.Errorf("no note %q among %v", code, u.Notes)
					}
				}
				skipped := map[string]int{}
				for _, s := range src {
					for why, n := range s.Skipped {
						skipped[why] += n
					}
					if s.SHA256 == "" || s.Bytes == 0 || s.Rows == 0 {
						t.Errorf("source %+v", s)
					}
				}
				for why, n := range c.skip {
					if skipped[why] != n {
						t.Errorf("%d rows skipped as %q, want %d (%v)", skipped[why], why, n, skipped)
					}
				}
				if c.skip == nil && len(skipped) > 0 {
					t.Errorf("rows skipped: %v", skipped)
				}
			}
		})
	}
	// Every fixture is read by this test or the next.
	files, err := os.ReadDir(habits)
	if err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile("habits_test.go")
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		if !strings.Contains(string(text), `"`+f.Name()+`"`) {
			t.Errorf("%s is read by no test", f.Name())
		}
	}
}

func TestHabitsOfClocks(t *testing.T) {
	site := func(zone string) string {
		p := filepath.Join(t.TempDir(), "site.toml")
		if err := os.WriteFile(p, []byte("[site]\ntimezone = \""+zone+"\"\n"), 0o644); err != nil {
			t.Fatal(err)
		}
		return p
	}
	for _, c := range []struct {
		file, zone, note string
		start            time.Time
		n                int
		step             time.Duration
	}{
		// A logger that stayed on standard time and one on the wall's clock, both over
		// the night of 29 March 2026: the same 48 hours.
		{"clock-standard.csv", "Europe/Lisbon", "clock-standard", time.Date(2026, 3, 28, 12, 0, 0, 0, time.UTC), 96, 30 * time.Minute},
		{"clock-wall.csv", "Europe/Lisbon", "", time.Date(2026, 3, 28, 12, 0, 0, 0, time.UTC), 96, 30 * time.Minute},
		// New York, 1 November 2026: the repeated hour is told apart by EDT and EST.
		{"time-zone-words.csv", "America/New_York", "", time.Date(2026, 11, 1, 0, 0, 0, 0, time.UTC), 24, time.Hour},
	} {
		_, units, err := load(t, Options{Paths: []string{habits + c.file}, SitePath: site(c.zone)})
		if err != nil || len(units) != 1 {
			t.Errorf("%s: %d units, %v", c.file, len(units), err)
			continue
		}
		u := units[0]
		if !u.Axis.Start.Equal(c.start) || u.Axis.N != c.n || u.Axis.Step != c.step {
			t.Errorf("%s: axis %+v, want %d of %v from %v", c.file, u.Axis, c.n, c.step, c.start)
		}
		for i, got := range u.Col(trend.SATemp) {
			if !(math.Abs(got-habitRecord(trend.SATemp, i)) < 1e-9) {
				t.Errorf("%s: interval %d is %v, want %v", c.file, i, got, habitRecord(trend.SATemp, i))
				break
			}
		}
		for _, code := range []string{"clock-standard", "clock-skipped", "clock-once"} {
			if got := noted(u.Notes, code) != nil; got != (code == c.note) {
				t.Errorf("%s: note %s is there: %v", c.file, code, got)
			}
		}
	}
	// What can be read two ways is not read.
	if _, _, err := load(t, Options{Paths: []string{habits + "time-ambiguous.csv"}}); err == nil || !strings.Contains(Hint(err), "day_first") {
		t.Errorf("ambiguous dates: %v (%s)", err, Hint(err))
	}
	// An encoding that is not read is an error, not an empty column.
	if _, _, err := load(t, Options{Paths: []string{habits + "byte-stream-split.parquet"}}); err == nil || !strings.Contains(err.Error(), "BYTE_STREAM_SPLIT") && !strings.Contains(err.Error(), "rows could be read") {
		t.Errorf("byte stream split: %v", err)
	}
	// Row groups outside --from and --to are not read.
	r, err := Read(t.Context(), Options{Paths: []string{habits + "snappy.parquet"}, From: "2026-05-21T15:00:00Z", To: "2026-05-21T16:00:00Z"})
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	u, src, err := r.Load(t.Context(), 0)
	if err != nil || u.Axis.N != 12 || src[0].Rows != 20 || u.Axis.Step != 5*time.Minute {
		t.Errorf("two row groups of three are outside the period: %d rows read, axis %+v, %v", src[0].Rows, u.Axis, err)
	}
	if _, _, err := load(t, Options{Paths: []string{habits + "snappy.parquet"}, From: "2027-01-01"}); err == nil || !strings.Contains(err.Error(), "no data between --from and --to") {
		t.Errorf("all row groups are outside the period: %v", err)
	}
	// Without a header the columns have no names: nothing is guessed.
	if _, _, err := load(t, Options{Paths: []string{habits + "no-header.csv"}}); err == nil || !strings.Contains(err.Error(), "no column could be told") {
		t.Errorf("no header: %v", err)
	}
}
