package balance

import (
	"math"
	"slices"
	"testing"
	"time"

	"dewledger/ingest/trend"
)

var nan = math.NaN()

func TestStates(t *testing.T) {
	type in struct{ fan, preheat, heat, cool, damper float64 }
	for _, c := range []struct {
		name string
		in   in
		want State
	}{
		{"fan off", in{0, 0, 0, 0, 0}, Off},
		{"fan off with a valve open", in{0, 0, 1, 0, 0}, Off},
		{"fan not known", in{nan, 0, 0, 0, 0.2}, Unknown},
		{"ventilating", in{1, 0, 0, 0, 0.2}, Ventilating},
		{"a whisker above minimum", in{1, 0, 0, 0, 0.24}, Ventilating},
		{"free cooling", in{1, 0, 0, 0, 0.6}, FreeCooling},
		{"free and mechanical", in{1, 0, 0, 0.5, 1}, FreePlusMechanical},
		{"mechanical", in{1, 0, 0, 0.5, 0.2}, Mechanical},
		{"heating", in{1, 0, 0.3, 0, 0.2}, Heating},
		{"preheating", in{1, 0.3, 0, 0, 0.6}, Heating},
		{"both", in{1, 0.3, 0, 0.4, 0.2}, HeatingAndCooling},
		{"both, damper shut", in{1, 0, 0.3, 0.4, 0}, HeatingAndCooling},
		{"warm-up", in{1, 0, 0.8, 0, 0}, Recirculating},
		{"night", in{1, 0, 0, 0, 0.01}, Recirculating},
		{"valve neither shut nor running", in{1, 0, 0.04, 0, 0.2}, Ventilating},
		{"cooling not known", in{1, 0, 0, nan, 0.2}, Unknown},
		{"cooling not known while heating", in{1, 0, 1, nan, 0.2}, Unknown},
		{"one heating coil not known, the other on", in{1, nan, 1, 0, 0.2}, Heating},
		{"one heating coil not known", in{1, nan, 0, 0, 0.2}, Unknown},
		{"damper not known", in{1, 0, 0, 0, nan}, Unknown},
		{"damper not known while heating", in{1, 0, 1, 0, nan}, Heating},
	} {
		r := newRig(2).flat(trend.SAFanStatus, c.in.fan).flat(trend.PreheatValve, c.in.preheat).flat(trend.HeatValve, c.in.heat)
		r.flat(trend.CoolValve, c.in.cool).flat(trend.OADamper, c.in.damper)
		r.u.Plant.MinDamper = 0.2
		if got := Keep(r.u).States()[1]; got != c.want {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}

func TestStateWithoutPoints(t *testing.T) {
	// No point of the cooling coil in a train that has one.
	r := newRig(20).running()
	r.u.Cols[trend.CoolValve] = nil
	b := Keep(r.u)
	if got := b.States()[19]; got != Unknown {
		t.Errorf("state %v without a cooling point, want unknown", got)
	}
	if b.Shut(trend.Cooling)[19] || b.Running(trend.Cooling)[19] || b.Dry()[19] || b.ShutFor(trend.Cooling)[19] != 0 {
		t.Error("a coil without a point is called shut, running or dry")
	}
	if !b.Settled()[19] {
		t.Error("not settled although all that is known has held")
	}
	// A component that the train has not is shut.
	r = newRig(20, trend.Mixing, trend.Heating).running()
	b = Keep(r.u)
	if !b.Shut(trend.Cooling)[0] || b.Running(trend.Cooling)[0] || !b.Dry()[19] || b.ShutFor(trend.Cooling)[0] < 1000 {
		t.Error("a coil that is not there is not shut")
	}
	// No fan point at all: assumed on, and said so.
	r.u.Cols[trend.SAFanStatus] = nil
	b = Keep(r.u)
	if b.FanKnownBy() != trend.NoRole || !b.FanOn()[0] {
		t.Errorf("fan known by %v, on %v; want assumed on", b.FanKnownBy(), b.FanOn()[0])
	}
}

func TestFanOn(t *testing.T) {
	for _, c := range []struct {
		role     trend.Role
		on, off  float64
		absolute bool
	}{
		{trend.SAFanStatus, 1, 0, true}, {trend.SAFanStatus, 100, 0, true}, {trend.SAFanCmd, 1, 0, true},
		{trend.SAFanSpeed, 0.3, 0.02, true}, {trend.SAFlow, 2.5, 0.2, false}, {trend.SAFanPower, 3, 0.1, false},
	} {
		r := newRig(100).set(c.role, func(i int) float64 {
			switch {
			case i < 50:
				return c.on
			case i < 90:
				return c.off
			}
			return nan
		})
		b := Keep(r.u)
		on := b.FanOn()
		if b.FanKnownBy() != c.role || !on[10] || on[60] || on[95] {
			t.Errorf("%s: known by %v, on %v, off %v, missing %v", c.role, b.FanKnownBy(), on[10], on[60], on[95])
		}
	}
}

// A change starts the wait again; 30 minutes are six intervals of five.
func TestSettled(t *testing.T) {
	r := newRig(60).running().set(trend.HeatValve, func(i int) float64 {
		switch {
		case i >= 20 && i < 30:
			return 0.5
		case i == 45:
			return nan
		}
		return 0
	})
	r.u.Plant.MinDamper = 0.3
	b := Keep(r.u)
	var got []int
	was := false
	for i, s := range b.Settled() {
		if s != was {
			got = append(got, i)
		}
		was = s
	}
	if want := []int{6, 20, 26, 30, 36, 45, 52}; !slices.Equal(got, want) {
		t.Errorf("settled changes at %v, want %v", got, want)
	}
	if k := b.ShutFor(trend.Heating); k[19] != 20 || k[25] != 0 || k[30] != 1 || k[45] != 0 || k[46] != 1 {
		t.Errorf("shut for %v", k)
	}
}

// A wet coil waits before it is dry.
func TestDryWaitsForTheCoil(t *testing.T) {
	r := newRig(60).running().set(trend.CoolValve, func(i int) float64 {
		if i < 20 {
			return 0.6
		}
		return 0
	})
	r.u.Plant.MinDamper = 0.3
	dry := Keep(r.u).Dry()
	if k := slices.Index(dry, true); k != 26 {
		t.Errorf("dry from interval %d, want 26", k)
	}
}

func TestStages(t *testing.T) {
	r := newRig(3).flat(trend.CoolStage, 0.5)
	if c := Keep(r.u).Command(trend.Cooling); c[0] != 0.5 {
		t.Errorf("stages alone: %v", c)
	}
	r.flat(trend.CoolValve, 0.2)
	if c := Keep(r.u).Command(trend.Cooling); c[0] != 0.5 {
		t.Errorf("valve and stages: %v", c)
	}
	// Two heating coils, one valve and one set of stages: the first has the valve.
	r = newRig(3, trend.Mixing, trend.Heating, trend.Cooling, trend.Reheat).flat(trend.HeatValve, 0.1).flat(trend.HeatStage, 0.7)
	b := Keep(r.u)
	if h, x := b.Command(trend.Heating), b.Command(trend.Reheat); h[0] != 0.1 || x[0] != 0.7 {
		t.Errorf("heating %v, reheat %v", h, x)
	}
	// A valve alone says nothing of the second.
	r = newRig(3, trend.Mixing, trend.Heating, trend.Cooling, trend.Reheat).flat(trend.HeatValve, 0.1)
	if c := Keep(r.u).Command(trend.Reheat); c != nil {
		t.Errorf("reheat known by %v", c)
	}
	// Position feedback serves where there is no command.
	r = newRig(3).flat(trend.OADamperFB, 0.4)
	if c := Keep(r.u).Command(trend.Mixing); c[0] != 0.4 {
		t.Errorf("damper %v", c)
	}
}

func TestMinDamper(t *testing.T) {
	day := func(i int) float64 { // shut at night, minimum 0.18 for hours, modulating above
		switch k := i % 288; {
		case k < 84 || k > 230:
			return 0
		case k < 140:
			return 0.18 + 0.004*float64(i%3)
		case k < 200:
			return 0.2 + 0.8*float64(k-140)/60
		}
		return 0.35
	}
	r := newRig(288*3).running().set(trend.OADamper, day)
	near(t, "lowest sustained command", Keep(r.u).MinDamper(), 0.184, 0.01)
	r.u.Plant.MinDamper = 0.25
	near(t, "stated", Keep(r.u).MinDamper(), 0.25, 0)
	r = newRig(288).running().flat(trend.OADamper, 0)
	if m := Keep(r.u).MinDamper(); m == m {
		t.Errorf("a damper that never opens has a minimum of %v", m)
	}
	r = newRig(288).running()
	r.u.Cols[trend.OADamper] = nil
	if m := Keep(r.u).MinDamper(); m == m {
		t.Errorf("no damper point, minimum %v", m)
	}
}

// Day by day as interval by interval, through two clock changes, in zones whose
// offsets are not whole hours, and with spans that touch midnight.
func TestOccupiedFollowsTheSchedule(t *testing.T) {
	for _, name := range []string{"UTC", "Europe/Lisbon", "America/St_Johns", "Asia/Kathmandu", "Australia/Lord_Howe"} {
		zone, err := time.LoadLocation(name)
		if err != nil {
			t.Fatal(err)
		}
		r := newRig(365*24*2 + 7)
		r.u.Axis.Step = 30 * time.Minute
		r.u.Axis.Start = time.Date(2026, 1, 1, 3, 10, 0, 0, time.UTC)
		r.u.Site.Zone = zone
		s := &r.u.Site.Schedule
		s.Given = true
		for d := time.Monday; d <= time.Friday; d++ {
			s.Spans[d] = []trend.DaySpan{{From: 60, To: 150}, {From: 425, To: 1140}}
		}
		s.Spans[time.Saturday] = []trend.DaySpan{{From: 0, To: 1440}}
		s.Spans[time.Sunday] = []trend.DaySpan{{From: 1380, To: 1440}}
		s.Holidays = map[string]bool{"2026-05-01": true}
		got := Keep(r.u).Occupied()
		for i := range got {
			local := r.u.Axis.At(i).In(zone)
			if want := s.Occupied(local); got[i] != want {
				t.Fatalf("%s: %v is occupied %v, want %v", name, local, got[i], want)
			}
		}
	}
}

func TestOccupiedPointGoesFirst(t *testing.T) {
	r := newRig(4).set(trend.Occupied, func(i int) float64 { return []float64{0, 1, nan, 0}[i] })
	b := Keep(r.u)
	if !b.OccupiedKnown() || !slices.Equal(b.Occupied(), []bool{false, true, true, false}) {
		t.Errorf("occupied %v", b.Occupied())
	}
	r.u.Site.Schedule.Given = true // and says never
	if b := Keep(r.u); !slices.Equal(b.Occupied(), []bool{false, true, false, false}) {
		t.Errorf("occupied %v", b.Occupied())
	}
	if b := Keep(newRig(4).u); b.OccupiedKnown() || !b.Occupied()[0] {
		t.Error("without point or schedule: known, or not occupied")
	}
}
