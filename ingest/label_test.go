package ingest

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"dewledger/ingest/trend"
)

// A unit of measure that the data contradict is reported; the file's is replaced where
// there is no doubt, the schedule's never.
func TestMislabelled(t *testing.T) {
	file := func(head string, cells string) string {
		var b strings.Builder
		b.WriteString("time," + head + "\n")
		for i := range 60 {
			fmt.Fprintf(&b, "2026-05-01 %02d:%02d,", i/12, i%12*5)
			fmt.Fprintf(&b, cells+"\n", float64(i%5)/10)
		}
		return b.String()
	}
	for _, c := range []struct {
		name, text string
		want       map[trend.Role]float64 // first values
		notes      int                    // measure-mislabelled
		words      string
	}{
		{"degC called degF, and all of the file with it", file("RAT [degF],SAT [degF],OAT [degF],CHW Valve [%%]", "2%.1[1]f,14.0,5.0,30"),
			map[trend.Role]float64{trend.RATemp: 20, trend.SATemp: 14, trend.OATemp: 5}, 3, "it is read as degC"},
		{"degF called degC", file("RAT [degC],SAT [degC]", "7%.1[1]f,55.0"), map[trend.Role]float64{trend.RATemp: (70. - 32) / 1.8, trend.SATemp: (55. - 32) / 1.8}, 2, "it is read as degF"},
		{"fractions called percent", file("RAT [degC],RA RH [%%]", "22,0.4%.0[1]f"), map[trend.Role]float64{trend.RARH: 0.40}, 1, "it is read as fraction"},
		{"a valve that may never open beyond 1 %", file("RAT [degC],CHW Valve [%%]", "22,%.1[1]f5"), map[trend.Role]float64{trend.CoolValve: 0.0005}, 0, ""},
		{"right labels", file("RAT [degF],SAT [degF],RA RH [%%]", "7%.1[1]f,55.0,40"), map[trend.Role]float64{trend.RATemp: (70. - 32) / 1.8, trend.RARH: 0.4}, 0, ""},
	} {
		text := strings.ReplaceAll(c.text, "%%", "%")
		u := fromText(t, text)
		for role, want := range c.want {
			if col := u.Col(role); col == nil || !(math.Abs(col[0]-want) < 1e-9) {
				t.Errorf("%s: %v is %v, want %v", c.name, role, col, want)
			}
		}
		n := 0
		for _, note := range u.Notes {
			if note.Code == "measure-mislabelled" {
				n++
				if !strings.Contains(note.Text, c.words) {
					t.Errorf("%s: %q does not say %q", c.name, note.Text, c.words)
				}
			}
		}
		if n != c.notes {
			t.Errorf("%s: %d notes, want %d: %v", c.name, n, c.notes, u.Notes)
		}
	}
	// points.csv has the last word.
	site := folder(t, map[string]string{"points.csv": "unit,column,role,measure\nA,RAT,ra_temp,degF\nA,SAT,sa_temp,degC\nA,Temp 3,?,\n", "trends/a.csv": file("RAT,SAT,Temp 3", "2%.1[1]f,14.0,5.0")})
	r, units, err := load(t, Options{Paths: []string{site}})
	if err != nil {
		t.Fatal(err)
	}
	if got := units[0].Col(trend.RATemp)[0]; !(math.Abs(got-(20.-32)/1.8) < 1e-9) {
		t.Errorf("return temperature %v: points.csv says degF", got)
	}
	if n := noted(units[0].Notes, "measure-mislabelled"); n == nil || n.Line != 2 || !strings.Contains(n.Text, "as points.csv says") {
		t.Errorf("notes %v", units[0].Notes)
	}
	if n := noted(r.Notes, "point-open"); n == nil || n.Count != 1 {
		t.Errorf("an open row: %v", r.Notes)
	}
}

// Words are values of a switch or a command; of a temperature they are no reading.
func TestWordsByKind(t *testing.T) {
	u := fromText(t, "time,SAT [degC],SF Status,CHW Valve,RAT [degC]\n"+
		"2026-05-01 00:00,13,on,closed,22\n2026-05-01 00:05,off,disabled,open,disabled\n2026-05-01 00:10,13,off,closed,22\n2026-05-01 00:15,13,enabled,0,\"Fault, sensor open\"\n")
	for role, want := range map[trend.Role][]float64{
		trend.SATemp: {13, nan, 13, 13}, trend.SAFanStatus: {1, 0, 0, 1}, trend.CoolValve: {0, 1, 0, 0}, trend.RATemp: {22, nan, 22, nan},
	} {
		if got := u.Col(role); !same(got, want) {
			t.Errorf("%v is %v, want %v", role, got, want)
		}
	}
	if c := u.Cols[trend.RATemp]; c.Why[1] != trend.Disabled || c.Why[3] != trend.BadQuality {
		t.Errorf("reasons %v", c.Why)
	}
	if c := u.Cols[trend.SATemp]; c.Why[1] != trend.NotNumeric {
		t.Errorf("reasons %v", c.Why)
	}
}
