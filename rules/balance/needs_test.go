package balance

import (
	"slices"
	"testing"

	"dewledger/ingest/trend"
)

// full is a unit with every sensor that any balance asks for, one measure a
// station.
func full(n int) *rig {
	r := standard(n, 0.35)
	r.flat(trend.PHTemp, 17).flat(trend.CCTemp, 17).flat(trend.HCTemp, 18)
	return r.flat(trend.OAFlow, 1).flat(trend.SAFlow, 3)
}

// Remove what a balance needs and it is not struck, and Missing names what to
// put back; put that back and it is.
func TestMissingNamesWhatIsGone(t *testing.T) {
	for _, d := range Defs() {
		r := full(60)
		if m := d.Missing(r.u); m != nil {
			t.Errorf("%s: misses %v on a unit that has everything", d.Name, m)
		}
		if Keep(r.u).Get(d) == nil {
			t.Errorf("%s: not struck on a unit that has everything", d.Name)
		}
	}
	for _, c := range []struct {
		def    *Def
		remove []trend.Role
		want   []trend.Role
	}{
		{FractionTemp, []trend.Role{trend.OATemp}, []trend.Role{trend.OATemp}},
		{FractionTemp, []trend.Role{trend.RATemp}, []trend.Role{trend.RATemp}},
		{FractionTemp, []trend.Role{trend.MATemp}, []trend.Role{trend.MATemp}},
		{FractionTemp, []trend.Role{trend.MATemp, trend.OATemp}, []trend.Role{trend.OATemp, trend.MATemp}},
		{FractionMoisture, []trend.Role{trend.OARH}, []trend.Role{trend.OARH}},
		{FractionMoisture, []trend.Role{trend.RARH}, []trend.Role{trend.RARH}},
		{FractionMoisture, []trend.Role{trend.MARH}, []trend.Role{trend.MARH}},
		{FractionFlow, []trend.Role{trend.OAFlow}, []trend.Role{trend.OAFlow}},
		{FractionFlow, []trend.Role{trend.SAFlow}, []trend.Role{trend.SAFlow}},
		{Fraction, []trend.Role{trend.MATemp, trend.OAFlow}, []trend.Role{trend.MATemp}}, // moisture needs it too
		{FractionChi2, []trend.Role{trend.OAFlow, trend.MARH}, []trend.Role{trend.MARH}},
		{MixingEnergy, []trend.Role{trend.RARH, trend.SAFlow}, []trend.Role{trend.RARH}},
		{MixingEnergy, []trend.Role{trend.MATemp}, []trend.Role{trend.MATemp}},
		{MixingMoisture, []trend.Role{trend.MARH}, []trend.Role{trend.MARH}},
		{MixedTempOutside, []trend.Role{trend.MATemp}, []trend.Role{trend.MATemp}},
		{MixedMoistureOutside, []trend.Role{trend.OARH}, []trend.Role{trend.OARH}},
		{TempRise, []trend.Role{trend.MATemp, trend.PHTemp, trend.CCTemp, trend.HCTemp}, []trend.Role{trend.MATemp}},
		{TempRise, []trend.Role{trend.SATemp, trend.PHTemp, trend.CCTemp, trend.HCTemp}, []trend.Role{trend.SATemp}},
		{MoistureGain, []trend.Role{trend.SARH}, []trend.Role{trend.SARH}},
		{MoistureLoss, []trend.Role{trend.MARH, trend.OARH}, []trend.Role{trend.OARH}},
		{FanRise, []trend.Role{trend.HCTemp, trend.SATemp}, []trend.Role{trend.SATemp}},
		{CoilHeat, []trend.Role{trend.MATemp, trend.PHTemp, trend.CCTemp, trend.HCTemp}, []trend.Role{trend.MATemp}},
	} {
		r := full(60)
		cols := r.u.Cols
		for _, role := range c.remove {
			r.u.Cols[role] = nil
		}
		if Keep(r.u).Get(c.def) != nil {
			t.Errorf("%s: struck without %v", c.def.Name, c.remove)
		}
		if got := c.def.Missing(r.u); !slices.Equal(got, c.want) {
			t.Errorf("%s without %v: misses %v, want %v", c.def.Name, c.remove, got, c.want)
		}
		for _, role := range c.def.Missing(r.u) {
			r.u.Cols[role] = cols[role]
		}
		if Keep(r.u).Get(c.def) == nil {
			t.Errorf("%s: not struck with what it missed put back", c.def.Name)
		}
	}
}

// One by one and in pairs: a balance is struck exactly where nothing is missing.
func TestStruckWhereNothingIsMissing(t *testing.T) {
	trains := [][]trend.Component{
		trend.DefaultTrain(),
		{trend.Mixing, trend.Heating, trend.Cooling, trend.Fan},
		{trend.Recovery, trend.Mixing, trend.Preheat, trend.Cooling, trend.Fan, trend.Reheat},
		{trend.Preheat, trend.Cooling, trend.Humidify, trend.Fan},
		{trend.Mixing, trend.Recovery, trend.Cooling},
		{trend.Mixing},
		{},
	}
	for _, train := range trains {
		r := full(12)
		r.u.Plant.Train = train
		r.flat(trend.RETemp, 12).flat(trend.RERH, 0.5)
		cols, roles := r.u.Cols, r.u.Roles()
		for i, x := range roles {
			for _, y := range roles[i:] {
				r.u.Cols = cols
				r.u.Cols[x], r.u.Cols[y] = nil, nil
				b := Keep(r.u)
				for _, d := range Defs() {
					struck, missing := b.Get(d) != nil, d.Missing(r.u)
					if struck && missing != nil || !struck && missing == nil && d.Needs(r.u) != nil {
						t.Errorf("train %v without %s and %s: %s struck %v, misses %v", train, x, y, d.Name, struck, missing)
					}
				}
			}
		}
	}
}

// A moisture reading of any kind will do, and each is read as what it is.
func TestAnyMoistureReadingServes(t *testing.T) {
	w := 0.0065
	for _, c := range []struct {
		role trend.Role
		x    float64
	}{
		{trend.OARH, atSeaLevel.RelHumidity(20, w)},
		{trend.OADewPoint, atSeaLevel.DewPoint(w)},
		{trend.OAHumRatio, w},
		{trend.OAEnthalpy, atSeaLevel.Enthalpy(20, w)},
		{trend.OAWetBulb, wetBulb(20, w)},
	} {
		r := newRig(5).flat(trend.OATemp, 20).flat(c.role, c.x)
		b := Keep(r.u)
		near(t, "W from "+c.role.String(), b.HumRatio(trend.Outdoor).Val[2], w, 1e-6)
		near(t, "h from "+c.role.String(), b.Enthalpy(trend.Outdoor).Val[2], atSeaLevel.Enthalpy(20, w), 5e-3)
		near(t, "dew point from "+c.role.String(), b.DewPoint(trend.Outdoor).Val[2], atSeaLevel.DewPoint(w), 2e-3)
	}
	// With several, the most direct.
	r := newRig(5).flat(trend.OATemp, 20).flat(trend.OARH, 0.9).flat(trend.OAHumRatio, w)
	near(t, "W", Keep(r.u).HumRatio(trend.Outdoor).Val[2], w, 0)
	// An enthalpy reading needs a temperature before it says anything of moisture.
	r = newRig(5).flat(trend.OAEnthalpy, 40)
	if Keep(r.u).HumRatio(trend.Outdoor) != nil {
		t.Error("moisture from an enthalpy alone")
	}
}
