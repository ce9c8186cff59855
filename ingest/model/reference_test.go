package model

import (
	"bytes"
	"encoding/json"
	"fmt"
	"sort"
	"strings"
	"testing"

	"dewledger/ingest/trend"
	"dewledger/testdata/reference"
)

// The Turtle reader against a general RDF library (n3, run under Node; testdata/
// reference says which version): the same statements, blank nodes apart. What we write
// it must read as well.
func TestTurtleAgainstReferenceLibrary(t *testing.T) {
	var written bytes.Buffer
	var points []Point
	for r := trend.NoRole + 1; r < trend.NumRoles; r++ {
		points = append(points, Point{Unit: "AHU 1/é", Column: "a \"b\" \\\t\n" + r.String(), File: "x'.csv", Role: r, Measure: "degC"})
	}
	if err := WriteBrick(&written, "Quay <House>", points); err != nil {
		t.Fatal(err)
	}
	for name, text := range map[string]string{
		"written": written.String(),
		"site":    turtleSite,
		"odd":     "@prefix : <urn:a#> .\n:a.b :c\\~d 'x', '''long \\u0041\n\"y\" ''' , -1.5e3, .5, 7 , true;\n  :p [ :q ( [] ( :r ) \"z\"@en-GB ) ; ; ] , _:lab . # end\n_:lab :x <urn:é> .",
	} {
		out, err := reference.Run(t, "n3", "turtle.js", []byte(text))
		if err != nil {
			t.Errorf("%s: the library refuses it: %v", name, err)
			continue
		}
		var rows [][]any
		if err := json.Unmarshal(out, &rows); err != nil {
			t.Fatal(err)
		}
		list, err := readTurtle(text)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		var got, want []string
		for _, r := range rows {
			want = append(want, fmt.Sprintf("%s %s %s %v", r...))
		}
		plain := func(s term) string {
			if !s.literal && strings.HasPrefix(s.text, "_:") {
				return "_:"
			}
			return s.text
		}
		for _, x := range list {
			got = append(got, fmt.Sprintf("%s %s %s %v", plain(x.s), plain(x.p), plain(x.o), x.o.literal))
		}
		sort.Strings(got)
		sort.Strings(want)
		if len(got) < 10 || strings.Join(got, "\n") != strings.Join(want, "\n") {
			t.Errorf("%s:\n%s\nreference:\n%s", name, strings.Join(got, "\n"), strings.Join(want, "\n"))
		}
	}
}
