package balance

import (
	"slices"

	"dewledger/ingest/trend"
)

// Def is one balance of the books: what it is, what it needs, where it comes
// from. Books.Get computes it once a unit, on demand.
type Def struct {
	Name    string // ledger column, or its prefix where the balance has several parts
	Title   string // in words
	Unit    string // as package finding names it
	Formula string // in symbols, for the report and the catalogue
	Source  string
	needs   func(u *trend.Unit) []Need
	keep    func(b *Books) []*Part
}

// Need is one thing that a balance cannot do without: any one of the
// alternatives, each a set of roles. The first alternative is the usual one.
type Need struct {
	What  string // in words: "outdoor humidity"
	AnyOf [][]trend.Role
}

// Part is one place where a balance was struck: a section of the air path
// between two stations, or the one place of a balance that has no more.
type Part struct {
	*Series
	Component trend.Component   // the component that the part is about; empty for several or for the unit as a whole
	From, To  trend.Station     // NoStation where it has none; From Mixed may be a computed mixture
	Between   []trend.Component // all components between From and To, in train order
	Bound     bool              // a bound that the truth cannot be under, not an estimate: silence within it proves little
	Readings  []trend.Role      // the readings behind it, for charts
}

// Needs is what the balance cannot do without on this unit. Where a train offers
// several places to strike it, these are the needs of the place that is nearest
// to being had. Nil where the train has no place for it at all, and where it
// takes nothing.
func (d *Def) Needs(u *trend.Unit) []Need { return d.needs(u) }

// Missing is the smallest set of roles that would let the balance be struck on
// this unit, in the order of the roles: of every need, the alternative that
// lacks least, the usual one first. Nil where nothing is missing.
func (d *Def) Missing(u *trend.Unit) []trend.Role { return missing(u, d.needs(u)) }

func missing(u *trend.Unit, needs []Need) []trend.Role {
	var out []trend.Role
	for _, n := range needs {
		var best []trend.Role
		for k, alt := range n.AnyOf {
			var lack []trend.Role
			for _, r := range alt {
				if !u.Has(r) && !slices.Contains(out, r) {
					lack = append(lack, r)
				}
			}
			if k == 0 || len(lack) < len(best) {
				best = lack
			}
		}
		out = append(out, best...)
	}
	slices.Sort(out)
	return out
}

// cheapest is the route with the fewest missing roles, the first of equals.
func cheapest(u *trend.Unit, routes ...[]Need) []Need {
	var best []Need
	least := -1
	for _, r := range routes {
		if n := len(missing(u, r)); least < 0 || n < least {
			best, least = r, n
		}
	}
	return best
}

// Defs lists every balance, in the order of the ledger.
func Defs() []*Def {
	return []*Def{
		FractionTemp, FractionMoisture, FractionFlow, Fraction, FractionChi2,
		MixingEnergy, MixingMoisture, MixedTempOutside, MixedMoistureOutside,
		TempRise, MoistureGain, MoistureLoss, FanRise, CoilHeat,
	}
}

const (
	mixingSource = "ASHRAE Handbook of Fundamentals, psychrometrics chapter, adiabatic mixing of two moist airstreams"
	heatSource   = "ASHRAE Handbook of Fundamentals, psychrometrics chapter, moist air sensible heating or cooling"
	coilSource   = "ASHRAE Handbook of Fundamentals, psychrometrics chapter, moist air cooling and dehumidification"
)

// The balances.
var (
	// FractionTemp is the outdoor-air fraction by mass from temperatures. Missing
	// where |Tr - To| is under four of its own standard uncertainties.
	FractionTemp = &Def{
		Name: "oa_fraction_temp", Title: "outdoor-air fraction from temperatures", Unit: "fraction",
		Formula: "f_T = a_r(T_r − T_m) / [a_r(T_r − T_m) + a_o(T_m − T_o)], a = cp_a + cp_v·W",
		Source:  mixingSource, needs: needsFractionTemp, keep: keepFractionTemp,
	}
	// FractionMoisture is the outdoor-air fraction by mass from humidity ratios.
	FractionMoisture = &Def{
		Name: "oa_fraction_moisture", Title: "outdoor-air fraction from moisture", Unit: "fraction",
		Formula: "f_W = (W_r − W_m) / (W_r − W_o)",
		Source:  mixingSource, needs: needsFractionMoisture, keep: keepFractionMoisture,
	}
	// FractionFlow is the outdoor-air fraction by mass from air flows.
	FractionFlow = &Def{
		Name: "oa_fraction_flow", Title: "outdoor-air fraction from air flows", Unit: "fraction",
		Formula: "f_Q = (Q_o / v_o) / (Q_s / v_s)",
		Source:  "conservation of dry air", needs: needsFractionFlow, keep: keepFractionFlow,
	}
	// Fraction is the outdoor-air fraction by mass, of those that an interval has,
	// by generalised least squares with their covariance. It is not held to 0..1. A
	// train without mixing has fraction 1 exactly.
	Fraction = &Def{
		Name: "oa_fraction", Title: "outdoor-air fraction", Unit: "fraction",
		Formula: "f = 1ᵀV⁻¹(f_T, f_W, f_Q) / 1ᵀV⁻¹1",
		Source:  mixingSource + "; least squares with covariance: Aitken 1935", needs: needsFraction, keep: keepFraction,
	}
	// FractionChi2 is the disagreement of the fractions that an interval has: their
	// weighted sum of squares about the combined one, chi-square with one degree of
	// freedom fewer than there are.
	FractionChi2 = &Def{
		Name: "oa_fraction_chi2", Title: "disagreement of the outdoor-air fractions", Unit: "",
		Formula: "χ² = (f_k − f)ᵀV⁻¹(f_k − f)",
		Source:  "least squares with covariance: Aitken 1935", needs: needsChi2, keep: keepFractionChi2,
	}
	// MixingEnergy is the mixed temperature less that of the mixture, by the
	// fraction from moisture and flow, K.
	MixingEnergy = &Def{
		Name: "mixing_energy", Title: "energy balance of the mixing box", Unit: "K",
		Formula: "T_m − [f·a_o·T_o + (1 − f)·a_r·T_r] / [f·a_o + (1 − f)·a_r], f from moisture and flow",
		Source:  mixingSource, needs: needsMixingEnergy, keep: keepMixingEnergy,
	}
	// MixingMoisture is the mixed moisture less that of the mixture, by the fraction
	// from temperature and flow, g/kg.
	MixingMoisture = &Def{
		Name: "mixing_moisture", Title: "moisture balance of the mixing box", Unit: "g/kg",
		Formula: "W_m − [f·W_o + (1 − f)·W_r], f from temperature and flow",
		Source:  mixingSource, needs: needsMixingMoisture, keep: keepMixingMoisture,
	}
	// MixedTempOutside is how far the mixed temperature lies outside the range of
	// its streams, K; negative inside.
	MixedTempOutside = &Def{
		Name: "mixed_temp_outside", Title: "mixed temperature outside the range of its streams", Unit: "K",
		Formula: "max(T_m − max(T_o, T_r), min(T_o, T_r) − T_m)",
		Source:  mixingSource, needs: needsTempOutside, keep: keepMixedTempOutside,
	}
	// MixedMoistureOutside is how far the mixed moisture lies outside the range of
	// its streams, g/kg; negative inside.
	MixedMoistureOutside = &Def{
		Name: "mixed_moisture_outside", Title: "mixed moisture outside the range of its streams", Unit: "g/kg",
		Formula: "max(W_m − max(W_o, W_r), min(W_o, W_r) − W_m)",
		Source:  mixingSource, needs: needsMoistureOutside, keep: keepMixedMoistureOutside,
	}
	// TempRise is the rise between consecutive temperature sensors downstream of
	// mixing, less the fan's expected heat where the fan lies between, K. Its
	// uncertainty holds the unit's own spread with coils shut, which averaging does
	// not shrink.
	TempRise = &Def{
		Name: "temp_rise", Title: "temperature rise over a section", Unit: "K",
		Formula: "T_to − T_from − ΔT_fan",
		Source:  heatSource + "; fan heat Δp/(ρ·cp·η)", needs: needsTempRise, keep: keepTempRise,
	}
	// MoistureGain is the rise of moisture between consecutive humidity sensors
	// downstream of mixing, and over the whole path from the mixture, g/kg.
	MoistureGain = &Def{
		Name: "moisture_gain", Title: "moisture gained over a section", Unit: "g/kg",
		Formula: "W_to − W_from; from the mixture W_s − [f·W_o + (1 − f)·W_r], at least W_s − max(W_o, W_r)",
		Source:  heatSource + "; " + mixingSource, needs: needsMoisture, keep: keepMoistureGain,
	}
	// MoistureLoss is the fall of moisture, likewise, g/kg.
	MoistureLoss = &Def{
		Name: "moisture_loss", Title: "moisture lost over a section", Unit: "g/kg",
		Formula: "W_from − W_to; from the mixture [f·W_o + (1 − f)·W_r] − W_s, at least min(W_o, W_r) − W_s",
		Source:  heatSource + "; " + mixingSource, needs: needsMoisture, keep: keepMoistureLoss,
	}
	// FanRise is the temperature rise over the supply fan in settled time with the
	// coils beside it shut, K.
	FanRise = &Def{
		Name: "fan_rise", Title: "temperature rise over the supply fan", Unit: "K",
		Formula: "T_to − T_from, coils between shut",
		Source:  "fan heat Δp/(ρ·cp·η)", needs: needsFanRise, keep: keepFanRise,
	}
	// CoilHeat is a coil section's duty, heating positive: kW where the mass flow is
	// known, else kJ per kg of dry air. Fan heat is taken off; the condensate's
	// enthalpy is in.
	CoilHeat = &Def{
		Name: "coil_heat", Title: "heat that a coil section gave", Unit: "kW",
		Formula: "Q = m·[(h_2 − h_1) − (W_2 − W_1)·h_w2]; sensible-only coils m·a·(T_2 − T_1)",
		Source:  coilSource, needs: needsCoilHeat, keep: keepCoilHeat,
	}
)

// ---- what they need

func needTemp(s trend.Station) Need {
	return Need{What: "temperature of " + s.Title(), AnyOf: [][]trend.Role{{s.DryBulb()}}}
}

func needMoisture(s trend.Station) Need {
	return Need{What: "moisture of " + s.Title(), AnyOf: moistureWays(s)}
}

func needsFractionTemp(u *trend.Unit) []Need {
	p := pathOf(&u.Plant)
	if !p.mixing {
		return nil
	}
	return []Need{needTemp(p.inlet), needTemp(trend.Return), needTemp(trend.Mixed)}
}

func needsFractionMoisture(u *trend.Unit) []Need {
	p := pathOf(&u.Plant)
	if !p.mixing {
		return nil
	}
	return []Need{needMoisture(p.inlet), needMoisture(trend.Return), needMoisture(trend.Mixed)}
}

func needsFractionFlow(u *trend.Unit) []Need {
	if !u.Plant.In(trend.Mixing) {
		return nil
	}
	return []Need{{What: "outdoor and supply air flow", AnyOf: [][]trend.Role{{trend.OAFlow, trend.SAFlow}}}}
}

func needsFraction(u *trend.Unit) []Need {
	return cheapest(u, needsFractionTemp(u), needsFractionMoisture(u), needsFractionFlow(u))
}

func needsChi2(u *trend.Unit) []Need {
	t, m, q := needsFractionTemp(u), needsFractionMoisture(u), needsFractionFlow(u)
	return cheapest(u, slices.Concat(t, m), slices.Concat(t, q), slices.Concat(m, q))
}

func needsMixingEnergy(u *trend.Unit) []Need {
	t := needsFractionTemp(u)
	return cheapest(u, slices.Concat(t, needsFractionMoisture(u)), slices.Concat(t, needsFractionFlow(u)))
}

func needsMixingMoisture(u *trend.Unit) []Need {
	m := needsFractionMoisture(u)
	return cheapest(u, slices.Concat(needsFractionTemp(u), m), slices.Concat(needsFractionFlow(u), m))
}

func needsTempOutside(u *trend.Unit) []Need { return needsFractionTemp(u) }

func needsMoistureOutside(u *trend.Unit) []Need { return needsFractionMoisture(u) }

// sectionRoutes lists what it takes to strike a section balance anywhere: each
// pair of stations that enclose a component and none that hides what it did. The
// usual pair, from the beginning of the path to supply, comes first.
func sectionRoutes(p *path, need func(trend.Station) Need, allowed func([]trend.Component) bool) [][]Need {
	var out [][]Need
	last := len(p.places) - 1
	try := func(i, j int) {
		if len(need(p.places[i].at).AnyOf) == 0 || len(need(p.places[j].at).AnyOf) == 0 {
			return
		}
		if s := p.section(p.places[i], p.places[j]); len(s.between) > 0 && allowed(s.between) {
			out = append(out, []Need{need(s.from), need(s.to)})
		}
	}
	try(0, last)
	for i := range p.places {
		for j := last; j > i; j-- {
			if i != 0 || j != last {
				try(i, j)
			}
		}
	}
	return out
}

func needsTempRise(u *trend.Unit) []Need {
	p := pathOf(&u.Plant)
	return cheapest(u, sectionRoutes(&p, needTemp, func(between []trend.Component) bool {
		return !slices.Contains(between, trend.Recovery) && !slices.Contains(between, trend.Evaporative)
	})...)
}

func needsCoilHeat(u *trend.Unit) []Need {
	p := pathOf(&u.Plant)
	return cheapest(u, sectionRoutes(&p, needTemp, func(between []trend.Component) bool {
		return len(coils(between)) > 0 && !slices.Contains(between, trend.Recovery) && !slices.Contains(between, trend.Evaporative)
	})...)
}

func needsFanRise(u *trend.Unit) []Need {
	p := pathOf(&u.Plant)
	return cheapest(u, sectionRoutes(&p, needTemp, func(between []trend.Component) bool {
		return slices.Contains(between, trend.Fan) && !slices.ContainsFunc(between, func(c trend.Component) bool {
			return c == trend.Recovery || c == trend.Evaporative || c == trend.Humidify
		})
	})...)
}

func needsMoisture(u *trend.Unit) []Need {
	p := pathOf(&u.Plant)
	routes := sectionRoutes(&p, needMoisture, func(between []trend.Component) bool { return !slices.Contains(between, trend.Recovery) })
	if p.mixing {
		for _, at := range []trend.Station{trend.AfterCooling, trend.Supply} {
			k := slices.IndexFunc(p.places, func(q place) bool { return q.at == at })
			if k <= 0 {
				continue
			}
			s := p.section(p.places[0], p.places[k])
			if len(s.between) == 0 || slices.Contains(s.between, trend.Recovery) {
				continue
			}
			// Outdoor, return and supply humidity are what real units have.
			routes = slices.Insert(routes, 0, []Need{needMoisture(p.inlet), needMoisture(trend.Return), needMoisture(at)})
		}
	}
	return cheapest(u, routes...)
}
