package balance

import (
	"math"
	"reflect"
	"slices"
	"testing"

	"dewledger/ingest/trend"
)

func row(rows []Row, from, to trend.Station) *Row {
	for i := range rows {
		if rows[i].From == from && rows[i].To == to {
			return &rows[i]
		}
	}
	return nil
}

func TestAccountCloses(t *testing.T) {
	rows := Keep(standard(2000, 0.3).u).Account()
	if len(rows) != 2 {
		t.Fatalf("%d rows, want the mixing box and one section", len(rows))
	}
	m, s := row(rows, trend.Outdoor, trend.Mixed), row(rows, trend.Mixed, trend.Supply)
	for _, r := range []*Row{m, s} {
		if r.MoistureCloses != Closes || r.EnergyCloses != Closes {
			t.Errorf("%v to %v: moisture %v, energy %v; both close", r.From, r.To, r.MoistureCloses, r.EnergyCloses)
		}
		near(t, "moisture residual", r.MoistureResidual, 0, 2e-3)
		near(t, "energy residual", r.EnergyResidual, 0, 5e-3)
		near(t, "moisture in and out", r.MoistureOut-r.MoistureIn, r.MoistureResidual, 2e-3)
		if !(r.MoistureU > 0.1 && r.EnergyU > 0.2) {
			t.Errorf("%v to %v: moisture ± %v, energy ± %v", r.From, r.To, r.MoistureU, r.EnergyU)
		}
		near(t, "hours", r.Hours, (2000-6)*5.0/60, 0.01)
	}
	near(t, "energy over the fan", s.EnergyOut-s.EnergyIn, 1.02, 0.01)
}

// A leak of 3 g/kg and 5 K opens both accounts of the section, not the mixing
// box's.
func TestAccountOpens(t *testing.T) {
	r := standard(2000, 0.3)
	tm, wm := slices.Clone(r.u.Col(trend.SATemp)), Keep(r.u).HumRatio(trend.Supply).Val
	r.air(trend.Supply, trend.SARH, func(i int) float64 { return tm[i] + 5 }, func(i int) float64 { return wm[i] + 0.003 })
	rows := Keep(r.u).Account()
	s := row(rows, trend.Mixed, trend.Supply)
	if s.MoistureCloses != Open || s.EnergyCloses != Open {
		t.Errorf("moisture %v (%v ± %v), energy %v (%v ± %v); both are open", s.MoistureCloses, s.MoistureResidual, s.MoistureU, s.EnergyCloses, s.EnergyResidual, s.EnergyU)
	}
	near(t, "moisture residual", s.MoistureResidual, 3, 0.01)
	near(t, "energy residual", s.EnergyResidual, 5*1.017, 0.03)
	if m := row(rows, trend.Outdoor, trend.Mixed); m.MoistureCloses != Closes || m.EnergyCloses != Closes {
		t.Errorf("mixing box: moisture %v, energy %v", m.MoistureCloses, m.EnergyCloses)
	}
}

// While the cooling coil works its account is shown and not tested; a balance
// that no hour could test is not called closed.
func TestAccountWhileCooling(t *testing.T) {
	r := standard(400, 0.3).flat(trend.CoolValve, 0.7).flat(trend.SAFlow, 2)
	w := Keep(r.u).HumRatio(trend.Mixed).Val
	r.air(trend.Supply, trend.SARH, flat(8), func(i int) float64 { return w[i] - 0.001 })
	s := row(Keep(r.u).Account(), trend.Mixed, trend.Supply)
	if s.MoistureCloses != Untested || s.EnergyCloses != Untested || s.Hours != 0 {
		t.Errorf("moisture %v, energy %v, %v h tested", s.MoistureCloses, s.EnergyCloses, s.Hours)
	}
	if s.MoistureResidual == s.MoistureResidual || s.EnergyResidual == s.EnergyResidual {
		t.Error("a residual that no hour tested")
	}
	near(t, "moisture taken", s.MoistureIn-s.MoistureOut, 1, 0.01)
	if s.UseHours <= 0 || math.Abs(s.UseGain+1) > 0.005 {
		t.Errorf("in use for %v h it gained %v g/kg, want -1", s.UseHours, s.UseGain)
	}
	// 2 m3/s from near 17 to 8 degC, and 1 g/kg: some 2.4 kg/s times 10 + 2.5 kJ/kg
	// for 33 h.
	if !(s.CoolKWh > 800 && s.CoolKWh < 1200) || s.HeatKWh != 0 {
		t.Errorf("cooling %v kWh, heating %v kWh", s.CoolKWh, s.HeatKWh)
	}
}

// Without humidity between, the coils have their energy accounts and the whole
// path its moisture account.
func TestAccountOfManyTemperatures(t *testing.T) {
	r := standard(400, 0.3)
	tm := r.u.Col(trend.MATemp)
	same := func(i int) float64 { return tm[i] }
	r.set(trend.PHTemp, same).set(trend.CCTemp, same)
	rows := Keep(r.u).Account()
	var got []string
	for _, x := range rows {
		got = append(got, x.From.String()+"-"+x.To.String())
	}
	if want := []string{"oa-ma", "ma-ph", "ph-cc", "cc-sa", "ma-sa"}; !slices.Equal(got, want) {
		t.Fatalf("rows %v, want %v", got, want)
	}
	if x := rows[1]; x.Component != trend.Preheat || x.EnergyCloses != Closes || x.MoistureCloses != Untested || x.EnergyIn != x.EnergyIn {
		t.Errorf("preheat %+v", x)
	}
	if x := rows[4]; x.MoistureCloses != Closes || x.EnergyCloses != Untested || x.Component != "" {
		t.Errorf("whole path %+v", x)
	}
}

func TestAccountOfNothing(t *testing.T) {
	for _, train := range [][]trend.Component{trend.DefaultTrain(), {}, {trend.Mixing}, {trend.Recovery, trend.Cooling}} {
		for _, n := range []int{0, 1, 5} {
			r := newRig(n, train...)
			b := Keep(r.u)
			for _, x := range b.Account() {
				if x.MoistureCloses != Untested || x.EnergyCloses != Untested {
					t.Errorf("%v: closed without a reading", x)
				}
			}
			b.Ledger()
			b.Curve()
			// And with columns that hold nothing.
			for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
				r.flat(role, math.NaN())
			}
			b = Keep(r.u)
			b.Account()
			b.Curve()
			for _, c := range b.Ledger() {
				if len(c.Val)+len(c.Text) != n {
					t.Errorf("column %s has %d values of %d", c.Name, len(c.Val)+len(c.Text), n)
				}
			}
		}
	}
}

// Readings that no air has: NaN, never a panic, and no uncertainty without a
// value. (An infinite reading is none; ingest drops it.)
func TestStrangeReadings(t *testing.T) {
	rng := seeded(31)
	odd := []float64{0, -1, 1, 1e9, -1e9, math.NaN(), 120, -273.15, 1e-300, 50}
	for range 60 {
		r := full(40)
		for _, role := range r.u.Roles() {
			v := r.u.Cols[role].Val
			for range 12 {
				v[rng.IntN(len(v))] = odd[rng.IntN(len(odd))]
			}
		}
		b := Keep(r.u)
		b.Account()
		b.Curve()
		for _, d := range Defs() {
			for _, p := range b.Get(d) {
				for i, v := range p.Val {
					if (v == v) != (p.Off[i] == p.Off[i]) || (v == v) != (p.Noise[i] == p.Noise[i]) {
						t.Fatalf("%s at %d: %v, offset %v, noise %v", p.Name, i, v, p.Off[i], p.Noise[i])
					}
				}
			}
		}
	}
}

func TestLedger(t *testing.T) {
	r := full(300).flat(trend.SAFanSpeed, 0.8)
	cols := Keep(r.u).Ledger()
	seen := map[string]bool{}
	for _, c := range cols {
		if seen[c.Name] {
			t.Errorf("two columns %s", c.Name)
		}
		seen[c.Name] = true
		if c.Title == "" || len(c.Val)+len(c.Text) != 300 {
			t.Errorf("column %s: title %q, %d values", c.Name, c.Title, len(c.Val)+len(c.Text))
		}
	}
	for _, name := range []string{
		"state", "oa_temp", "oa_humratio", "oa_humratio_u_offset", "oa_humratio_u_noise", "sa_enthalpy", "ma_dewpoint", "mixture_temp", "mixture_humratio",
		"oa_fraction", "oa_fraction_chi2", "mass_flow", "temp_rise_ma_ph", "moisture_gain_ma_sa", "coil_heat_ph_cc", "coil_sensible_ph_cc", "coil_latent_ph_cc",
	} {
		if !seen[name] {
			t.Errorf("no column %s", name)
		}
	}
	again := Keep(r.u).Ledger()
	if !reflect.DeepEqual(names(cols), names(again)) {
		t.Error("two ledgers of one unit differ in their columns")
	}
}

func names(cols []LedgerColumn) []string {
	var out []string
	for _, c := range cols {
		out = append(out, c.Name)
	}
	return out
}

// A damper that gives 0.1 + 0.7·command² is read back, bin by bin.
func TestCurve(t *testing.T) {
	const n = 2000
	r := newRig(n).running()
	r.u.Plant.MinDamper = 0
	cmd := func(i int) float64 { return float64(i/100) / 20 }
	r.set(trend.OADamper, cmd).flat(trend.OATemp, 2).flat(trend.RATemp, 22)
	f := func(i int) float64 { return 0.1 + 0.7*cmd(i)*cmd(i) }
	r.set(trend.MATemp, func(i int) float64 { return 22 - 20*f(i) })
	c := Keep(r.u).Curve()
	if len(c.Bins) != 20 {
		t.Fatalf("%d bins", len(c.Bins))
	}
	for k, q := range c.Bins {
		near(t, "command", q.Command, float64(k)/20, 1e-9)
		near(t, "fraction", q.Fraction, f(100*k), 1e-9)
		// The offset part: at least the mixed sensor's 0.58 K in 20 K.
		if q.U < 0.025 || q.U > 0.06 || q.Hours < 7 {
			t.Errorf("bin %d: ± %v from %v h", k, q.U, q.Hours)
		}
	}
	r.u.Cols[trend.OADamper] = nil
	if Keep(r.u).Curve() != nil {
		t.Error("a curve without a command")
	}
}
