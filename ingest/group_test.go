package ingest

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

// table5 writes rows of 5 min under a header, the same cells in every row.
func table5(header, row string, day, rows int) string {
	var b strings.Builder
	b.WriteString("time," + header + "\n")
	for i := range rows {
		fmt.Fprintf(&b, "2026-05-%02d %02d:%02d,%s\n", day, i/12, i%12*5, row)
	}
	return b.String()
}

// How files and columns come together into units where nothing says.
func TestGrouping(t *testing.T) {
	const head, row = "SAT [degC],RAT [degC],OAT [degC],CHWV [%]", "13,22,10,50"
	for _, c := range []struct {
		name  string
		files map[string]string
		want  string // units with their number of points
	}{
		{"a file a unit", map[string]string{"trends/AHU-2.csv": table5(head, row, 1, 5), "trends/AHU-10.csv": table5(head, row, 1, 5)}, "AHU-2:4 AHU-10:4"},
		{"months of one unit", map[string]string{"trends/AHU-1_2026-05.csv": table5(head, row, 1, 5), "trends/AHU-1_2026-06.csv": table5(head, row, 2, 5)}, "AHU-1:4"},
		{"two units in a file, and what they share", map[string]string{"trends/export.csv": table5("AHU-1.SAT [degC],AHU-1.RAT [degC],AHU-1.CHWV [%],AHU-2.SAT [degC],AHU-2.RAT [degC],AHU-2.CHWV [%],OAT [degC]", "13,22,50,14,23,60,10", 1, 5)}, "AHU-1:4 AHU-2:4"},
		{"one prefix names the unit of an export", map[string]string{"trends/export.csv": table5("RTU_7.SAT [degC],RTU_7.RAT [degC],RTU_7.OAT [degC]", "13,22,10", 1, 5)}, "RTU_7:3"},
		{"a folder of files that share no role", map[string]string{"trends/AHU-3/temps.csv": table5("SAT [degC],RAT [degC],OAT [degC]", "13,22,10", 1, 5), "trends/AHU-3/valves.csv": table5("CHWV [%],HWV [%]", "50,0", 1, 5)}, "AHU-3:5"},
		{"weather is shared", map[string]string{"trends/AHU-1.csv": table5("SAT [degC],RAT [degC],CHWV [%]", "13,22,50", 1, 5), "trends/AHU-2.csv": table5("SAT [degC],RAT [degC],CHWV [%]", "13,22,50", 1, 5), "trends/weather.csv": table5("Temp [degC],RH [%]", "10,60", 1, 5)}, "AHU-1:5 AHU-2:5"},
		{"two columns that say the same are left open", map[string]string{"trends/AHU-1.csv": table5("SAT [degC],Supply Air Temp [degC],RAT [degC],OAT [degC]", "13,14,22,10", 1, 5)}, "AHU-1:2"},
		{"a position beside a command is the feedback", map[string]string{"trends/AHU-1.csv": table5("OA Damper Cmd [%],OA Damper Position [%],RAT [degC],OAT [degC]", "30,28,22,10", 1, 5)}, "AHU-1:4"},
	} {
		_, us, err := load(t, Options{Paths: []string{folder(t, c.files)}})
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		var got []string
		for _, u := range us {
			got = append(got, fmt.Sprintf("%s:%d", u.Name, len(u.Roles())))
		}
		if strings.Join(got, " ") != c.want {
			t.Errorf("%s: %v, want %s", c.name, got, c.want)
		}
	}
}

// The schedule's scale and offset apply in the file's unit; a shared point
// reaches every unit; a row that matches nothing is noted.
func TestScheduleApplied(t *testing.T) {
	dir := folder(t, map[string]string{
		"points.csv": "unit,file,column,role,measure,scale,offset,accuracy\n" +
			"A,one*.csv,T1,sa_temp,degF,0.1,2,0.9 degF\n" +
			"A,one*.csv,T2,ra_temp,degC,,,\n" +
			"B,two.csv,T1,sa_temp,degC,,,\n" +
			"*,two.csv,X,oa_temp,degC,,,\n" +
			"B,two.csv,junk,-,,,,\n" +
			"B,,gone,ra_rh,%,,,\n",
		"trends/one.csv": table5("T1,T2,rest", "480,22,9", 1, 6),
		"trends/two.csv": table5("T1,X,junk", "15,8,7", 1, 6),
	})
	r, us, err := load(t, Options{Paths: []string{dir}})
	if err != nil || len(us) != 2 {
		t.Fatalf("%d units, %v", len(us), err)
	}
	a, b := us[0], us[1]
	if v := a.Col(trend.SATemp); v == nil || math.Abs(v[0]-10) > 1e-9 { // 480*0.1 + 2 = 50 degF
		t.Errorf("scaled temperature %v, want 10 degC", v)
	}
	if c := a.Cols[trend.SATemp]; math.Abs(c.Accuracy-0.5) > 1e-12 || c.Source.By != "schedule" {
		t.Errorf("accuracy %v, by %q", c.Accuracy, c.Source.By)
	}
	for _, u := range []*trend.Unit{a, b} {
		if v := u.Col(trend.OATemp); v == nil || v[0] != 8 {
			t.Errorf("%s: shared outdoor temperature %v", u.Name, v)
		}
	}
	if n := noted(r.Notes, "point-unmatched"); n == nil || n.Count != 1 || n.Line != 7 {
		t.Errorf("unmatched row: %+v", n)
	}
}

// Units of measure that nothing states are told from the data, or the column is
// left out with a note.
func TestMeasureJudged(t *testing.T) {
	for _, c := range []struct {
		name, head, row string
		role            trend.Role
		want            float64 // NaN: left out
	}{
		{"degF by indoor temperatures", "sa_temp,ra_temp,oa_temp", "55.4,72,41", trend.OATemp, 5},
		{"degC by indoor temperatures", "sa_temp,ra_temp,oa_temp", "13,22,41", trend.OATemp, 41},
		{"degF by a labelled one", "sa_temp,ra_temp [degF],oa_temp", "55.4,72,41", trend.SATemp, 13},
		{"outdoor alone cannot be told", "oa_temp,oa_damper,ra_rh", "41,50,40", trend.OATemp, nan},
		{"percent", "ra_temp [degC],oa_rh", "22,45", trend.OARH, 0.45},
		{"fraction", "ra_temp [degC],oa_rh", "22,0.45", trend.OARH, 0.45},
		{"a small percentage beside a large one", "ra_temp [degC],oa_damper,cool_valve", "22,30,0.8", trend.CoolValve, 0.008},
		{"barometer in inHg", "ra_temp [degC],wx_pressure", "22,29.92126", trend.WXPressure, 101325},
		{"air flow cannot be told", "ra_temp [degC],sa_flow", "22,4000", trend.SAFlow, nan},
	} {
		u := fromText(t, table5(c.head, c.row, 1, 6))
		v := u.Col(c.role)
		switch {
		case math.IsNaN(c.want):
			if v != nil || noted(u.Notes, "unit-unknown") == nil {
				t.Errorf("%s: %v, want it left out with a note", c.name, v)
			}
		case v == nil || math.Abs(v[0]-c.want) > 1e-5*math.Max(1, math.Abs(c.want)):
			t.Errorf("%s: %v, want %v", c.name, v, c.want)
		}
	}
}

// Every kind of time and packing of the fixtures gives the same values.
func TestFixturesAgree(t *testing.T) {
	_, want, err := load(t, Options{Paths: []string{raw + "micros.parquet"}})
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range []string{"millis.parquet", "epoch.parquet", "int96.parquet", "text.parquet", "date-clock.parquet", "packed.parquet.gz", "packed.csv.gz", "packed.csv.zst", "nested.parquet", "nanos-local.parquet"} {
		_, got, err := load(t, Options{Paths: []string{raw + f}})
		if err != nil {
			t.Errorf("%s: %v", f, err)
			continue
		}
		a, b := got[0], want[0]
		start := b.Axis.Start
		if f == "nanos-local.parquet" { // clock times of UTC+1, and no zone is given
			start = start.Add(time.Hour)
		}
		if !a.Axis.Start.Equal(start) || a.Axis.Step != b.Axis.Step {
			t.Errorf("%s: axis %+v, want %+v", f, a.Axis, b.Axis)
			continue
		}
		for _, r := range a.Roles() {
			x, y := a.Col(r), b.Col(r)
			for i := range x {
				// The Parquet files leave every tenth return temperature out.
				if r == trend.RATemp && strings.HasPrefix(f, "packed.csv") && i%10 == 9 {
					continue
				}
				if !same(x[i:i+1], y[i:i+1]) {
					t.Errorf("%s: %v is %v in interval %d, want %v", f, r, x[i], i, y[i])
					break
				}
			}
		}
	}
}
