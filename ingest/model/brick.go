package model

import (
	"fmt"
	"io"
	"net/url"
	"sort"
	"strings"
	"unicode"

	"dewledger/ingest/trend"
)

// The namespaces that a Brick model uses.
const (
	nsBrick = "https://brickschema.org/schema/Brick#"
	nsRef   = "https://brickschema.org/schema/Brick/ref#"
	nsUnit  = "http://qudt.org/vocab/unit/"
	nsLabel = "http://www.w3.org/2000/01/rdf-schema#label"
)

// graph indexes triples by subject and predicate, and backwards.
type graph struct {
	of   map[string]map[string][]term
	from map[string]map[string][]string // object, predicate: subjects
	subj []string                       // in order
}

func newGraph(list []triple) *graph {
	g := &graph{of: map[string]map[string][]term{}, from: map[string]map[string][]string{}}
	for _, t := range list {
		if g.of[t.s.text] == nil {
			g.of[t.s.text] = map[string][]term{}
			g.subj = append(g.subj, t.s.text)
		}
		g.of[t.s.text][t.p.text] = append(g.of[t.s.text][t.p.text], t.o)
		if !t.o.literal {
			if g.from[t.o.text] == nil {
				g.from[t.o.text] = map[string][]string{}
			}
			g.from[t.o.text][t.p.text] = append(g.from[t.o.text][t.p.text], t.s.text)
		}
	}
	return g
}

// text is the first literal of a property, or empty.
func (g *graph) text(s string, preds ...string) string {
	for _, p := range preds {
		for _, o := range g.of[s][p] {
			if o.literal && o.text != "" {
				return o.text
			}
		}
	}
	return ""
}

// classes are the Brick classes of a node.
func (g *graph) classes(s string) []string {
	var out []string
	for _, o := range g.of[s][rdfType] {
		if c, ok := strings.CutPrefix(o.text, nsBrick); ok {
			out = append(out, c)
		}
	}
	return out
}

// up lists what a node is a point or a part of, nearest first.
func (g *graph) up(s string) []string {
	var out []string
	add := func(list []string) {
		for _, x := range list {
			if !contains(out, x) {
				out = append(out, x)
			}
		}
	}
	for _, p := range []string{"isPointOf", "isPartOf"} {
		var list []string
		for _, o := range g.of[s][nsBrick+p] {
			if !o.literal {
				list = append(list, o.text)
			}
		}
		add(list)
	}
	for _, p := range []string{"hasPoint", "hasPart"} {
		add(g.from[s][nsBrick+p])
	}
	return out
}

// The classes whose instances are the units of this program, and what else it calls
// by another name.
var (
	unitClasses = []string{"AHU", "Air_Handling_Unit", "Air_Handler_Unit", "RTU", "Rooftop_Unit", "Rooftop_AHU", "MAU", "Makeup_Air_Unit", "DOAS", "Dedicated_Outdoor_Air_System_Unit"}
	sameClass   = map[string]string{"Discharge_Fan": "Supply_Fan", "Air_Handling_Unit": "AHU", "Air_Handler_Unit": "AHU", "Chilled_Water_Valve": "Cooling_Valve", "Hot_Water_Valve": "Heating_Valve", "Chilled_Water_Coil": "Cooling_Coil", "Hot_Water_Coil": "Heating_Coil"}
)

// brickPoints finds the points of a Brick model.
func brickPoints(g *graph) []Point {
	var out []Point
	for _, s := range g.subj {
		for _, class := range g.classes(s) {
			if !isPointClass(class) {
				continue
			}
			p := Point{Class: class, Column: g.column(s), File: g.file(s)}
			for _, u := range g.of[s][nsBrick+"hasUnit"] {
				p.Measure = qudtUnit(u.text)
			}
			g.place(s, class, &p)
			out = append(out, p)
			break
		}
	}
	return out
}

// isPointClass goes by the end of the name, as the schema's point classes are named.
func isPointClass(c string) bool {
	for _, e := range []string{"_Sensor", "_Setpoint", "_Command", "_Status", "_Alarm", "_Parameter", "_Limit", "Sensor", "Setpoint", "Command", "Status", "Point"} {
		if strings.HasSuffix(c, e) {
			return true
		}
	}
	return false
}

// column is the name of the trend: its time series reference, else its label, else
// the last part of its IRI.
func (g *graph) column(s string) string {
	for _, p := range []string{nsRef + "hasExternalReference", nsBrick + "timeseries"} {
		for _, o := range g.of[s][p] {
			if id := g.text(o.text, nsRef+"hasTimeseriesId", nsBrick+"hasTimeseriesId"); id != "" {
				return id
			}
		}
	}
	if l := g.text(s, nsLabel, nsBrick+"hasTimeseriesId", nsRef+"hasTimeseriesId"); l != "" {
		return l
	}
	return lastPart(s)
}

func (g *graph) file(s string) string {
	for _, o := range g.of[s][nsRef+"hasExternalReference"] {
		if f := g.text(o.text, nsRef+"storedAt"); f != "" {
			return f
		}
	}
	return ""
}

func lastPart(iri string) string {
	if i := strings.LastIndexAny(iri, "#/:"); i >= 0 && i+1 < len(iri) {
		iri = iri[i+1:]
	}
	if u, err := url.PathUnescape(iri); err == nil {
		return u
	}
	return iri
}

func (g *graph) name(s string) string {
	if l := g.text(s, nsLabel); l != "" {
		return l
	}
	return lastPart(s)
}

// place finds the unit that a point belongs to and, by its class and those of the
// equipment on the way, its role.
func (g *graph) place(s, class string, p *Point) {
	near := map[string]bool{} // classes of the equipment up to the unit
	seen := map[string]bool{s: true}
	at := []string{s}
	for depth := 0; depth < 8 && len(at) > 0 && p.Unit == "" && !p.Weather; depth++ {
		var next []string
		for _, x := range at {
			for _, up := range g.up(x) {
				if seen[up] {
					continue
				}
				seen[up] = true
				next = append(next, up)
				for _, c := range g.classes(up) {
					if same, ok := sameClass[c]; ok {
						c = same
					}
					near[c] = true
					if contains(unitClasses, c) && p.Unit == "" {
						p.Unit = g.name(up)
						near["AHU"] = true
					}
					p.Weather = p.Weather || c == "Weather_Station"
				}
			}
		}
		at = next
	}
	class = strings.ReplaceAll(class, "Discharge_Air", "Supply_Air")
	class = strings.ReplaceAll(class, "Outdoor_Air", "Outside_Air")
	var fallback *standard
	many := 0
	for i := range standards {
		st := &standards[i]
		if st.class != class {
			continue
		}
		if near[st.parent] && (st.parent != "AHU" || fallback == nil) {
			if st.parent != "AHU" { // the nearest equipment says it
				p.Role, p.Known = st.role, true
				return
			}
			p.Role, p.Known = st.role, true
			continue
		}
		fallback = st
		many++
	}
	if !p.Known && many == 1 { // the class alone says it
		p.Role, p.Known = fallback.role, true
	}
}

func contains(list []string, s string) bool {
	for _, x := range list {
		if x == s {
			return true
		}
	}
	return false
}

func qudtUnit(iri string) string {
	u := strings.TrimPrefix(strings.TrimPrefix(iri, nsUnit), "https://qudt.org/vocab/unit/")
	for _, n := range unitNames {
		if n.qudt == u {
			return n.ours
		}
	}
	return u
}

// ReadBrick reads the points of a Brick model in Turtle.
func ReadBrick(text string) ([]Point, error) {
	list, err := readTurtle(text)
	if err != nil {
		return nil, err
	}
	out := brickPoints(newGraph(list))
	if len(out) == 0 {
		return nil, errorf(0, "it has no point of a Brick class (%s)", nsBrick)
	}
	return out, nil
}

// WriteBrick writes points as a Brick model in Turtle: units, the equipment that the
// points' classes belong to, points with label, unit of measure and time series. What
// has no class is left out and named in a comment.
func WriteBrick(w io.Writer, site string, points []Point) error {
	var b strings.Builder
	fmt.Fprintf(&b, "@prefix brick: <%s> .\n@prefix ref: <%s> .\n@prefix unit: <%s> .\n@prefix rdfs: <http://www.w3.org/2000/01/rdf-schema#> .\n@prefix site: <urn:dewledger:%s#> .\n", nsBrick, nsRef, nsUnit, iriPart(site))
	equipment := map[string]bool{}
	declare := func(id, class, label, partOf string) {
		if equipment[id] {
			return
		}
		equipment[id] = true
		fmt.Fprintf(&b, "\nsite:%s a brick:%s ;\n    rdfs:label %s", id, class, quoteTurtle(label))
		if partOf != "" {
			fmt.Fprintf(&b, " ;\n    brick:isPartOf site:%s", partOf)
		}
		b.WriteString(" .\n")
	}
	var without []string
	used := map[string]int{}
	for _, p := range points {
		if p.Role == trend.NoRole {
			continue
		}
		st, ok := standardOf(p.Role)
		if !ok {
			without = append(without, fmt.Sprintf("%s of %s (%s)", p.Column, p.Unit, p.Role))
			continue
		}
		parent := iriPart(p.Unit)
		switch {
		case st.parent == "Weather_Station" || p.Unit == "*":
			parent = "weather"
			declare(parent, "Weather_Station", "weather", "")
		default:
			declare(parent, "AHU", p.Unit, "")
			if st.parent != "AHU" {
				id := parent + "_" + st.parent
				declare(id, st.parent, p.Unit+" "+strings.ToLower(strings.ReplaceAll(st.parent, "_", " ")), parent)
				parent = id
			}
		}
		id := iriPart(p.Unit + "_" + p.Role.String())
		if used[id]++; used[id] > 1 {
			id += fmt.Sprintf("_%d", used[id])
		}
		fmt.Fprintf(&b, "\nsite:%s a brick:%s ;\n    rdfs:label %s ;\n    brick:isPointOf site:%s", id, st.class, quoteTurtle(p.Column), parent)
		for _, n := range unitNames {
			if n.ours == p.Measure && n.qudt != "" {
				fmt.Fprintf(&b, " ;\n    brick:hasUnit unit:%s", n.qudt)
				break
			}
		}
		fmt.Fprintf(&b, " ;\n    ref:hasExternalReference [ a ref:TimeseriesReference ; ref:hasTimeseriesId %s", quoteTurtle(p.Column))
		if p.File != "" {
			fmt.Fprintf(&b, " ; ref:storedAt %s", quoteTurtle(p.File))
		}
		b.WriteString(" ] .\n")
	}
	sort.Strings(without)
	for _, s := range without {
		fmt.Fprintf(&b, "\n# no class for %s\n", strings.Map(func(r rune) rune {
			if unicode.IsControl(r) {
				return ' '
			}
			return r
		}, s))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// iriPart turns a name into a local name: letters, digits, - and _.
func iriPart(s string) string {
	var b strings.Builder
	for _, r := range s {
		switch {
		case r < 0x80 && (unicode.IsLetter(r) || unicode.IsDigit(r) || r == '-' || r == '_'):
			b.WriteRune(r)
		case r == '*':
			b.WriteString("all")
		default:
			fmt.Fprintf(&b, "_%X", r)
		}
	}
	if b.Len() == 0 {
		return "site"
	}
	return b.String()
}

func quoteTurtle(s string) string {
	var b strings.Builder
	b.WriteByte('"')
	for _, r := range s {
		switch r {
		case '"', '\\':
			b.WriteByte('\\')
			b.WriteRune(r)
		case '\n':
			b.WriteString(`\n`)
		case '\r':
			b.WriteString(`\r`)
		case '\t':
			b.WriteString(`\t`)
		default:
			if unicode.IsControl(r) {
				fmt.Fprintf(&b, `\u%04X`, r)
			} else {
				b.WriteRune(r)
			}
		}
	}
	b.WriteByte('"')
	return b.String()
}
