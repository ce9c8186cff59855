package ingest

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

// named is a row of testdata/point-names.tsv.
type named struct {
	style, name, unit string
	lo, hi            float64
	role              string
}

func readNames(t *testing.T) []named {
	t.Helper()
	f, err := os.Open("testdata/point-names.tsv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comma, r.Comment, r.LazyQuotes = '\t', '#', true
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []named
	for _, row := range rows[1:] {
		n := named{style: row[0], name: row[1], unit: row[2], role: row[5]}
		if n.lo, err = strconv.ParseFloat(row[3], 64); err != nil {
			t.Fatal(err)
		}
		if n.hi, err = strconv.ParseFloat(row[4], 64); err != nil {
			t.Fatal(err)
		}
		out = append(out, n)
	}
	return out
}

// Names in twelve styles as the program meets them: in files of a style, with their
// units and a month of data. Goals: 90 % right, under 1 % of the sure ones wrong, the
// rest left open. A name that is no point of an air handler, or from which nobody could
// tell, is right when no role is proposed.
func TestPointNames(t *testing.T) {
	names := readNames(t)
	if len(names) < 300 {
		t.Fatalf("%d names", len(names))
	}
	// A unit has one point a role: names of one role go to different units.
	files := map[string][]named{}
	count := map[string]int{}
	for _, n := range names {
		k := 0
		if _, ok := trend.ParseRole(n.role); ok && n.role != "-" {
			count[n.style+n.role]++
			k = count[n.style+n.role]
		}
		file := fmt.Sprintf("%s unit %d.csv", n.style, max(k, 1))
		files[file] = append(files[file], n)
	}
	texts := map[string]string{}
	for file, list := range files {
		var b strings.Builder
		w := csv.NewWriter(&b)
		w.Write([]string{"time", "point", "unit", "value"})
		t0 := time.Date(2026, 5, 1, 0, 0, 0, 0, time.UTC)
		for i := range 300 {
			for k, n := range list {
				x := 0.5 + 0.5*math.Sin(float64(i)/7+float64(k))
				v := n.lo + (n.hi-n.lo)*x
				if n.lo == 0 && n.hi == 1 {
					v = math.Round(x)
				}
				w.Write([]string{t0.Add(time.Duration(i) * time.Hour).Format("2006-01-02 15:04"), n.name, n.unit, strconv.FormatFloat(v, 'f', 2, 64)})
			}
		}
		w.Flush()
		texts[file] = b.String()
	}
	r, err := Read(t.Context(), Options{Paths: []string{folder(t, texts)}})
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	rows, err := r.Propose(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	type key struct{ unit, name string }
	got := map[key]Proposal{}
	for _, p := range rows {
		got[key{p.Unit, p.Column}] = p
	}
	right, wrong, open, sure, sureWrong := 0, 0, 0, 0, 0
	by := map[string][3]int{}
	for file, list := range files {
		for _, n := range list {
			name := strings.Join(strings.Fields(n.name), " ")
			p, ok := got[key{strings.TrimSuffix(file, ".csv"), name}]
			if !ok {
				p, ok = got[key{strings.TrimSuffix(file, ".csv"), n.name}]
			}
			if !ok {
				for k, q := range got { // a unit by another name
					if k.name == n.name {
						p, ok = q, true
					}
				}
			}
			if !ok {
				t.Errorf("%s %q: no row", n.style, n.name)
				continue
			}
			proposed := p.Role.String()
			s := by[n.style]
			switch {
			case p.Role == trend.NoRole && (n.role == "-" || n.role == "?"), proposed == n.role:
				right++
				s[0]++
			case p.Role == trend.NoRole:
				open++
				s[1]++
				t.Logf("open:  %s %q [%s] is %s: %s", n.style, n.name, n.unit, n.role, p.Ground)
			default:
				wrong++
				s[2]++
				t.Logf("wrong: %s %q [%s] is %s, proposed %s at %.2f: %s", n.style, n.name, n.unit, n.role, proposed, p.Confidence, p.Ground)
			}
			by[n.style] = s
			if p.Role != trend.NoRole && p.Confidence >= Sure {
				sure++
				if proposed != n.role {
					sureWrong++
				}
			}
		}
	}
	for style, s := range by {
		t.Logf("%s: %d right, %d open, %d wrong", style, s[0], s[1], s[2])
	}
	t.Logf("%d names: %d right, %d left open, %d wrong; %d sure, of which %d wrong", len(names), right, open, wrong, sure, sureWrong)
	if right*10 < len(names)*9 {
		t.Errorf("%d of %d names right, goal 90 %%", right, len(names))
	}
	if sureWrong*100 >= sure {
		t.Errorf("%d of %d sure names wrong, goal under 1 %%", sureWrong, sure)
	}
	if wrong*50 > len(names) {
		t.Errorf("%d of %d names wrong: they should be left open", wrong, len(names))
	}
}
