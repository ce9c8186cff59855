package ingest

import (
	"bytes"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

// A draft, and the models written of it, read in place of a schedule, give the units
// that reading by name gives.
func TestDraftReadsBack(t *testing.T) {
	for _, file := range []string{"fleet.csv", "parts", "one-a-point", "long-equipment.csv", "long.parquet", "comma.csv", "months"} {
		in := habits + file
		if file == "months" { // two units, a file a month each
			plain, err := os.ReadFile(habits + "comma.csv")
			if err != nil {
				t.Fatal(err)
			}
			head, body, _ := strings.Cut(string(plain), "\n")
			later := strings.ReplaceAll(body, "2026-05-21", "2026-06-21")
			in = folder(t, map[string]string{"AHU-1 2026-05.csv": head + "\n" + body, "AHU-1 2026-06.csv": head + "\n" + later, "AHU-2 2026-05.csv": head + "\n" + body, "AHU-2 2026-06.csv": head + "\n" + later})
		}
		r, want, err := load(t, Options{Paths: []string{in}})
		if err != nil {
			t.Fatal(file, err)
		}
		rows, err := r.Propose(t.Context())
		if err != nil {
			t.Fatal(err)
		}
		var draft bytes.Buffer
		if err := WriteSchedule(&draft, rows); err != nil {
			t.Fatal(err)
		}
		schedules := map[string]string{"points.csv": draft.String()}
		for _, f := range ModelFormats() {
			var b bytes.Buffer
			if err := WriteModel(&b, f, "Quay House", rows); err != nil {
				t.Fatal(err)
			}
			schedules["points."+ModelExtension(f)] = b.String()
		}
		for name, text := range schedules {
			p := filepath.Join(t.TempDir(), name)
			if err := os.WriteFile(p, []byte(text), 0o644); err != nil {
				t.Fatal(err)
			}
			r, got, err := load(t, Options{Paths: []string{in}, PointsPath: p})
			if err != nil {
				t.Errorf("%s by %s: %v\n%s", file, name, err, text)
				continue
			}
			if len(got) != len(want) {
				t.Errorf("%s by %s: %d units, want %d\n%s", file, name, len(got), len(want), text)
				continue
			}
			for i := range want {
				if got[i].Name != want[i].Name || !reflect.DeepEqual(got[i].Roles(), want[i].Roles()) || got[i].Axis.N != want[i].Axis.N {
					t.Errorf("%s by %s: unit %s has %v, want %s with %v\n%s", file, name, got[i].Name, got[i].Roles(), want[i].Name, want[i].Roles(), text)
				}
				for _, role := range want[i].Roles() {
					if c := got[i].Cols[role]; c != nil && c.Source.By != "schedule" {
						t.Errorf("%s by %s: %v of %s by %s", file, name, role, got[i].Name, c.Source.By)
					}
				}
			}
			for _, n := range r.Notes {
				if n.Code == "point-unmatched" {
					t.Errorf("%s by %s: %s", file, name, n.Text)
				}
			}
		}
	}
}

// A month of an invented unit, for what the data say of the names.
func evidenceCSV(swap bool) string {
	var b strings.Builder
	heat, cool := "HTG VLV", "CLG VLV"
	if swap {
		heat, cool = cool, heat
	}
	fmt.Fprintf(&b, "time,OAT [degC],RAT [degC],MAT [degC],SAT [degC],SAT SP [degC],%s [%%],%s [%%],SF STS,OCC\n", heat, cool)
	t0 := time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC)
	for i := range 14 * 96 {
		at := t0.Add(time.Duration(i) * 15 * time.Minute)
		h := float64(at.Hour()) + float64(at.Minute())/60
		on := 0
		if h >= 7 && h < 19 && at.Weekday() != time.Saturday && at.Weekday() != time.Sunday {
			on = 1
		}
		oa := 8 + 7*math.Sin((h-9)/24*2*math.Pi)
		ra := 22 + 0.5*math.Sin(h)
		ma := 0.3*oa + 0.7*ra
		hv, cv := 0.0, 0.0
		if h < 11 {
			hv = 60
		} else if h > 14 {
			cv = 70
		}
		sa := ma + 0.1*hv - 0.1*cv
		fmt.Fprintf(&b, "%s,%.1f,%.1f,%.1f,%.1f,%.1f,%.0f,%.0f,%d,%d\n", at.Format("2006-01-02 15:04"), oa, ra, ma, sa, sa+0.5, hv, cv, on, on)
	}
	return b.String()
}

func TestEvidenceOfData(t *testing.T) {
	propose := func(text string) map[trend.Role]Proposal {
		t.Helper()
		r, err := Read(t.Context(), Options{Paths: []string{folder(t, map[string]string{"AHU-1.csv": text})}})
		if err != nil {
			t.Fatal(err)
		}
		defer r.Close()
		rows, err := r.Propose(t.Context())
		if err != nil {
			t.Fatal(err)
		}
		out := map[trend.Role]Proposal{}
		for _, p := range rows {
			out[p.Role] = p
			if p.Role == trend.NoRole {
				for _, o := range p.Open {
					out[o] = p
				}
			}
		}
		return out
	}
	good := propose(evidenceCSV(false))
	for role, words := range map[trend.Role]string{
		trend.MATemp: "between outdoor and return", trend.RATemp: "as rooms are", trend.OATemp: "moves more than the return", trend.SATempSP: "stays within",
		trend.HeatValve: "warmer with it open", trend.CoolValve: "colder with it open", trend.Occupied: "of weekdays",
	} {
		if p := good[role]; p.Role != role || p.Confidence < Sure || !strings.Contains(p.Ground, words) {
			t.Errorf("%v: %+v, want it sure since %q", role, p, words)
		}
	}
	// Names that the data contradict are not sure.
	bad := propose(evidenceCSV(true))
	for _, role := range []trend.Role{trend.HeatValve, trend.CoolValve} {
		if p := bad[role]; p.Confidence >= Sure || !strings.Contains(p.Ground, "but supply air is not") {
			t.Errorf("swapped %v: %+v", role, p)
		}
	}
}
