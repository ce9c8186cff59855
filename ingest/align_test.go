package ingest

import (
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

// folder writes files into a new folder and returns its path.
func folder(t *testing.T, files map[string]string) string {
	t.Helper()
	dir := t.TempDir()
	for name, text := range files {
		p := filepath.Join(dir, filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(p), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(p, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return dir
}

func noted(notes []trend.Note, code string) *trend.Note {
	for i := range notes {
		if notes[i].Code == code {
			return &notes[i]
		}
	}
	return nil
}

func same(got, want []float64) bool {
	if len(got) != len(want) {
		return false
	}
	for i := range want {
		if math.IsNaN(got[i]) != math.IsNaN(want[i]) || math.Abs(got[i]-want[i]) > 1e-9 {
			return false
		}
	}
	return true
}

var nan = math.NaN()

// Several samples an interval: the mean, of a switch the last; the step is the
// site's.
func TestMeanOfInterval(t *testing.T) {
	var b strings.Builder
	b.WriteString("time,sa_temp [degC],ra_temp [degC],sa_fan_status\n")
	for i := range 10 {
		ra := fmt.Sprint(20 + i)
		if i >= 5 && i < 9 {
			ra = ""
		}
		fmt.Fprintf(&b, "2026-05-01 00:%02d,%d,%s,%d\n", i, 10+i, ra, i%2)
	}
	dir := folder(t, map[string]string{"site.toml": "[site]\nstep = \"5 min\"\ntimezone = \"UTC\"\n", "trends/AHU-1.csv": b.String()})
	_, us, err := load(t, Options{Paths: []string{dir}})
	if err != nil {
		t.Fatal(err)
	}
	u := us[0]
	if u.Axis.N != 2 || u.Axis.Step != 5*time.Minute {
		t.Fatalf("axis %+v", u.Axis)
	}
	for role, want := range map[trend.Role][]float64{trend.SATemp: {12, 17}, trend.RATemp: {22, 29}, trend.SAFanStatus: {0, 1}} {
		if got := u.Col(role); !same(got, want) {
			t.Errorf("%v is %v, want %v", role, got, want)
		}
	}
}

// A step per stamp: stamps a few seconds off a boundary stand for the interval
// that they begin, rows out of order and repeated are put right, a gap is a gap.
func TestOrderAndGaps(t *testing.T) {
	u := fromText(t, `time,sa_temp [degC],ra_temp [degC],oa_temp [degC]
2026-05-01 00:00:02,10,20,5
2026-05-01 00:09:58,12,22,5
2026-05-01 00:05:01,11,21,5
2026-05-01 00:15:00,13,23,5
2026-05-01 00:15:00,14,,5
2026-05-01 00:25:00,16,25,5
2026-05-01 00:30:00,17,-9999,5
2026-05-01 00:35:00,18,27,5
2026-05-01 00:40:00,19,28,500
2026-05-01 00:45:00,20,29,5
`)
	if got := u.Col(trend.SATemp); !same(got, []float64{10, 11, 12, 14, nan, 16, 17, 18, 19, 20}) {
		t.Errorf("supply temperature %v", got)
	}
	if got := u.Col(trend.RATemp); !same(got, []float64{20, 21, 22, 23, nan, 25, nan, 27, 28, 29}) {
		t.Errorf("return temperature %v", got)
	}
	if why := u.Cols[trend.RATemp].Why; why[4] != trend.Gap || why[6] != trend.OutOfRange {
		t.Errorf("reasons %v", why)
	}
	if why := u.Cols[trend.OATemp].Why; why[8] != trend.OutOfRange {
		t.Errorf("reasons %v", why)
	}
	for code, n := range map[string]int{"time-order": 1, "time-repeated": 1, "marker": 1, "out-of-range": 1} {
		if x := noted(u.Notes, code); x == nil || x.Count != n {
			t.Errorf("note %s: %+v, want a count of %d", code, x, n)
		}
	}
}

// A point logged on change stands until the next value, for at most 4 h where it
// is a measured quantity, 24 h where it is a command.
func TestHeldOnChange(t *testing.T) {
	var b strings.Builder
	b.WriteString("time,sa_temp [degC],ra_temp [degC],cool_valve [%]\n")
	sparse := map[int]string{0: "22,10", 12: "23,20", 40: "22.5,30", 100: "22.7,50"} // rows of 5 min
	for i := range 300 {
		v := sparse[i]
		if v == "" {
			v = ","
		}
		fmt.Fprintf(&b, "2026-05-0%d %02d:%02d,%d,%s\n", 1+i/288, i/12%24, i%12*5, 10+i%7, v)
	}
	u := fromText(t, b.String())
	ra, cv := u.Cols[trend.RATemp], u.Cols[trend.CoolValve]
	if ra == nil || cv == nil {
		t.Fatal("a column was left out")
	}
	for _, c := range []struct {
		i     int
		ra    float64
		raWhy trend.Reason
		cv    float64
	}{{0, 22, 0, 0.1}, {11, 22, 0, 0.1}, {12, 23, 0, 0.2}, {39, 23, 0, 0.2}, {87, 22.5, 0, 0.3}, {88, nan, trend.Stale, 0.3}, {100, 22.7, 0, 0.5}, {147, 22.7, 0, 0.5}, {148, nan, trend.Stale, 0.5}, {299, nan, trend.Stale, 0.5}} {
		why := trend.Present
		if ra.Why != nil {
			why = ra.Why[c.i]
		}
		if !same(ra.Val[c.i:c.i+1], []float64{c.ra}) || why != c.raWhy || !same(cv.Val[c.i:c.i+1], []float64{c.cv}) {
			t.Errorf("interval %d: return %v (%v), valve %v; want %v (%v), %v", c.i, ra.Val[c.i], why, cv.Val[c.i], c.ra, c.raWhy, c.cv)
		}
	}
}

// An hourly file beside one of 5 min: its values stand for their hour; an hour
// that is missing is a gap.
func TestSlowerFile(t *testing.T) {
	var fast, slow strings.Builder
	fast.WriteString("time,sa_temp [degC],ra_temp [degC],ma_temp [degC]\n")
	slow.WriteString("time,wx_temp [degC],wx_rh [%]\n")
	for i := range 12 * 8 {
		fmt.Fprintf(&fast, "2026-05-01 %02d:%02d,13,22,%d\n", i/12, i%12*5, 15+i%3)
	}
	for h := range 8 {
		if h != 5 {
			fmt.Fprintf(&slow, "2026-05-01 %02d:00,%d,60\n", h, h)
		}
	}
	dir := folder(t, map[string]string{"trends/AHU-1.csv": fast.String(), "trends/weather.csv": slow.String()})
	_, us, err := load(t, Options{Paths: []string{dir}})
	if err != nil || len(us) != 1 {
		t.Fatalf("%d units, %v", len(us), err)
	}
	wx := us[0].Col(trend.WXTemp)
	if wx == nil {
		t.Fatal("the weather was not shared")
	}
	for i, v := range wx {
		want := float64(i / 12)
		if i/12 == 5 {
			want = nan
		}
		if !same([]float64{v}, []float64{want}) {
			t.Fatalf("interval %d: %v, want %v", i, v, want)
		}
	}
}

// The night on which clocks go back, through Load: 25 hours of intervals and no
// gap (Lisbon, 25 October 2026; IANA tz database).
func TestAutumnNight(t *testing.T) {
	lisbon, err := time.LoadLocation("Europe/Lisbon")
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	b.WriteString("time,sa_temp [degC],ra_temp [degC],oa_temp [degC]\n")
	start := time.Date(2026, 10, 25, 0, 0, 0, 0, lisbon)
	for i := range 25 * 12 {
		fmt.Fprintf(&b, "%s,%d,22,12\n", start.Add(time.Duration(i)*5*time.Minute).Format("2006-01-02 15:04"), 10+i%50)
	}
	for name, text := range map[string]string{"oldest first": b.String(), "newest first": newestFirst(b.String())} {
		dir := folder(t, map[string]string{"site.toml": "[site]\ntimezone = \"Europe/Lisbon\"\n", "trends/AHU-1.csv": text})
		_, us, err := load(t, Options{Paths: []string{dir}})
		if err != nil {
			t.Fatal(err)
		}
		u := us[0]
		if u.Axis.N != 300 || !u.Axis.Start.Equal(start) {
			t.Fatalf("%s: %d intervals from %v", name, u.Axis.N, u.Axis.Start)
		}
		for i, v := range u.Col(trend.SATemp) {
			if v != float64(10+i%50) {
				t.Fatalf("%s: interval %d holds %v", name, i, v)
			}
		}
		if noted(u.Notes, "clock-repeated") == nil {
			t.Errorf("%s: nothing is said of the repeated hour", name)
		}
	}
}

func newestFirst(text string) string {
	lines := strings.Split(strings.TrimSpace(text), "\n")
	slices.Reverse(lines[1:])
	return strings.Join(lines, "\n") + "\n"
}

// --from and --to: a date means from its midnight and through its end, local to
// the site; a period without data is an error of the unit.
func TestPeriod(t *testing.T) {
	var b strings.Builder
	b.WriteString("time,sa_temp [degC],ra_temp [degC],oa_temp [degC]\n")
	at := time.Date(2026, 4, 30, 0, 0, 0, 0, time.UTC)
	for i := range 24 * 5 {
		fmt.Fprintf(&b, "%s,%d,22,12\n", at.Add(time.Duration(i)*time.Hour).Format(time.RFC3339), i%40)
	}
	dir := folder(t, map[string]string{"site.toml": "[site]\ntimezone = \"Europe/Berlin\"\n", "trends/AHU-1.csv": b.String()})
	for _, c := range []struct {
		from, to, start string
		n               int
	}{
		{"2026-05-01", "2026-05-01", "2026-04-30T22:00:00Z", 24},
		{"2026-05-01", "", "2026-04-30T22:00:00Z", 98},
		{"", "2026-05-01T08:00:00+02:00", "2026-04-30T00:00:00Z", 30},
	} {
		_, us, err := load(t, Options{Paths: []string{dir}, From: c.from, To: c.to})
		if err != nil {
			t.Errorf("%s to %s: %v", c.from, c.to, err)
			continue
		}
		if a := us[0].Axis; a.Start.Format(time.RFC3339) != c.start || a.N != c.n {
			t.Errorf("%s to %s: %d from %v, want %d from %s", c.from, c.to, a.N, a.Start, c.n, c.start)
		}
	}
	if _, _, err := load(t, Options{Paths: []string{dir}, From: "2030-01-01"}); err == nil || Hint(err) == "" {
		t.Errorf("a period without data: %v", err)
	}
	for _, bad := range [][2]string{{"yesterday", ""}, {"2026-05-02", "2026-05-01"}} {
		if _, err := Read(t.Context(), Options{Paths: []string{dir}, From: bad[0], To: bad[1]}); len(ConfigErrors(err)) != 1 {
			t.Errorf("%v: %v, want an error of configuration", bad, err)
		}
	}
}
