package model

import (
	"encoding/json"
	"io"
	"strings"
)

// readJSON reads a grid in Haystack's JSON, version 4 ({"_kind":"marker"}) or 3
// ("m:").
func readJSON(text string) (grid, error) {
	var doc struct {
		Kind string                       `json:"_kind"`
		Meta json.RawMessage              `json:"meta"`
		Rows []map[string]json.RawMessage `json:"rows"`
	}
	if err := json.Unmarshal([]byte(strings.TrimPrefix(text, "\ufeff")), &doc); err != nil {
		return nil, errorf(0, "it is no JSON grid: %v", err)
	}
	if doc.Rows == nil {
		return nil, errorf(0, "it is no grid: it has no rows")
	}
	var g grid
	for _, row := range doc.Rows {
		e := entity{}
		for tag, raw := range row {
			if v, ok := jsonValue(raw); ok {
				e[tag] = v
			}
		}
		g = append(g, e)
	}
	return g, nil
}

func jsonValue(raw json.RawMessage) (value, bool) {
	var s string
	if json.Unmarshal(raw, &s) == nil {
		switch {
		case s == "m:":
			return value{kind: marker}, true
		case strings.HasPrefix(s, "s:"):
			return value{kind: str, text: s[2:]}, true
		case strings.HasPrefix(s, "r:"):
			id, dis, _ := strings.Cut(s[2:], " ")
			return value{kind: ref, text: id, dis: dis}, true
		case len(s) > 1 && s[1] == ':' && strings.IndexByte("nudthcbxz-", s[0]) >= 0:
			return value{text: s[2:]}, true
		}
		return value{kind: str, text: s}, true
	}
	var o struct {
		Kind string `json:"_kind"`
		Val  any    `json:"val"`
		Dis  string `json:"dis"`
	}
	if json.Unmarshal(raw, &o) == nil && o.Kind != "" {
		switch o.Kind {
		case "marker":
			return value{kind: marker}, true
		case "ref":
			id, _ := o.Val.(string)
			return value{kind: ref, text: strings.TrimPrefix(id, "@"), dis: o.Dis}, true
		}
		return value{text: o.Kind}, true
	}
	return value{}, false
}

// ReadJSON reads the points of a Haystack model in JSON.
func ReadJSON(text string) ([]Point, error) {
	g, err := readJSON(text)
	if err != nil {
		return nil, err
	}
	return pointsOf(g)
}

// WriteJSON writes points as a Haystack model in JSON, version 4. What has no tags in
// the standard is left out and named in the grid's doc.
func WriteJSON(w io.Writer, site string, points []Point) error {
	type object map[string]any
	g, without := makeGrid(points)
	cols := g.columns()
	doc := struct {
		Kind string   `json:"_kind"`
		Meta object   `json:"meta"`
		Cols []object `json:"cols"`
		Rows []object `json:"rows"`
	}{Kind: "grid", Meta: object{"ver": "3.0", "dis": site}, Rows: []object{}}
	if len(without) > 0 {
		doc.Meta["doc"] = leftOut(without)
	}
	for _, c := range cols {
		doc.Cols = append(doc.Cols, object{"name": c})
	}
	for _, e := range g {
		row := object{}
		for tag, v := range e {
			switch v.kind {
			case marker:
				row[tag] = object{"_kind": "marker"}
			case ref:
				row[tag] = object{"_kind": "ref", "val": v.text}
			default:
				row[tag] = v.text
			}
		}
		doc.Rows = append(doc.Rows, row)
	}
	enc := json.NewEncoder(w)
	enc.SetIndent("", " ")
	enc.SetEscapeHTML(false)
	return enc.Encode(doc)
}
