package report

import (
	"encoding/csv"
	"encoding/json"
	"io"
	"math"
	"strconv"
	"strings"
	"time"

	"github.com/xitongsys/parquet-go-source/writerfile"
	"github.com/xitongsys/parquet-go/parquet"
	"github.com/xitongsys/parquet-go/writer"

	"dewledger/ingest/columnfile"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// findingRow is a row of the findings log: the public columns, in order. Figures
// are SI; an absent one is nil.
type findingRow struct {
	Unit          string   `json:"unit" parquet:"name=unit, type=BYTE_ARRAY, convertedtype=UTF8"`
	Rule          string   `json:"rule" parquet:"name=rule, type=BYTE_ARRAY, convertedtype=UTF8"`
	Priority      string   `json:"priority" parquet:"name=priority, type=BYTE_ARRAY, convertedtype=UTF8"`
	Start         string   `json:"start" parquet:"name=start, type=BYTE_ARRAY, convertedtype=UTF8"`
	End           string   `json:"end" parquet:"name=end, type=BYTE_ARRAY, convertedtype=UTF8"`
	FaultHours    *float64 `json:"fault_hours" parquet:"name=fault_hours, type=DOUBLE, repetitiontype=OPTIONAL"`
	TestedHours   *float64 `json:"tested_hours" parquet:"name=tested_hours, type=DOUBLE, repetitiontype=OPTIONAL"`
	Magnitude     *float64 `json:"magnitude" parquet:"name=magnitude, type=DOUBLE, repetitiontype=OPTIONAL"`
	MagnitudeUnit string   `json:"magnitude_unit" parquet:"name=magnitude_unit, type=BYTE_ARRAY, convertedtype=UTF8"`
	Uncertainty   *float64 `json:"uncertainty" parquet:"name=uncertainty, type=DOUBLE, repetitiontype=OPTIONAL"`
	Confidence    *float64 `json:"confidence" parquet:"name=confidence, type=DOUBLE, repetitiontype=OPTIONAL"`
	Suspect       string   `json:"suspect" parquet:"name=suspect, type=BYTE_ARRAY, convertedtype=UTF8"`
	EnergyKWh     *float64 `json:"energy_kwh" parquet:"name=energy_kwh, type=DOUBLE, repetitiontype=OPTIONAL"`
	Cost          *float64 `json:"cost" parquet:"name=cost, type=DOUBLE, repetitiontype=OPTIONAL"`
	Currency      string   `json:"currency" parquet:"name=currency, type=BYTE_ARRAY, convertedtype=UTF8"`
	Statement     string   `json:"statement" parquet:"name=statement, type=BYTE_ARRAY, convertedtype=UTF8"`
	Check         string   `json:"check" parquet:"name=check, type=BYTE_ARRAY, convertedtype=UTF8"`
	Component     string   `json:"component" parquet:"name=component, type=BYTE_ARRAY, convertedtype=UTF8"`
	Cause         string   `json:"cause" parquet:"name=cause, type=BYTE_ARRAY, convertedtype=UTF8"`
	EnergyLow     *float64 `json:"energy_low_kwh" parquet:"name=energy_low_kwh, type=DOUBLE, repetitiontype=OPTIONAL"`
	EnergyHigh    *float64 `json:"energy_high_kwh" parquet:"name=energy_high_kwh, type=DOUBLE, repetitiontype=OPTIONAL"`
	CostLow       *float64 `json:"cost_low" parquet:"name=cost_low, type=DOUBLE, repetitiontype=OPTIONAL"`
	CostHigh      *float64 `json:"cost_high" parquet:"name=cost_high, type=DOUBLE, repetitiontype=OPTIONAL"`
}

var findingColumns = []string{"unit", "rule", "priority", "start", "end", "fault_hours", "tested_hours", "magnitude", "magnitude_unit",
	"uncertainty", "confidence", "suspect", "energy_kwh", "cost", "currency", "statement", "check", "component", "cause",
	"energy_low_kwh", "energy_high_kwh", "cost_low", "cost_high"}

func rowOf(f *finding.Finding, currency string, zone *time.Location) findingRow {
	return findingRow{
		Unit: f.Unit, Rule: f.Rule, Priority: f.Priority.String(), Start: stamp(f.Start, zone), End: stamp(f.End, zone),
		FaultHours: opt(f.FaultHours), TestedHours: opt(f.TestedHours), Magnitude: opt(f.Magnitude), MagnitudeUnit: f.UnitOf,
		Uncertainty: opt(f.Uncertainty), Confidence: opt(f.Confidence), Suspect: strings.Join(f.Suspects, ";"),
		EnergyKWh: opt(f.Energy.KWh), Cost: opt(f.Energy.Cost), Currency: currency, Statement: f.Statement, Check: f.Check,
		Component: f.Component, Cause: f.Cause, EnergyLow: opt(f.Energy.Low), EnergyHigh: opt(f.Energy.High),
		CostLow: opt(f.Energy.CostLow), CostHigh: opt(f.Energy.CostHigh),
	}
}

func stamp(t time.Time, zone *time.Location) string { return t.In(zone).Format(time.RFC3339) }

// opt keeps six significant digits, which is more than any figure here deserves;
// nil for NaN.
func opt(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	y, _ := strconv.ParseFloat(strconv.FormatFloat(x, 'g', 6, 64), 64)
	return &y
}

func cell(x *float64) string {
	if x == nil {
		return ""
	}
	return strconv.FormatFloat(*x, 'f', -1, 64)
}

// inert keeps a text from being read as a formula by a spreadsheet.
func inert(s string) string {
	if s != "" && strings.ContainsRune("=+-@\t\r\n|%", rune(s[0])) {
		return "'" + s
	}
	return s
}

// FindingsCSV writes the findings of all sets, a row each.
func FindingsCSV(w io.Writer, sets []finding.Set, zone *time.Location) error {
	c := csv.NewWriter(w)
	if err := c.Write(findingColumns); err != nil {
		return err
	}
	for k := range sets {
		for i := range sets[k].Findings {
			r := rowOf(&sets[k].Findings[i], sets[k].Currency, zone)
			err := c.Write([]string{inert(r.Unit), r.Rule, r.Priority, r.Start, r.End, cell(r.FaultHours), cell(r.TestedHours), cell(r.Magnitude), r.MagnitudeUnit,
				cell(r.Uncertainty), cell(r.Confidence), inert(r.Suspect), cell(r.EnergyKWh), cell(r.Cost), inert(r.Currency), inert(r.Statement), inert(r.Check), inert(r.Component), inert(r.Cause),
				cell(r.EnergyLow), cell(r.EnergyHigh), cell(r.CostLow), cell(r.CostHigh)})
			if err != nil {
				return err
			}
		}
	}
	c.Flush()
	return c.Error()
}

// FindingsJSON writes the findings with the rules that made them, so that the
// file explains itself.
func FindingsJSON(w io.Writer, sets []finding.Set, zone *time.Location) error {
	type rule struct {
		Name    string             `json:"name"`
		Title   string             `json:"title"`
		Text    string             `json:"text"`
		Formula string             `json:"formula"`
		Cannot  string             `json:"cannot_tell_apart"`
		Unit    string             `json:"effect_unit"`
		Sources []string           `json:"sources"`
		Params  map[string]float64 `json:"parameters"`
	}
	type unit struct {
		Unit        string       `json:"unit"`
		PeriodHours float64      `json:"period_hours"`
		Factor      float64      `json:"coverage_factor"`
		TotalKWh    *float64     `json:"total_kwh"`
		TotalCost   *float64     `json:"total_cost"`
		Findings    []findingRow `json:"findings"`
	}
	out := struct {
		Units []unit `json:"units"`
		Rules []rule `json:"rules"`
	}{Units: []unit{}, Rules: []rule{}}
	for k := range sets {
		s := &sets[k]
		u := unit{Unit: s.Unit, PeriodHours: s.PeriodHours, Factor: s.Factor, TotalKWh: opt(s.Total.KWh), TotalCost: opt(s.Total.Cost), Findings: []findingRow{}}
		for i := range s.Findings {
			u.Findings = append(u.Findings, rowOf(&s.Findings[i], s.Currency, zone))
		}
		out.Units = append(out.Units, u)
		if k > 0 {
			continue
		}
		for _, d := range s.Rules {
			r := rule{Name: d.Name, Title: d.Title, Text: d.Text, Formula: d.Formula, Cannot: d.Cannot, Unit: d.Unit, Sources: d.Sources, Params: map[string]float64{}}
			for _, p := range d.Params {
				r.Params[p.Name] = p.Value
			}
			out.Rules = append(out.Rules, r)
		}
	}
	return JSON(w, out)
}

// JSON writes v indented, with a final newline.
func JSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(v)
}

// FindingsParquet writes the findings log as Parquet.
func FindingsParquet(w io.Writer, sets []finding.Set, zone *time.Location) (err error) {
	pw, err := writer.NewParquetWriter(writerfile.NewWriterFile(w), new(findingRow), 1)
	if err != nil {
		return err
	}
	pw.CompressionType = parquet.CompressionCodec_SNAPPY
	for k := range sets {
		for i := range sets[k].Findings {
			if err := pw.Write(rowOf(&sets[k].Findings[i], sets[k].Currency, zone)); err != nil {
				return err
			}
		}
	}
	return pw.WriteStop()
}

// SpansCSV writes every flagged span.
func SpansCSV(w io.Writer, sets []finding.Set, zone *time.Location) error {
	c := csv.NewWriter(w)
	if err := c.Write([]string{"unit", "rule", "start", "end", "effect", "uncertainty", "effect_unit", "component"}); err != nil {
		return err
	}
	for k := range sets {
		for i := range sets[k].Findings {
			f := &sets[k].Findings[i]
			for _, s := range f.Spans {
				if err := c.Write([]string{inert(f.Unit), f.Rule, stamp(s.Start, zone), stamp(s.End, zone), cell(opt(s.Effect)), cell(opt(s.Uncertainty)), f.UnitOf, inert(f.Component)}); err != nil {
					return err
				}
			}
		}
	}
	c.Flush()
	return c.Error()
}

// CoverageCSV writes every rule's verdict on every unit.
func CoverageCSV(w io.Writer, sets []finding.Set) error {
	c := csv.NewWriter(w)
	if err := c.Write([]string{"unit", "rule", "verdict", "tested_hours", "period_hours", "detectable", "detectable_unit", "reason"}); err != nil {
		return err
	}
	for k := range sets {
		for _, v := range sets[k].Coverage {
			if err := c.Write([]string{inert(v.Unit), v.Rule, v.Verdict.String(), cell(opt(v.TestedHours)), cell(opt(v.PeriodHours)), cell(opt(v.Detectable)), v.UnitOf, inert(v.Reason)}); err != nil {
				return err
			}
		}
	}
	c.Flush()
	return c.Error()
}

// LedgerParquet writes every interval's books: a UTC time, then the columns that
// balance.Books.Ledger lists. The file's metadata holds, under each column's
// name, its unit and title.
func LedgerParquet(w io.Writer, b *balance.Books) error {
	u := b.Unit()
	var cols []columnfile.Column
	for _, c := range b.Ledger() {
		meta := c.Title
		if c.Unit != "" {
			meta = c.Unit + "; " + c.Title
		}
		cols = append(cols, columnfile.Column{Name: c.Name, Meta: meta, Val: c.Val, Text: c.Text})
	}
	return columnfile.Write(w, "time", u.Axis.N, u.Axis.At, cols, map[string]string{
		"dewledger:unit": u.Name, "dewledger:step_seconds": strconv.Itoa(int(u.Axis.Step.Seconds())),
	})
}
