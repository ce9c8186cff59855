package trend

import (
	"fmt"
	"sort"
)

// Role is what a point measures or commands on a unit.
type Role uint8

// The roles, grouped as in the README. NoRole marks a column that is known and
// not used.
const (
	NoRole Role = iota

	OATemp
	RATemp
	MATemp
	PHTemp
	CCTemp
	HCTemp
	SATemp

	OARH
	RARH
	MARH
	CCRH
	SARH

	OADewPoint
	RADewPoint
	MADewPoint
	SADewPoint
	OAWetBulb
	OAEnthalpy
	RAEnthalpy
	OAHumRatio
	RAHumRatio
	SAHumRatio

	SATempSP
	SATempSPHeat
	SATempSPCool
	SAStaticSP
	RARHSP
	SARHSP
	MATempSP
	OAFlowSP

	SAFlow
	RAFlow
	OAFlow
	EAFlow
	SAVelocity

	SAStatic
	FilterDP
	BuildingDP

	OADamper
	OADamperFB
	RADamper
	RADamperFB
	EADamper
	EADamperFB

	PreheatValve
	PreheatValveFB
	HeatValve
	HeatValveFB
	CoolValve
	CoolValveFB
	Humidifier
	HumidifierFB

	CoolStage
	HeatStage

	SAFanCmd
	SAFanStatus
	SAFanSpeed
	SAFanPower
	RAFanCmd
	RAFanStatus
	RAFanSpeed
	RAFanPower

	CHWSupplyTemp
	CHWReturnTemp
	CHWFlow
	HWSupplyTemp
	HWReturnTemp
	HWFlow

	RETemp
	RERH
	RecoveryCmd
	RecoveryBypass

	WXTemp
	WXRH
	WXDewPoint
	WXPressure

	Occupied
	RACO2
	OACO2
	ZoneTemp
	ZoneTempSP

	// NumRoles is one more than the last role, for arrays indexed by role.
	NumRoles
)

// Kind is the quantity that a role carries; it fixes the canonical unit and the
// default accuracy.
type Kind uint8

// The kinds, each with its canonical unit.
const (
	NoKind        Kind = iota
	Temperature        // degC
	RelHumidity        // fraction of saturation, 0 to 1 (over 1 is representable)
	DewPoint           // degC
	WetBulb            // degC
	Enthalpy           // kJ/kg of dry air
	HumRatio           // kg/kg of dry air
	AirFlow            // m3/s
	Velocity           // m/s
	Pressure           // Pa (duct, filter and building pressure differences)
	BaroPressure       // Pa, absolute
	Position           // fraction open or of full speed, 0 to 1 (damper, valve, speed, stages)
	Switch             // 0 or 1
	Power              // kW
	WaterTemp          // degC
	WaterFlow          // L/s
	Concentration      // ppm
	numKinds
)

type kindInfo struct {
	name string // as site.toml's [accuracy] names it
	unit string // canonical unit
}

var kinds = [numKinds]kindInfo{
	NoKind:        {"none", ""},
	Temperature:   {"temperature", "degC"},
	RelHumidity:   {"rh", "fraction"},
	DewPoint:      {"dewpoint", "degC"},
	WetBulb:       {"wetbulb", "degC"},
	Enthalpy:      {"enthalpy", "kJ/kg"},
	HumRatio:      {"humratio", "kg/kg"},
	AirFlow:       {"flow", "m3/s"},
	Velocity:      {"velocity", "m/s"},
	Pressure:      {"pressure", "Pa"},
	BaroPressure:  {"barometer", "Pa"},
	Position:      {"position", "fraction"},
	Switch:        {"switch", ""},
	Power:         {"power", "kW"},
	WaterTemp:     {"water_temperature", "degC"},
	WaterFlow:     {"water_flow", "L/s"},
	Concentration: {"concentration", "ppm"},
}

// String is the kind's name, as [accuracy] in site.toml spells it.
func (k Kind) String() string {
	if k >= numKinds {
		return fmt.Sprintf("kind(%d)", uint8(k))
	}
	return kinds[k].name
}

// Unit is the kind's canonical unit, empty for a switch.
func (k Kind) Unit() string { return kinds[k].unit }

// ParseKind returns the kind of that name and whether there is one.
func ParseKind(name string) (Kind, bool) {
	for k := NoKind + 1; k < numKinds; k++ {
		if kinds[k].name == name {
			return k, true
		}
	}
	return NoKind, false
}

// Station is a place along the air path, in the order that the air meets them.
type Station uint8

// The stations.
const (
	NoStation    Station = iota
	Outdoor              // oa
	Recovered            // re: outdoor air leaving heat recovery
	Return               // ra
	Mixed                // ma
	AfterPreheat         // ph
	AfterCooling         // cc
	AfterHeating         // hc
	Supply               // sa
	Exhaust              // ea
	Weather              // wx: the site's weather, not the unit's own sensor
	NumStations          // for arrays indexed by station
)

var stations = [NumStations]struct{ code, title string }{
	NoStation:    {"", ""},
	Outdoor:      {"oa", "outdoor air"},
	Recovered:    {"re", "air leaving heat recovery"},
	Return:       {"ra", "return air"},
	Mixed:        {"ma", "mixed air"},
	AfterPreheat: {"ph", "air leaving preheat"},
	AfterCooling: {"cc", "air leaving the cooling coil"},
	AfterHeating: {"hc", "air leaving the heating coil"},
	Supply:       {"sa", "supply air"},
	Exhaust:      {"ea", "exhaust air"},
	Weather:      {"wx", "site weather"},
}

// String is the station's two-letter code.
func (s Station) String() string { return stations[s].code }

// DryBulb is the role of the dry-bulb temperature at the station, NoRole where
// there is none.
func (s Station) DryBulb() Role {
	switch s {
	case Outdoor:
		return OATemp
	case Recovered:
		return RETemp
	case Return:
		return RATemp
	case Mixed:
		return MATemp
	case AfterPreheat:
		return PHTemp
	case AfterCooling:
		return CCTemp
	case AfterHeating:
		return HCTemp
	case Supply:
		return SATemp
	case Weather:
		return WXTemp
	}
	return NoRole
}

// Title is the station in words.
func (s Station) Title() string { return stations[s].title }

type roleInfo struct {
	name    string
	title   string
	kind    Kind
	station Station
}

var roles = [NumRoles]roleInfo{
	NoRole: {"-", "not used", NoKind, NoStation},

	OATemp: {"oa_temp", "outdoor air temperature", Temperature, Outdoor},
	RATemp: {"ra_temp", "return air temperature", Temperature, Return},
	MATemp: {"ma_temp", "mixed air temperature", Temperature, Mixed},
	PHTemp: {"ph_temp", "temperature leaving preheat", Temperature, AfterPreheat},
	CCTemp: {"cc_temp", "temperature leaving the cooling coil", Temperature, AfterCooling},
	HCTemp: {"hc_temp", "temperature leaving the heating coil", Temperature, AfterHeating},
	SATemp: {"sa_temp", "supply air temperature", Temperature, Supply},

	OARH: {"oa_rh", "outdoor relative humidity", RelHumidity, Outdoor},
	RARH: {"ra_rh", "return relative humidity", RelHumidity, Return},
	MARH: {"ma_rh", "mixed air relative humidity", RelHumidity, Mixed},
	CCRH: {"cc_rh", "relative humidity leaving the cooling coil", RelHumidity, AfterCooling},
	SARH: {"sa_rh", "supply relative humidity", RelHumidity, Supply},

	OADewPoint: {"oa_dewpoint", "outdoor dew point", DewPoint, Outdoor},
	RADewPoint: {"ra_dewpoint", "return dew point", DewPoint, Return},
	MADewPoint: {"ma_dewpoint", "mixed air dew point", DewPoint, Mixed},
	SADewPoint: {"sa_dewpoint", "supply dew point", DewPoint, Supply},
	OAWetBulb:  {"oa_wetbulb", "outdoor wet bulb", WetBulb, Outdoor},
	OAEnthalpy: {"oa_enthalpy", "outdoor enthalpy", Enthalpy, Outdoor},
	RAEnthalpy: {"ra_enthalpy", "return enthalpy", Enthalpy, Return},
	OAHumRatio: {"oa_humratio", "outdoor humidity ratio", HumRatio, Outdoor},
	RAHumRatio: {"ra_humratio", "return humidity ratio", HumRatio, Return},
	SAHumRatio: {"sa_humratio", "supply humidity ratio", HumRatio, Supply},

	SATempSP:     {"sa_temp_sp", "supply temperature setpoint", Temperature, NoStation},
	SATempSPHeat: {"sa_temp_sp_heat", "supply temperature setpoint, heating", Temperature, NoStation},
	SATempSPCool: {"sa_temp_sp_cool", "supply temperature setpoint, cooling", Temperature, NoStation},
	SAStaticSP:   {"sa_static_sp", "supply static pressure setpoint", Pressure, NoStation},
	RARHSP:       {"ra_rh_sp", "return humidity setpoint", RelHumidity, NoStation},
	SARHSP:       {"sa_rh_sp", "supply humidity setpoint", RelHumidity, NoStation},
	MATempSP:     {"ma_temp_sp", "mixed temperature setpoint", Temperature, NoStation},
	OAFlowSP:     {"oa_flow_sp", "outdoor air flow setpoint", AirFlow, NoStation},

	SAFlow:     {"sa_flow", "supply air flow", AirFlow, Supply},
	RAFlow:     {"ra_flow", "return air flow", AirFlow, Return},
	OAFlow:     {"oa_flow", "outdoor air flow", AirFlow, Outdoor},
	EAFlow:     {"ea_flow", "exhaust air flow", AirFlow, Exhaust},
	SAVelocity: {"sa_velocity", "supply air velocity", Velocity, Supply},

	SAStatic:   {"sa_static", "supply static pressure", Pressure, Supply},
	FilterDP:   {"filter_dp", "filter pressure drop", Pressure, NoStation},
	BuildingDP: {"building_dp", "building pressure", Pressure, NoStation},

	OADamper:   {"oa_damper", "outdoor air damper command", Position, Outdoor},
	OADamperFB: {"oa_damper_fb", "outdoor air damper position", Position, Outdoor},
	RADamper:   {"ra_damper", "return air damper command", Position, Return},
	RADamperFB: {"ra_damper_fb", "return air damper position", Position, Return},
	EADamper:   {"ea_damper", "exhaust air damper command", Position, Exhaust},
	EADamperFB: {"ea_damper_fb", "exhaust air damper position", Position, Exhaust},

	PreheatValve:   {"preheat_valve", "preheat valve command", Position, NoStation},
	PreheatValveFB: {"preheat_valve_fb", "preheat valve position", Position, NoStation},
	HeatValve:      {"heat_valve", "heating valve command", Position, NoStation},
	HeatValveFB:    {"heat_valve_fb", "heating valve position", Position, NoStation},
	CoolValve:      {"cool_valve", "cooling valve command", Position, NoStation},
	CoolValveFB:    {"cool_valve_fb", "cooling valve position", Position, NoStation},
	Humidifier:     {"humidifier", "humidifier command", Position, NoStation},
	HumidifierFB:   {"humidifier_fb", "humidifier valve position", Position, NoStation},

	CoolStage: {"cool_stage", "cooling stages on", Position, NoStation},
	HeatStage: {"heat_stage", "heating stages on", Position, NoStation},

	SAFanCmd:    {"sa_fan_cmd", "supply fan command", Switch, NoStation},
	SAFanStatus: {"sa_fan_status", "supply fan status", Switch, NoStation},
	SAFanSpeed:  {"sa_fan_speed", "supply fan speed", Position, NoStation},
	SAFanPower:  {"sa_fan_power", "supply fan power", Power, NoStation},
	RAFanCmd:    {"ra_fan_cmd", "return fan command", Switch, NoStation},
	RAFanStatus: {"ra_fan_status", "return fan status", Switch, NoStation},
	RAFanSpeed:  {"ra_fan_speed", "return fan speed", Position, NoStation},
	RAFanPower:  {"ra_fan_power", "return fan power", Power, NoStation},

	CHWSupplyTemp: {"chw_supply_temp", "chilled water supply temperature", WaterTemp, NoStation},
	CHWReturnTemp: {"chw_return_temp", "chilled water return temperature", WaterTemp, NoStation},
	CHWFlow:       {"chw_flow", "chilled water flow", WaterFlow, NoStation},
	HWSupplyTemp:  {"hw_supply_temp", "hot water supply temperature", WaterTemp, NoStation},
	HWReturnTemp:  {"hw_return_temp", "hot water return temperature", WaterTemp, NoStation},
	HWFlow:        {"hw_flow", "hot water flow", WaterFlow, NoStation},

	RETemp:         {"re_temp", "temperature leaving heat recovery", Temperature, Recovered},
	RERH:           {"re_rh", "relative humidity leaving heat recovery", RelHumidity, Recovered},
	RecoveryCmd:    {"recovery_cmd", "heat recovery command", Position, NoStation},
	RecoveryBypass: {"recovery_bypass", "heat recovery bypass damper", Position, NoStation},

	WXTemp:     {"wx_temp", "site weather temperature", Temperature, Weather},
	WXRH:       {"wx_rh", "site weather relative humidity", RelHumidity, Weather},
	WXDewPoint: {"wx_dewpoint", "site weather dew point", DewPoint, Weather},
	WXPressure: {"wx_pressure", "site barometric pressure", BaroPressure, Weather},

	Occupied:   {"occupied", "occupied mode", Switch, NoStation},
	RACO2:      {"ra_co2", "return air CO2", Concentration, Return},
	OACO2:      {"oa_co2", "outdoor air CO2", Concentration, Outdoor},
	ZoneTemp:   {"zone_temp", "zone temperature", Temperature, NoStation},
	ZoneTempSP: {"zone_temp_sp", "zone temperature setpoint", Temperature, NoStation},
}

// String is the role's public name, "oa_temp".
func (r Role) String() string {
	if r >= NumRoles {
		return fmt.Sprintf("role(%d)", uint8(r))
	}
	return roles[r].name
}

// Title is the role in words, "outdoor air temperature".
func (r Role) Title() string { return roles[r].title }

// Kind is the quantity that the role carries.
func (r Role) Kind() Kind { return roles[r].kind }

// Station is the place along the air path where the role is measured, or
// NoStation.
func (r Role) Station() Station { return roles[r].station }

// Analogue reports whether the role is a measured quantity of the air or water
// that never stays at one value for long in a running unit.
func (r Role) Analogue() bool {
	switch r.Kind() {
	case Temperature:
		return r.Station() != NoStation || r == ZoneTemp
	case RelHumidity:
		return r.Station() != NoStation
	case DewPoint, WetBulb, Enthalpy, HumRatio, AirFlow, Velocity, WaterTemp, WaterFlow, Concentration:
		return r != OAFlowSP
	case Pressure:
		return r != SAStaticSP
	}
	return false
}

// ParseRole returns the role of that public name and whether there is one; "-"
// is NoRole.
func ParseRole(name string) (Role, bool) {
	for r := NoRole; r < NumRoles; r++ {
		if roles[r].name == name {
			return r, true
		}
	}
	return NoRole, false
}

// RoleNames lists every role's public name, sorted, for messages.
func RoleNames() []string {
	out := make([]string, 0, NumRoles-1)
	for r := NoRole + 1; r < NumRoles; r++ {
		out = append(out, roles[r].name)
	}
	sort.Strings(out)
	return out
}
