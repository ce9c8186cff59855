package balance

import (
	"dewledger/ingest/trend"
)

// Temp is a station's dry-bulb temperature, degC; nil where it is not measured.
func (b *Books) Temp(s trend.Station) *Series {
	if r := s.DryBulb(); r != trend.NoRole {
		return b.Reading(r)
	}
	return nil
}

// HumRatio is a station's humidity ratio, kg of water per kg of dry air, from
// whichever moisture reading the unit has there (humidity ratio, dew point,
// relative humidity, wet bulb or enthalpy, in that order) at the site's
// pressure, with the partial derivatives of package psy. Nil where there is
// none.
func (b *Books) HumRatio(s trend.Station) *Series {
	name := s.String() + "_humratio"
	return b.named(name, func() *Series { return b.express(name, "kg/kg", b.humRatio(s), 1) })
}

// Enthalpy is a station's enthalpy, kJ per kg of dry air: an enthalpy reading
// where that is how the unit knows its moisture, else from temperature and
// humidity ratio. Nil where the station lacks one of them.
func (b *Books) Enthalpy(s trend.Station) *Series {
	name := s.String() + "_enthalpy"
	return b.named(name, func() *Series { return b.express(name, "kJ/kg", b.enthalpy(s), 1) })
}

// DewPoint is a station's dew point, degC, frost point below freezing: a dew
// point reading, else from the humidity ratio. Nil where there is no moisture
// reading.
func (b *Books) DewPoint(s trend.Station) *Series {
	name := s.String() + "_dewpoint"
	return b.named(name, func() *Series {
		way := moistureWay(b.u, s)
		if way == nil {
			return nil
		}
		if way[0].Kind() == trend.DewPoint {
			return b.Reading(way[0])
		}
		w, air := b.humRatio(s), b.Air()
		n := b.n()
		f, dw := &form{val: make([]float64, n)}, make([]float64, n)
		for i, x := range w.val {
			f.val[i], dw[i], _ = air.DewPointPartials(x)
		}
		f.sens = b.merge(weigh{f: w, w: dw})
		return b.express(name, "degC", f, 1)
	})
}

// temp is a station's temperature as a form, nil where it is not read.
func (b *Books) tempForm(s trend.Station) *form {
	return b.temp[s].get(func() *form { return b.reading(s.DryBulb()) })
}

func (b *Books) humRatio(s trend.Station) *form {
	return b.hum[s].get(func() *form {
		way := moistureWay(b.u, s)
		if way == nil {
			return nil
		}
		air, n := b.Air(), b.n()
		x := b.u.Col(way[0])
		switch way[0].Kind() {
		case trend.HumRatio:
			return b.reading(way[0])
		case trend.DewPoint:
			w, d := make([]float64, n), make([]float64, n)
			for i, td := range x {
				w[i], d[i], _ = air.HumRatioDewPointPartials(td)
			}
			return &form{val: w, sens: []sens{{role: way[0], c: 1, d: d}}}
		}
		t := b.u.Col(way[1])
		w, dt, dx := make([]float64, n), make([]float64, n), make([]float64, n)
		switch way[0].Kind() {
		case trend.RelHumidity:
			air.HumRatiosPartials(w, dt, dx, t, x)
		case trend.WetBulb:
			for i := range w {
				w[i], dt[i], dx[i], _ = air.HumRatioWetBulbPartials(t[i], x[i])
			}
		case trend.Enthalpy:
			for i := range w {
				w[i], dt[i], dx[i] = air.HumRatioEnthalpyPartials(t[i], x[i])
			}
		}
		return &form{val: w, sens: []sens{{role: way[1], c: 1, d: dt}, {role: way[0], c: 1, d: dx}}}
	})
}

func (b *Books) enthalpy(s trend.Station) *form {
	return b.enth[s].get(func() *form {
		if way := moistureWay(b.u, s); way != nil && way[0].Kind() == trend.Enthalpy {
			return b.reading(way[0])
		}
		t, w := b.tempForm(s), b.humRatio(s)
		if t == nil || w == nil {
			return nil
		}
		return b.enthalpyOf(t, w)
	})
}

// enthalpyOf is the enthalpy of air at t and w, with exact values and partials.
func (b *Books) enthalpyOf(t, w *form) *form {
	n, air := b.n(), b.Air()
	h, dt, dw := make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range h {
		h[i], dt[i], dw[i] = air.EnthalpyPartials(t.val[i], w.val[i])
	}
	return &form{val: h, sens: b.merge(weigh{f: t, w: dt}, weigh{f: w, w: dw})}
}
