package balance

import "dewledger/ingest/trend"

// LedgerColumn is one column of the per-interval ledger. Text is for the
// operating state; every other column has Val.
type LedgerColumn struct {
	Name  string
	Unit  string
	Title string
	Val   []float64
	Text  []string
}

// ledgerStations is the order of the stations in the ledger.
var ledgerStations = []trend.Station{
	trend.Outdoor, trend.Recovered, trend.Return, trend.Mixed, trend.AfterPreheat, trend.AfterCooling, trend.AfterHeating, trend.Supply,
}

// Ledger lists every interval's operating state, air states, fractions, balances
// and duties, each figure followed by its two standard uncertainties
// (_u_offset, _u_noise). The order is the same for the same unit.
func (b *Books) Ledger() []LedgerColumn {
	var out []LedgerColumn
	states := b.States()
	text := make([]string, len(states))
	for i, s := range states {
		text[i] = s.String()
	}
	out = append(out, LedgerColumn{Name: "state", Title: "operating state", Text: text})
	flag := func(name, title string, v []bool) {
		x := make([]float64, len(v))
		for i, on := range v {
			if on {
				x[i] = 1
			}
		}
		out = append(out, LedgerColumn{Name: name, Title: title, Val: x})
	}
	flag("fan_on", "supply fan runs", b.FanOn())
	flag("settled", "state has held for the settling time", b.Settled())
	flag("dry", "no wet component in use for the settling time", b.Dry())

	add := func(s *Series, title string) {
		if s == nil {
			return
		}
		out = append(out,
			LedgerColumn{Name: s.Name, Unit: s.Unit, Title: title, Val: s.Val},
			LedgerColumn{Name: s.Name + "_u_offset", Unit: differenceUnit(s.Unit), Title: title + ", standard uncertainty from offsets", Val: s.Off},
			LedgerColumn{Name: s.Name + "_u_noise", Unit: differenceUnit(s.Unit), Title: title + ", standard uncertainty from noise", Val: s.Noise})
	}
	for _, st := range ledgerStations {
		add(b.Temp(st), "temperature of "+st.Title())
		add(b.HumRatio(st), "humidity ratio of "+st.Title())
		add(b.Enthalpy(st), "enthalpy of "+st.Title())
		if d := b.DewPoint(st); d != nil {
			add(d, "dew point of "+st.Title())
		}
	}
	add(b.MixtureTemp(), "temperature of the computed mixture")
	add(b.MixtureHumRatio(), "humidity ratio of the computed mixture")
	flow, estimated := b.MassFlow()
	title := "supply mass flow of dry air"
	if estimated {
		title += ", estimated"
	}
	add(flow, title)
	add(b.ExpectedFanRise(), "expected temperature rise over the supply fan")
	for _, d := range Defs() {
		for _, p := range b.Get(d) {
			title := d.Title
			if p.From != trend.NoStation && p.To != trend.NoStation {
				title += ", " + p.From.Title() + " to " + p.To.Title()
			}
			if p.Bound {
				title += " (bound)"
			}
			if d == FractionChi2 {
				out = append(out, LedgerColumn{Name: p.Name, Unit: p.Unit, Title: title, Val: p.Val})
				continue
			}
			add(p.Series, title)
			if d == CoilHeat {
				sensible, latent := b.CoilHeatSplit(p)
				add(sensible, title+", sensible")
				add(latent, title+", latent")
			}
		}
	}
	return out
}

// differenceUnit is the unit of an uncertainty.
func differenceUnit(unit string) string {
	if unit == "degC" {
		return "K"
	}
	return unit
}

// MixtureTemp is the temperature of the mixture of outdoor and return air by the
// combined fraction, degC; nil where it cannot be computed.
func (b *Books) MixtureTemp() *Series {
	return b.named("mixture_temp", func() *Series { return b.express("mixture_temp", "degC", b.mixed().temp, 1) })
}

// MixtureHumRatio is the humidity ratio of the mixture of outdoor and return air
// by the combined fraction, kg/kg; nil where it cannot be computed.
func (b *Books) MixtureHumRatio() *Series {
	return b.named("mixture_humratio", func() *Series { return b.express("mixture_humratio", "kg/kg", b.mixed().hum, 1) })
}
