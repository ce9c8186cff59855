package ingest

import (
	"slices"
	"testing"

	"dewledger/ingest/trend"
)

func TestAssumeTrain(t *testing.T) {
	for _, c := range []struct {
		name  string
		roles []trend.Role
		want  []trend.Component
	}{
		{"nothing but supply air", []trend.Role{trend.SATemp}, []trend.Component{trend.Fan}},
		{"the usual unit", []trend.Role{trend.MATemp, trend.PreheatValve, trend.CoolValve, trend.HeatValve}, trend.DefaultTrain()},
		{"stages for valves, no preheat", []trend.Role{trend.OADamper, trend.CoolStage, trend.HeatStage},
			[]trend.Component{trend.Mixing, trend.Cooling, trend.Fan, trend.Heating}},
		{"all outdoor air with a wheel and a humidifier", []trend.Role{trend.RETemp, trend.CoolValve, trend.Humidifier},
			[]trend.Component{trend.Recovery, trend.Cooling, trend.Fan, trend.Humidify}},
	} {
		u := &trend.Unit{}
		for _, r := range c.roles {
			u.Cols[r] = &trend.Column{Role: r}
		}
		if got := assumeTrain(u); !slices.Equal(got, c.want) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}
