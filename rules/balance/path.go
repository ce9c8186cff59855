package balance

import (
	"slices"

	"dewledger/ingest/trend"
)

// path is the air path of a train: its stations downstream of mixing, in the
// order that the air meets them, and the streams that feed it.
type path struct {
	train  []trend.Component
	mixing bool
	inlet  trend.Station // outdoor air as it meets the unit's mixing or first coil: Outdoor, or Recovered behind a recovery
	first  trend.Station // where the sections begin: Mixed, or the inlet of a train without mixing
	places []place
}

// place is a station and how many components of the train lie before it.
type place struct {
	at    trend.Station
	after int
}

// behind is the component that a station stands behind.
var behind = map[trend.Station]trend.Component{
	trend.Recovered:    trend.Recovery,
	trend.Mixed:        trend.Mixing,
	trend.AfterPreheat: trend.Preheat,
	trend.AfterCooling: trend.Cooling,
	trend.AfterHeating: trend.Heating,
}

func pathOf(pl *trend.Plant) path {
	t := pl.Train
	p := path{train: t, mixing: slices.Contains(t, trend.Mixing), inlet: trend.Outdoor}
	recovery := slices.Index(t, trend.Recovery)
	mixing := slices.Index(t, trend.Mixing)
	if recovery >= 0 && (mixing < 0 || recovery < mixing) {
		p.inlet = trend.Recovered
	}
	begin := 0
	switch {
	case p.mixing:
		p.first, begin = trend.Mixed, mixing+1
	case p.inlet == trend.Recovered:
		p.first, begin = trend.Recovered, recovery+1
	default:
		p.first = trend.Outdoor
	}
	p.places = append(p.places, place{p.first, begin})
	for _, s := range []trend.Station{trend.AfterPreheat, trend.AfterCooling, trend.AfterHeating} {
		if k := slices.Index(t, behind[s]); k >= begin {
			p.places = append(p.places, place{s, k + 1})
		}
	}
	p.places = append(p.places, place{trend.Supply, len(t)})
	slices.SortStableFunc(p.places, func(a, b place) int { return a.after - b.after })
	return p
}

// section is a stretch of the air path between two stations.
type section struct {
	from, to trend.Station
	between  []trend.Component
}

// sections are the stretches between consecutive stations that sensed has,
// downstream of mixing. Stretches without a component are left out.
func (p *path) sections(sensed func(trend.Station) bool) []section {
	var out []section
	last := -1
	for k, q := range p.places {
		if !sensed(q.at) {
			continue
		}
		if last >= 0 {
			if s := p.section(p.places[last], q); len(s.between) > 0 {
				out = append(out, s)
			}
		}
		last = k
	}
	return out
}

func (p *path) section(a, b place) section {
	return section{from: a.at, to: b.at, between: p.train[a.after:b.after]}
}

// whole is the stretch from mixing (or the inlet) to the last station that
// sensed has; false where there is none behind it.
func (p *path) whole(sensed func(trend.Station) bool) (section, bool) {
	for k := len(p.places) - 1; k > 0; k-- {
		if q := p.places[k]; sensed(q.at) {
			s := p.section(p.places[0], q)
			return s, len(s.between) > 0
		}
	}
	return section{}, false
}

// coils are the components that a section's Between names and that heat or cool
// air at a coil.
func coils(between []trend.Component) []trend.Component {
	var out []trend.Component
	for _, c := range between {
		switch c {
		case trend.Preheat, trend.Cooling, trend.Heating, trend.Reheat:
			out = append(out, c)
		}
	}
	return out
}

// wet reports whether the component can add or take moisture.
func wet(c trend.Component) bool {
	switch c {
	case trend.Cooling, trend.Humidify, trend.Evaporative, trend.Recovery:
		return true
	}
	return false
}

// moistureWays lists, station by station, the ways to its moisture content, the
// usual first: each a set of roles, the moisture reading in front.
func moistureWays(s trend.Station) [][]trend.Role {
	switch s {
	case trend.Outdoor:
		return [][]trend.Role{
			{trend.OARH, trend.OATemp}, {trend.OADewPoint}, {trend.OAHumRatio},
			{trend.OAWetBulb, trend.OATemp}, {trend.OAEnthalpy, trend.OATemp},
		}
	case trend.Recovered:
		return [][]trend.Role{{trend.RERH, trend.RETemp}}
	case trend.Return:
		return [][]trend.Role{
			{trend.RARH, trend.RATemp}, {trend.RADewPoint}, {trend.RAHumRatio}, {trend.RAEnthalpy, trend.RATemp},
		}
	case trend.Mixed:
		return [][]trend.Role{{trend.MARH, trend.MATemp}, {trend.MADewPoint}}
	case trend.AfterCooling:
		return [][]trend.Role{{trend.CCRH, trend.CCTemp}}
	case trend.Supply:
		return [][]trend.Role{{trend.SARH, trend.SATemp}, {trend.SADewPoint}, {trend.SAHumRatio}}
	case trend.Weather:
		return [][]trend.Role{{trend.WXRH, trend.WXTemp}, {trend.WXDewPoint}}
	}
	return nil
}

// moistureWay is the way by which the unit knows a station's moisture: of those
// whose roles it has, the one that takes the fewest conversions (humidity ratio,
// dew point, relative humidity, wet bulb, enthalpy). Nil where there is none.
func moistureWay(u *trend.Unit, s trend.Station) []trend.Role {
	var best []trend.Role
	for _, w := range moistureWays(s) {
		if u.Has(w...) && (best == nil || directness(w[0]) < directness(best[0])) {
			best = w
		}
	}
	return best
}

func directness(r trend.Role) int {
	switch r.Kind() {
	case trend.HumRatio:
		return 0
	case trend.DewPoint:
		return 1
	case trend.RelHumidity:
		return 2
	case trend.WetBulb:
		return 3
	}
	return 4
}
