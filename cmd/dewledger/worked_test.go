package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v17/parquet/file"
)

// ledgerAt reads one row of a ledger: its doubles by column name.
func ledgerAt(t *testing.T, path string, row int64) map[string]float64 {
	t.Helper()
	f, err := file.OpenParquetFile(path, false)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rg := f.RowGroup(0)
	out := map[string]float64{}
	for c := range rg.NumColumns() {
		col, err := rg.Column(c)
		if err != nil {
			t.Fatal(err)
		}
		r, ok := col.(*file.Float64ColumnChunkReader)
		if !ok {
			continue
		}
		if _, err := r.Skip(row); err != nil {
			t.Fatal(err)
		}
		val, def := make([]float64, 1), make([]int16, 1)
		if _, n, err := r.ReadBatch(1, val, def, nil); err != nil {
			t.Fatal(err)
		} else if n == 1 {
			out[f.MetaData().Schema.Column(c).Name()] = val[0]
		}
	}
	return out
}

// The worked examples of the ASHRAE Handbook of Fundamentals (2021, SI, chapter
// 1, Psychrometrics), each written as a trend file, run through the program, and
// its ledger held against the printed answers. The handbook reads them off its
// chart, so a figure is good to the width of a line there: 0.3 kJ/kg, 0.1 g/kg,
// 0.3 K, half a percent of a duty (but one percent of what is a product of two
// rounded figures).
func TestHandbookExamples(t *testing.T) {
	type check struct {
		column    string
		scale     float64
		want, tol float64
	}
	for _, c := range []struct {
		name, train string
		columns     string // header
		row         string
		checks      []check
	}{
		{
			// Example 2: 10 m³/s of saturated air at 2 °C is heated to 40 °C. The flow
			// is given where it leaves: 12.74 kg/s of 0.893 m³/kg.
			"sensible heating", `["heating"]`,
			"oa_temp [degC],oa_rh [%],sa_temp [degC],sa_humratio [kg/kg],sa_flow [m3/s],heat_valve [%],sa_fan_status",
			"2,100,40,0.00438,11.38,100,1",
			[]check{
				{"oa_humratio", 1000, 4.38, 0.01},
				{"oa_enthalpy", 1, 13.0, 0.3},
				{"sa_enthalpy", 1, 51.5, 0.3},
				{"mass_flow", 1, 12.74, 0.06},
				{"coil_heat_oa_sa", 1, 490, 5},
				{"moisture_gain_oa_sa", 1, 0, 0.01},
			},
		},
		{
			// Example 3: 5 m³/s at 30 °C and 50 % is cooled to saturation at 10 °C; the
			// condensate leaves at 10 °C. 5.70 kg/s of 0.8116 m³/kg (table 2) leave.
			"cooling and dehumidification", `["cooling"]`,
			"oa_temp [degC],oa_rh [%],sa_temp [degC],sa_rh [%],sa_flow [m3/s],cool_valve [%],sa_fan_status",
			"30,50,10,100,4.627,100,1",
			[]check{
				{"oa_humratio", 1000, 13.3, 0.1},
				{"oa_enthalpy", 1, 64.3, 0.3},
				{"sa_humratio", 1000, 7.66, 0.01},
				{"sa_enthalpy", 1, 29.5, 0.3},
				{"mass_flow", 1, 5.70, 0.03},
				{"coil_heat_oa_sa", 1, -197, 2},
			},
		},
		{
			// Example 4: 2 m³/s of outdoor air at 4 °C dry, 2 °C wet bulb, meet 6.25 m³/s
			// at 25 °C and 50 %. Return is 0.742 of the mixture.
			"adiabatic mixing", `["mixing", "fan"]`,
			"oa_temp [degC],oa_wetbulb [degC],ra_temp [degC],ra_rh [%],oa_flow [m3/s],sa_flow [m3/s],sa_temp [degC],oa_damper [%],sa_fan_status",
			"4,2,25,50,2,8.27,19.5,50,1",
			[]check{
				{"oa_fraction_flow", 1, 1 - 0.742, 0.003},
				{"mixture_temp", 1, 19.5, 0.3},
			},
		},
		{
			// Example 5: 2 kg/s at 20 °C dry, 8 °C wet bulb, are humidified with steam to
			// a dew point of 13 °C: 15 g/s of water.
			"steam humidification", `["humidifier"]`,
			"oa_temp [degC],oa_wetbulb [degC],sa_temp [degC],sa_dewpoint [degC],sa_flow [m3/s],humidifier [%],sa_fan_status",
			"20,8,21,13,1.692,100,1",
			[]check{
				{"oa_humratio", 1000, 1.8, 0.1},
				{"sa_humratio", 1000, 9.3, 0.1},
				{"moisture_gain_oa_sa", 2, 15, 0.3}, // g/kg times 2 kg/s
				{"mass_flow", 1, 2, 0.01},
			},
		},
	} {
		t.Run(c.name, func(t *testing.T) {
			dir, out := t.TempDir(), t.TempDir()
			var b strings.Builder
			fmt.Fprintf(&b, "time,%s\n", c.columns)
			for i := range 48 {
				fmt.Fprintf(&b, "2026-03-02 %02d:%02d,%s\n", i/12, i%12*5, c.row)
			}
			write := func(name, text string) {
				if err := os.MkdirAll(filepath.Dir(filepath.Join(dir, name)), 0o755); err != nil {
					t.Fatal(err)
				}
				if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o600); err != nil {
					t.Fatal(err)
				}
			}
			write("trends/AHU-1.csv", b.String())
			write("site.toml", "[site]\npressure = \"101.325 kPa\"\n\n[unit.AHU-1]\ntrain = "+c.train+"\n")
			if _, stderr, status := call(t, "audit", dir, "--out", out, "--ledger", "--quiet"); status != 0 {
				t.Fatal(stderr)
			}
			got := ledgerAt(t, filepath.Join(out, "ledger", "AHU-1.parquet"), 40)
			for _, k := range c.checks {
				v, ok := got[k.column]
				if !ok {
					t.Errorf("the ledger has no %s; it has %v", k.column, columnsOf(got))
					continue
				}
				near(t, k.column, v*k.scale, k.want, k.tol)
			}
		})
	}
}

func columnsOf(m map[string]float64) []string {
	var out []string
	for k := range m {
		if !strings.Contains(k, "_u_") {
			out = append(out, k)
		}
	}
	return out
}
