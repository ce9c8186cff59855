package synth

import (
	"context"
	"fmt"
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// Story is one of the examples: a site of one unit with something to find.
type Story struct {
	Name string // of its folder
	make func() (*folder, error)
}

// Stories are the examples that the repository keeps.
func Stories() []Story {
	return []Story{{"valve-behind-a-mask", maskedValve}, {"steam-in-the-duct", steamLeak}}
}

// Write writes the story's folder, but for its README: site.toml, points.csv,
// truth.csv and the trends. The folder must not exist or be empty.
func (s Story) Write(ctx context.Context, dir string) error {
	f, err := s.make()
	if err != nil {
		return err
	}
	return f.write(ctx, dir)
}

// maskedValve: an office unit in early spring. Its heating valve passes all
// month, and its outdoor damper sticks in the third week. The supply temperature
// is held throughout, by outdoor air and by the cooling coil, so nobody in the
// building notices.
func maskedValve() (*folder, error) {
	const zone = "Europe/Dublin"
	z, err := time.LoadLocation(zone)
	if err != nil {
		return nil, fmt.Errorf("the example's time zone: %w", err)
	}
	start := time.Date(2026, 2, 23, 0, 0, 0, 0, z)
	spec := Spec{
		Name: "AHU-2", Seed: 41, Start: start, Days: 28, Step: 5 * time.Minute, Zone: z, Climate: Marine, Variable: true,
		PressurePa: psy.PressureAtAltitude(15), Schedule: Weekdays(7, 19), Sensors: Realistic(),
		Prices: trend.Prices{Electricity: 0.24, Heat: 0.11, CoolingCOP: 3.2}, Currency: "EUR",
		Plant: trend.Plant{
			Serves: "Offices, floors 2 to 4", Train: slices.Clone(officeTrain), DesignFlow: 6.5, MinOAFraction: 0.2, FanHeat: 1.1,
			HighLimit: trend.HighLimit{Kind: trend.FixedDryBulb, Value: 19},
			CoilKind:  map[trend.Component]string{trend.Preheat: "water", trend.Heating: "water", trend.Cooling: "water"},
		},
		Faults: []Fault{
			{Kind: HeatValvePasses, Severity: 0.16},
			{Kind: DamperStuck, Severity: 0.6, From: start.AddDate(0, 0, 14).Add(10 * time.Hour)},
		},
	}
	return &folder{
		name: "Quill Street Offices", currency: "EUR", zone: zone, altitude: "15 m", measure: "si", prices: spec.Prices,
		occupied: "Mon-Fri 07:00-19:00", header: TradeSI, format: "csv", units: 1, unit: func(int) Spec { return spec },
	}, nil
}

// steamLeak: a laboratory's outdoor air unit in a humid autumn, in inch-pound
// units. Its steam preheat coil begins to leak into the air in the second week.
// Temperatures stay as they should be; only the moisture books show it.
func steamLeak() (*folder, error) {
	const zone = "America/New_York"
	z, err := time.LoadLocation(zone)
	if err != nil {
		return nil, fmt.Errorf("the example's time zone: %w", err)
	}
	start := time.Date(2026, 11, 2, 0, 0, 0, 0, z)
	spec := Spec{
		Name: "OAU-1", Seed: 77, Start: start, Days: 28, Step: 5 * time.Minute, Zone: z, Climate: HumidSubtropical,
		PressurePa: psy.PressureAtAltitude(390 * 0.3048), Schedule: Always(), Sensors: Realistic(),
		Prices: trend.Prices{Electricity: 0.13, Heat: 0.06, CoolingCOP: 3.8}, Currency: "USD",
		Plant: trend.Plant{
			Serves: "Laboratories, all outdoor air", Train: slices.Clone(labTrain), DesignFlow: math.Round(1000*9000*0.3048*0.3048*0.3048/60) / 1000, FanHeat: 1.4,
			CoilKind: map[trend.Component]string{trend.Preheat: "steam", trend.Heating: "water", trend.Cooling: "water"},
		},
		Faults: []Fault{{Kind: CoilLeak, At: trend.Preheat, Severity: 2.2, From: start.AddDate(0, 0, 10).Add(6 * time.Hour)}},
	}
	spec.Trended = DefaultPoints(spec.Plant.Train, false)
	return &folder{
		name: "Fenwater Laboratory", currency: "USD", zone: zone, altitude: "390 ft", measure: "ip", prices: spec.Prices,
		occupied: "Mon-Sun 00:00-24:00", header: TradeIP, format: "parquet", units: 1, unit: func(int) Spec { return spec },
	}, nil
}
