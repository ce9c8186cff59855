package synth

import (
	"fmt"
	"math"
	"slices"
	"time"

	"dewledger/ingest/trend"
	"dewledger/psy"
)

// Spec says what to simulate. The zero value of a field takes a default; a Spec
// that makes no sense panics in Simulate, since it is the caller's mistake.
type Spec struct {
	Name        string         // default "AHU-1"
	Seed        uint64         // of the building, the sensors and, unless set apart, the weather
	WeatherSeed uint64         // default Seed: units of one site share it
	Start       time.Time      // local midnight in Zone; default Monday 2 March 2026
	Days        int            // of 24 hours; default 28
	Step        time.Duration  // default 5 min; a day is a whole number of steps
	Zone        *time.Location // default UTC
	Climate     Climate

	// Plant is both what the unit is and what its site says of it. What it leaves
	// open (zero or NaN) the simulated unit has all the same, and Unit does not
	// tell: 5 m³/s, 20 % outdoor air at least, 1.0 K over the fan, an economizer up
	// to 18 degC dry bulb.
	Plant      trend.Plant
	Variable   bool           // air flow follows the load; else it is constant
	PressurePa float64        // default 101325
	Schedule   trend.Schedule // default Monday to Friday, 07:00 to 19:00
	Prices     trend.Prices   // default none
	Currency   string
	Trended    []trend.Role // default: DefaultPoints of the train
	Sensors    SensorModel  // default: readings are the truth
	Faults     []Fault
}

// Run is what a Spec leads to.
type Run struct {
	Spec Spec // with its defaults filled in
	Axis trend.Axis
	True *Truth
	Read [trend.NumRoles]*trend.Column // what the sensors of the trended points read

	Offsets [trend.NumRoles]float64 // of the sensors, in the role's canonical unit; of a relative one a share of the reading
}

// Truth is what really happens, a value an interval. Stations that the train
// has not are nil. While the fan is off the ducts hold still air, Flow and
// every rate are 0.
type Truth struct {
	T        [trend.NumStations][]float64 // degC
	W        [trend.NumStations][]float64 // kg/kg
	Flow     []float64                    // kg of dry air per second, supply
	Fraction []float64                    // outdoor air in the mixture, by mass of dry air; 1 without a mixing box
	Position []float64                    // of the outdoor damper, whatever its command
	Parts    []Part                       // the components behind the mixing box, in the order of the train
}

// Part is one component's true doing, a value an interval. Its books close:
//
//	Flow·h(TIn, WIn) + Heat + WaterHeat = Flow·h(TOut, WOut)
//	Flow·WIn + Water = Flow·WOut
type Part struct {
	Component            trend.Component
	TIn, WIn, TOut, WOut []float64 // degC, kg/kg
	Heat                 []float64 // kW into the air; negative: cooling
	Water                []float64 // kg/s into the air, net; negative: condensate
	WaterHeat            []float64 // kW, the enthalpy that this water brings
}

// Air is the moist air model at the run's pressure.
func (r *Run) Air() psy.Model { return psy.Model{P: r.Spec.PressurePa} }

// Part is the part of that component, nil where the train has none.
func (t *Truth) Part(c trend.Component) *Part {
	for i := range t.Parts {
		if t.Parts[i].Component == c {
			return &t.Parts[i]
		}
	}
	return nil
}

// Unit is the run as the trend reader would give it: the readings of the
// trended points, and what the site says about the unit. The columns are the
// run's own; a unit whose columns are to be changed needs copies.
func (r *Run) Unit() *trend.Unit {
	s := &r.Spec
	u := &trend.Unit{
		Name: s.Name, Axis: r.Axis, Plant: stated(s.Plant),
		Site: trend.Site{Name: "Simulated site", Zone: s.Zone, PressurePa: s.PressurePa, Measure: "si", Currency: s.Currency, Prices: s.Prices, Schedule: s.Schedule},
		Cols: r.Read,
	}
	return u
}

// stated is the plant as a site says it: what the literal left at zero is not
// said.
func stated(p trend.Plant) trend.Plant {
	for _, x := range []*float64{&p.DesignFlow, &p.DuctArea, &p.MinOAFraction, &p.MinDamper, &p.FanHeat} {
		if *x == 0 {
			*x = math.NaN()
		}
	}
	switch {
	case math.IsNaN(p.FanHeat):
		p.FanHeatU = math.NaN()
	case p.FanHeatU == 0:
		p.FanHeatU = 0.5 * p.FanHeat / math.Sqrt(3)
	}
	if p.Train == nil {
		p.Train, p.TrainAssumed = trend.DefaultTrain(), true
	}
	return p
}

func or(x, otherwise float64) float64 {
	if x == 0 || math.IsNaN(x) {
		return otherwise
	}
	return x
}

// Weekdays is a schedule from Monday to Friday.
func Weekdays(fromHour, toHour int) trend.Schedule {
	s := trend.Schedule{Given: true}
	for d := time.Monday; d <= time.Friday; d++ {
		s.Spans[d] = []trend.DaySpan{{From: fromHour * 60, To: toHour * 60}}
	}
	return s
}

// Always is a schedule without an unoccupied hour, as a laboratory has.
func Always() trend.Schedule {
	s := trend.Schedule{Given: true}
	for d := range s.Spans {
		s.Spans[d] = []trend.DaySpan{{From: 0, To: 24 * 60}}
	}
	return s
}

// settle fills in the defaults and panics at what cannot be simulated.
func (s Spec) settle() Spec {
	if s.Name == "" {
		s.Name = "AHU-1"
	}
	if s.WeatherSeed == 0 {
		s.WeatherSeed = s.Seed
	}
	if s.Zone == nil {
		s.Zone = time.UTC
	}
	if s.Start.IsZero() {
		s.Start = time.Date(2026, 3, 2, 0, 0, 0, 0, s.Zone)
	}
	if s.Days == 0 {
		s.Days = 28
	}
	if s.Step == 0 {
		s.Step = 5 * time.Minute
	}
	s.PressurePa = or(s.PressurePa, 101325)
	if !s.Schedule.Given {
		s.Schedule = Weekdays(7, 19)
	}
	for _, x := range []*float64{&s.Prices.Electricity, &s.Prices.Heat, &s.Prices.CoolingCOP} {
		if *x == 0 {
			*x = math.NaN()
		}
	}
	if s.Days < 0 || s.Step < time.Second || s.Step > time.Hour || 24*time.Hour%s.Step != 0 {
		panic(fmt.Sprintf("synth: %d days in steps of %v: a step lies between a second and an hour and divides a day", s.Days, s.Step))
	}
	if s.Climate >= numClimates {
		panic(fmt.Sprintf("synth: there is no climate %d", s.Climate))
	}
	train := stated(s.Plant).Train
	for i, c := range train {
		if !slices.Contains(trend.Components(), c) || slices.Index(train, c) != i {
			panic(fmt.Sprintf("synth: the train %v names %q, which is no component or stands twice", train, c))
		}
		if c == trend.Mixing && i > 0 && (i > 1 || train[0] != trend.Recovery) {
			panic(fmt.Sprintf("synth: the train %v has more than recovery before mixing", train))
		}
	}
	if s.Trended == nil {
		s.Trended = DefaultPoints(train, s.Variable)
	}
	for _, f := range s.Faults {
		f.check(train)
	}
	return s
}

// DefaultPoints are the points that a well-instrumented unit of that train
// trends: 24 or more for a train with mixing and coils.
func DefaultPoints(train []trend.Component, variable bool) []trend.Role {
	has := func(c trend.Component) bool { return slices.Contains(train, c) }
	out := []trend.Role{
		trend.OATemp, trend.RATemp, trend.SATemp, trend.OARH, trend.RARH, trend.SARH, trend.SATempSP, trend.SAFlow,
		trend.SAStatic, trend.SAStaticSP, trend.FilterDP, trend.SAFanCmd, trend.SAFanStatus, trend.SAFanPower,
		trend.RAFanStatus, trend.Occupied, trend.RACO2, trend.ZoneTemp,
	}
	add := func(c trend.Component, roles ...trend.Role) {
		if has(c) {
			out = append(out, roles...)
		}
	}
	add(trend.Mixing, trend.MATemp, trend.OADamper, trend.RADamper)
	add(trend.Recovery, trend.RETemp, trend.RecoveryCmd)
	add(trend.Preheat, trend.PHTemp, trend.PreheatValve)
	add(trend.Cooling, trend.CCTemp, trend.CoolValve, trend.CHWSupplyTemp)
	add(trend.Heating, trend.HeatValve, trend.HWSupplyTemp)
	if has(trend.Reheat) {
		if has(trend.Heating) {
			out = append(out, trend.HCTemp, trend.HeatStage)
		} else {
			out = append(out, trend.HeatValve)
		}
	}
	if has(trend.Humidify) || has(trend.Evaporative) {
		out = append(out, trend.Humidifier, trend.RARHSP)
	}
	if variable {
		out = append(out, trend.SAFanSpeed)
	}
	slices.Sort(out)
	return out
}
