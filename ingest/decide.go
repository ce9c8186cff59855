package ingest

import (
	"fmt"
	"math"
	"slices"

	"dewledger/ingest/trend"
)

// scaleOf is how a unit's temperatures are logged, where they do not say.
type tempScale uint8

const (
	tempUnknown tempScale = iota
	tempC
	tempF
)

// decideMeasures settles the unit of measure of every column: what the schedule
// or the header says, what the cells carry, else what the data leave no doubt
// about. A column whose unit stays in doubt is left out with a note.
func decideMeasures(cols []*rawColumn, measure string, notes *notebook) {
	for _, c := range cols {
		if c.bind.stated {
			c.set(c.bind.measure, "")
			continue
		}
		if c.cellUnit != "" {
			if u, ok := LookupUnit(c.cellUnit); ok {
				c.set(u, "the cells carry the unit")
			}
		}
	}
	checkLabels(cols, notes)
	scale, why := temperatureScale(cols, measure)
	positions := positionScale(cols)
	for _, c := range cols {
		if c.decided {
			continue
		}
		name, how := c.judge(scale, why, positions)
		if name == "" {
			notes.add("unit-unknown", c.file, c.header, 0, "the unit of measure of %s cannot be told (%s); the column is left out. Give it in points.csv, column measure", c.role.Title(), how)
			continue
		}
		u, _ := LookupUnit(name)
		c.set(u, how)
		if DimensionOf(c.role.Kind()) != NoDimension {
			notes.add("unit-assumed", c.file, c.header, 0, "%s is taken to be in %s: %s", c.role.Title(), u.Name, how)
		}
	}
}

func (c *rawColumn) set(u Measure, how string) {
	k := c.role.Kind()
	if DimensionOf(k) == NoDimension { // a switch has no unit
		c.measure, c.scale, c.decided, c.how = Measure{}, 1, true, how
		return
	}
	scale, shift, ok := u.toKind(k)
	if !ok {
		return
	}
	if k == trend.Position && u.Dim == Frequency {
		full := 60.0
		if _, _, hi, _ := c.stats(); hi*u.Scale <= 50.5 {
			full = 50
		}
		scale = u.Scale / full
		if how != "" {
			how += "; "
		}
		how += fmt.Sprintf("full speed is taken for %.0f Hz", full)
	}
	c.measure, c.scale, c.shift, c.decided, c.how = u, scale, shift, true, how
}

// valueStats is what a column's values are like: extremes over all of them, the
// median of a sample.
type valueStats struct {
	lo, mid, hi float64
	n           int
}

// statsOf is how many values a median is taken of.
const statsOf = 20_000

// stats are the column's extremes, median and number of values, NaN and 0 where it has
// none.
func (c *rawColumn) stats() (lo, mid, hi float64, n int) {
	if k := c.known; k != nil {
		return k.lo, k.mid, k.hi, k.n
	}
	k := &valueStats{lo: math.NaN(), mid: math.NaN(), hi: math.NaN()}
	c.known = k
	stride := len(c.s.val)/statsOf + 1
	v := make([]float64, 0, len(c.s.val)/stride+1)
	for _, x := range c.s.val {
		if x != x || isSentinel(x) {
			continue
		}
		if k.n == 0 || x < k.lo {
			k.lo = x
		}
		if k.n == 0 || x > k.hi {
			k.hi = x
		}
		if k.n%stride == 0 {
			v = append(v, x)
		}
		k.n++
	}
	if len(v) > 0 {
		slices.Sort(v)
		k.mid = v[len(v)/2]
	}
	return k.lo, k.mid, k.hi, k.n
}

// temperatureScale judges degC or degF for the unit's temperatures that do not
// say: by what labelled ones are, else by indoor temperatures, which a building
// keeps between 10 and 35 degC, 50 and 95 degF.
func temperatureScale(cols []*rawColumn, measure string) (tempScale, string) {
	c, f := 0, 0
	indoor := func(r trend.Role) bool {
		switch r {
		case trend.RATemp, trend.ZoneTemp, trend.ZoneTempSP, trend.SATemp, trend.SATempSP, trend.SATempSPCool, trend.SATempSPHeat:
			return true
		}
		return false
	}
	for _, x := range cols {
		if x.decided && DimensionOf(x.role.Kind()) == Temperature {
			switch x.measure.Name {
			case "degC":
				c++
			case "degF":
				f++
			}
		}
	}
	if c != f && (c == 0 || f == 0) {
		if c > f {
			return tempC, "the unit's other temperatures are in degC"
		}
		return tempF, "the unit's other temperatures are in degF"
	}
	c, f = 0, 0
	for _, x := range cols {
		if x.decided || !indoor(x.role) {
			continue
		}
		switch _, mid, _, n := x.stats(); {
		case n == 0:
		case mid >= 50 && mid <= 130:
			f++
		case mid >= 5 && mid <= 40:
			c++
		}
	}
	switch {
	case c > 0 && f == 0:
		return tempC, "indoor temperatures of this size are degC"
	case f > 0 && c == 0:
		return tempF, "indoor temperatures of this size are degF"
	case c > 0 && f > 0:
		return tempUnknown, "some indoor temperatures look like degC, others like degF"
	}
	// Only outdoor or coil temperatures: extremes that one scale cannot have.
	for _, x := range cols {
		if x.decided || DimensionOf(x.role.Kind()) != Temperature || x.role.Kind() == trend.WaterTemp {
			continue
		}
		lo, _, hi, n := x.stats()
		switch {
		case n == 0:
		case hi > 60 && lo > -30:
			return tempF, "temperatures of this size are degF"
		case lo < -5 && hi < 45:
			return tempC, "temperatures of this size are degC"
		}
	}
	return tempUnknown, "degC or degF"
}

// positionScale is 0.01 where the unit's unlabelled positions are percentages.
func positionScale(cols []*rawColumn) float64 {
	for _, c := range cols {
		if c.decided || c.role.Kind() != trend.Position || isStage(c.role) {
			continue
		}
		if _, _, hi, n := c.stats(); n > 0 && hi > 1.5 {
			return 0.01
		}
	}
	return 1
}

func isStage(r trend.Role) bool { return r == trend.CoolStage || r == trend.HeatStage }

// judge names the unit of a column that does not say its own, or an empty name,
// and why.
func (c *rawColumn) judge(scale tempScale, tempWhy string, positions float64) (unit, how string) {
	lo, mid, hi, n := c.stats()
	if n == 0 {
		return "", "it has no values"
	}
	switch k := c.role.Kind(); k {
	case trend.Temperature, trend.DewPoint, trend.WetBulb, trend.WaterTemp:
		switch scale {
		case tempC:
			return "degC", tempWhy
		case tempF:
			return "degF", tempWhy
		}
		return "", tempWhy
	case trend.RelHumidity:
		if mid > 1.5 || hi > 2 {
			return "%", "its values go over 1.5"
		}
		return "fraction", "its values stay under 1.5"
	case trend.Position:
		switch {
		case isStage(c.role):
			return c.judgeStages(hi)
		case hi > 1.5:
			return "%", "its values go over 1.5"
		case positions == 0.01 && hi <= 1:
			return "%", "the unit's other positions are percentages"
		}
		return "fraction", "its values stay under 1.5"
	case trend.Switch:
		return "fraction", "on or off"
	case trend.Enthalpy:
		switch scale {
		case tempC:
			return "kJ/kg", "the unit's temperatures are in degC"
		case tempF:
			return "Btu/lb", "the unit's temperatures are in degF"
		}
		return "", "kJ/kg or Btu/lb"
	case trend.HumRatio:
		switch {
		case hi < 0.06:
			return "kg/kg", "its values are of that size"
		case hi > 40 && scale == tempF:
			return "gr/lb", "its values are of that size"
		case scale == tempC && hi < 40:
			return "g/kg", "its values are of that size"
		}
		return "", "g/kg or gr/lb"
	case trend.BaroPressure:
		switch {
		case lo > 18 && hi < 33:
			return "inHg", "its values are of that size"
		case lo > 45 && hi < 111:
			return "kPa", "its values are of that size"
		case lo > 450 && hi < 1110:
			return "hPa", "its values are of that size"
		case lo > 45e3 && hi < 111e3:
			return "Pa", "its values are of that size"
		}
		return "", "kPa, hPa or inHg"
	case trend.Pressure:
		switch {
		case scale == tempF && hi > 0.02 && hi < 12 && c.role != trend.BuildingDP:
			return "inH2O", "a unit in degF with pressures of this size"
		case scale == tempC && hi > 15 && hi < 5000:
			return "Pa", "a unit in degC with pressures of this size"
		}
		return "", "Pa, kPa or inH2O"
	case trend.Concentration:
		return "ppm", "the only usual one"
	case trend.Velocity:
		if scale == tempC && hi < 30 {
			return "m/s", "a unit in degC with velocities of this size"
		}
		if scale == tempF && hi > 100 {
			return "fpm", "a unit in degF with velocities of this size"
		}
		return "", "m/s or fpm"
	case trend.AirFlow:
		if scale == tempF && hi > 300 {
			return "cfm", "a unit in degF with flows of this size"
		}
		return "", "m3/s, m3/h, L/s or cfm"
	case trend.WaterFlow:
		if scale == tempF && hi > 0 {
			return "gpm", "a unit in degF"
		}
		return "", "L/s or m3/h"
	}
	return "", "several are usual"
}

// judgeStages reads counts of stages as a share of the most that are ever on.
func (c *rawColumn) judgeStages(hi float64) (unit, how string) {
	if hi > 12 {
		return "%", "its values go beyond any count of stages"
	}
	if hi > 1 {
		c.bind.scale /= math.Ceil(hi)
		return "fraction", "counts of stages, as a share of the most that are on"
	}
	return "fraction", "its values stay within 0 and 1"
}

// fewest is how many values a label is judged by.
const fewest = 24

// checkLabels holds the units that headers and schedule state against the data. What
// the file says is replaced where the data leave no doubt; what points.csv says is
// only reported.
func checkLabels(cols []*rawColumn, notes *notebook) {
	wrong := map[[2]string]string{} // file and label: what indoor temperatures show
	for _, c := range cols {
		if !c.bind.stated || !c.decided {
			continue
		}
		name, sure := c.contradicts()
		if name == "" || name == c.measure.Name {
			continue
		}
		u, _ := LookupUnit(name)
		lo, _, hi, _ := c.stats()
		switch {
		case !c.bind.label:
			notes.add("measure-mislabelled", c.file, c.header, c.bind.line, "points.csv says %s; values of %.4g to %.4g look like %s to a %s. It is read as points.csv says", c.measure.Name, lo, hi, u.Name, c.role.Title())
		case !sure:
			notes.add("measure-mislabelled", c.file, c.header, 0, "the file says %s; values of %.4g to %.4g look like %s to a %s. It is read as the file says; points.csv, column measure, settles it", c.measure.Name, lo, hi, u.Name, c.role.Title())
		default:
			if u.Dim == Temperature {
				wrong[[2]string{c.file, c.measure.Name}] = u.Name
			}
			c.relabel(u, lo, hi, "", notes)
		}
	}
	// A file that calls its indoor temperatures by the wrong scale does so for all.
	for _, c := range cols {
		name := wrong[[2]string{c.file, c.measure.Name}]
		if name == "" || !c.bind.stated || !c.bind.label || c.role.Kind() == trend.WaterTemp || DimensionOf(c.role.Kind()) != Temperature {
			continue
		}
		u, _ := LookupUnit(name)
		lo, _, hi, _ := c.stats()
		c.relabel(u, lo, hi, "as the file's indoor temperatures show", notes)
	}
}

func (c *rawColumn) relabel(u Measure, lo, hi float64, why string, notes *notebook) {
	if why == "" {
		why = fmt.Sprintf("values of %.4g to %.4g cannot be a %s in %s", lo, hi, c.role.Title(), c.measure.Name)
	}
	notes.add("measure-mislabelled", c.file, c.header, 0, "the file says %s; it is read as %s: %s", c.measure.Name, u.Name, why)
	c.set(u, "the file says "+c.measure.Name+", which the data contradict")
}

// contradicts names the unit that the data are in where that is not what is stated;
// sure says that there is no doubt (common practice, no source: occupied rooms are
// kept between 12 and 33 degC).
func (c *rawColumn) contradicts() (unit string, sure bool) {
	lo, mid, hi, n := c.stats()
	if n < fewest {
		return "", false
	}
	switch k := c.role.Kind(); k {
	case trend.Temperature:
		indoor := c.role == trend.RATemp || c.role == trend.ZoneTemp || c.role == trend.ZoneTempSP
		switch {
		case indoor && c.measure.Name == "degF" && mid >= 12 && mid <= 33 && hi < 45:
			return "degC", true
		case indoor && c.measure.Name == "degC" && mid >= 54 && mid <= 92 && lo > 35:
			return "degF", true
		case !indoor && c.measure.Name == "degC" && mid > 55 && hi < 130 && c.role.Station() != trend.NoStation:
			return "degF", false
		}
	case trend.RelHumidity:
		switch {
		case c.measure.Name == "%" && hi <= 1.01 && mid > 0.05:
			return "fraction", true
		case c.measure.Name == "fraction" && mid > 1.5:
			return "%", true
		}
	case trend.Position:
		if c.measure.Name == "fraction" && hi > 1.5 && hi <= 105 {
			return "%", true
		}
		if c.measure.Name == "%" && hi <= 1 && hi >= 0.5 && mid > 0 && mid < 1 {
			return "fraction", false
		}
	case trend.BaroPressure:
		if u, _ := c.judge(tempUnknown, "", 0); u != "" {
			return u, true
		}
	case trend.HumRatio:
		switch {
		case c.measure.Name == "g/kg" && hi < 0.06 && hi > 0:
			return "kg/kg", true
		case c.measure.Name == "kg/kg" && mid > 1 && hi < 40:
			return "g/kg", true
		}
	case trend.Pressure:
		if c.measure.Name == "inH2O" && mid > 30 && c.role != trend.BuildingDP {
			return "Pa", true
		}
		if c.measure.Name == "Pa" && c.role == trend.SAStatic && hi < 8 && mid > 0.1 {
			return "inH2O", false
		}
	case trend.Concentration:
	}
	return "", false
}
