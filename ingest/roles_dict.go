package ingest

import "dewledger/ingest/trend"

// trait is one thing that a word of a point's name says about the point.
type trait uint64

// The traits.
const (
	tOA trait = 1 << iota
	tSupply
	tReturn
	tMixed
	tExhaust
	tZone
	tWeather
	tRecovery
	tPre
	tHeat
	tCool
	tHW
	tCHW
	tCoil
	tLeaving
	tEntering
	tTemp
	tRH
	tDew
	tWetBulb
	tEnthalpy
	tMoisture
	tFlow
	tVelocity
	tPressure
	tDP
	tFilter
	tBuilding
	tBaro
	tDamper
	tEcon
	tValve
	tFan
	tStage
	tHumidifier
	tBypass
	tCO2
	tOccupied
	tSetpoint
	tCommand
	tFeedback
	tPosition
	tStatus
	tSpeed
	tPower
	tAir
	tDuct
	tSensor
	tOutput
	tUnit
	tWater
	tBlock // the point is about something else: an alarm, a limit, an enable
	tSP    // "SP": setpoint or static pressure
	tH     // "H": humidity or enthalpy
	tC     // "C": command where it is about a fan, a damper or a valve
	tS     // "S": status where it is about a fan
	tD     // "D": damper
)

// traitNames are the words in which the ground of a mapping is told.
var traitNames = []string{
	"outdoor air", "supply", "return", "mixed air", "exhaust", "zone", "weather", "heat recovery", "preheat", "heating", "cooling", "hot water", "chilled water", "coil", "leaving", "entering",
	"temperature", "relative humidity", "dew point", "wet bulb", "enthalpy", "humidity ratio", "flow", "velocity", "pressure", "pressure difference", "filter", "building", "barometer",
	"damper", "economizer", "valve", "fan", "stage", "humidifier", "bypass", "CO2", "occupancy", "setpoint", "command", "feedback", "position", "status", "speed", "power",
	"air", "duct", "sensor", "output", "unit", "water", "something else", "setpoint or static pressure", "humidity or enthalpy", "command", "status", "damper",
}

// nameWords are the words of point names, in the styles met in trend exports:
// trade abbreviations, words in full, and the usual German, French and Spanish
// words. Unless marked otherwise they are common practice, no source; the words
// in full follow the class names of the Brick schema (BSD licence) and the tag names of
// Project Haystack (Academic Free Licence), both open standards.
var nameWords = map[string]trait{
	// places
	"oa": tOA, "osa": tOA, "outdoor": tOA, "outside": tOA, "outdoorair": tOA, "outsideair": tOA, "oda": tOA, "ambient": tOA, "fresh": tOA, "makeup": tOA, "exterior": tOA, "outair": tOA,
	"sa": tSupply, "da": tSupply, "supply": tSupply, "discharge": tSupply, "sup": tSupply, "disch": tSupply, "dis": tSupply, "supplyair": tSupply, "dischargeair": tSupply, "splyair": tSupply, "sply": tSupply, "sad": tSupply, "sup air": tSupply,
	"ra": tReturn, "return": tReturn, "ret": tReturn, "rtn": tReturn, "returnair": tReturn, "rtrn": tReturn, "extract": tReturn, "eta": tReturn,
	"ma": tMixed, "mixed": tMixed, "mix": tMixed, "mixedair": tMixed, "mxd": tMixed, "mixing": tMixed, "mad": tMixed | tDamper,
	"ea": tExhaust, "exhaust": tExhaust, "exh": tExhaust, "relief": tExhaust, "rlf": tExhaust, "spill": tExhaust, "eha": tExhaust,
	"zone": tZone, "zn": tZone, "room": tZone, "space": tZone, "rm": tZone, "spc": tZone,
	"weather": tWeather, "wx": tWeather, "wthr": tWeather, "meteo": tWeather, "station": tWeather, "airport": tWeather, "wetter": tWeather, "weatherstation": tWeather,
	"erv": tRecovery, "hrv": tRecovery, "hrw": tRecovery, "hru": tRecovery, "wheel": tRecovery, "recovery": tRecovery, "erw": tRecovery, "heatwheel": tRecovery, "enthalpywheel": tRecovery, "re": tRecovery, "wrg": tRecovery,

	// coils and water
	"preheat": tPre, "ph": tPre, "prht": tPre, "phc": tPre | tCoil, "preheater": tPre, "preh": tPre, "phtg": tPre, "preheating": tPre, "frost": tPre,
	"heat": tHeat, "heating": tHeat, "htg": tHeat, "hc": tHeat | tCoil, "ht": tHeat, "heater": tHeat, "hcoil": tHeat | tCoil, "htgcoil": tHeat | tCoil, "hg": tHeat,
	"cool": tCool, "cooling": tCool, "clg": tCool, "cc": tCool | tCoil, "cl": tCool, "cooler": tCool, "ccoil": tCool | tCoil, "clng": tCool, "dx": tCool,
	"hw": tHW, "hhw": tHW, "hotwater": tHW, "lthw": tHW, "hws": tHW | tSupply, "hwr": tHW | tReturn, "hhws": tHW | tSupply, "hhwr": tHW | tReturn, "lphw": tHW, "lphws": tHW | tSupply,
	"chw": tCHW, "cw": tCHW, "chilledwater": tCHW, "chws": tCHW | tSupply, "chwr": tCHW | tReturn, "chilled": tCHW, "chwt": tCHW | tTemp,
	"hot": tHW, "coil": tCoil, "coils": tCoil, "leaving": tLeaving, "lvg": tLeaving, "lv": tLeaving, "entering": tEntering, "ent": tEntering, "off": tLeaving, "water": tWater, "wtr": tWater, "lat": tLeaving | tTemp, "eat": tBlock,

	// quantities
	"temp": tTemp, "temperature": tTemp, "t": tTemp, "tmp": tTemp, "tp": tTemp, "temps": tTemp, "drybulb": tTemp, "db": tTemp, "tmpr": tTemp, "tempr": tTemp,
	"rh": tRH, "humidity": tRH, "hum": tRH, "humid": tRH, "relhum": tRH, "relativehumidity": tRH, "rhum": tRH, "hmd": tRH, "hr": tRH, "humi": tRH,
	"dewpoint": tDew, "dewpt": tDew, "dp": tDP, "dew": tDew, "dwpt": tDew, "dpt": tDew, "dewp": tDew, "dewpnt": tDew,
	"wetbulb": tWetBulb, "wb": tWetBulb, "wbt": tWetBulb, "wetblb": tWetBulb,
	"enthalpy": tEnthalpy, "enth": tEnthalpy, "enthlpy": tEnthalpy, "enthalpie": tEnthalpy, "entalpia": tEnthalpy, "h": tH,
	"humidityratio": tMoisture, "humratio": tMoisture, "mixingratio": tMoisture, "grains": tMoisture, "abshum": tMoisture, "absolutehumidity": tMoisture, "specifichumidity": tMoisture, "moisture": tMoisture,
	"flow": tFlow, "cfm": tFlow, "airflow": tFlow | tAir, "flo": tFlow, "vol": tFlow, "volume": tFlow, "flowrate": tFlow, "gpm": tFlow | tWater, "flw": tFlow,
	"velocity": tVelocity, "vel": tVelocity, "fpm": tVelocity, "velo": tVelocity,
	"pressure": tPressure, "press": tPressure, "pres": tPressure, "static": tPressure, "stat pr": tPressure, "stpr": tPressure, "p": tPressure, "prs": tPressure, "stc": tPressure, "staticpressure": tPressure, "statpress": tPressure, "stp": tPressure,
	"diff": tDP, "differential": tDP, "dpress": tDP | tPressure, "drop": tDP, "deltap": tDP, "delta": tDP,
	"filter": tFilter, "filt": tFilter, "fltr": tFilter, "flt": tFilter, "filters": tFilter,
	"building": tBuilding, "bldg": tBuilding, "bsp": tBuilding | tPressure, "bld": tBuilding,
	"baro": tBaro, "barometer": tBaro, "barometric": tBaro, "atmospheric": tBaro, "barom": tBaro,
	"co2": tCO2, "carbondioxide": tCO2, "kohlendioxid": tCO2,

	// components
	"damper": tDamper, "dmpr": tDamper, "dmp": tDamper, "dpr": tDamper, "dampr": tDamper, "damp": tDamper, "d": tD, "dmpers": tDamper, "dampers": tDamper, "dpos": tDamper | tPosition,
	"econ": tEcon, "economizer": tEcon, "economiser": tEcon, "ecn": tEcon, "eco": tEcon,
	"valve": tValve, "vlv": tValve, "v": tValve, "vv": tValve, "valv": tValve, "vl": tValve, "vlve": tValve, "vvlv": tValve,
	"fan": tFan, "fn": tFan, "blower": tFan,
	"stage": tStage, "stg": tStage, "stages": tStage, "stgs": tStage, "compressor": tStage | tCool, "compressors": tStage | tCool,
	"humidifier": tHumidifier, "humidif": tHumidifier, "hmdfr": tHumidifier, "humidify": tHumidifier, "hmdf": tHumidifier, "humd": tHumidifier,
	"bypass": tBypass, "byp": tBypass, "bypas": tBypass,
	"occ": tOccupied, "occupied": tOccupied, "occupancy": tOccupied, "occmode": tOccupied, "occstatus": tOccupied | tStatus, "occupd": tOccupied,

	// what the point is to its quantity
	"setpoint": tSetpoint, "setpt": tSetpoint, "stpt": tSetpoint, "spt": tSetpoint, "setp": tSetpoint, "set": tSetpoint, "setpnt": tSetpoint, "sp": tSP, "stptactive": tSetpoint, "setpoints": tSetpoint,
	"cmd": tCommand, "command": tCommand, "output": tOutput, "out": tOutput, "signal": tCommand, "sig": tCommand, "ctrl": tCommand, "control": tCommand, "cmnd": tCommand, "demand": tCommand, "c": tC, "req": tCommand, "request": tCommand, "comd": tCommand, "opn": tPosition, "modulating": tCommand, "mod": tCommand,
	"fb": tFeedback, "fdbk": tFeedback, "feedback": tFeedback, "actual": tFeedback, "fbk": tFeedback, "feed": tFeedback, "act": tFeedback, "measured": tFeedback, "meas": tFeedback,
	"pos": tPosition, "position": tPosition, "posn": tPosition, "opening": tPosition, "open": tPosition, "psn": tPosition,
	"status": tStatus, "sts": tStatus, "state": tStatus, "stat": tStatus, "s": tS, "run": tStatus, "running": tStatus, "proof": tStatus, "onoff": tStatus, "on": tStatus, "ss": tCommand, "startstop": tCommand, "start": tCommand, "st": tStatus, "start/stop": tCommand, "prf": tStatus,
	"speed": tSpeed, "spd": tSpeed, "vfd": tSpeed, "vsd": tSpeed, "freq": tSpeed, "frequency": tSpeed, "drive": tSpeed, "vfdspeed": tSpeed, "hz": tSpeed, "spee": tSpeed, "inverter": tSpeed,
	"power": tPower, "kw": tPower, "pwr": tPower, "watts": tPower, "elec": tPower, "electric": tPower, "kilowatts": tPower,

	// words that say nothing more
	"air": tAir, "duct": tDuct, "dct": tDuct, "main": tUnit, "ahu": tUnit, "rtu": tUnit, "lta": tUnit, "cta": tUnit, "uta": tUnit, "unit": tUnit, "mau": tUnit, "doas": tUnit, "ach": tUnit,
	"sensor": tSensor, "sen": tSensor, "sens": tSensor, "snsr": tSensor, "value": tSensor, "val": tSensor, "present": tSensor, "pv": tSensor, "presentvalue": tSensor, "reading": tSensor, "trend": tSensor, "log": tSensor, "point": tSensor, "avg": tSensor, "average": tSensor, "mean": tSensor, "inst": tSensor,
	"ai": tSensor, "ao": tSensor, "av": tSensor, "bi": tSensor, "bo": tSensor, "bv": tSensor, "di": tSensor, "do": tSensor, "mv": tSensor, "msv": tSensor, "tl": tSensor, "effective": tSensor, "eff": tSensor, "relative": tSensor, "rel": tSensor, "local": tSensor, "the": tSensor, "of": tSensor, "current": tSensor, "active": tSensor,

	// words that make it another point
	"alarm": tBlock, "alm": tBlock, "fault": tBlock, "flt alarm": tBlock, "limit": tBlock, "lim": tBlock, "min": tBlock, "max": tBlock, "minimum": tBlock, "maximum": tBlock, "enable": tBlock, "ena": tBlock, "enb": tBlock, "en": tBlock, "enabled": tBlock,
	"mode": tBlock, "lockout": tBlock, "override": tBlock, "ovrd": tBlock, "ovr": tBlock, "reset": tBlock, "high": tBlock, "low": tBlock, "hi": tBlock, "lo": tBlock, "deadband": tBlock, "dbnd": tBlock, "offset": tBlock, "bias": tBlock, "error": tBlock, "test": tBlock, "gain": tBlock, "integral": tBlock,
	"loop": tBlock, "schedule": tBlock, "sched": tBlock, "runtime": tBlock, "hours": tBlock, "kwh": tBlock, "energy": tBlock, "total": tBlock, "accum": tBlock, "freezestat": tBlock, "freeze": tBlock, "smoke": tBlock, "safety": tBlock, "hand": tBlock, "vav": tBlock, "vavs": tBlock, "boiler": tBlock, "chiller": tBlock, "tower": tBlock, "pump": tBlock, "condenser": tBlock, "cond": tBlock, "voc": tBlock, "amps": tBlock, "amp": tBlock, "volts": tBlock, "torque": tBlock, "switch": tBlock, "target": tSetpoint, "filtered": tBlock, "calc": tBlock, "predicted": tBlock, "forecast": tBlock,

	// contractions of the trade
	"oat": tOA | tTemp, "rat": tReturn | tTemp, "mat": tMixed | tTemp, "sat": tSupply | tTemp, "dat": tSupply | tTemp, "cct": tCool | tCoil | tTemp, "hct": tHeat | tCoil | tTemp, "pht": tPre | tTemp, "zat": tZone | tTemp, "znt": tZone | tTemp, "rmt": tZone | tTemp, "osat": tOA | tTemp, "dbt": tTemp,
	"oah": tOA | tH, "rah": tReturn | tH, "sah": tSupply | tH, "dah": tSupply | tH, "mah": tMixed | tH, "oarh": tOA | tRH, "rarh": tReturn | tRH, "sarh": tSupply | tRH, "darh": tSupply | tRH,
	"oad": tOA | tDamper, "rad": tReturn | tDamper, "ead": tExhaust | tDamper, "chwv": tCool | tValve, "ccv": tCool | tValve, "clgv": tCool | tValve, "hwv": tHeat | tValve, "hcv": tHeat | tValve, "htgv": tHeat | tValve, "phv": tPre | tValve, "hhwv": tHeat | tValve,
	"sf": tSupply | tFan, "rf": tReturn | tFan, "ef": tExhaust | tFan, "saf": tSupply | tFan, "raf": tReturn | tFan, "sfan": tSupply | tFan, "rfan": tReturn | tFan, "sfs": tSupply | tFan | tStatus, "rfs": tReturn | tFan | tStatus, "sfc": tSupply | tFan | tCommand, "rfc": tReturn | tFan | tCommand,
	"dsp": tSupply | tPressure, "oaf": tOA | tFlow, "sasp": tSupply | tSP, "satsp": tSupply | tTemp | tSetpoint, "datsp": tSupply | tTemp | tSetpoint, "sats": tSupply | tTemp | tSetpoint, "dsps": tSupply | tPressure | tSetpoint, "dspsp": tSupply | tPressure | tSetpoint, "matsp": tMixed | tTemp | tSetpoint,
	"hwst": tHW | tSupply | tTemp, "hwrt": tHW | tReturn | tTemp, "chwst": tCHW | tSupply | tTemp, "chwrt": tCHW | tReturn | tTemp, "oadp": tOA | tDew, "oawb": tOA | tWetBulb, "fdp": tFilter | tDP,

	// German
	"aussenluft": tOA, "außenluft": tOA, "aul": tOA, "aussen": tOA, "außen": tOA, "zuluft": tSupply, "zul": tSupply, "abluft": tReturn, "abl": tReturn, "fortluft": tExhaust, "fol": tExhaust, "mischluft": tMixed, "mil": tMixed, "umluft": tReturn, "raum": tZone,
	"temperatur": tTemp, "feuchte": tRH, "feuchtigkeit": tRH, "taupunkt": tDew, "ventil": tValve, "klappe": tDamper, "kuehler": tCool, "kühler": tCool, "kuehl": tCool, "kühl": tCool, "kuehlung": tCool, "kühlung": tCool, "erhitzer": tHeat, "heiz": tHeat, "heizung": tHeat, "vorerhitzer": tPre, "nacherhitzer": tHeat, "heizventil": tHeat | tValve, "kühlventil": tCool | tValve, "kuehlventil": tCool | tValve,
	"ventilator": tFan, "druck": tPressure, "volumenstrom": tFlow | tAir, "sollwert": tSetpoint, "soll": tSetpoint, "istwert": tSensor, "ist": tSensor, "stellsignal": tCommand, "stellgrad": tCommand, "stellung": tPosition, "rückmeldung": tFeedback, "rueckmeldung": tFeedback, "befeuchter": tHumidifier, "betrieb": tStatus, "meldung": tStatus, "drehzahl": tSpeed, "leistung": tPower, "belegt": tOccupied, "vorlauf": tSupply | tWater, "ruecklauf": tReturn | tWater, "rücklauf": tReturn | tWater, "befehl": tCommand, "luft": tAir, "kanal": tDuct, "fühler": tSensor,

	"stell": tCommand, "erh": tHeat, "kue": tCool, "kü": tCool, "ve": tPre, "vent": tFan, "drehz": tSpeed, "leist": tPower, "uml": tReturn, "bef": tHumidifier, "kaltwasser": tCHW, "warmwasser": tHW, "heizwasser": tHW, "kaltw": tCHW, "warmw": tHW, "volstrom": tFlow, "vol.strom": tFlow, "störung": tBlock, "stoer": tBlock, "stör": tBlock, "störmeldung": tBlock, "stoermeldung": tBlock, "betriebsstunden": tBlock, "grenzwert": tBlock, "freigabe": tBlock, "raumluft": tZone, "umluftklappe": tReturn | tDamper, "registerventil": tValve, "differenzdruck": tDP, "betriebsmeldung": tStatus,

	// French
	"repris": tReturn, "mélangé": tMixed, "melangé": tMixed, "rejeté": tExhaust, "rejete": tExhaust, "extrait": tReturn, "préchauffage": tPre, "prechauffage": tPre, "départ": tSupply | tWater, "depart": tSupply | tWater, "retour": tReturn, "soufflée": tSupply, "insufflation": tSupply, "alarme": tBlock, "défaut": tBlock, "defaut": tBlock, "seuil": tBlock, "compteur": tBlock, "marche": tStatus, "pièce": tZone, "ambiente": tZone, "statique": tPressure, "échangeur": tRecovery, "récupérateur": tRecovery, "roue": tRecovery, "enthalpique": tEnthalpy, "rosée": tDew,
	"neuf": tOA, "neuve": tOA, "soufflage": tSupply, "souffle": tSupply, "soufflé": tSupply, "reprise": tReturn, "melange": tMixed, "mélange": tMixed, "rejet": tExhaust, "température": tTemp, "humidite": tRH, "humidité": tRH, "hygrometrie": tRH, "hygrométrie": tRH, "vanne": tValve, "registre": tDamper, "volet": tDamper, "chaude": tHeat, "froide": tCool, "chaud": tHeat, "froid": tCool, "batterie": tCoil, "ventilateur": tFan, "consigne": tSetpoint, "debit": tFlow, "débit": tFlow, "pression": tPressure, "vitesse": tSpeed, "puissance": tPower, "commande": tCommand, "ambiance": tZone, "etat": tStatus, "état": tStatus, "humidificateur": tHumidifier, "occupation": tOccupied, "gaine": tDuct, "exterieur": tOA, "extérieur": tOA, "exterieure": tOA, "extérieure": tOA, "de": tSensor, "du": tSensor, "la": tSensor,

	// Spanish
	"expulsión": tExhaust, "agua": tWater, "fría": tCool, "fria": tCool, "caliente": tHeat, "marcha": tCommand, "extracción": tExhaust, "extraccion": tExhaust, "mezclado": tMixed, "alarma": tBlock, "fallo": tBlock, "horas": tBlock, "límite": tBlock, "precalentamiento": tPre, "recuperador": tRecovery, "rocío": tDew, "rocio": tDew, "sala": tZone, "estática": tPressure, "diferencial": tDP, "orden": tCommand,
	"impulsion": tSupply, "impulsión": tSupply, "retorno": tReturn, "mezcla": tMixed, "expulsion": tExhaust, "temperatura": tTemp, "humedad": tRH, "valvula": tValve, "válvula": tValve, "compuerta": tDamper, "ventilador": tFan, "consigna": tSetpoint, "caudal": tFlow, "presion": tPressure, "presión": tPressure, "velocidad": tSpeed, "potencia": tPower, "frio": tCool, "frío": tCool, "calor": tHeat, "estado": tStatus, "posicion": tPosition, "posición": tPosition, "humidificador": tHumidifier, "ocupado": tOccupied, "aire": tAir, "conducto": tDuct, "filtro": tFilter, "filtre": tFilter, "bateria": tCoil, "batería": tCoil, "mando": tCommand, "zona": tZone,
}

// pattern is a set of traits that a point's name must have, and those it may
// have besides, to be a role. cost is taken off the score of a name that says
// less than it could.
type pattern struct {
	role trend.Role
	need trait
	may  trait
	cost int
}

const (
	anyFiller = tAir | tDuct | tSensor | tUnit
	asCommand = tCommand | tOutput | tPosition | tC
	measured  = anyFiller | tFeedback
)

// patterns are tried all; the cheapest that fits says the role.
var patterns = []pattern{
	{trend.OATemp, tOA | tTemp, measured, 0},
	{trend.RATemp, tReturn | tTemp, measured, 0},
	{trend.MATemp, tMixed | tTemp, measured, 0},
	{trend.SATemp, tSupply | tTemp, measured | tFan, 0},
	{trend.SATemp, tSupply | tLeaving | tTemp, measured, 0},
	{trend.PHTemp, tPre | tTemp, measured | tCoil | tLeaving | tSupply | tHeat, 0},
	{trend.CCTemp, tCool | tCoil | tTemp, measured | tLeaving | tSupply, 0},
	{trend.CCTemp, tCool | tLeaving | tTemp, measured, 0},
	{trend.HCTemp, tHeat | tCoil | tTemp, measured | tLeaving | tSupply, 0},
	{trend.HCTemp, tHeat | tLeaving | tTemp, measured, 0},

	{trend.OARH, tOA | tRH, measured, 0},
	{trend.RARH, tReturn | tRH, measured, 0},
	{trend.MARH, tMixed | tRH, measured, 0},
	{trend.CCRH, tCool | tCoil | tRH, measured | tLeaving, 0},
	{trend.SARH, tSupply | tRH, measured, 0},

	{trend.OADewPoint, tOA | tDew, measured | tTemp, 0},
	{trend.RADewPoint, tReturn | tDew, measured | tTemp, 0},
	{trend.MADewPoint, tMixed | tDew, measured | tTemp, 0},
	{trend.SADewPoint, tSupply | tDew, measured | tTemp, 0},
	{trend.OAWetBulb, tOA | tWetBulb, measured | tTemp, 0},
	{trend.OAEnthalpy, tOA | tEnthalpy, measured, 0},
	{trend.RAEnthalpy, tReturn | tEnthalpy, measured, 0},
	{trend.OAHumRatio, tOA | tMoisture, measured | tRH, 0},
	{trend.RAHumRatio, tReturn | tMoisture, measured | tRH, 0},
	{trend.SAHumRatio, tSupply | tMoisture, measured | tRH, 0},

	{trend.SATempSP, tSupply | tTemp | tSetpoint, anyFiller, 0},
	{trend.SATempSPHeat, tSupply | tTemp | tSetpoint | tHeat, anyFiller, 0},
	{trend.SATempSPCool, tSupply | tTemp | tSetpoint | tCool, anyFiller, 0},
	{trend.SAStaticSP, tPressure | tSetpoint, anyFiller | tSupply | tFan, 1},
	{trend.SAStaticSP, tPressure | tSetpoint | tSupply, anyFiller | tFan, 0},
	{trend.SAStaticSP, tPressure | tSetpoint | tDuct, anyFiller | tFan, 0},
	{trend.RARHSP, tReturn | tRH | tSetpoint, anyFiller, 0},
	{trend.SARHSP, tSupply | tRH | tSetpoint, anyFiller, 0},
	{trend.MATempSP, tMixed | tTemp | tSetpoint, anyFiller, 0},
	{trend.OAFlowSP, tOA | tFlow | tSetpoint, anyFiller, 0},

	{trend.SAFlow, tSupply | tFlow, measured | tFan, 0},
	{trend.RAFlow, tReturn | tFlow, measured | tFan, 0},
	{trend.OAFlow, tOA | tFlow, measured, 0},
	{trend.EAFlow, tExhaust | tFlow, measured | tFan, 0},
	{trend.SAVelocity, tSupply | tVelocity, measured, 0},

	{trend.SAStatic, tSupply | tPressure, measured | tFan, 0},
	{trend.SAStatic, tDuct | tPressure, measured, 0},
	{trend.FilterDP, tFilter | tDP, measured | tPressure | tSupply | tMixed, 0},
	{trend.FilterDP, tFilter | tPressure, measured | tSupply, 0},
	{trend.BuildingDP, tBuilding | tPressure, measured | tDP, 0},
	{trend.BuildingDP, tBuilding | tDP, measured, 0},

	{trend.OADamper, tOA | tDamper, anyFiller | asCommand | tEcon, 0},
	{trend.OADamper, tEcon | tDamper, anyFiller | asCommand | tMixed, 0},
	{trend.OADamper, tEcon | tCommand, anyFiller | tOutput | tPosition, 1},
	{trend.OADamper, tEcon | tOutput, anyFiller | tPosition, 1},
	{trend.OADamper, tEcon | tPosition, anyFiller, 1},
	{trend.OADamper, tEcon, anyFiller, 2},
	{trend.OADamper, tMixed | tDamper, anyFiller | asCommand, 1},
	{trend.OADamperFB, tOA | tDamper | tFeedback, anyFiller | tPosition | tEcon, 0},
	{trend.OADamperFB, tEcon | tDamper | tFeedback, anyFiller | tPosition, 0},
	{trend.RADamper, tReturn | tDamper, anyFiller | asCommand, 0},
	{trend.RADamperFB, tReturn | tDamper | tFeedback, anyFiller | tPosition, 0},
	{trend.EADamper, tExhaust | tDamper, anyFiller | asCommand, 0},
	{trend.EADamperFB, tExhaust | tDamper | tFeedback, anyFiller | tPosition, 0},

	{trend.PreheatValve, tPre | tValve, anyFiller | asCommand | tCoil | tHW | tHeat | tWater, 0},
	{trend.PreheatValveFB, tPre | tValve | tFeedback, anyFiller | tPosition | tCoil | tHW | tHeat | tWater, 0},
	{trend.HeatValve, tHeat | tValve, anyFiller | asCommand | tCoil | tHW | tWater, 0},
	{trend.HeatValve, tHW | tValve, anyFiller | asCommand | tCoil | tWater, 0},
	{trend.HeatValveFB, tHeat | tValve | tFeedback, anyFiller | tPosition | tCoil | tHW | tWater, 0},
	{trend.HeatValveFB, tHW | tValve | tFeedback, anyFiller | tPosition | tCoil | tWater, 0},
	{trend.CoolValve, tCool | tValve, anyFiller | asCommand | tCoil | tCHW | tWater, 0},
	{trend.CoolValve, tCHW | tValve, anyFiller | asCommand | tCoil | tWater, 0},
	{trend.CoolValveFB, tCool | tValve | tFeedback, anyFiller | tPosition | tCoil | tCHW | tWater, 0},
	{trend.CoolValveFB, tCHW | tValve | tFeedback, anyFiller | tPosition | tCoil | tWater, 0},
	{trend.Humidifier, tHumidifier, anyFiller | asCommand | tValve, 0},
	{trend.HumidifierFB, tHumidifier | tFeedback, anyFiller | tPosition | tValve, 0},
	{trend.CoolStage, tCool | tStage, anyFiller | asCommand | tStatus, 0},
	{trend.HeatStage, tHeat | tStage, anyFiller | asCommand | tStatus, 0},

	{trend.SAFanCmd, tSupply | tFan | tCommand, anyFiller | tOutput | tStatus, 0},
	{trend.SAFanCmd, tSupply | tFan | tC, anyFiller, 0},
	{trend.SAFanStatus, tSupply | tFan | tStatus, anyFiller | tFeedback, 0},
	{trend.SAFanStatus, tSupply | tFan | tS, anyFiller, 0},
	{trend.SAFanSpeed, tSupply | tFan | tSpeed, anyFiller | asCommand | tFeedback, 0},
	{trend.SAFanSpeed, tSupply | tFan | tOutput, anyFiller, 1},
	{trend.SAFanPower, tSupply | tFan | tPower, measured | tSpeed, 0},
	{trend.RAFanCmd, tReturn | tFan | tCommand, anyFiller | tOutput | tStatus, 0},
	{trend.RAFanCmd, tReturn | tFan | tC, anyFiller, 0},
	{trend.RAFanStatus, tReturn | tFan | tStatus, anyFiller | tFeedback, 0},
	{trend.RAFanStatus, tReturn | tFan | tS, anyFiller, 0},
	{trend.RAFanSpeed, tReturn | tFan | tSpeed, anyFiller | asCommand | tFeedback, 0},
	{trend.RAFanPower, tReturn | tFan | tPower, measured | tSpeed, 0},
	{trend.SAFanCmd, tFan | tCommand, anyFiller, 2},
	{trend.SAFanStatus, tFan | tStatus, anyFiller, 2},
	{trend.SAFanSpeed, tFan | tSpeed, anyFiller | asCommand, 2},
	{trend.SAFanPower, tFan | tPower, anyFiller, 2},

	{trend.CHWSupplyTemp, tCHW | tSupply | tTemp, anyFiller | tWater, 0},
	{trend.CHWSupplyTemp, tCHW | tEntering | tTemp, anyFiller | tWater | tCoil, 0},
	{trend.CHWReturnTemp, tCHW | tReturn | tTemp, anyFiller | tWater, 0},
	{trend.CHWReturnTemp, tCHW | tLeaving | tTemp, anyFiller | tWater | tCoil, 0},
	{trend.CHWFlow, tCHW | tFlow, anyFiller | tWater | tCoil, 0},
	{trend.HWSupplyTemp, tHW | tSupply | tTemp, anyFiller | tWater, 0},
	{trend.HWSupplyTemp, tHW | tEntering | tTemp, anyFiller | tWater | tCoil, 0},
	{trend.HWReturnTemp, tHW | tReturn | tTemp, anyFiller | tWater, 0},
	{trend.HWReturnTemp, tHW | tLeaving | tTemp, anyFiller | tWater | tCoil, 0},
	{trend.HWFlow, tHW | tFlow, anyFiller | tWater | tCoil, 0},

	{trend.RETemp, tRecovery | tLeaving | tTemp, measured | tOA | tSupply, 0},
	{trend.RETemp, tRecovery | tTemp | tSupply, measured, 1},
	{trend.RERH, tRecovery | tLeaving | tRH, measured | tOA | tSupply, 0},
	{trend.RecoveryCmd, tRecovery | tCommand, anyFiller | tOutput | tSpeed | tHeat | tEnthalpy, 0},
	{trend.RecoveryCmd, tRecovery | tSpeed, anyFiller | tOutput | tHeat | tEnthalpy, 0},
	{trend.RecoveryBypass, tRecovery | tBypass, anyFiller | asCommand | tDamper | tHeat, 0},

	{trend.WXTemp, tWeather | tTemp, measured | tOA, 0},
	{trend.WXRH, tWeather | tRH, measured | tOA, 0},
	{trend.WXDewPoint, tWeather | tDew, measured | tOA | tTemp, 0},
	{trend.WXPressure, tWeather | tPressure, measured | tOA | tBaro, 0},
	{trend.WXPressure, tBaro, measured | tPressure | tOA, 0},

	{trend.Occupied, tOccupied, anyFiller | tStatus | tCommand | tBuilding | tZone, 0},
	{trend.RACO2, tReturn | tCO2, measured, 0},
	{trend.OACO2, tOA | tCO2, measured, 0},
	{trend.ZoneTemp, tZone | tTemp, measured, 0},
	{trend.ZoneTempSP, tZone | tTemp | tSetpoint, anyFiller, 0},
}
