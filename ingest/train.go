package ingest

import (
	"slices"

	"dewledger/ingest/trend"
)

// signs are the points that show a component to be there.
var signs = map[trend.Component][]trend.Role{
	trend.Recovery: {trend.RETemp, trend.RERH, trend.RecoveryCmd, trend.RecoveryBypass},
	trend.Mixing:   {trend.MATemp, trend.MARH, trend.MADewPoint, trend.OADamper, trend.OADamperFB, trend.RADamper, trend.RADamperFB},
	trend.Preheat:  {trend.PHTemp, trend.PreheatValve, trend.PreheatValveFB},
	trend.Cooling:  {trend.CCTemp, trend.CCRH, trend.CoolValve, trend.CoolValveFB, trend.CoolStage, trend.CHWSupplyTemp, trend.CHWReturnTemp, trend.CHWFlow},
	trend.Heating:  {trend.HCTemp, trend.HeatValve, trend.HeatValveFB, trend.HeatStage},
	trend.Humidify: {trend.Humidifier, trend.HumidifierFB},
}

// assumeTrain is the order of components of a unit whose site gives none: the
// usual one (recovery, mixing, preheat, cooling, fan, heating, humidifier), of
// which a component stays only if some point shows that it is there. A coil that
// nobody trends would otherwise leave every test around it waiting for its
// command.
func assumeTrain(u *trend.Unit) []trend.Component {
	var out []trend.Component
	for _, c := range []trend.Component{trend.Recovery, trend.Mixing, trend.Preheat, trend.Cooling, trend.Fan, trend.Heating, trend.Humidify} {
		if c == trend.Fan || slices.ContainsFunc(signs[c], func(r trend.Role) bool { return u.Has(r) }) {
			out = append(out, c)
		}
	}
	return out
}
