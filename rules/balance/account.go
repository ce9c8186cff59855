package balance

import (
	"math"
	"slices"

	"dewledger/ingest/trend"
)

// Closure says whether a balance closes.
type Closure uint8

// Whether a balance closes: Untested where it could not be put to the test, Open
// where its residual exceeds twice its standard uncertainty.
const (
	Untested Closure = iota
	Closes
	Open
)

var closures = [...]string{"not tested", "closes", "open"}

// String is the closure in words.
func (c Closure) String() string { return closures[c] }

// closureFactor is the coverage factor of Closes and Open (JCGM 100:2008, 6.3.3:
// about 95 %).
const closureFactor = 2

// leastForClosure is how many hours a balance must have been tested for.
const leastForClosure = 1.0

// Row is one component's account over the period: means per kg of dry air over
// settled time. Every U is the standard uncertainty of the residual beside it;
// what is not known is NaN.
type Row struct {
	Component trend.Component   // the one component, the fan aside; empty for several
	Between   []trend.Component // all components of the section
	From, To  trend.Station
	Hours     float64 // tested: settled, and nothing asked of what would change the residual

	MoistureIn, MoistureOut, MoistureU, MoistureResidual float64 // g/kg
	EnergyIn, EnergyOut, EnergyU, EnergyResidual         float64 // kJ/kg
	MoistureCloses, EnergyCloses                         Closure
	HeatKWh, CoolKWh                                     float64 // over the period, while asked for; NaN without a flow or a coil

	UseHours, UseGain, UseU float64 // while a wet component ran: hours, moisture gained and its standard uncertainty, g/kg; 0 h where none did
	Note                    string  // a sentence; may be empty
}

// Account is the books' table: the mixing box, then a row a section of the air
// path, in the order of the train; then, where humidity is read at fewer places
// than temperature, the longer sections that moisture can be held against. A
// mixing residual is the mixed state less the mixture. A section's moisture
// residual is moisture out less in where nothing could change it: always for
// sensible-only components, while dry for the rest. Its energy residual is the
// sensible heat out less in and less the fan's, tested while its coils are shut.
func (b *Books) Account() []Row {
	return b.account.get(func() []Row {
		var rows []Row
		if b.path.mixing {
			rows = append(rows, b.mixingRow())
		}
		temps := b.path.sections(b.hasTemp)
		for _, s := range temps {
			rows = append(rows, b.sectionRow(s, true))
		}
		moist := b.path.sections(func(at trend.Station) bool {
			return b.hasMoisture(at) || at == trend.Mixed && b.mixed().hum != nil
		})
		for _, s := range moist {
			if !slices.ContainsFunc(temps, func(t section) bool { return t.from == s.from && t.to == s.to }) {
				rows = append(rows, b.sectionRow(s, false))
			}
		}
		return rows
	})
}

func emptyRow() Row {
	nan := math.NaN()
	return Row{
		MoistureIn: nan, MoistureOut: nan, MoistureU: nan, MoistureResidual: nan,
		EnergyIn: nan, EnergyOut: nan, EnergyU: nan, EnergyResidual: nan, HeatKWh: nan, CoolKWh: nan,
	}
}

func (b *Books) mixingRow() Row {
	r := emptyRow()
	r.Component, r.From, r.To, r.Between = trend.Mixing, b.path.inlet, trend.Mixed, []trend.Component{trend.Mixing}
	settled, n := b.Settled(), b.n()
	m := b.mixed()
	if m.hum != nil {
		r.MoistureIn = b.express("", "g/kg", m.hum, 1000).Mean(0, n, settled).Val
	}
	if w := b.HumRatio(trend.Mixed); w != nil {
		r.MoistureOut = w.Mean(0, n, settled).Val * 1000
	}
	if f := b.mixingMoisture(); f != nil {
		x := b.express("", "g/kg", f, 1000).Mean(0, n, settled)
		r.MoistureResidual, r.MoistureU = x.Val, x.U()
		r.MoistureCloses = b.closure(&r, x)
	}
	if m.temp != nil && m.hum != nil {
		r.EnergyIn = b.express("", "kJ/kg", b.enthalpyOf(m.temp, m.hum), 1).Mean(0, n, settled).Val
	}
	if e := b.Enthalpy(trend.Mixed); e != nil {
		r.EnergyOut = e.Mean(0, n, settled).Val
	}
	if f := b.mixingEnergy(); f != nil {
		a := b.heatCapacities(trend.Return)
		x := b.express("", "kJ/kg", b.product(f, a), 1).Mean(0, n, settled)
		r.EnergyResidual, r.EnergyU = x.Val, x.U()
		r.EnergyCloses = b.closure(&r, x)
	}
	if r.MoistureCloses == Untested && r.EnergyCloses == Untested {
		r.Note = "There is no second way to the share of outdoor air, so nothing to hold the mixing box against."
	}
	return r
}

// closure judges a residual's mean and books the hours that tested it.
func (b *Books) closure(r *Row, m Mean) Closure {
	hours := float64(m.N) * b.u.Axis.Hours()
	if hours < leastForClosure {
		return Untested
	}
	r.Hours = math.Max(r.Hours, hours)
	if math.Abs(m.Val) > closureFactor*m.U() {
		return Open
	}
	return Closes
}

func (b *Books) sectionRow(s section, energy bool) Row {
	r := emptyRow()
	r.Component, r.From, r.To, r.Between = aboutOne(s.between), s.from, s.to, s.between
	settled, n := b.Settled(), b.n()
	hidden := slices.Contains(s.between, trend.Recovery) // moves heat and perhaps moisture, unseen

	w1, w2 := b.moistureAt(s.from), b.moistureAt(s.to)
	if w1 != nil && w2 != nil {
		in, out := b.express("", "g/kg", w1, 1000), b.express("", "g/kg", w2, 1000)
		seen := both(settled, in.Val, out.Val)
		r.MoistureIn, r.MoistureOut = in.Mean(0, n, seen).Val, out.Mean(0, n, seen).Val
		if b.readOrMixed(s.from) && b.readOrMixed(s.to) && !hidden {
			b.moistureResidual(&r, s, b.express("", "g/kg", b.minus(w2, w1), 1000))
		}
		if t1, t2 := b.tempForm(s.from), b.tempForm(s.to); energy && t1 != nil && t2 != nil {
			in, out := b.express("", "kJ/kg", b.enthalpyOf(t1, w1), 1), b.express("", "kJ/kg", b.enthalpyOf(t2, w2), 1)
			seen := both(settled, in.Val, out.Val)
			r.EnergyIn, r.EnergyOut = in.Mean(0, n, seen).Val, out.Mean(0, n, seen).Val
		}
	}
	if !energy || hidden || slices.Contains(s.between, trend.Evaporative) {
		return r
	}
	// Sensible heat that nothing asked for. While the coils are shut no moisture
	// should change hands either; the moisture account says whether it does.
	rise := b.express("", "kJ/kg", b.product(b.riseOver(s), b.sectionCapacity(s)), 1)
	if m := rise.Mean(0, n, kept(settled, b.shutLong(heatMovers(s.between)))); m.N > 0 {
		r.EnergyResidual, r.EnergyU = m.Val, m.U()
		r.EnergyCloses = b.closure(&r, m)
	}
	r.HeatKWh, r.CoolKWh = b.energy(s)
	return r
}

func (b *Books) readOrMixed(at trend.Station) bool { return b.hasMoisture(at) || at == trend.Mixed }

// heatMovers are a section's coils and humidifier.
func heatMovers(between []trend.Component) []trend.Component {
	out := coils(between)
	if slices.Contains(between, trend.Humidify) {
		out = append(out, trend.Humidify)
	}
	return out
}

func (b *Books) moistureResidual(r *Row, s section, gain *Series) {
	test := b.Settled()
	isWet := slices.ContainsFunc(s.between, wet)
	if isWet {
		test = b.Dry()
	}
	if m := gain.Mean(0, b.n(), test); m.N > 0 {
		r.MoistureResidual, r.MoistureU = m.Val, m.U()
		r.MoistureCloses = b.closure(r, m)
	}
	if isWet {
		in := b.inUse(s, gain)
		r.UseHours, r.UseGain, r.UseU = float64(in.N)*b.u.Axis.Hours(), in.Val, in.U()
	}
}

// both is where keep holds and all of the values are there.
func both(keep []bool, vs ...[]float64) []bool {
	out := slices.Clone(keep)
	for _, v := range vs {
		for i, x := range v {
			out[i] = out[i] && x == x
		}
	}
	return out
}

// inUse is what a wet section did to moisture in settled time while one of its
// wet components ran, g/kg: gained, or lost where negative.
func (b *Books) inUse(s section, gain *Series) Mean {
	use := make([]bool, b.n())
	for _, c := range s.between {
		if wet(c) {
			for i, on := range b.Running(c) {
				use[i] = use[i] || on
			}
		}
	}
	for i, on := range b.Settled() {
		use[i] = use[i] && on
	}
	return gain.Mean(0, b.n(), use)
}

// energy is the heat and the cooling of a section over the period, kWh, while the
// fan ran and not all of its coils were known to be shut: what an offset adds
// while they are is no duty. NaN where no flow or no coil is there.
func (b *Books) energy(s section) (heat, cool float64) {
	heat, cool = math.NaN(), math.NaN()
	if b.massFlow().f == nil {
		return heat, cool
	}
	on, h := b.FanOn(), b.u.Axis.Hours()
	cs := coils(s.between)
	for _, p := range b.coilHeatParts() {
		if p.From != s.from || p.To != s.to {
			continue
		}
		heat, cool = 0, 0
		for i, q := range p.Val {
			if !on[i] || q != q || !slices.ContainsFunc(cs, func(c trend.Component) bool { return !b.Shut(c)[i] }) {
				continue
			}
			if q > 0 {
				heat += q * h
			} else {
				cool -= q * h
			}
		}
	}
	return heat, cool
}
