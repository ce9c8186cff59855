package ingest

// Dimension is the sort of quantity that a unit of measure measures. Each has
// one base unit, the one the program computes in.
type Dimension uint8

// The dimensions, each with its base unit.
const (
	NoDimension    Dimension = iota
	Temperature              // degC
	TempDifference           // K
	Ratio                    // fraction, 0 to 1
	Enthalpy                 // kJ/kg of dry air, zero for dry air at 0 degC
	Moisture                 // kg/kg of dry air
	Flow                     // m3/s
	Speed                    // m/s
	Pressure                 // Pa
	Power                    // kW
	Concentration            // ppm
	Length                   // m
	Area                     // m2
	Duration                 // h
	Frequency                // Hz
	Rate                     // 1/h
	numDimensions
)

var dimensions = [numDimensions]struct{ title, base string }{
	NoDimension:    {"number", ""},
	Temperature:    {"temperature", "degC"},
	TempDifference: {"temperature difference", "K"},
	Ratio:          {"fraction or percentage", "fraction"},
	Enthalpy:       {"enthalpy", "kJ/kg"},
	Moisture:       {"humidity ratio", "kg/kg"},
	Flow:           {"flow", "m3/s"},
	Speed:          {"velocity", "m/s"},
	Pressure:       {"pressure", "Pa"},
	Power:          {"power", "kW"},
	Concentration:  {"concentration", "ppm"},
	Length:         {"length", "m"},
	Area:           {"area", "m2"},
	Duration:       {"time", "h"},
	Frequency:      {"frequency", "Hz"},
	Rate:           {"rate", "1/h"},
}

// String is the dimension in words.
func (d Dimension) String() string { return dimensions[d].title }

// Base is the dimension's base unit, empty for a bare number.
func (d Dimension) Base() string { return dimensions[d].base }

// Measure is a unit of measure: base = value*Scale + Shift.
type Measure struct {
	Name  string // as messages and reports spell it
	Dim   Dimension
	Scale float64
	Shift float64
	also  []string // other spellings, folded by foldUnit
}

// The units of measure that are read everywhere. Conversion factors are those
// of NIST Special Publication 811 (2008), appendix B.8: foot 0.3048 m, inch
// 0.0254 m, US gallon 3.785412E-03 m3, pound (avoirdupois) 0.45359237 kg,
// Btu(IT)/lb 2.326 kJ/kg, Btu(IT)/h 0.2930711 W, ton of refrigeration 3516.853
// W, horsepower (550 ft·lbf/s) 745.6999 W, (metric) 735.4988 W, psi 6894.757
// Pa, inch of mercury (conventional) 3386.389 Pa, inch of water (conventional)
// 249.0889 Pa, millimetre of water (conventional) 9.80665 Pa, millimetre of
// mercury (conventional) 133.3224 Pa, foot of water (conventional) 2989.067 Pa.
// A pound is 7000 grains by definition (the same appendix: grain 64.79891 mg).
//
// Enthalpy per pound counts from dry air at 0 degF, per kilogram from dry air
// at 0 degC; the tables of both (ASHRAE Handbook Fundamentals, psychrometrics
// chapter) count water from the liquid at the freezing point. The two zeros are 0.240
// Btu/(lb·degF) * 32 degF = 7.68 Btu/lb apart, 17.86 kJ/kg.
var units = []Measure{
	{"degC", Temperature, 1, 0, []string{"c", "celsius", "degcelsius", "degreec", "degreesc", "degreecelsius", "degreescelsius", "centigrade", "degc"}},
	{"degF", Temperature, 1 / 1.8, -32 / 1.8, []string{"f", "fahrenheit", "degfahrenheit", "degreef", "degreesf", "degreefahrenheit", "degreesfahrenheit"}},
	{"K", Temperature, 1, -273.15, []string{"kelvin", "degk"}},

	{"%", Ratio, 0.01, 0, []string{"percent", "pct", "prozent", "pourcent", "porcentaje", "%rh", "%r.h.", "rh%", "percentrh", "pctrh", "%relativehumidity", "%open", "%opn", "percentopen", "%rf", "%hr", "%spd", "%speed", "%relh"}},
	{"fraction", Ratio, 1, 0, []string{"frac", "ratio", "0-1", "0..1", "1", "unit", "perunit", "pu"}},

	{"kJ/kg", Enthalpy, 1, 0, []string{"kj/kgda", "kj/kgdryair", "kjperkg", "kilojoulesperkilogram", "kj/kga", "kilojoulesperkilogramdryair"}},
	{"J/kg", Enthalpy, 0.001, 0, []string{"j/kgda"}},
	{"Btu/lb", Enthalpy, 2.326, -7.68 * 2.326, []string{"btu/lbda", "btuperlb", "btu/lbm", "btu/lbdryair", "btu/lbs", "btu/pound", "btusperpounddryair"}},

	{"kg/kg", Moisture, 1, 0, []string{"kg/kgda", "lb/lb", "lb/lbda", "kgw/kgda", "lbw/lbda", "kgperkg"}},
	{"g/kg", Moisture, 0.001, 0, []string{"g/kgda", "gperkg", "gw/kgda", "gramsofwaterperkilogramdryair"}},
	{"gr/lb", Moisture, 1.0 / 7000, 0, []string{"grains", "grains/lb", "gr/lbda", "grains/lbda", "grainsperpound", "gpp", "grainsperlb"}},

	{"m3/s", Flow, 1, 0, []string{"cms", "cumecs", "m3s", "m3ps", "cubicmeterspersecond", "m3/sec"}},
	{"m3/h", Flow, 1.0 / 3600, 0, []string{"cmh", "m3h", "m3/hr", "cubicmetersperhour", "cbm/h"}},
	{"m3/min", Flow, 1.0 / 60, 0, []string{"cmm"}},
	{"L/s", Flow, 0.001, 0, []string{"lps", "l/sec", "literspersecond", "litrespersecond", "ls", "dm3/s"}},
	{"L/min", Flow, 0.001 / 60, 0, []string{"lpm", "litersperminute"}},
	{"L/h", Flow, 0.001 / 3600, 0, []string{"lph", "l/hr"}},
	{"cfm", Flow, 0.3048 * 0.3048 * 0.3048 / 60, 0, []string{"ft3/min", "ft3/m", "scfm", "acfm", "cubicfeetperminute", "cuft/min"}},
	{"gpm", Flow, 3.785412e-3 / 60, 0, []string{"gal/min", "usgpm", "usgallonsperminute", "gallonsperminute"}},

	{"m/s", Speed, 1, 0, []string{"mps", "meterspersecond", "m/sec"}},
	{"fpm", Speed, 0.3048 / 60, 0, []string{"ft/min", "feetperminute"}},
	{"ft/s", Speed, 0.3048, 0, []string{"fps", "feetpersecond"}},

	{"Pa", Pressure, 1, 0, []string{"pascal", "pascals"}},
	{"hPa", Pressure, 100, 0, []string{"hectopascals"}},
	{"kPa", Pressure, 1000, 0, []string{"kilopascals"}},
	{"mbar", Pressure, 100, 0, []string{"millibar", "millibars", "mb"}},
	{"bar", Pressure, 1e5, 0, []string{"bars"}},
	{"psi", Pressure, 6894.757, 0, []string{"psia", "psig", "lbf/in2", "poundsforcepersquareinch"}},
	{"inH2O", Pressure, 249.0889, 0, []string{"inwc", "inwg", "iwc", "wc", "inh20", "\"wc", "\"wg", "\"h2o", "inw", "incheswc", "incheswg", "inchesh2o", "inchesofwater", "inwatercolumn", "wg", "iwg"}},
	{"mmH2O", Pressure, 9.80665, 0, []string{"mmwc", "mmwg", "mmca", "mmws"}},
	{"ftH2O", Pressure, 2989.067, 0, []string{"ftwc"}},
	{"inHg", Pressure, 3386.389, 0, []string{"inchesofmercury", "\"hg", "incheshg"}},
	{"mmHg", Pressure, 133.3224, 0, []string{"millimetersofmercury", "torr"}},
	{"atm", Pressure, 101325, 0, nil},

	{"kW", Power, 1, 0, []string{"kilowatt", "kilowatts"}},
	{"W", Power, 0.001, 0, []string{"watt", "watts"}},
	{"MW", Power, 1000, 0, []string{"megawatt", "megawatts"}},
	{"hp", Power, 0.7456999, 0, []string{"horsepower", "bhp"}},
	{"PS", Power, 0.7354988, 0, nil},
	{"Btu/h", Power, 0.2930711e-3, 0, []string{"btuh", "btu/hr", "btusperhour"}},
	{"MBH", Power, 0.2930711, 0, []string{"kbtu/h", "kbtuh", "kbtu/hr", "mbtuh"}},
	{"ton", Power, 3.516853, 0, []string{"tons", "tonsrefrigeration", "tr"}},

	{"ppm", Concentration, 1, 0, []string{"partspermillion", "ppmv"}},

	{"m", Length, 1, 0, []string{"meter", "metre", "meters", "metres"}},
	{"km", Length, 1000, 0, nil},
	{"ft", Length, 0.3048, 0, []string{"feet", "foot"}},
	{"in", Length, 0.0254, 0, []string{"inch", "inches"}},
	{"mm", Length, 0.001, 0, nil},
	{"cm", Length, 0.01, 0, nil},
	{"m2", Area, 1, 0, []string{"sqm", "squaremeters"}},
	{"ft2", Area, 0.3048 * 0.3048, 0, []string{"sqft", "squarefeet"}},
	{"in2", Area, 0.0254 * 0.0254, 0, []string{"sqin"}},

	{"h", Duration, 1, 0, []string{"hr", "hrs", "hour", "hours"}},
	{"min", Duration, 1.0 / 60, 0, []string{"minute", "minutes", "mins"}},
	{"s", Duration, 1.0 / 3600, 0, []string{"sec", "second", "seconds"}},
	{"d", Duration, 24, 0, []string{"day", "days"}},

	{"Hz", Frequency, 1, 0, []string{"hertz"}},
	{"1/h", Rate, 1, 0, []string{"perhour", "/h"}},
	{"1/d", Rate, 1.0 / 24, 0, []string{"perday", "/d"}},
}

// Units of a difference; a plain temperature unit is read as one too where a
// difference is asked for.
var differenceUnits = []Measure{
	{"K", TempDifference, 1, 0, []string{"kelvin", "deltac", "degcdiff", "cdegrees", "deltadegc", "deltak"}},
	{"degF diff", TempDifference, 1 / 1.8, 0, []string{"deltaf", "degfdiff", "deltadegf", "fdegrees", "r"}},
}
