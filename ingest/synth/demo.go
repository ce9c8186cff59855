package synth

import (
	"fmt"
	"math"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// demoUnit is one unit of the demo site: a kind of unit and what is wrong with
// it. Beyond the first cycle severities and times vary.
type demoUnit struct {
	serves   string
	train    []trend.Component
	variable bool
	allDay   bool // a laboratory: never unoccupied
	coils    map[trend.Component]string
	fault    Fault
	limit    float64 // high limit, degC, where it is low: a unit that hardly cools with outdoor air; 0: between 18 and 21
	from, to float64 // of the fault, as shares of the period; to 0: the end
}

var (
	officeTrain = []trend.Component{trend.Mixing, trend.Preheat, trend.Cooling, trend.Fan, trend.Heating}
	plainTrain  = []trend.Component{trend.Mixing, trend.Heating, trend.Cooling, trend.Fan}
	labTrain    = []trend.Component{trend.Preheat, trend.Cooling, trend.Heating, trend.Fan}
	damped      = []trend.Component{trend.Mixing, trend.Heating, trend.Cooling, trend.Humidify, trend.Fan}
)

// demoUnits, the small site first: two healthy units and four faults, one of
// them new in the third week and one gone in the last. After the list's end it
// begins again.
var demoUnits = []demoUnit{
	{serves: "Offices, north side", train: officeTrain, variable: true},
	{serves: "Offices, south side", train: officeTrain, variable: true, fault: Fault{Kind: HeatValvePasses, Severity: 0.3}},
	{serves: "Meeting rooms", train: officeTrain, variable: true, fault: Fault{Kind: DamperStuck, Severity: 0.6}, from: 0.25},
	{serves: "Laboratory", train: labTrain, allDay: true, coils: map[trend.Component]string{trend.Preheat: "steam"},
		fault: Fault{Kind: CoilLeak, At: trend.Preheat, Severity: 2.5}, from: 0.5},
	{serves: "Entrance hall", train: plainTrain},
	{serves: "Assembly hall", train: plainTrain, fault: Fault{Kind: RunsAtNight, Severity: 0.8}, to: 0.75},

	{serves: "Offices, second floor", train: officeTrain, variable: true, fault: Fault{Kind: CoolValvePasses, Severity: 0.4}},
	{serves: "Library", train: officeTrain, variable: true},
	{serves: "Server support", train: plainTrain, variable: true, fault: Fault{Kind: EconomizerOff, Severity: 1}},
	{serves: "Dining hall", train: plainTrain, fault: Fault{Kind: SensorScale, Role: trend.OARH, Severity: 1.3}},
	{serves: "Print shop", train: damped, fault: Fault{Kind: HumidifierPasses, Severity: 2.5}},
	{serves: "Gymnasium", train: plainTrain, fault: Fault{Kind: SensorFrozen, Role: trend.MATemp, Severity: 1}, from: 0.4},
	{serves: "Clinic", train: officeTrain, variable: true, fault: Fault{Kind: DamperLeaks, Severity: 0.4}},
	{serves: "Workshop", train: plainTrain},
	{serves: "Archive", train: plainTrain, variable: true, fault: Fault{Kind: SensorOffset, Role: trend.SARH, Severity: -0.22}},
	{serves: "Theatre", train: plainTrain, fault: Fault{Kind: SensorOffset, Role: trend.MATemp, Severity: 4}},
	{serves: "Cold rooms, fresh air", train: labTrain, allDay: true, fault: Fault{Kind: PreheatFails, Severity: 1}, from: 0.3, to: 0.9},
	{serves: "Kitchen", train: plainTrain, variable: true, fault: Fault{Kind: SensorCeiling, Role: trend.OARH, Severity: 0.7}},
	{serves: "Pool plant room", train: plainTrain, variable: true, limit: 2, fault: Fault{Kind: CarryOver, Severity: 3}},
}

// demo is the demo site: a campus in a mild, damp spring.
func demo(o SiteOptions) (*folder, error) {
	const zone = "Europe/Lisbon"
	z, err := time.LoadLocation(zone)
	if err != nil {
		return nil, fmt.Errorf("the demo site's time zone: %w", err)
	}
	prices := trend.Prices{Electricity: 0.18, Heat: 0.09, CoolingCOP: 3.5}
	y, m, d := o.From.Date()
	start := time.Date(y, m, d, 0, 0, 0, 0, z)
	width := max(1, len(fmt.Sprint(o.Count)))
	period := time.Duration(o.Days) * 24 * time.Hour
	unit := func(i int) Spec {
		u := &demoUnits[i%len(demoUnits)]
		rng := stream(o.Seed+uint64(i)*1000003, forPlant+200)
		draw := func(lo, hi float64) float64 { return lo + (hi-lo)*rng.Float64() }
		s := Spec{
			Name: fmt.Sprintf("AHU-%0*d", width, i+1), Seed: o.Seed*7919 + uint64(i) + 1, WeatherSeed: o.Seed,
			Start: start, Days: o.Days, Step: o.Step, Zone: z, Climate: Marine, Variable: u.variable,
			PressurePa: psy.PressureAtAltitude(40), Schedule: Weekdays(7, 19), Prices: prices, Currency: "EUR",
			Sensors: Realistic(),
			Plant: trend.Plant{
				Serves: u.serves, Train: u.train, CoilKind: u.coils,
				DesignFlow:    math.Round(10*draw(2, 8)) / 10,
				FanHeat:       math.Round(10*draw(0.8, 1.4)) / 10,
				MinOAFraction: math.Round(20*draw(0.15, 0.25)) / 20,
				HighLimit:     trend.HighLimit{Kind: trend.FixedDryBulb, Value: math.Round(draw(18, 21))},
			},
		}
		if u.limit != 0 {
			s.Plant.HighLimit.Value = u.limit
		}
		if u.allDay {
			s.Schedule = Always()
			s.Plant.MinOAFraction, s.Plant.HighLimit = 0, trend.HighLimit{}
		}
		if u.fault.Kind != NoFault {
			f := u.fault
			from, to := u.from, u.to
			if i >= len(demoUnits) {
				if f.Severity != 1 { // of those there is no less and no more
					f.Severity = math.Round(100*f.Severity*draw(0.7, 1.1)) / 100
				}
				from *= draw(0.5, 1.3)
			}
			f.From = s.Start.Add(time.Duration(from * float64(period))).Truncate(o.Step)
			if to > 0 {
				f.To = s.Start.Add(time.Duration(to * float64(period))).Truncate(o.Step)
			}
			s.Faults = []Fault{f}
		}
		return s
	}
	return &folder{
		name: "Alder Point Campus", currency: "EUR", zone: zone, altitude: "40 m", measure: "si", prices: prices,
		occupied: "Mon-Fri 07:00-19:00", header: TradeSI, format: o.Format, units: o.Count, unit: unit,
	}, nil
}
