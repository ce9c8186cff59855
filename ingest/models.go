package ingest

import (
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"strings"

	"dewledger/ingest/model"
	"dewledger/ingest/trend"
)

// modelFormat is one way to read and write points as a model of an open standard.
type modelFormat struct {
	name  string // of the flag
	ext   string
	read  func(text string) ([]model.Point, error)
	write func(w io.Writer, site string, points []model.Point) error
}

var modelFormats = []modelFormat{
	{"brick", "ttl", model.ReadBrick, model.WriteBrick},
	{"haystack-zinc", "zinc", model.ReadZinc, model.WriteZinc},
	{"haystack-json", "json", model.ReadJSON, model.WriteJSON},
}

// ModelFormats names the formats that WriteModel knows.
func ModelFormats() []string {
	var out []string
	for _, f := range modelFormats {
		out = append(out, f.name)
	}
	return out
}

// IsModelFormat reports whether a name is one of ModelFormats.
func IsModelFormat(name string) bool { return findFormat(name) != nil }

// ModelExtension is a format's file extension, without the full stop.
func ModelExtension(format string) string { return findFormat(format).ext }

func findFormat(name string) *modelFormat {
	for i := range modelFormats {
		if modelFormats[i].name == name {
			return &modelFormats[i]
		}
	}
	return nil
}

// WriteModel writes the settled rows of a schedule as a model: Brick in Turtle, or
// Haystack in Zinc or JSON. The format must be one of ModelFormats.
func WriteModel(w io.Writer, format, site string, rows []Proposal) error {
	var points []model.Point
	for _, p := range rows {
		if p.Role != trend.NoRole {
			points = append(points, model.Point{Unit: p.Unit, Column: p.Column, File: p.File, Role: p.Role, Known: true, Measure: p.Measure})
		}
	}
	return findFormat(format).write(w, site, points)
}

// scheduleFiles are the names under which a site folder may hold its points schedule.
func scheduleFiles() []string {
	out := []string{"points.csv"}
	for _, f := range modelFormats {
		out = append(out, "points."+f.ext)
	}
	return out
}

// readModel reads a model as a points schedule.
func readModel(file string, text []byte, notes *notebook) ([]*point, error) {
	var f *modelFormat
	for i := range modelFormats {
		if strings.EqualFold(filepath.Ext(file), "."+modelFormats[i].ext) {
			f = &modelFormats[i]
		}
	}
	list, err := f.read(string(text))
	if err != nil {
		c := &ConfigError{File: file, Msg: err.Error(), Hint: "points are read from Brick (.ttl), Haystack (.zinc, .json) or points.csv"}
		var me *model.Error
		if errors.As(err, &me) {
			c.Line, c.Msg = me.Line, me.Msg
		}
		return nil, c
	}
	var out []*point
	seen := map[string]string{}
	for _, m := range list {
		p := &point{unit: m.Unit, column: strings.Join(strings.Fields(m.Column), " "), file: m.File, role: m.Role, scale: 1, open: !m.Known, note: m.Class, lax: true}
		switch {
		case p.column == "":
			continue
		case p.open:
			notes.add("model-class", file, p.column, 0, "%s says no role: the point is not used", quote(m.Class))
		case m.Weather:
			p.unit = "*"
		case p.unit == "" && p.role != trend.NoRole:
			notes.add("model-unit", file, p.column, 0, "the point is part of no air-handling unit of the model and is not used")
			p.role, p.open = trend.NoRole, true
		}
		if p.role != trend.NoRole {
			key := p.unit + "\x00" + p.role.String()
			if first, twice := seen[key]; twice && first != p.column {
				notes.add("model-repeated", file, p.column, 0, "%s of unit %s is %s already; the first is used", p.role, quote(p.unit), quote(first))
				p.role = trend.NoRole
			} else {
				seen[key] = p.column
			}
		}
		if m.Measure != "" && p.role != trend.NoRole {
			if u, ok := LookupUnit(m.Measure); ok {
				if _, _, fits := u.toKind(p.role.Kind()); fits {
					p.measure, p.stated = u, true
				}
			}
			if !p.stated && p.role.Kind() != trend.Switch {
				notes.add("model-measure", file, p.column, 0, "%s is no unit of measure of a %s; it is judged from the data", quote(m.Measure), p.role.Kind())
			}
		}
		out = append(out, p)
	}
	if len(out) == 0 {
		return nil, &ConfigError{File: file, Msg: "no point of the model has a name", Hint: fmt.Sprintf("the column of a point is its time series reference, its label or its %s", "dis")}
	}
	return out, nil
}
