package synth

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"time"

	"dewledger/ingest/columnfile"
	"dewledger/ingest/trend"
)

// Header is how a trend export names its columns and in which units it writes
// them.
type Header uint8

// The styles: our role names, and names as controllers show them, in SI and in
// inch-pound units.
const (
	RoleNames Header = iota
	TradeSI
	TradeIP
)

// measure is how a canonical value is written: value·scale + shift.
type measure struct {
	unit     string
	scale    float64
	shift    float64
	decimals int
}

func measureOf(r trend.Role, h Header) measure {
	ip := h == TradeIP
	switch r.Kind() {
	case trend.Temperature, trend.DewPoint, trend.WetBulb, trend.WaterTemp:
		if ip {
			return measure{"degF", 1.8, 32, 1}
		}
		return measure{"degC", 1, 0, 1}
	case trend.RelHumidity, trend.Position:
		return measure{"%", 100, 0, 1}
	case trend.Enthalpy:
		if ip { // zero at 0 degF for dry air, not at 0 degC
			return measure{"Btu/lb", 1 / 2.326, 7.68, 2}
		}
		return measure{"kJ/kg", 1, 0, 1}
	case trend.HumRatio:
		if ip {
			return measure{"gr/lb", 7000, 0, 1}
		}
		return measure{"g/kg", 1000, 0, 2}
	case trend.AirFlow:
		switch h {
		case TradeIP:
			return measure{"cfm", 60 / (0.3048 * 0.3048 * 0.3048), 0, 0}
		case TradeSI:
			return measure{"m3/h", 3600, 0, 0}
		}
		return measure{"m3/s", 1, 0, 2}
	case trend.Velocity:
		if ip {
			return measure{"fpm", 60 / 0.3048, 0, 0}
		}
		return measure{"m/s", 1, 0, 2}
	case trend.Pressure:
		if ip {
			return measure{"inH2O", 1 / 249.0889, 0, 3}
		}
		return measure{"Pa", 1, 0, 0}
	case trend.BaroPressure:
		if ip {
			return measure{"inHg", 1 / 3386.389, 0, 2}
		}
		return measure{"kPa", 0.001, 0, 2}
	case trend.Power:
		return measure{"kW", 1, 0, 2}
	case trend.WaterFlow:
		if ip {
			return measure{"gpm", 60 / 3.785412, 0, 1}
		}
		return measure{"L/s", 1, 0, 2}
	case trend.Concentration:
		return measure{"ppm", 1, 0, 0}
	}
	return measure{"", 1, 0, 0}
}

// tradeNames are points as controllers show them, without the unit (common
// practice, no source).
var tradeNames = map[trend.Role]string{
	trend.OATemp: "OA-T", trend.RATemp: "RA-T", trend.MATemp: "MA-T", trend.PHTemp: "Preheat Leaving T", trend.CCTemp: "CC Leaving T", trend.HCTemp: "HC Leaving T", trend.SATemp: "SA-T",
	trend.OARH: "OA-RH", trend.RARH: "RA-RH", trend.MARH: "MA-RH", trend.CCRH: "CC Leaving RH", trend.SARH: "SA-RH",
	trend.SATempSP: "SA-T Setpoint", trend.SAStaticSP: "SA Static Setpoint", trend.RARHSP: "RA-RH Setpoint",
	trend.SAFlow: "SA Flow", trend.RAFlow: "RA Flow", trend.OAFlow: "OA Flow", trend.SAStatic: "SA Static", trend.FilterDP: "Filter DP", trend.BuildingDP: "Building DP",
	trend.OADamper: "OA Damper Cmd", trend.RADamper: "RA Damper Cmd", trend.EADamper: "EA Damper Cmd", trend.OADamperFB: "OA Damper Pos",
	trend.PreheatValve: "Preheat Valve Cmd", trend.HeatValve: "Heating Valve Cmd", trend.CoolValve: "Cooling Valve Cmd", trend.Humidifier: "Humidifier Cmd",
	trend.SAFanCmd: "SA Fan Start", trend.SAFanStatus: "SA Fan Status", trend.SAFanSpeed: "SA Fan Speed", trend.SAFanPower: "SA Fan Power", trend.RAFanStatus: "RA Fan Status",
	trend.CHWSupplyTemp: "CHW Supply T", trend.HWSupplyTemp: "HW Supply T", trend.RETemp: "Recovery Leaving T", trend.RecoveryCmd: "Recovery Cmd",
	trend.Occupied: "Occupied", trend.RACO2: "RA-CO2", trend.ZoneTemp: "Zone T",
}

// Point is a row of the points schedule of a run's file.
type Point struct {
	Role    trend.Role
	Column  string // as in the file's header
	Measure string // unit of measure; empty for a switch
}

// Points are the run's points under a style of header, in the order of the
// file's columns.
func (r *Run) Points(h Header) []Point {
	var out []Point
	for role := trend.NoRole + 1; role < trend.NumRoles; role++ {
		if r.Read[role] == nil {
			continue
		}
		m := measureOf(role, h)
		name, open, end := role.String(), " [", "]"
		if h != RoleNames {
			if n, ok := tradeNames[role]; ok {
				name = n
			}
			if h == TradeIP {
				open, end = " (", ")"
			}
		}
		if m.unit != "" {
			name += open + m.unit + end
		}
		out = append(out, Point{role, name, m.unit})
	}
	return out
}

// timeColumn is the header of the column of time stamps.
const timeColumn = "Timestamp"

// stamps says how local time is written: naive, as most exports do, unless the
// clock changes within the run.
func (r *Run) stamps() string {
	z := r.Spec.Zone
	_, first := r.Axis.Start.In(z).Zone()
	for t := r.Axis.Start; t.Before(r.Axis.End()); t = t.Add(24 * time.Hour) {
		if _, o := t.In(z).Zone(); o != first {
			return "2006-01-02T15:04:05Z07:00"
		}
	}
	if _, o := r.Axis.End().In(z).Zone(); o != first {
		return "2006-01-02T15:04:05Z07:00"
	}
	return "2006-01-02 15:04:05"
}

// WriteCSV writes the readings as a wide CSV file in local time. A missing
// value is an empty cell.
func (r *Run) WriteCSV(w io.Writer, h Header) error {
	b := bufio.NewWriterSize(w, 1<<16)
	points := r.Points(h)
	ms := make([]measure, len(points))
	line := append([]byte(nil), timeColumn...)
	for k, p := range points {
		ms[k] = measureOf(p.Role, h)
		line = append(line, ',')
		line = append(line, p.Column...)
	}
	layout := r.stamps()
	for i := range r.Axis.N {
		line = append(line, '\n')
		if _, err := b.Write(line); err != nil {
			return err
		}
		line = r.Axis.At(i).In(r.Spec.Zone).AppendFormat(line[:0], layout)
		for k, p := range points {
			line = append(line, ',')
			if v := r.Read[p.Role].Val[i]; !math.IsNaN(v) {
				line = strconv.AppendFloat(line, ms[k].written(v), 'f', ms[k].decimals, 64)
			}
		}
	}
	if _, err := b.Write(append(line, '\n')); err != nil {
		return err
	}
	return b.Flush()
}

// written is a canonical value in the file's unit, rounded as it is written; a
// rounded nothing has no sign.
func (m measure) written(v float64) float64 {
	p := math.Pow10(m.decimals)
	return math.Round((v*m.scale+m.shift)*p)/p + 0
}

// WriteParquet writes the readings as a Parquet file: stamps in UTC, a double a
// point, its unit in the header and in the metadata.
func (r *Run) WriteParquet(w io.Writer, h Header) error {
	points := r.Points(h)
	cols := make([]columnfile.Column, len(points))
	for k, p := range points {
		m := measureOf(p.Role, h)
		val := make([]float64, r.Axis.N)
		for i, v := range r.Read[p.Role].Val {
			val[i] = m.written(v)
		}
		cols[k] = columnfile.Column{Name: p.Column, Meta: m.unit, Val: val}
	}
	if err := columnfile.Write(w, timeColumn, r.Axis.N, r.Axis.At, cols, nil); err != nil {
		return fmt.Errorf("trends of %s: %w", r.Spec.Name, err)
	}
	return nil
}
