package trend

import (
	"testing"
	"time"
)

func TestRolesAreComplete(t *testing.T) {
	seen := map[string]bool{}
	for r := NoRole + 1; r < NumRoles; r++ {
		if r.String() == "" || r.Title() == "" || r.Kind() == NoKind {
			t.Errorf("role %d: name %q, title %q, kind %v", r, r, r.Title(), r.Kind())
		}
		if seen[r.String()] {
			t.Errorf("two roles are called %s", r)
		}
		seen[r.String()] = true
		if got, ok := ParseRole(r.String()); !ok || got != r {
			t.Errorf("%s is read as %v, %v", r, got, ok)
		}
	}
	if _, ok := ParseRole("no_such_role"); ok {
		t.Error("an unknown role was read")
	}
	for k := NoKind + 1; k < numKinds; k++ {
		if got, ok := ParseKind(k.String()); !ok || got != k {
			t.Errorf("kind %s is read as %v, %v", k, got, ok)
		}
	}
}

func TestDryBulbIsAtItsStation(t *testing.T) {
	for s := Outdoor; s < NumStations; s++ {
		if r := s.DryBulb(); r != NoRole && (r.Station() != s || r.Kind() != Temperature) {
			t.Errorf("the dry bulb of %v is %s", s, r)
		}
	}
}

func TestAxis(t *testing.T) {
	start := time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC)
	a := Axis{Start: start, Step: 5 * time.Minute, N: 12}
	for _, c := range []struct {
		at   time.Duration
		want int
	}{{0, 0}, {4*time.Minute + 59*time.Second, 0}, {5 * time.Minute, 1}, {-time.Second, -1}, {-5 * time.Minute, -1}, {-5*time.Minute - time.Second, -2}, {time.Hour, 12}} {
		if got := a.Index(start.Add(c.at)); got != c.want {
			t.Errorf("%v lies in interval %d, want %d", c.at, got, c.want)
		}
	}
	if !a.End().Equal(start.Add(time.Hour)) || a.Intervals(time.Second) != 1 || a.Intervals(time.Hour) != 12 {
		t.Error("end or number of intervals")
	}
}

func TestScheduleOccupied(t *testing.T) {
	s := Schedule{Given: true, Holidays: map[string]bool{"2026-05-01": true}}
	s.Spans[time.Friday] = []DaySpan{{7 * 60, 19 * 60}}
	s.Spans[time.Saturday] = []DaySpan{{0, 60}, {23 * 60, 1440}}
	for at, want := range map[string]bool{
		"2026-04-24 06:59": false, "2026-04-24 07:00": true, "2026-04-24 18:59": true, "2026-04-24 19:00": false,
		"2026-05-01 12:00": false, "2026-04-25 00:30": true, "2026-04-25 23:59": true, "2026-04-26 12:00": false,
	} {
		tm, err := time.Parse("2006-01-02 15:04", at)
		if err != nil {
			t.Fatal(err)
		}
		if got := s.Occupied(tm); got != want {
			t.Errorf("%s: occupied %v, want %v", at, got, want)
		}
	}
}
