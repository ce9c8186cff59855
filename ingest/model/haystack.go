package model

import (
	"sort"
	"strings"

	"dewledger/ingest/trend"
)

// A Haystack model is a grid: a list of entities, each a set of tags.
type grid []entity

type entity map[string]value

// value is a tag's value: a marker, a text, a reference or anything else, of which
// only the text is kept.
type value struct {
	kind kind
	text string
	dis  string // of a reference
}

type kind uint8

const (
	other kind = iota
	marker
	str
	ref
)

// haystackPoints finds the points of a grid.
func haystackPoints(g grid) []Point {
	byID := map[string]entity{}
	for _, e := range g {
		if id := e["id"]; id.kind == ref {
			byID[id.text] = e
		}
	}
	var out []Point
	for _, e := range g {
		if e["point"].kind != marker {
			continue
		}
		p := Point{Column: e.name(), File: e["trendFile"].text, Measure: haystackUnit(e["unit"].text)}
		var tags []string
		for t, v := range e {
			if v.kind == marker {
				tags = append(tags, t)
			}
		}
		sort.Strings(tags)
		p.Class = strings.Join(tags, " ")
		weather := false
		seen := map[string]bool{}
		for at := e["equipRef"]; at.kind == ref && !seen[at.text]; {
			seen[at.text] = true
			up, ok := byID[at.text]
			if !ok {
				break
			}
			for _, t := range []string{"ahu", "rtu", "mau", "doas", "airHandlingEquip"} {
				if up[t].kind == marker && p.Unit == "" {
					p.Unit = up.name()
				}
			}
			weather = weather || up["weatherStation"].kind == marker
			at = up["equipRef"]
		}
		p.Weather = p.Unit == "" && (weather || e["weather"].kind == marker || e["weatherStationRef"].kind == ref)
		p.Role, p.Known = byTags(tags, p.Weather)
		out = append(out, p)
	}
	return out
}

// name is what an entity is called: dis, else navName, else its reference's words, else
// its reference.
func (e entity) name() string {
	for _, t := range []string{"trendColumn", "dis", "navName"} {
		if v := e[t]; v.kind == str && v.text != "" {
			return v.text
		}
	}
	if id := e["id"]; id.dis != "" {
		return id.dis
	}
	return e["id"].text
}

// byTags is the role whose tags the point has, the most of them. Discharge and supply
// are one; so are outside and outdoor.
func byTags(tags []string, weather bool) (trend.Role, bool) {
	have := map[string]bool{}
	for _, t := range tags {
		have[t] = true
	}
	for _, same := range [][2]string{{"supply", "discharge"}, {"outdoor", "outside"}, {"setpoint", "sp"}} {
		if have[same[0]] {
			have[same[1]] = true
		}
	}
	if weather {
		have["weather"] = true
	} else if have["weather"] || have["outside"] { // of a unit's own sensor they say the same
		have["outside"], have["weather"] = true, true
	}
	best := -1
	for i, s := range standards {
		if len(s.tags) == 0 || best >= 0 && len(s.tags) <= len(standards[best].tags) {
			continue
		}
		fits := true
		for _, t := range s.tags {
			fits = fits && have[t]
		}
		if fits && (!weather || s.parent == "Weather_Station") {
			best = i
		}
	}
	if best < 0 {
		return trend.NoRole, false
	}
	return standards[best].role, true
}

func haystackUnit(u string) string {
	for _, n := range unitNames {
		if n.haystack == u && u != "" {
			return n.ours
		}
	}
	return u
}

func unitForHaystack(ours string) string {
	for _, n := range unitNames {
		if n.ours == ours {
			return n.haystack
		}
	}
	return ""
}

// makeGrid lays points out as a grid: units and points. What has no tags is left out
// and returned.
func makeGrid(points []Point) (g grid, without []Point) {
	units := map[string]bool{}
	for _, p := range points {
		if p.Role == trend.NoRole {
			continue
		}
		var st *standard
		for i := range standards {
			if standards[i].role == p.Role && len(standards[i].tags) > 0 {
				st = &standards[i]
				break
			}
		}
		if st == nil {
			without = append(without, p)
			continue
		}
		weather := p.Unit == "*" || st.parent == "Weather_Station"
		unit := iriPart(p.Unit)
		if weather {
			unit = "weather"
		}
		if !units[unit] {
			units[unit] = true
			e := entity{"id": {ref, unit, ""}, "equip": {kind: marker}}
			if weather {
				e = entity{"id": {ref, unit, ""}, "weatherStation": {kind: marker}}
				e["dis"] = value{str, "weather", ""}
			} else {
				e["ahu"] = value{kind: marker}
				e["dis"] = value{str, p.Unit, ""}
			}
			g = append(g, e)
		}
		e := entity{"id": {ref, unit + "_" + p.Role.String(), ""}, "dis": {str, p.Column, ""}, "trendColumn": {str, p.Column, ""}, "equipRef": {ref, unit, ""}, "his": {kind: marker}}
		for _, t := range st.tags {
			e[t] = value{kind: marker}
		}
		if weather {
			e["weather"] = value{kind: marker}
		} else {
			delete(e, "weather")
			if st.tags != nil && contains(st.tags, "weather") {
				e["outside"] = value{kind: marker}
			}
		}
		if p.File != "" {
			e["trendFile"] = value{str, p.File, ""}
		}
		if u := unitForHaystack(p.Measure); u != "" {
			e["unit"] = value{str, u, ""}
		}
		e["kind"] = value{str, "Number", ""}
		g = append(g, e)
	}
	unique := map[string]int{}
	for _, e := range g {
		id := e["id"]
		if unique[id.text]++; unique[id.text] > 1 {
			id.text += "_" + string(rune('a'+min(unique[id.text]-2, 25)))
			e["id"] = id
		}
	}
	return g, without
}

// columns lists the tags of a grid: id and dis first, then by name.
func (g grid) columns() []string {
	seen := map[string]bool{"id": true, "dis": true}
	var rest []string
	for _, e := range g {
		for t := range e {
			if !seen[t] {
				seen[t] = true
				rest = append(rest, t)
			}
		}
	}
	sort.Strings(rest)
	return append([]string{"id", "dis"}, rest...)
}
