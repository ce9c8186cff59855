// Package model reads and writes the points of a site as models of two open standards:
// Brick, in Turtle, and Project Haystack, in Zinc and in JSON (its version 3 and 4
// encodings). It knows the classes and tags of the points of air-handling units and
// nothing else of the standards.
package model

import (
	_ "embed"
	"encoding/csv"
	"fmt"
	"sort"
	"strings"

	"dewledger/ingest/trend"
)

// Point is one point of a model.
type Point struct {
	Unit    string // name of its air-handling unit; empty: not part of one
	Column  string // name of its trend
	File    string // where the trend is stored, where the model says
	Role    trend.Role
	Known   bool   // the class or the tags are known; with NoRole: a point that is not used
	Class   string // as the model has it, for messages
	Measure string // unit of measure as the model writes it
	Weather bool   // of the site's weather, not of a unit
}

// Error says what is wrong with a model and where.
type Error struct {
	Line int
	Msg  string
}

func (e *Error) Error() string {
	if e.Line == 0 {
		return e.Msg
	}
	return fmt.Sprintf("line %d: %s", e.Line, e.Msg)
}

func errorf(line int, format string, args ...any) error {
	return &Error{line, fmt.Sprintf(format, args...)}
}

//go:embed points.tsv
var table string

// standard is a role in the standards' words.
type standard struct {
	role   trend.Role
	parent string   // class of the equipment that has it
	class  string   // Brick class
	tags   []string // Haystack tags, sorted
}

var standards = readTable()

func readTable() []standard {
	r := csv.NewReader(strings.NewReader(table))
	r.Comma, r.Comment, r.FieldsPerRecord = '\t', '#', 6
	rows, err := r.ReadAll()
	if err != nil {
		panic("model: " + err.Error())
	}
	var out []standard
	for _, row := range rows[1:] {
		s := standard{parent: row[2], class: row[3]}
		if row[0] != "" {
			var ok bool
			if s.role, ok = trend.ParseRole(row[0]); !ok {
				panic("model: no role " + row[0])
			}
		}
		words, _, _ := strings.Cut(row[5], "(") // what follows is a remark
		s.tags = strings.Fields(words)
		sort.Strings(s.tags)
		out = append(out, s)
	}
	return out
}

// standardOf is the first standard of a role.
func standardOf(r trend.Role) (standard, bool) {
	for _, s := range standards {
		if s.role == r && s.class != "" {
			return s, true
		}
	}
	return standard{}, false
}

// unitNames pairs the names of units: ours, QUDT's (which Brick uses) and Haystack's.
// Sources: QUDT vocabulary of units (CC BY 4.0) and the Project Haystack unit
// database (Academic Free Licence 3.0), from memory.
var unitNames = []struct{ ours, qudt, haystack string }{
	{"degC", "DEG_C", "°C"}, {"degF", "DEG_F", "°F"}, {"K", "K", "K"}, {"%", "PERCENT", "%"}, {"%", "PERCENT_RH", "%RH"}, {"fraction", "UNITLESS", ""},
	{"Pa", "PA", "Pa"}, {"kPa", "KiloPA", "kPa"}, {"inH2O", "IN_H2O", "inH₂O"}, {"hPa", "HectoPA", "hPa"}, {"inHg", "IN_HG", "inHg"}, {"psi", "LB_F-PER-IN2", "psi"},
	{"m3/s", "M3-PER-SEC", "m³/s"}, {"m3/h", "M3-PER-HR", "m³/h"}, {"L/s", "L-PER-SEC", "L/s"}, {"cfm", "FT3-PER-MIN", "cfm"}, {"gpm", "GAL_US-PER-MIN", "gal/min"},
	{"m/s", "M-PER-SEC", "m/s"}, {"fpm", "FT-PER-MIN", "ft/min"}, {"kW", "KiloW", "kW"}, {"W", "W", "W"}, {"hp", "HP", "hp"}, {"ppm", "PPM", "ppm"},
	{"kJ/kg", "KiloJ-PER-KiloGM", "kJ/kg"}, {"Btu/lb", "BTU_IT-PER-LB", "BTU/lb"}, {"kg/kg", "KiloGM-PER-KiloGM", "kgH₂O/kgAir"}, {"g/kg", "GM-PER-KiloGM", "gH₂O/kgAir"},
}
