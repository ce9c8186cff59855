package rules

import (
	"context"
	"math"
	"strings"
	"testing"
	"time"

	"dewledger/ingest/synth"
	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// A mixed-air sensor far out makes valves seem to leak: they are explained by it, low
// and without a price. A valve that leaks on a unit with sound sensors is not.
func TestSensorExplains(t *testing.T) {
	run := func(f synth.Fault) finding.Set {
		s := spec(synth.Marine, time.April, 5, []synth.Fault{f})
		return Run(context.Background(), balance.Keep(synth.Simulate(s).Unit()), Options{})
	}
	bad := run(synth.Fault{Kind: synth.SensorOffset, Role: trend.MATemp, Severity: 4})
	explained := 0
	for k, f := range bad.Findings {
		switch {
		case f.Rule == "sensor-offset":
			if k != 0 || f.Component != "ma_temp" {
				t.Errorf("finding %d is %s of %s", k, f.Rule, f.Component)
			}
		case strings.Contains(f.Statement, "explains it"):
			explained++
			if f.Priority != finding.Low || !math.IsNaN(f.Energy.KWh) || strings.Contains(f.Statement, "kWh") || f.Cause != "mixed air temperature sensor out of calibration" {
				t.Errorf("explained, and yet %+v", f)
			}
		default:
			t.Errorf("%s (%s) is not explained by the sensor: %s", f.Rule, f.Priority, f.Statement)
		}
	}
	if explained == 0 || bad.Total.KWh > 0 {
		t.Errorf("%d findings explained, %.0f kWh in all", explained, bad.Total.KWh)
	}
	leak := run(synth.Fault{Kind: synth.HeatValvePasses, Severity: 0.3})
	found := false
	for _, f := range leak.Findings {
		found = found || f.Rule == "heat-valve-passes" && f.Priority > finding.Low
		if strings.Contains(f.Statement, "explains it") {
			t.Errorf("a leaking valve is explained away: %s", f.Statement)
		}
	}
	if !found {
		t.Error("the leaking valve was not found")
	}
}
