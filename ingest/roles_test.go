package ingest

import (
	"testing"

	"dewledger/ingest/trend"
)

// Names in the styles met in trend exports: abbreviations in several orders, full
// words, controller point names, German, French and Spanish (invented; the styles
// are common practice, no source). The full-word names of open standards are
// checked in TestGuessStandardNames.
func TestGuessRole(t *testing.T) {
	percent := sample{n: 10, lo: 0, hi: 80}
	onoff := sample{n: 10, lo: 0, hi: 1, twoState: true}
	for _, tt := range []struct {
		name, unit string
		sm         sample
		want       trend.Role
	}{
		{"sa_temp", "", sample{}, trend.SATemp},
		{"SA_TEMP", "degC", sample{}, trend.SATemp},
		{"sa temp", "", sample{}, trend.SATemp},
		{"wx_pressure", "kPa", sample{}, trend.WXPressure},
		{"SAT", "degF", sample{}, trend.SATemp},
		{"DAT", "", sample{}, trend.SATemp},
		{"Supply Air Temp", "", sample{}, trend.SATemp},
		{"SaTemp", "", sample{}, trend.SATemp},
		{"SATemp", "", sample{}, trend.SATemp},
		{"SA-T", "degF", sample{}, trend.SATemp},
		{"SupplyAirTemperature", "", sample{}, trend.SATemp},
		{"Discharge Air Temperature", "", sample{}, trend.SATemp},
		{"DischAirTemp", "", sample{}, trend.SATemp},
		{"Leaving Air Temp", "", sample{}, trend.NoRole},
		{"MAT", "", sample{}, trend.MATemp},
		{"Mixed Air Temp", "", sample{}, trend.MATemp},
		{"MaTemp", "", sample{}, trend.MATemp},
		{"RAT", "", sample{}, trend.RATemp},
		{"Return Temp", "°F", sample{}, trend.RATemp},
		{"OAT", "", sample{}, trend.OATemp},
		{"Outside Air Temp", "", sample{}, trend.OATemp},
		{"OSA Temp", "", sample{}, trend.OATemp},
		{"OA_RH", "%", sample{}, trend.OARH},
		{"OA Hum", "", sample{}, trend.OARH},
		{"Return Air Humidity", "%RH", sample{}, trend.RARH},
		{"RA-H", "%", sample{}, trend.RARH},
		{"RAH", "%", sample{}, trend.RARH},
		{"RA-H", "kJ/kg", sample{}, trend.RAEnthalpy},
		{"RA-H", "", sample{}, trend.NoRole},
		{"OA Dew Point", "", sample{}, trend.OADewPoint},
		{"OA Dewpoint Temp", "degF", sample{}, trend.OADewPoint},
		{"OA DP", "degC", sample{}, trend.OADewPoint},
		{"Outdoor Wet Bulb", "", sample{}, trend.OAWetBulb},
		{"OA Enthalpy", "Btu/lb", sample{}, trend.OAEnthalpy},
		{"CHWV", "%", sample{}, trend.CoolValve},
		{"Clg Vlv Cmd", "", sample{}, trend.CoolValve},
		{"CHW Valve", "", percent, trend.CoolValve},
		{"CCV", "", sample{}, trend.CoolValve},
		{"Cooling Coil Valve Position", "", sample{}, trend.CoolValve},
		{"Cooling Valve Feedback", "", sample{}, trend.CoolValveFB},
		{"HWV", "", sample{}, trend.HeatValve},
		{"Htg Valve", "", sample{}, trend.HeatValve},
		{"Hot Water Valve Cmd", "", sample{}, trend.HeatValve},
		{"Preheat Valve", "", sample{}, trend.PreheatValve},
		{"PH-VLV", "", sample{}, trend.PreheatValve},
		{"Preheat Leaving Temp", "", sample{}, trend.PHTemp},
		{"Cooling Coil Leaving Air Temp", "", sample{}, trend.CCTemp},
		{"CCT", "", sample{}, trend.CCTemp},
		{"OAD", "%", sample{}, trend.OADamper},
		{"OA Dmpr Cmd", "", sample{}, trend.OADamper},
		{"OA-D", "%", sample{}, trend.OADamper},
		{"Econ", "%", percent, trend.OADamper},
		{"Economizer Damper", "", sample{}, trend.OADamper},
		{"Mixing Damper Output", "", sample{}, trend.OADamper},
		{"OA Damper Position Feedback", "", sample{}, trend.OADamperFB},
		{"Relief Damper", "", sample{}, trend.EADamper},
		{"RA Dmpr", "", sample{}, trend.RADamper},
		{"SF Status", "", onoff, trend.SAFanStatus},
		{"SF-S", "", onoff, trend.SAFanStatus},
		{"SF-C", "", onoff, trend.SAFanCmd},
		{"Supply Fan Start/Stop", "", onoff, trend.SAFanCmd},
		{"SF Cmd", "", percent, trend.SAFanSpeed},
		{"SF VFD", "%", sample{}, trend.SAFanSpeed},
		{"Supply Fan Speed", "", sample{}, trend.SAFanSpeed},
		{"SF", "kW", sample{}, trend.SAFanPower},
		{"Supply Fan Power", "kW", sample{}, trend.SAFanPower},
		{"RF Status", "", onoff, trend.RAFanStatus},
		{"Return Fan Speed", "%", sample{}, trend.RAFanSpeed},
		{"Fan Status", "", onoff, trend.SAFanStatus},
		{"DSP", "inH2O", sample{}, trend.SAStatic},
		{"Duct Static Pressure", "", sample{}, trend.SAStatic},
		{"SA Static", "inwc", sample{}, trend.SAStatic},
		{"SA SP", "inH2O", sample{}, trend.SAStatic},
		{"SA SP", "", sample{}, trend.NoRole},
		{"SAT SP", "", sample{}, trend.SATempSP},
		{"Supply Air Temp Setpoint", "", sample{}, trend.SATempSP},
		{"DAT Stpt", "", sample{}, trend.SATempSP},
		{"Duct Static Setpoint", "", sample{}, trend.SAStaticSP},
		{"Supply Air Flow", "cfm", sample{}, trend.SAFlow},
		{"SA", "cfm", sample{}, trend.SAFlow},
		{"OA Flow Setpoint", "L/s", sample{}, trend.OAFlowSP},
		{"Filter DP", "Pa", sample{}, trend.FilterDP},
		{"Bldg Static", "Pa", sample{}, trend.BuildingDP},
		{"Return CO2", "ppm", sample{}, trend.RACO2},
		{"Zone Temp", "", sample{}, trend.ZoneTemp},
		{"Space Temp Setpoint", "", sample{}, trend.ZoneTempSP},
		{"Occ", "", onoff, trend.Occupied},
		{"CHWS Temp", "", sample{}, trend.CHWSupplyTemp},
		{"CHW Return Temp", "", sample{}, trend.CHWReturnTemp},
		{"HWST", "", sample{}, trend.HWSupplyTemp},
		{"HW Supply Water Temp", "", sample{}, trend.HWSupplyTemp},
		{"Humidifier Output", "%", sample{}, trend.Humidifier},
		{"Clg Stage", "", sample{}, trend.CoolStage},
		{"Heat Wheel Speed", "%", sample{}, trend.RecoveryCmd},
		{"Barometric Pressure", "inHg", sample{}, trend.WXPressure},
		{"Weather Temp", "", sample{}, trend.WXTemp},

		{"Zulufttemperatur", "°C", sample{}, trend.SATemp},
		{"Außenlufttemperatur", "", sample{}, trend.OATemp},
		{"Abluftfeuchte", "%", sample{}, trend.RARH},
		{"Mischlufttemperatur", "", sample{}, trend.MATemp},
		{"Kühlventil", "%", sample{}, trend.CoolValve},
		{"Ventil Erhitzer", "%", sample{}, trend.HeatValve},
		{"Außenluftklappe", "%", sample{}, trend.OADamper},
		{"Zuluftventilator Betrieb", "", onoff, trend.SAFanStatus},
		{"Température soufflage", "", sample{}, trend.SATemp},
		{"Température air neuf", "", sample{}, trend.OATemp},
		{"Humidité reprise", "%", sample{}, trend.RARH},
		{"Vanne batterie froide", "%", sample{}, trend.CoolValve},
		{"Temperatura de impulsión", "", sample{}, trend.SATemp},
		{"Temperatura aire exterior", "", sample{}, trend.OATemp},
		{"Humedad retorno", "%", sample{}, trend.RARH},
		{"Compuerta aire exterior", "%", sample{}, trend.OADamper},

		// Left open: another point, too little said, or a contradiction.
		{"SAT High Limit", "", sample{}, trend.NoRole},
		{"OA Damper Min Pos", "", sample{}, trend.NoRole},
		{"SF Alarm", "", onoff, trend.NoRole},
		{"Econ Enable", "", onoff, trend.NoRole},
		{"Temp", "", sample{}, trend.NoRole},
		{"T1", "", sample{}, trend.NoRole},
		{"Kitchen hood widget temp", "", sample{}, trend.NoRole},
		{"SAT", "%", sample{}, trend.NoRole},
		{"SAT", "", sample{n: 5, lo: 900, hi: 1200}, trend.NoRole},
		{"Exhaust Fan Status", "", onoff, trend.NoRole},
		{"VAV-12 Damper", "", percent, trend.NoRole},
		{"column 4", "", percent, trend.NoRole},
		{"Chiller Supply Temp", "", sample{}, trend.NoRole},
		{"", "", sample{}, trend.NoRole},
	} {
		g := guessRole(tt.name, tt.unit, tt.sm)
		if g.role != tt.want {
			t.Errorf("%q [%s] is %v, want %v (%s)", tt.name, tt.unit, g.role, tt.want, g.ground)
		}
		if g.ground == "" {
			t.Errorf("%q: no ground", tt.name)
		}
	}
}

// Class names of the Brick schema 1.3 (brickschema.org, BSD licence) and point
// names of Project Haystack's ph.points library (Academic Free Licence), with
// the place put before where the class leaves that to the parent.
func TestGuessStandardNames(t *testing.T) {
	for name, want := range map[string]trend.Role{
		"Supply_Air_Temperature_Sensor":             trend.SATemp,
		"DischargeAirTempSensor":                    trend.SATemp,
		"Supply_Air_Temperature_Setpoint":           trend.SATempSP,
		"DischargeAirTempSp":                        trend.SATempSP,
		"Effective_Supply_Air_Temperature_Setpoint": trend.SATempSP,
		"Supply_Air_Temperature_Cooling_Setpoint":   trend.SATempSPCool,
		"Supply_Air_Temperature_Heating_Setpoint":   trend.SATempSPHeat,
		"Mixed_Air_Temperature_Sensor":              trend.MATemp,
		"Return_Air_Temperature_Sensor":             trend.RATemp,
		"Outside_Air_Temperature_Sensor":            trend.OATemp,
		"WeatherTempPoint":                          trend.WXTemp,
		"Preheat_Supply_Air_Temperature_Sensor":     trend.PHTemp,
		"DischargeAirHumiditySensor":                trend.SARH,
		"Outside_Air_Dewpoint_Sensor":               trend.OADewPoint,
		"Outside_Air_Wet_Bulb_Temperature_Sensor":   trend.OAWetBulb,
		"Outside_Air_Enthalpy_Sensor":               trend.OAEnthalpy,
		"Return_Air_CO2_Sensor":                     trend.RACO2,
		"DischargeAirFlowSensor":                    trend.SAFlow,
		"Supply_Air_Static_Pressure_Sensor":         trend.SAStatic,
		"Supply_Air_Static_Pressure_Setpoint":       trend.SAStaticSP,
		"Filter_Differential_Pressure_Sensor":       trend.FilterDP,
		"Building_Air_Static_Pressure_Sensor":       trend.BuildingDP,
		"OutsideDamperCmd":                          trend.OADamper,
		"OutsideDamperSensor":                       trend.OADamper,
		"ReturnDamperCmd":                           trend.RADamper,
		"ChilledWaterValveCmd":                      trend.CoolValve,
		"HotWaterValveCmd":                          trend.HeatValve,
		"DischargeFanRunCmd":                        trend.SAFanCmd,
		"DischargeFanRunSensor":                     trend.SAFanStatus,
		"DischargeFanSpeedModulatingCmd":            trend.SAFanSpeed,
		"ReturnFanRunSensor":                        trend.RAFanStatus,
		"ChilledWaterEnteringTempSensor":            trend.CHWSupplyTemp,
		"HotWaterEnteringTempSensor":                trend.HWSupplyTemp,
		"Min_Outside_Air_Flow_Setpoint_Limit":       trend.NoRole,
		"Supply_Air_Temperature_High_Limit_Alarm":   trend.NoRole,
		"Preheat_Hot_Water_Valve":                   trend.PreheatValve,
		"Entering_Chilled_Water_Temperature_Sensor": trend.CHWSupplyTemp,
		"Leaving_Chilled_Water_Temperature_Sensor":  trend.CHWReturnTemp,
		"Outside_Air_Humidity_Sensor":               trend.OARH,
		"Return_Air_Flow_Sensor":                    trend.RAFlow,
		"Exhaust_Air_Flow_Sensor":                   trend.EAFlow,
		"Occupancy_Status":                          trend.Occupied,
	} {
		if g := guessRole(name, "", sample{}); g.role != want {
			t.Errorf("%s is %v, want %v (%s)", name, g.role, want, g.ground)
		}
	}
}
