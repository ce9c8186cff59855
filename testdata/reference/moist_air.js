// Reads states as JSON, [[t, rh, p, twb], ...] in degC, 1, Pa, degC, and writes
// what the reference library makes of each, as arrays in the order below. Null
// where the library refuses.
'use strict'
const lib = require('psychrolib')
lib.SetUnitSystem(lib.SI)

const attempt = f => {
  try {
    return f()
  } catch {
    return null
  }
}

const states = JSON.parse(require('fs').readFileSync(0, 'utf8'))
process.stdout.write(JSON.stringify(states.map(([t, rh, p, twb]) => {
  const w = lib.GetHumRatioFromRelHum(t, rh, p)
  const h = lib.GetMoistAirEnthalpy(t, w)
  return [
    lib.GetSatVapPres(t),
    w,
    h / 1000,
    lib.GetMoistAirVolume(t, w, p),
    lib.GetMoistAirDensity(t, w, p),
    lib.GetDegreeOfSaturation(t, w, p),
    lib.GetRelHumFromHumRatio(t, w, p),
    lib.GetTDryBulbFromEnthalpyAndHumRatio(h, w),
    lib.GetHumRatioFromEnthalpyAndTDryBulb(h, t),
    lib.GetHumRatioFromTWetBulb(t, twb, p),
    attempt(() => lib.GetTDewPointFromHumRatio(t, w, p)),
    attempt(() => lib.GetTWetBulbFromHumRatio(t, w, p))
  ]
})))
