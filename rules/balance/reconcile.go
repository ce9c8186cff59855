package balance

import (
	"cmp"
	"math"
	"slices"
	"time"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"dewledger/ingest/trend"
)

// Reconciliation closes all balances of the period at once and asks which offsets of
// the sensors would let them.
//
// Each balance that must close (fractions that must agree, a dry train's moisture, a
// section with its coils shut, the mixture at either end of its damper, two sensors of
// the same air) gives, block of time by block of time,
//
//	r = Σ_j a_j·z_j + noise
//
// with z_j the offset of sensor j over the standard uncertainty that its band gives it,
// z_j ~ N(0, 1), and a_j the balance's sensitivity times that uncertainty. What a balance
// assumes beyond its sensors (the fan's heat, how well a damper shuts, what a mixing box
// and a duct do to a mean) enters as further unknowns with priors of their own. The
// maximum a posteriori z and its covariance C follow from weighted least squares. Blocks
// are long against the readings' memory; what correlation is left between them is taken
// off their weight. Blocks far from the rest count less (Huber 1964), so that a faulty
// fifth of the period does not become the norm.
//
// Under the model ẑ has the covariance I − C. The global test holds ẑᵀ(I−C)⁺ẑ against
// chi-square. The measurement test of a sensor, ẑ_j/√(I−C)_jj, is held against the
// standard normal at the Šidák level of the family (Mah and Tamhane 1982; Narasimhan and
// Jordache, Data Reconciliation and Gross Error Detection, 2000). It is also the square
// root of what the fit gains when sensor j alone is freed of its prior, so that the
// largest is the likeliest single culprit. Serial elimination frees the worst and tests
// again, until no sensor is beyond the level.
type Reconciliation struct {
	Offsets   []Offset // by role, with the suspects freed
	Held      []Offset // with none freed
	Closed    []Closed // likewise
	Chi2      float64  // global test, before any sensor is freed
	Dof       int
	P         float64 // chance of a larger Chi2 without a gross error
	Suspects  []Suspect
	Remaining float64 // P once the suspects are freed

	limit float64 // of the measurement tests
}

// Unbound is the offset by the data alone, without the sensor's own prior.
func (o Offset) Unbound() (val, u float64) { return o.Val / o.Share, o.U / math.Sqrt(o.Share) }

// Sees is the offset of this sensor alone that would have been called a suspect in 95 %
// of such periods.
func (r *Reconciliation) Sees(o Offset) float64 {
	return (r.limit + quantile95) * o.Prior / math.Sqrt(o.Share)
}

// quantile95 is the standard normal's 95th percentile.
const quantile95 = 1.6449

// Accused is the sensor's suspicion where nothing else would explain as much and the
// balances close once it is freed; else nil.
func (r *Reconciliation) Accused(role trend.Role) *Suspect {
	for k := range r.Suspects {
		if s := &r.Suspects[k]; s.Role == role && role != trend.NoRole && len(s.Alternates) == 0 && r.Remaining >= leastClosed {
			return s
		}
	}
	return nil
}

// Offset is one sensor's estimated offset, in the role's canonical unit: a reading is
// the truth plus the offset.
type Offset struct {
	Role  trend.Role
	Val   float64
	U     float64 // standard uncertainty, after the data
	Prior float64 // and before them
	Share float64 // how far the data determined it, 0 (prior alone) to 1
	Test  float64 // measurement test, in standard deviations; NaN where the data say nothing
}

// Suspect is a sensor whose offset the balances do not believe to be within its band,
// or an assumption that they do not believe.
type Suspect struct {
	Offset             // with the sensor freed of its prior; of an assumption what it would have to be, and Prior what is usual about Usual
	What       string  // an assumption, in words; empty for a sensor
	Unit       string  // of an assumption
	Usual      float64 // of an assumption
	Bands      float64 // the offset over the half-width of the sensor's band
	Alternates []Alternate
}

// Alternate is another sensor or assumption that would explain the data about as well.
type Alternate struct {
	Role trend.Role // NoRole: an assumption
	What string
}

// Closed is one balance that took part.
type Closed struct {
	Name   string
	Title  string
	Unit   string
	Hours  float64 // settled hours behind it
	Before float64 // mean residual as read
	After  float64 // and with the offsets taken off
	U      float64 // standard uncertainty of Before from offsets and assumptions alone
}

// Reconciliation's settings (common practice, no source, where nothing else is said).
const (
	blockTime   = 2 * time.Hour
	leastBlocks = 6 // of a balance, to take part
	familyLevel = 0.01
	freed       = 1e4 // variance of z for a sensor freed of its prior
	mostFreed   = 3
	leastClosed = 1e-4 // chance under which what remains is said not to close
	huberAt     = 1.5
	plausible   = 5    // bands: a sensor that must be out by more is named after a part that would explain as much
	asGood      = 3.84 // chi-square with one degree of freedom at 95 %: a difference in fit that does not tell two culprits apart
)

// What balances assume beyond their sensors, as standard uncertainties.
const (
	fractionsBias   = 0.02  // fractions of a well-mixed box by two ways
	dryMoistureBias = 5e-5  // kg/kg between two stations of a dry train
	sectionBias     = 0.15  // K over a section with its coils shut, fan apart
	damperLeak      = 0.03  // of the span, with the damper commanded shut, mean
	damperLeakU     = 0.025 // and standard uncertainty
	damperLack      = 0.05  // with it commanded wide open, mean
	damperLackU     = 0.03
	weatherApart    = 0.7   // K between a unit's intake and the weather station
	leastNoiseShare = 0.003 // of a balance's a-priori uncertainty: blocks are never exact
)

// equation is one balance that must close in the intervals that keep holds.
type equation struct {
	name, title, unit string
	f                 *form
	keep              []bool
	scale             float64 // to unit
	bias              []assumption
}

// assumption is an unknown of a balance that is no sensor: (mean ± u)·d(i), d nil for
// ones. Those of one name are one unknown.
type assumption struct {
	name string
	u    float64
	d    []float64
	mean float64

	unit  string  // of what it is, for readers
	scale float64 // from u to unit; 0: 1
	base  float64 // what u is about, where mean is 0 because the balance has it already
}

// equations lists the balances that the unit lets be closed.
func (b *Books) equations() []equation {
	var out []equation
	add := func(e equation) {
		if e.f != nil && e.keep != nil {
			out = append(out, e)
		}
	}
	settled := b.Settled()
	fr := b.fraction()
	if b.path.mixing {
		// In moisture and in kelvin rather than in fractions, which are strongly bent
		// where the streams are alike.
		to, tr, tm := b.tempForm(b.path.inlet), b.tempForm(trend.Return), b.tempForm(trend.Mixed)
		wo, wr, wm := b.humRatio(b.path.inlet), b.humRatio(trend.Return), b.humRatio(trend.Mixed)
		if fr.temp != nil && wo != nil && wr != nil && wm != nil {
			add(equation{"close_mixing_moisture", "moisture of the mixture, by a fraction from temperatures", "g/kg", b.minus(wm, b.mixFrom(b.knownFraction(combined{fr.temp, fr.varTemp}), wo, wr)), settled, 1000, []assumption{{name: "moisture that the mixing box adds or hides", u: dryMoistureBias, unit: "g/kg", scale: 1000}}})
		}
		if fr.flow != nil && tm != nil && to != nil && tr != nil {
			add(equation{"close_mixing_flow", "temperature of the mixture, by a fraction from flows", "K", b.minus(tm, b.mixTemp(fr.flow, to, tr)), settled, 1, []assumption{{name: "how evenly the measured flows mix", u: fractionsBias, d: b.span(to, tr), unit: "fraction"}}})
		}
		b.damperEnds(add)
	}
	dry := b.Dry()
	for _, p := range b.moisturePlaces() {
		if p.bound {
			continue
		}
		add(equation{"close_moisture_" + p.name, "moisture of the dry train, " + p.s.from.Title() + " to " + p.s.to.Title(), "g/kg", b.minus(p.out, p.in), dry, 1000, []assumption{{name: "moisture gained or lost from " + p.s.from.Title() + " to " + p.s.to.Title() + " with the train dry", u: dryMoistureBias, unit: "g/kg", scale: 1000}}})
	}
	for _, s := range b.tempSections() {
		idle := b.shutLong(coils(s.between))
		e := equation{name: "close_temp_" + s.from.String() + "_" + s.to.String(), title: "temperature with the coils shut, " + s.from.Title() + " to " + s.to.Title(), unit: "K", scale: 1,
			keep: kept(settled, idle), f: b.minus(b.tempForm(s.to), b.tempForm(s.from)), bias: []assumption{{name: "heat gained or lost from " + s.from.Title() + " to " + s.to.Title() + " with the coils shut", u: sectionBias, unit: "K"}}}
		if slices.Contains(s.between, trend.Fan) {
			rise := b.fanRiseForm()
			val := b.buffer()
			for i := range val {
				val[i] = e.f.val[i] - rise.val[i]
			}
			e.f = &form{val: val, sens: e.f.sens}
			e.bias = append(e.bias, b.fanHeat())
		}
		add(e)
	}
	if to, tw := b.tempForm(trend.Outdoor), b.tempForm(trend.Weather); to != nil && tw != nil {
		add(equation{"close_weather", "outdoor air and the site's weather", "K", b.minus(to, tw), settled, 1, []assumption{{name: "how alike the air is at the intake and at the weather station", u: weatherApart, unit: "K"}}})
	}
	return out
}

// fanHeat is the fan's heat as an assumption: what it is stated or usually is, at full
// speed, ± its standard uncertainty, both falling with the speed as ExpectedFanRise says.
func (b *Books) fanHeat() assumption {
	rise, u := priorFanRise, priorFanRiseU
	if h := b.u.Plant.FanHeat; h == h {
		rise, u = h, b.u.Plant.FanHeatU
		if !(u > 0) {
			u = statedFanU
		}
	}
	d := slices.Clone(b.fanRiseForm().sens[0].d)
	for i := range d {
		d[i] /= u
	}
	return assumption{name: "the fan's heat", u: u, d: d, unit: "K", base: rise}
}

// span is what lies between the streams, K.
func (b *Books) span(to, tr *form) []float64 {
	out := make([]float64, b.n())
	for i := range out {
		out[i] = to.val[i] - tr.val[i]
	}
	return out
}

// damperEnds are the mixture with the damper shut and wide open: return air, outdoor
// air, but for what leaks.
func (b *Books) damperEnds(add func(equation)) {
	cmd := b.Command(trend.Mixing)
	to, tr, tm := b.tempForm(b.path.inlet), b.tempForm(trend.Return), b.tempForm(trend.Mixed)
	if cmd == nil || to == nil || tr == nil || tm == nil {
		return
	}
	settled := b.Settled()
	span := b.span(to, tr)
	lack, shut, full := make([]float64, len(cmd)), make([]bool, len(cmd)), make([]bool, len(cmd))
	for i, c := range cmd {
		lack[i] = -span[i]
		shut[i] = settled[i] && c <= shutAt
		full[i] = settled[i] && c >= 0.98
	}
	add(equation{"close_damper_shut", "mixed air with the damper shut is return air", "K", b.minus(tm, tr), shut, 1, []assumption{{name: "outdoor air that passes the shut damper", u: damperLeakU, d: span, mean: damperLeak, unit: "fraction"}}})
	add(equation{"close_damper_open", "mixed air with the damper wide open is outdoor air", "K", b.minus(tm, to), full, 1, []assumption{{name: "return air that passes the outdoor damper wide open", u: damperLackU, d: lack, mean: damperLack, unit: "fraction"}}})
}

// rows are the blocks of all equations over the unknowns.
type rows struct {
	unknowns []parameter
	a        [][]float64 // by block, over the unknowns
	r        []float64
	eq       []int
	noise    []float64 // standard uncertainty of r
	weight   []float64 // robust
	floor    []float64
	used     []equation
	blocks   []int     // by equation used
	hours    []float64 // likewise
}

type parameter struct {
	role trend.Role // NoRole: an assumption
	name string
	u    float64    // mean standard uncertainty of the prior, canonical unit
	is   assumption // where it is one
	in   []int      // equations used that hold it
}

func (r *rows) column(role trend.Role, name string) int {
	for k, x := range r.unknowns {
		if x.role == role && x.name == name {
			return k
		}
	}
	r.unknowns = append(r.unknowns, parameter{role: role, name: name})
	return len(r.unknowns) - 1
}

// unevenMixing is how far a mixing box is from even, as an assumption: see unevenness.
const unevenMixing = "how evenly the mixing box mixes at the sensor"

// gather averages every equation over blocks of time.
func (b *Books) gather(eqs []equation) *rows {
	out := &rows{}
	length := b.u.Axis.Intervals(blockTime)
	uneven := b.unevenness()
	// First who is in it, so that all rows are of one length.
	for _, e := range eqs {
		for _, s := range e.f.sens {
			out.column(s.role, "")
			if s.role == trend.MATemp && uneven != nil {
				out.column(trend.NoRole, unevenMixing)
			}
		}
		for _, x := range e.bias {
			out.unknowns[out.column(trend.NoRole, x.name)].is = x
		}
	}
	m := len(out.unknowns)
	blocks := len(eqs) * (b.n()/length + 1)
	room := make([]float64, 0, blocks*m)
	out.a, out.r, out.eq, out.noise = make([][]float64, 0, blocks), make([]float64, 0, blocks), make([]int, 0, blocks), make([]float64, 0, blocks)
	for _, e := range eqs {
		cols := make([]int, len(e.f.sens))
		offset := make([][]float64, len(e.f.sens))
		mixed := -1
		for k, s := range e.f.sens {
			cols[k] = out.column(s.role, "")
			offset[k] = b.constantOffset(s.role)
			if s.role == trend.MATemp && uneven != nil {
				mixed = out.column(trend.NoRole, unevenMixing)
			}
		}
		biases := make([]int, len(e.bias))
		for k, x := range e.bias {
			biases[k] = out.column(trend.NoRole, x.name)
		}
		keep := e.keep
		for _, s := range e.f.sens {
			keep = b.withoutStandstill(keep, s.role)
		}
		from, hours := len(out.r), 0.0
		least := max(1, length/4)
		for i := 0; i < b.n(); i += length {
			n, sum, nz := 0, 0.0, 0.0
			row := room[len(room) : len(room)+m : len(room)+m]
			clear(row)
			for j := i; j < min(i+length, b.n()); j++ {
				v := e.f.val[j]
				if !keep[j] || v != v {
					continue
				}
				n++
				sum += v
				for k := range e.f.sens {
					s := &e.f.sens[k]
					x := s.at(j)
					row[cols[k]] += x * offset[k][j]
					if s.role == trend.MATemp && mixed >= 0 && uneven[j] == uneven[j] {
						row[mixed] += x * uneven[j]
					}
					nu := b.NoiseU(s.role)
					nz += x * x * nu * nu
				}
				for k, x := range e.bias {
					d := 1.0
					if x.d != nil {
						d = x.d[j]
					}
					row[biases[k]] += x.u * d
					sum -= x.mean * d
				}
			}
			if n < least {
				continue
			}
			room = room[:len(room)+m]
			for k := range row {
				row[k] /= float64(n)
			}
			out.a, out.r = append(out.a, row), append(out.r, sum/float64(n))
			out.eq = append(out.eq, len(out.used))
			out.noise = append(out.noise, math.Sqrt(nz)/float64(n))
			hours += float64(n) * b.u.Axis.Hours()
		}
		if len(out.r)-from < leastBlocks {
			out.a, out.r, out.eq, out.noise = out.a[:from], out.r[:from], out.eq[:from], out.noise[:from]
			continue
		}
		out.used, out.blocks, out.hours = append(out.used, e), append(out.blocks, len(out.r)-from), append(out.hours, hours)
	}
	out.floor = slices.Clone(out.noise)
	out.weight = make([]float64, len(out.r))
	for i, row := range out.a {
		prior := 0.0
		for _, x := range row {
			prior += x * x
		}
		out.floor[i] = math.Max(out.floor[i], leastNoiseShare*math.Sqrt(prior))
		out.noise[i] = math.Max(out.floor[i], 0.1*math.Sqrt(prior))
		out.weight[i] = 1
	}
	for k := range out.unknowns {
		x := &out.unknowns[k]
		for i, row := range out.a {
			if e := out.eq[i]; row[k] != 0 && !slices.Contains(x.in, e) {
				x.in = append(x.in, e)
			}
		}
		if x.role == trend.NoRole {
			x.u = x.is.u
			continue
		}
		o := b.constantOffset(x.role)
		n := 0
		for _, u := range o {
			if u == u {
				x.u += u
				n++
			}
		}
		x.u /= math.Max(float64(n), 1)
	}
	return out
}

// constantOffset is the standard uncertainty of a reading's offset as a constant: that of
// its band, without what the book-keeping adds where a humidity sensor leaves its range
// or a mixing box is uneven.
func (b *Books) constantOffset(r trend.Role) []float64 {
	if w := b.band(r); !w.Relative {
		return filled(b.n(), w.HalfWidth/sqrt3)
	}
	return b.OffsetU(r)
}

// standstill is for how long a reading may repeat one value before it is taken for
// stuck, which is no constant offset (common practice, no source).
const standstill = 12 * time.Hour

// withoutStandstill is keep without the intervals in which the reading is stuck; keep
// itself where it never is.
func (b *Books) withoutStandstill(keep []bool, r trend.Role) []bool {
	v := b.u.Col(r)
	least := b.u.Axis.Intervals(standstill)
	out := keep
	for i := 0; i < len(v); {
		j := i + 1
		for j < len(v) && v[j] == v[i] {
			j++
		}
		if j-i >= least && v[i] == v[i] {
			if &out[0] == &keep[0] {
				out = slices.Clone(keep)
			}
			for k := i; k < j; k++ {
				out[k] = false
			}
		}
		i = j
	}
	return out
}

// unevenness is one standard uncertainty of what a mixed-air element sees too much of
// one stream, K, with the sign of the outdoor stream: see OffsetU. Nil without a mixing
// box whose streams are read.
func (b *Books) unevenness() []float64 {
	to, tr, tm := b.u.Col(b.path.inlet.DryBulb()), b.u.Col(trend.RATemp), b.u.Col(trend.MATemp)
	if !b.path.mixing || to == nil || tr == nil || tm == nil {
		return nil
	}
	out := make([]float64, b.n())
	for i := range out {
		span := to[i] - tr[i]
		if math.Abs(span) < leastSpread {
			continue
		}
		f := math.Min(math.Max((tm[i]-tr[i])/span, 0), 1)
		out[i] = stratification * 4 * f * (1 - f) * span / sqrt3
	}
	return out
}

// fit is the estimate under given prior variances.
type fit struct {
	z   []float64
	cov *mat.SymDense
}

// solve finds the maximum a posteriori of z.
func (r *rows) solve(prior []float64) (fit, bool) {
	m := len(r.unknowns)
	h, g := mat.NewSymDense(m, nil), mat.NewVecDense(m, nil)
	for k := range m {
		h.SetSym(k, k, 1/prior[k])
	}
	for i, row := range r.a {
		w := r.weight[i] / (r.noise[i] * r.noise[i])
		for j, x := range row {
			if x == 0 {
				continue
			}
			g.SetVec(j, g.AtVec(j)+w*x*r.r[i])
			for k := j; k < m; k++ {
				if row[k] != 0 {
					h.SetSym(j, k, h.At(j, k)+w*x*row[k])
				}
			}
		}
	}
	var c mat.Cholesky
	if !c.Factorize(h) {
		return fit{}, false
	}
	var z mat.VecDense
	if err := c.SolveVecTo(&z, g); err != nil {
		return fit{}, false
	}
	f := fit{z: make([]float64, m), cov: mat.NewSymDense(m, nil)}
	for k := range f.z {
		f.z[k] = z.AtVec(k)
	}
	if err := c.InverseTo(f.cov); err != nil {
		return fit{}, false
	}
	return f, true
}

// residual is what is left of block i.
func (r *rows) residual(i int, z []float64) float64 {
	x := r.r[i]
	for k, a := range r.a[i] {
		x -= a * z[k]
	}
	return x
}

// reweigh sets, balance by balance, the blocks' noise from what is left of them, with
// the correlation of neighbours taken off, and their robust weights. What a constant
// offset cannot explain is noise here: also what a balance lacks of being true.
func (r *rows) reweigh(z []float64) {
	for e := range r.used {
		var res []float64
		var at []int
		for i := range r.r {
			if r.eq[i] == e {
				res, at = append(res, r.residual(i, z)), append(at, i)
			}
		}
		// About their own middle: what is left of all blocks alike is no noise, but the
		// sign of something that no offset within its band explains.
		mid := median(slices.Clone(res))
		for k := range res {
			res[k] -= mid
		}
		abs := make([]float64, len(res))
		for k, x := range res {
			abs[k] = math.Abs(x)
		}
		scale := madScale * median(abs)
		var c0, c1 float64
		for k, x := range res {
			x = math.Min(math.Max(x, -3*scale), 3*scale)
			c0 += x * x
			if k > 0 {
				y := math.Min(math.Max(res[k-1], -3*scale), 3*scale)
				c1 += x * y
			}
		}
		rho := 0.0
		if c0 > 0 {
			rho = math.Min(math.Max(c1/c0, 0), 0.9)
		}
		wide := math.Sqrt((1 + rho) / (1 - rho))
		for k, i := range at {
			r.noise[i] = math.Max(scale*wide, r.floor[i])
			r.weight[i] = 1
			if x := math.Abs(res[k]) / math.Max(scale, r.floor[i]); x > huberAt {
				r.weight[i] = huberAt / x
			}
		}
	}
}

// Reconcile closes all balances of the period at once; nil where the unit has none that
// its data let be closed.
func (b *Books) Reconcile() *Reconciliation {
	return b.reconciled.get(b.reconcile)
}

func (b *Books) reconcile() *Reconciliation {
	rs := b.gather(b.equations())
	if len(rs.used) == 0 {
		return nil
	}
	first, prior := rs, rs.priors(nil)
	f, ok := rs.estimate(prior)
	if !ok {
		return nil
	}
	out := &Reconciliation{}
	out.Chi2, out.Dof = global(f, prior)
	out.P = chiTail(out.Chi2, out.Dof)
	out.Held = rs.offsets(f, prior)
	tested := 0
	for k := range rs.unknowns {
		if !math.IsNaN(f.test(k, prior)) {
			tested++
		}
	}
	out.Remaining, out.limit = out.P, sidak(familyLevel, max(tested, 1))

	// Serial elimination.
	shift, free := map[trend.Role]float64{}, map[parameterKey]bool{}
	for range mostFreed {
		worst, same := rs.worst(f, prior, out.limit)
		if worst < 0 {
			break
		}
		test := f.test(worst, prior)
		var others []Alternate
		for _, k := range same {
			others = append(others, Alternate{rs.unknowns[k].role, rs.unknowns[k].name})
		}
		key := rs.unknowns[worst].key()
		free[key] = true
		// A sensor far out bends the balances: they are struck again with its offset
		// taken off (Gauss-Newton), twice.
		again, g, at, last := rs, f, worst, 0.0
		for range 3 {
			prior = again.priors(free)
			if g, ok = again.estimate(prior); !ok || key.role == trend.NoRole {
				break
			}
			rs, f, worst = again, g, at
			last = f.z[worst] * rs.unknowns[worst].u
			shift[key.role] += last
			c := Keep(shifted(b.u, shift))
			again = c.gather(c.equations())
			if at = again.find(key); at < 0 {
				break
			}
		}
		if key.role != trend.NoRole { // the last estimate, about the shift before it
			shift[key.role] -= last
		} else if ok {
			f = g
		}
		prior = rs.priors(free)
		out.Suspects = append(out.Suspects, rs.suspect(f, prior, worst, shift, test, others))
		chi2, dof := global(f, prior)
		out.Remaining = chiTail(chi2, dof)
	}
	out.Offsets = rs.offsets(f, prior)
	for k := range out.Offsets {
		out.Offsets[k].Val += shift[out.Offsets[k].Role]
	}
	out.Closed = first.closures(filled(len(first.unknowns), 0))
	for _, c := range rs.closures(f.z) {
		for k := range out.Closed {
			if out.Closed[k].Name == c.Name {
				out.Closed[k].After = c.After
			}
		}
	}
	return out
}

// humidityBeside reports whether rh is the humidity sensor beside the dry bulb t. A
// humidity sensor may be out by a share of its reading, which no constant offset of its
// own fits well; one of the temperature beside it, implausibly large, may fit better.
func humidityBeside(t, rh trend.Role) bool {
	return t != trend.NoRole && rh.Kind() == trend.RelHumidity && rh.Station() != trend.NoStation && t == rh.Station().DryBulb()
}

// shifted is the unit with offsets taken off its readings.
func shifted(u *trend.Unit, shift map[trend.Role]float64) *trend.Unit {
	v := *u
	for role, x := range shift {
		c := *u.Cols[role]
		c.Val = slices.Clone(c.Val)
		for i := range c.Val {
			c.Val[i] -= x
		}
		v.Cols[role] = &c
	}
	return &v
}

// parameterKey tells unknowns apart.
type parameterKey struct {
	role trend.Role
	name string
}

func (p parameter) key() parameterKey { return parameterKey{p.role, p.name} }

func (r *rows) find(key parameterKey) int {
	return slices.IndexFunc(r.unknowns, func(p parameter) bool { return p.key() == key })
}

// priors are the unknowns' prior variances.
func (r *rows) priors(free map[parameterKey]bool) []float64 {
	out := filled(len(r.unknowns), 1)
	for k, p := range r.unknowns {
		if free[p.key()] {
			out[k] = freed
		}
	}
	return out
}

// estimate is the fit with the blocks' noise and weights settled.
func (r *rows) estimate(prior []float64) (fit, bool) {
	for range 4 {
		f, ok := r.solve(prior)
		if !ok {
			return f, false
		}
		r.reweigh(f.z)
	}
	return r.solve(prior)
}

// suspect words unknown k, freed, as a suspect.
func (r *rows) suspect(f fit, prior []float64, k int, shift map[trend.Role]float64, test float64, others []Alternate) Suspect {
	p := r.unknowns[k]
	s := Suspect{What: p.name, Alternates: others}
	if p.role != trend.NoRole {
		for _, o := range r.offsets(f, prior) {
			if o.Role == p.role {
				s.Offset = o
			}
		}
		s.Val += shift[p.role]
		s.Bands = s.Val / (s.Prior * sqrt3)
		for _, q := range r.unknowns {
			if math.Abs(s.Bands) > plausible && humidityBeside(p.role, q.role) {
				s.Alternates = append(s.Alternates, Alternate{Role: q.role})
			}
		}
	} else {
		x, scale := p.is, 1.0
		if x.scale != 0 {
			scale = x.scale
		}
		s.Unit, s.Usual, s.Prior = x.unit, scale*(x.mean+x.base), scale*x.u
		s.Val, s.U = s.Usual+scale*x.u*f.z[k], scale*x.u*math.Sqrt(f.cov.At(k, k))
	}
	s.Test = test
	return s
}

// worst is the unknown to be freed next and those that would explain as much; -1 where
// none is beyond the limit. Among equals a sensor comes first, unless it would have to
// be out by more than sensors plausibly are.
func (r *rows) worst(f fit, prior []float64, limit float64) (worst int, same []int) {
	most := limit
	worst = -1
	for k := range r.unknowns {
		if t := math.Abs(f.test(k, prior)); prior[k] == 1 && t > most && !r.covered(k, prior) {
			worst, most = k, t
		}
	}
	if worst < 0 {
		return worst, nil
	}
	rank := func(k int) int { // of what explains as much
		if r.unknowns[k].role == trend.NoRole {
			return 1
		}
		if bands := math.Abs(f.z[k]) / (1 - f.cov.At(k, k)) / sqrt3; bands > plausible {
			return 2
		}
		return 0
	}
	for k := range r.unknowns {
		t := f.test(k, prior)
		if prior[k] != 1 || !(math.Abs(t) > limit) || r.covered(k, prior) {
			continue
		}
		if most*most-t*t < asGood {
			same = append(same, k)
		}
	}
	slices.SortStableFunc(same, func(a, b int) int {
		if x, y := rank(a), rank(b); x != y {
			return x - y
		}
		return cmp.Compare(math.Abs(f.test(b, prior)), math.Abs(f.test(a, prior)))
	})
	return same[0], same[1:]
}

// covered reports whether an assumption enters only where a freed one does: what that
// one leaves over is no sign of another.
func (r *rows) covered(k int, prior []float64) bool {
	if r.unknowns[k].role != trend.NoRole {
		return false
	}
	for j := range r.unknowns {
		if prior[j] == 1 || r.unknowns[j].role != trend.NoRole {
			continue
		}
		all := true
		for _, e := range r.unknowns[k].in {
			all = all && slices.Contains(r.unknowns[j].in, e)
		}
		if all {
			return true
		}
	}
	return false
}

// test is the measurement test of unknown k, NaN where the data say nothing of it.
func (f fit) test(k int, prior []float64) float64 {
	v := prior[k] - f.cov.At(k, k)
	if v < 1e-3*prior[k] {
		return math.NaN()
	}
	return f.z[k] / math.Sqrt(v)
}

func (r *rows) offsets(f fit, prior []float64) []Offset {
	var out []Offset
	for k, x := range r.unknowns {
		if x.role == trend.NoRole || len(x.in) == 0 {
			continue
		}
		c := f.cov.At(k, k)
		out = append(out, Offset{Role: x.role, Val: f.z[k] * x.u, U: math.Sqrt(c) * x.u, Prior: x.u, Share: math.Max(0, 1-c/prior[k]), Test: f.test(k, prior)})
	}
	slices.SortFunc(out, func(a, b Offset) int { return int(a.Role) - int(b.Role) })
	return out
}

func (r *rows) closures(z []float64) []Closed {
	out := make([]Closed, len(r.used))
	for e, q := range r.used {
		c := Closed{Name: q.name, Title: q.title, Unit: q.unit, Hours: r.hours[e]}
		mean := make([]float64, len(r.unknowns))
		for i := range r.r {
			if r.eq[i] != e {
				continue
			}
			c.Before += r.r[i] * q.scale / float64(r.blocks[e])
			c.After += r.residual(i, z) * q.scale / float64(r.blocks[e])
			for k, x := range r.a[i] {
				mean[k] += x / float64(r.blocks[e])
			}
		}
		for _, x := range mean {
			c.U += x * x
		}
		c.U = math.Sqrt(c.U) * q.scale
		out[e] = c
	}
	return out
}

// global is ẑᵀ(P−C)⁺ẑ over the directions that the data determine, and their number.
// Freed sensors have no prior to contradict; they are left out by their variance.
func global(f fit, prior []float64) (chi2 float64, dof int) {
	m := len(f.z)
	v := mat.NewSymDense(m, nil)
	for j := range m {
		for k := j; k < m; k++ {
			x := -f.cov.At(j, k)
			if j == k {
				x += prior[j]
			}
			v.SetSym(j, k, x/math.Sqrt(prior[j]*prior[k]))
		}
	}
	var e mat.EigenSym
	if !e.Factorize(v, true) {
		return math.NaN(), 0
	}
	var q mat.Dense
	e.VectorsTo(&q)
	free := 0
	for _, p := range prior {
		if p != 1 {
			free++
		}
	}
	for k, l := range e.Values(nil) {
		if l < 0.05 {
			continue // the prior alone
		}
		x := 0.0
		for j := range m {
			x += q.At(j, k) * f.z[j] / math.Sqrt(prior[j])
		}
		chi2 += x * x / l
		dof++
	}
	return chi2, max(dof-free, 0)
}

func chiTail(chi2 float64, dof int) float64 {
	if dof == 0 || math.IsNaN(chi2) {
		return 1
	}
	return distuv.ChiSquared{K: float64(dof)}.Survival(chi2)
}

// sidak is the two-sided limit of n standard normals at a family level.
func sidak(level float64, n int) float64 {
	one := 1 - math.Pow(1-level, 1/float64(n))
	return distuv.UnitNormal.Quantile(1 - one/2)
}
