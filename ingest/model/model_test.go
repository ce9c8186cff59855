package model

import (
	"bytes"
	"io"
	"reflect"
	"strings"
	"testing"

	"dewledger/ingest/trend"
)

// A model as sites write them: invented, in every notation of Turtle that counts.
const turtleSite = `@prefix brick: <https://brickschema.org/schema/Brick#> .
PREFIX ref: <https://brickschema.org/schema/Brick/ref#>
@prefix rdfs: <http://www.w3.org/2000/01/rdf-schema#> .
@prefix unit: <http://qudt.org/vocab/unit/> .
@base <http://quay.example/site> .
@prefix q: <#> .

# the unit, by two names of its class
q:ahu7 a brick:Air_Handling_Unit , brick:Equipment ;
	rdfs:label "AHU-7"@en ;
	brick:hasPoint q:sat, <#rat> ;
	brick:hasPart q:oad, [ a brick:Supply_Fan ; brick:hasPoint q:sf ] .
q:sat a brick:Discharge_Air_Temperature_Sensor ; rdfs:label "ignored" ;
	brick:hasUnit unit:DEG_F ;
	ref:hasExternalReference [ a ref:TimeseriesReference ; ref:hasTimeseriesId "AHU7.DAT" ; ref:storedAt "trends.csv" ] .
<#rat> a brick:Return_Air_Temperature_Sensor ; rdfs:label """AHU7 "RAT\""""^^<http://www.w3.org/2001/XMLSchema#string> .
q:oad a brick:Outside_Damper .
q:oad.cmd a brick:Damper_Position_Command ; brick:isPointOf q:oad ; rdfs:label "AHU7.OAD" ; q:order ( 1 2.5 -3e2 true "x" ) ;
.
q:sf a brick:Fan_On_Off_Status .
q:cv a brick:Valve_Position_Command ; brick:isPointOf [ a brick:Chilled_Water_Valve ; brick:isPartOf q:ahu7 ] ; rdfs:label "CV\u00E9" .
q:odd a brick:Filter_Status ; brick:isPointOf q:ahu7 .
q:ws a brick:Weather_Station . q:wt a brick:Outside_Air_Temperature_Sensor ; brick:isPointOf q:ws ; rdfs:label "Weather T" .
[] a brick:Return_Air_CO2_Sensor ; rdfs:label "lost" .
`

func TestReadBrick(t *testing.T) {
	got, err := ReadBrick(turtleSite)
	if err != nil {
		t.Fatal(err)
	}
	want := map[string]Point{
		"AHU7.DAT":    {Unit: "AHU-7", File: "trends.csv", Role: trend.SATemp, Known: true, Measure: "degF"},
		`AHU7 "RAT"`:  {Unit: "AHU-7", Role: trend.RATemp, Known: true},
		"AHU7.OAD":    {Unit: "AHU-7", Role: trend.OADamper, Known: true},
		"sf":          {Unit: "AHU-7", Role: trend.SAFanStatus, Known: true},
		"CVé":         {Unit: "AHU-7", Role: trend.CoolValve, Known: true},
		"odd":         {Unit: "AHU-7"},
		"Weather T":   {Role: trend.WXTemp, Known: true, Weather: true},
		"lost":        {Role: trend.RACO2, Known: true},
		"not a point": {},
	}
	delete(want, "not a point")
	for _, p := range got {
		w, ok := want[p.Column]
		if !ok {
			t.Errorf("a point too many: %+v", p)
			continue
		}
		delete(want, p.Column)
		w.Column, w.Class = p.Column, p.Class
		if !reflect.DeepEqual(p, w) {
			t.Errorf("%q: %+v, want %+v", p.Column, p, w)
		}
	}
	for c := range want {
		t.Errorf("%q was not found", c)
	}
}

const zincSite = "ver:\"3.0\" dis:\"Quay\" made:2026-05-01T10:00:00Z UTC\n" +
	"id,dis,ahu,equip,point,discharge,return,air,temp,sensor,outside,damper,cmd,equipRef,unit,weatherStationRef,weather,extra foo:\"bar\"\n" +
	"@ahu7 \"Unit seven\",\"AHU-7\",M,M,,,,,,,,,,,,,,{a:1 b:\"}\"}\n" +
	"@p1,\"AHU7.DAT\",,,M,M,,M,M,M,,,,@ahu7,\"°F\",,,[1,2,\"]\"]\n" +
	"@p2,\"AHU7 \\\"RAT\\\"\",,,M,,M,M,M,M,,,,@ahu7 \"Unit seven\",\"°C\",,,C(37.5,-77.4)\n" +
	"@p3,\"AHU7.OAD\",,,M,,,M,,,M,M,M,@ahu7,\"%\",,,<<\nver:\"3.0\"\na,b\n1,2\n>>\n" +
	"@p4,\"Weather T\",,,M,,,M,M,M,,,,,\"°C\",@ws,M,-3.5kW\n" +
	"@p5,\"odd\",,,M,,,,,,,,,@ahu7,,,,`http://x/`\n"

const jsonSite4 = `{"_kind":"grid","meta":{"ver":"3.0"},"cols":[{"name":"id"}],"rows":[
 {"id":{"_kind":"ref","val":"ahu7"},"dis":"AHU-7","ahu":{"_kind":"marker"}},
 {"id":{"_kind":"ref","val":"p1","dis":"x"},"dis":"AHU7.DAT","point":{"_kind":"marker"},"discharge":{"_kind":"marker"},"air":{"_kind":"marker"},"temp":{"_kind":"marker"},"sensor":{"_kind":"marker"},"equipRef":{"_kind":"ref","val":"ahu7"},"unit":"°F","n":{"_kind":"number","val":3}}]}`

const jsonSite3 = `{"meta":{"ver":"2.0"},"cols":[],"rows":[
 {"id":"r:ahu7 Unit seven","dis":"s:AHU-7","ahu":"m:"},
 {"id":"r:p1","dis":"s:AHU7.DAT","point":"m:","discharge":"m:","air":"m:","temp":"m:","sensor":"m:","equipRef":"r:ahu7 Unit seven","unit":"s:°F","n":"n:3.5 kW"}]}`

func TestReadHaystack(t *testing.T) {
	dat := Point{Unit: "AHU-7", Role: trend.SATemp, Known: true, Measure: "degF"}
	for name, c := range map[string]struct {
		read func(string) ([]Point, error)
		text string
		want map[string]Point
	}{
		"zinc": {ReadZinc, zincSite, map[string]Point{
			"AHU7.DAT":   dat,
			`AHU7 "RAT"`: {Unit: "AHU-7", Role: trend.RATemp, Known: true, Measure: "degC"},
			"AHU7.OAD":   {Unit: "AHU-7", Role: trend.OADamper, Known: true, Measure: "%"},
			"Weather T":  {Role: trend.WXTemp, Known: true, Weather: true, Measure: "degC"},
			"odd":        {Unit: "AHU-7"},
		}},
		"zinc crlf": {ReadZinc, strings.ReplaceAll(zincSite[:strings.Index(zincSite, "@p2")], "\n", "\r\n"), map[string]Point{"AHU7.DAT": dat}},
		"json 4":    {ReadJSON, jsonSite4, map[string]Point{"AHU7.DAT": dat}},
		"json 3":    {ReadJSON, jsonSite3, map[string]Point{"AHU7.DAT": dat}},
	} {
		got, err := c.read(c.text)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if len(got) != len(c.want) {
			t.Errorf("%s: %d points, want %d: %+v", name, len(got), len(c.want), got)
		}
		for _, p := range got {
			w := c.want[p.Column]
			w.Column, w.Class = p.Column, p.Class
			if !reflect.DeepEqual(p, w) {
				t.Errorf("%s: %q: %+v, want %+v", name, p.Column, p, w)
			}
		}
	}
}

// What is written is read back: every role that a standard has a word for, names with
// every nasty letter, units of measure, two units, weather.
func TestModelsComeBack(t *testing.T) {
	nasty := "a \"b\" \\ c' <d> $e é\t日\n#."
	for _, f := range []struct {
		name  string
		write func(w io.Writer, site string, points []Point) error
		read  func(string) ([]Point, error)
	}{{"brick", WriteBrick, ReadBrick}, {"zinc", WriteZinc, ReadZinc}, {"json", WriteJSON, ReadJSON}} {
		var in []Point
		for _, unit := range []string{"AHU-1", "Luft 2/ö"} {
			for r := trend.NoRole + 1; r < trend.NumRoles; r++ {
				if r.Station() == trend.Weather {
					continue
				}
				p := Point{Unit: unit, Column: unit + " " + r.String() + nasty, File: "a *.csv", Role: r, Known: true, Measure: "degC"}
				in = append(in, p)
			}
		}
		for _, r := range []trend.Role{trend.WXTemp, trend.WXRH} {
			in = append(in, Point{Unit: "*", Column: r.String(), Role: r, Known: true, Measure: "%"})
		}
		var b bytes.Buffer
		if err := f.write(&b, "Quay \"House\"", in); err != nil {
			t.Fatal(err)
		}
		got, err := f.read(b.String())
		if err != nil {
			t.Errorf("%s: %v\n%s", f.name, err, b.String())
			continue
		}
		back := map[string]Point{}
		for _, p := range got {
			back[p.Column] = p
		}
		lost, wrong := 0, 0
		for _, p := range in {
			q, ok := back[p.Column]
			switch {
			case !ok:
				lost++
				if st, has := standardOf(p.Role); has && (f.name == "brick" || len(st.tags) > 0) {
					t.Errorf("%s: %v of %s was lost", f.name, p.Role, p.Unit)
				}
			case p.Unit == "*" && (!q.Weather || q.Role != p.Role), p.Unit != "*" && (q.Unit != p.Unit || q.Role != p.Role || q.File != p.File), q.Measure != p.Measure:
				wrong++
				// Tags alone cannot tell a preheat valve from a heating valve, nor an
				// enthalpy wheel's sensors: then it must not be another role.
				if !(f.name != "brick" && q.Role.Kind() == p.Role.Kind()) {
					t.Errorf("%s: %+v came back as %+v", f.name, p, q)
				}
			}
		}
		t.Logf("%s: %d points, %d without a word, %d ambiguous", f.name, len(in), lost, wrong)
		if lost > len(in)/4 || wrong > 2 {
			t.Errorf("%s: %d of %d lost, %d ambiguous", f.name, lost, len(in), wrong)
		}
	}
}

func TestModelErrors(t *testing.T) {
	for _, c := range []struct {
		read func(string) ([]Point, error)
		in   string
		want string
	}{
		{ReadBrick, "", "no point of a Brick class"},
		{ReadBrick, "@prefix brick <x> .", "a prefix ends with a colon"},
		{ReadBrick, "\n\nq:a a q:b .", "line 3: the prefix \"q\" is not declared"},
		{ReadBrick, "<a> <b> \"c", "a text does not end"},
		{ReadBrick, "<a> <b> <c", "does not end with >"},
		{ReadBrick, "<a> <b> <c> <d> .", "\".\" is expected"},
		{ReadBrick, "<a> <b> " + strings.Repeat("[ <b> ", 200), "nested more than"},
		{ReadBrick, "<a> <b> ( 1 2", "a list does not end"},
		{ReadBrick, "\xff\xfe", "UTF-8"},
		{ReadZinc, "id,dis\n@a,\"b\"\n", "begins with ver"},
		{ReadZinc, "ver:\"3.0\"\nid,dis\n@a,\"b", "line 3: a text does not end"},
		{ReadZinc, "ver:\"3.0\"\nid\n@a,\"b\"\n", "more cells than the 1 columns"},
		{ReadZinc, "ver:\"3.0\"\nid\n@a\n", "no entity with the tag point"},
		{ReadZinc, "ver:\"3.0\"\na\n" + strings.Repeat("<<ver:\"3.0\"\na\n", 200), "nested more than"},
		{ReadJSON, "[]", "no JSON grid"},
		{ReadJSON, "{}", "it has no rows"},
		{ReadJSON, `{"rows":[{"id":"r:a"}]}`, "no entity with the tag point"},
	} {
		if _, err := c.read(c.in); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%.40q: %v, want %q", c.in, err, c.want)
		}
	}
}

func FuzzTurtle(f *testing.F) {
	f.Add(turtleSite)
	f.Add("<a> <b> [ <c> ( <d> 'e' ) ] .")
	f.Add("@base <x> . BASE <y>\n<a> a <b>;;.")
	f.Fuzz(func(t *testing.T, text string) {
		list, err := readTurtle(text)
		if err != nil {
			return
		}
		if len(list) > len(text) {
			t.Errorf("%d statements out of %d bytes", len(list), len(text))
		}
		brickPoints(newGraph(list))
	})
}

func FuzzZinc(f *testing.F) {
	f.Add(zincSite)
	f.Add("ver:\"2.0\"\na,b\n,\n\n")
	f.Fuzz(func(t *testing.T, text string) { _, _ = ReadZinc(text) })
}

func FuzzHaystackJSON(f *testing.F) {
	f.Add(jsonSite4)
	f.Add(jsonSite3)
	f.Fuzz(func(t *testing.T, text string) { _, _ = ReadJSON(text) })
}
