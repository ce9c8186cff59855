package synth

import (
	"bufio"
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"dewledger/ingest/trend"
)

// SiteOptions says what demo site to write. The zero value of a field takes its
// default.
type SiteOptions struct {
	Count  int           // units; default 6
	Days   int           // default 28
	Step   time.Duration // default 5 min
	From   time.Time     // first day: its date counts, at the site; default Monday 23 February 2026
	Seed   uint64        // default 2
	Format string        // "csv" (default) or "parquet"
}

// folder is a site on its way to disk: what all its units share, and the units.
type folder struct {
	name, currency, zone string
	altitude             string // as site.toml says it
	measure              string
	prices               trend.Prices
	occupied             string
	header               Header
	format               string
	units                int
	unit                 func(i int) Spec
}

// Stretch of options that make sense.
const (
	mostUnits = 100000
	mostDays  = 3660
)

func (o SiteOptions) settle() (SiteOptions, error) {
	if o.Count == 0 {
		o.Count = 6
	}
	if o.Days == 0 {
		o.Days = 28
	}
	if o.Step == 0 {
		o.Step = 5 * time.Minute
	}
	if o.Seed == 0 {
		o.Seed = 2
	}
	if o.Format == "" {
		o.Format = "csv"
	}
	if o.From.IsZero() {
		o.From = time.Date(2026, 2, 23, 0, 0, 0, 0, time.UTC)
	}
	switch {
	case o.Count < 1 || o.Count > mostUnits:
		return o, fmt.Errorf("a demo site has from 1 to %d units, not %d", mostUnits, o.Count)
	case o.Days < 1 || o.Days > mostDays:
		return o, fmt.Errorf("a demo site has from 1 to %d days, not %d", mostDays, o.Days)
	case o.Step < time.Minute || o.Step > time.Hour || 24*time.Hour%o.Step != 0:
		return o, fmt.Errorf("a step of %v: use one from 1 min to 1 h that divides a day, such as 5 min or 15 min", o.Step)
	case o.Format != "csv" && o.Format != "parquet":
		return o, fmt.Errorf("the format is csv or parquet, not %q", o.Format)
	}
	return o, nil
}

// WriteSite writes an invented site into dir, which must not exist or be empty:
// site.toml, points.csv, truth.csv and a trend file a unit. It is written beside
// dir and then renamed, so dir holds all of it or nothing. Units are simulated
// one at a time; the same options write the same bytes.
func WriteSite(ctx context.Context, dir string, o SiteOptions) error {
	o, err := o.settle()
	if err != nil {
		return err
	}
	f, err := demo(o)
	if err != nil {
		return err
	}
	return f.write(ctx, dir)
}

func (f *folder) write(ctx context.Context, dir string) (err error) {
	named := dir
	if dir, err = filepath.Abs(dir); err != nil {
		return err
	}
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
	case err != nil:
		return fmt.Errorf("write a site to %s: %w", named, err)
	case len(entries) > 0:
		return fmt.Errorf("%s is not empty; name a new folder, or empty it first", named)
	}
	if err := os.MkdirAll(filepath.Dir(dir), 0o777); err != nil {
		return err
	}
	tmp, err := os.MkdirTemp(filepath.Dir(dir), "."+filepath.Base(dir)+"-*")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			err = errors.Join(fmt.Errorf("write a site to %s: %w", named, err), os.RemoveAll(tmp))
		}
	}()
	if err := f.fill(ctx, tmp); err != nil {
		return err
	}
	// A temporary folder is its owner's alone; the site is an ordinary one.
	if err := os.Chmod(tmp, 0o755); err != nil {
		return err
	}
	if dirExists(dir) {
		if err := os.Remove(dir); err != nil { // fails where it has filled up meanwhile
			return err
		}
	}
	return os.Rename(tmp, dir)
}

func dirExists(dir string) bool {
	s, err := os.Stat(dir)
	return err == nil && s.IsDir()
}

// fill writes the site's files.
func (f *folder) fill(ctx context.Context, dir string) error {
	if err := os.Mkdir(filepath.Join(dir, "trends"), 0o755); err != nil {
		return err
	}
	var site strings.Builder
	f.head(&site)
	points := [][]string{{"unit", "file", "column", "role", "measure", "note"}}
	truth := [][]string{{"unit", "fault", "rule", "start", "end", "severity"}}
	for i := range f.units {
		if err := ctx.Err(); err != nil {
			return err
		}
		spec := f.unit(i)
		r := Simulate(spec)
		name := spec.Name + "." + f.format
		if err := writeFile(filepath.Join(dir, "trends", name), func(w io.Writer) error {
			if f.format == "parquet" {
				return r.WriteParquet(w, f.header)
			}
			return r.WriteCSV(w, f.header)
		}); err != nil {
			return err
		}
		for _, p := range r.Points(f.header) {
			points = append(points, []string{spec.Name, name, p.Column, p.Role.String(), p.Measure, ""})
		}
		truth = append(truth, r.truthRows()...)
		unitTable(&site, &spec)
	}
	for name, rows := range map[string][][]string{"points.csv": points, "truth.csv": truth} {
		if err := writeFile(filepath.Join(dir, name), func(w io.Writer) error {
			return csv.NewWriter(w).WriteAll(rows)
		}); err != nil {
			return err
		}
	}
	return writeFile(filepath.Join(dir, "site.toml"), func(w io.Writer) error {
		_, err := io.WriteString(w, site.String())
		return err
	})
}

func writeFile(name string, write func(io.Writer) error) (err error) {
	f, err := os.Create(name)
	if err != nil {
		return err
	}
	defer func() {
		if cerr := f.Close(); err == nil {
			err = cerr
		}
	}()
	b := bufio.NewWriter(f)
	if err := write(b); err != nil {
		return err
	}
	return b.Flush()
}

// truthRows says what is wrong with the unit: a row a fault, or one row without
// a rule where nothing is.
func (r *Run) truthRows() [][]string {
	z := r.Spec.Zone
	stamp := func(t time.Time) string { return t.In(z).Format(time.RFC3339) }
	if len(r.Spec.Faults) == 0 {
		return [][]string{{r.Spec.Name, NoFault.String(), "", stamp(r.Axis.Start), stamp(r.Axis.End()), "0"}}
	}
	var out [][]string
	for _, f := range r.Spec.Faults {
		from, to := r.Axis.Start, r.Axis.End()
		if f.From.After(from) {
			from = f.From
		}
		if !f.To.IsZero() && f.To.Before(to) {
			to = f.To
		}
		name := f.Kind.String()
		if f.Role != trend.NoRole {
			name += " " + f.Role.String()
		}
		if f.At != "" {
			name += " " + string(f.At)
		}
		out = append(out, []string{r.Spec.Name, name, f.Rule(), stamp(from), stamp(to), number(f.Severity)})
	}
	return out
}

func number(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

// head writes what all units of the site share.
func (f *folder) head(w *strings.Builder) {
	fmt.Fprintf(w, "# An invented site. Nothing in it is real.\n\n[site]\nname     = %q\ntimezone = %q\naltitude = %q\nmeasure  = %q\ncurrency = %q\n\n", f.name, f.zone, f.altitude, f.measure, f.currency)
	fmt.Fprintf(w, "[prices]\nelectricity = %s\nheat        = %s\ncooling_cop = %s\n\n", number(f.prices.Electricity), number(f.prices.Heat), number(f.prices.CoolingCOP))
	fmt.Fprintf(w, "[schedule]\noccupied = [%q]\n", f.occupied)
}

// unitTable writes [unit.NAME].
func unitTable(w *strings.Builder, s *Spec) {
	p := &s.Plant
	fmt.Fprintf(w, "\n[unit.%s]\n", s.Name)
	if p.Serves != "" {
		fmt.Fprintf(w, "serves          = %q\n", p.Serves)
	}
	if p.Train != nil {
		names := make([]string, len(p.Train))
		for i, c := range p.Train {
			names[i] = strconv.Quote(string(c))
		}
		fmt.Fprintf(w, "train           = [%s]\n", strings.Join(names, ", "))
	}
	quantity := func(key string, x float64, unit string) {
		if x == 0 || math.IsNaN(x) {
			return
		}
		if unit == "" {
			fmt.Fprintf(w, "%-15s = %s\n", key, number(x))
			return
		}
		fmt.Fprintf(w, "%-15s = %q\n", key, number(x)+" "+unit)
	}
	quantity("design_flow", p.DesignFlow, "m3/s")
	quantity("min_oa_fraction", p.MinOAFraction, "")
	quantity("min_damper", p.MinDamper, "")
	quantity("fan_heat", p.FanHeat, "K")
	limit := ""
	switch p.HighLimit.Kind {
	case trend.FixedDryBulb:
		limit = "dry-bulb " + number(p.HighLimit.Value) + " degC"
	case trend.FixedEnthalpy:
		limit = "fixed-enthalpy " + number(p.HighLimit.Value) + " kJ/kg"
	case trend.DifferentialDryBulb:
		limit = "differential-dry-bulb"
	case trend.DifferentialEnthalpy:
		limit = "differential-enthalpy"
	}
	if limit != "" {
		fmt.Fprintf(w, "high_limit      = %q\n", limit)
	}
	var kinds []string
	for _, c := range []trend.Component{trend.Preheat, trend.Cooling, trend.Heating, trend.Reheat} {
		if k := p.CoilKind[c]; k != "" {
			kinds = append(kinds, fmt.Sprintf("%s = %q", c, k))
		}
	}
	if kinds != nil {
		fmt.Fprintf(w, "coil_kind       = { %s }\n", strings.Join(kinds, ", "))
	}
}
