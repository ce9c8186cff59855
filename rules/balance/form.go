package balance

import (
	"math"

	"dewledger/ingest/trend"
)

// form is a quantity linearised in the readings behind it: its value and its
// sensitivity to each. Series are what others see of it.
type form struct {
	val  []float64
	sens []sens
}

// sens is the sensitivity to one reading: c·d[i], or c in every interval where d
// is nil. With role NoRole it is to something that is no reading (fan heat, the
// unit's own spread) and is given times its standard uncertainty; such terms
// never merge. A d may be shared between forms and is never written to.
type sens struct {
	role trend.Role
	c    float64
	d    []float64
}

func (s *sens) at(i int) float64 {
	if s.d != nil {
		return s.c * s.d[i]
	}
	return s.c
}

// reading is a role's column as a form, nil where the unit has none.
func (b *Books) reading(r trend.Role) *form {
	v := b.u.Col(r)
	if v == nil {
		return nil
	}
	return &form{val: v, sens: []sens{{role: r, c: 1}}}
}

// minus is a - c; sensors that both hold are merged.
func (b *Books) minus(a, c *form) *form {
	val := b.buffer()
	x, y := a.val[:len(val)], c.val[:len(val)]
	for i := range val {
		val[i] = x[i] - y[i]
	}
	return &form{val: val, sens: b.merge(weigh{f: a, c: 1}, weigh{f: c, c: -1})}
}

// product is w·f for exact w.
func (b *Books) product(f *form, w []float64) *form {
	val, x := b.buffer(), f.val
	w = w[:len(val)]
	for i := range val {
		val[i] = w[i] * x[i]
	}
	return &form{val: val, sens: b.merge(weigh{f: f, w: w})}
}

// buffer is a slice of n values to be written in full, used before if there is
// one: what is in it means nothing. release gives one back that nothing refers to
// any more.
func (b *Books) buffer() []float64 {
	if k := len(b.free); k > 0 {
		v := b.free[k-1]
		b.free = b.free[:k-1]
		return v
	}
	return make([]float64, b.n())
}

func (b *Books) release(vs ...[]float64) { b.free = append(b.free, vs...) }

// weigh is a form with its weight in a sum: w[i], or c where w is nil. A zero
// w[i] leaves the form out of that interval, whatever it holds there. With own,
// the weights are for this sum alone: merge keeps or releases the slice.
type weigh struct {
	f   *form
	c   float64
	w   []float64
	own bool
}

// merge gives the sensitivities of a weighted sum of forms.
func (b *Books) merge(parts ...weigh) []sens {
	total := 0
	for _, p := range parts {
		total += len(p.f.sens)
	}
	out := make([]sens, 0, total)
	made := make([]bool, 0, total) // out[k].d was made here and may be added to
	for _, p := range parts {
		kept := false
		for k := range p.f.sens {
			s := &p.f.sens[k]
			at := -1
			if s.role != trend.NoRole {
				for j := range out {
					if out[j].role == s.role {
						at = j
					}
				}
			}
			switch {
			case at >= 0:
				made[at] = b.addTo(&out[at], made[at], s, p)
			case p.w == nil:
				out, made = append(out, sens{role: s.role, c: s.c * p.c, d: s.d}), append(made, false)
			case s.d == nil:
				out, made = append(out, sens{role: s.role, c: s.c, d: p.w}), append(made, p.own && len(p.f.sens) == 1)
				kept = true
			default:
				out, made = append(out, sens{role: s.role, c: s.c, d: b.weighted(s.d, p.w)}), append(made, true)
			}
		}
		if p.own && !kept {
			b.release(p.w)
		}
	}
	return out
}

func (b *Books) weighted(d, w []float64) []float64 {
	out := b.buffer()
	d, w = d[:len(out)], w[:len(out)]
	for i := range out {
		out[i] = 0
		if w[i] != 0 {
			out[i] = w[i] * d[i]
		}
	}
	return out
}

// addTo adds a weighted sensitivity to dst, in place if its slice was made for
// it, and reports whether it is so afterwards.
func (b *Books) addTo(dst *sens, made bool, s *sens, p weigh) bool {
	if p.w == nil && s.d == nil && dst.d == nil {
		dst.c += s.c * p.c
		return false
	}
	d := dst.d
	switch {
	case made && dst.c == 1:
	case d == nil:
		d = b.buffer()
		for i := range d {
			d[i] = dst.c
		}
	default:
		from := d
		if !made {
			d = b.buffer()
		}
		for i, x := range from {
			d[i] = dst.c * x
		}
	}
	switch {
	case p.w == nil && s.d == nil:
		k := s.c * p.c
		for i := range d {
			d[i] += k
		}
	case p.w == nil:
		k, sd := s.c*p.c, s.d[:len(d)]
		for i := range d {
			d[i] += k * sd[i]
		}
	case s.d == nil:
		w := p.w[:len(d)]
		for i := range d {
			d[i] += s.c * w[i]
		}
	default:
		w, sd := p.w[:len(d)], s.d[:len(d)]
		for i := range d {
			if w[i] != 0 {
				d[i] += s.c * w[i] * sd[i]
			}
		}
	}
	dst.c, dst.d = 1, d
	return true
}

// block is how many intervals express works on at a time, so that the sums of
// squares stay in the nearest cache.
const block = 512

// express makes the public series of a form, times scale: its terms and its two
// uncertainties, Off² = Σ (s·u_offset)² and Noise² = Σ (s·u_noise)² over the
// sensors.
func (b *Books) express(name, unit string, f *form, scale float64) *Series {
	if f == nil {
		return nil
	}
	n := b.n()
	s := &Series{Name: name, Unit: unit, Val: f.val, Off: b.buffer(), Noise: b.buffer(), Terms: make([]Term, 0, len(f.sens))}
	if scale != 1 {
		s.Val = b.buffer()
		for i, v := range f.val {
			s.Val[i] = scale * v
		}
	}
	factors := make([]factor, 0, len(f.sens))
	var offset2, noise2 float64 // what is the same in all intervals
	for k := range f.sens {
		e := &f.sens[k]
		c := e.c * scale
		if c == 0 {
			continue
		}
		o := b.OffsetU(e.role)
		s.Terms = append(s.Terms, Term{Role: e.role, c: c, d: e.d, o: o})
		x := factor{d: e.d, o: o, c2: c * c}
		if nu := b.NoiseU(e.role); nu > 0 {
			x.noise2 = x.c2 * nu * nu
		}
		if u, same := b.sameOffset(e.role); same {
			x.o, x.c2 = nil, x.c2*u*u
		}
		if x.d == nil {
			noise2 += x.noise2
			if x.o == nil {
				offset2 += x.c2
				continue
			}
			x.noise2 = 0
		}
		factors = append(factors, x)
	}
	var off, noise [block]float64
	for i := 0; i < n; i += block {
		m := min(block, n-i)
		off, noise := off[:m], noise[:m]
		for k := range off {
			off[k], noise[k] = offset2, noise2
		}
		for k := range factors {
			factors[k].square(i, off, noise)
		}
		val, o, nu := s.Val[i:i+m], s.Off[i:i+m], s.Noise[i:i+m]
		for k, v := range val {
			// 0·v carries a missing value over.
			o[k], nu[k] = math.Sqrt(off[k]+0*v), math.Sqrt(noise[k]+0*v)
		}
	}
	return s
}

// factor is one sensor's part in the two variances: c²·d²·o² and noise²·d², with
// d and o nil for ones.
type factor struct {
	d, o       []float64
	c2, noise2 float64
}

// square adds the part from interval i on.
func (x *factor) square(i int, off, noise []float64) {
	m := len(off)
	noise = noise[:m]
	switch {
	case x.d == nil:
		for k, o := range x.o[i : i+m][:len(off)] {
			off[k] += x.c2 * (o * o)
		}
	case x.o == nil && x.noise2 == 0:
		for k, d := range x.d[i : i+m][:len(off)] {
			off[k] += x.c2 * (d * d)
		}
	case x.o == nil:
		for k, d := range x.d[i : i+m][:len(off)] {
			d *= d
			off[k] += x.c2 * d
			noise[k] += x.noise2 * d
		}
	default:
		o := x.o[i : i+m][:len(off)]
		for k, d := range x.d[i : i+m][:len(off)] {
			d *= d
			off[k] += x.c2 * d * (o[k] * o[k])
			noise[k] += x.noise2 * d
		}
	}
}

// variance is the form's total variance in every interval; covariance that of
// two forms through the sensors that they share. The caller may release them.
func (b *Books) variance(f *form) []float64 { return b.covariance(f, f) }

func (b *Books) covariance(f, g *form) []float64 {
	v := b.buffer()
	clear(v)
	for k := range f.sens {
		x := &f.sens[k]
		for j := range g.sens {
			y := &g.sens[j]
			if x.role != y.role || x.role == trend.NoRole && (f != g || k != j) {
				continue
			}
			b.addCovariance(v, x, y)
		}
	}
	return v
}

func (b *Books) addCovariance(v []float64, x, y *sens) {
	if x.role == trend.NoRole {
		for i := range v {
			v[i] += x.at(i) * y.at(i)
		}
		return
	}
	o, nu := b.OffsetU(x.role)[:len(v)], b.NoiseU(x.role)
	nu2, c := nu*nu, x.c*y.c
	if x.d == nil || y.d == nil {
		d := x.d
		if d == nil {
			d = y.d
		}
		for i, u := range o {
			k := c
			if d != nil {
				k *= d[i]
			}
			v[i] += k * (u*u + nu2)
		}
		return
	}
	xd, yd := x.d[:len(v)], y.d[:len(v)]
	for i, u := range o {
		v[i] += c * xd[i] * yd[i] * (u*u + nu2)
	}
}
