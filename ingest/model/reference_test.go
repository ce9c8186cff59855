package model

import (
	"bytes"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"sort"
	"strings"
	"testing"

	"dewledger/ingest/trend"
)

// The Turtle reader against a general RDF library (n3, run under Node; testdata/
// reference says which version): the same statements, blank nodes apart. What we write
// it must read as well. Skipped without Node or the library, unless DEWLEDGER_NO_SKIP
// is 1.
func TestTurtleAgainstReferenceLibrary(t *testing.T) {
	dir := filepath.Join("..", "..", "testdata", "reference")
	lack := func(why string) {
		if os.Getenv("DEWLEDGER_NO_SKIP") == "1" {
			t.Fatal(why)
		}
		t.Skip(why)
	}
	node, err := exec.LookPath("node")
	if err != nil {
		lack("no Node on the path")
	}
	if _, err := os.Stat(filepath.Join(dir, "node_modules", "n3")); err != nil {
		lack("the reference library is not installed: run npm ci in testdata/reference")
	}
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
		cmd := exec.CommandContext(t.Context(), node, "turtle.js")
		cmd.Dir, cmd.Stdin = dir, strings.NewReader(text)
		out, err := cmd.Output()
		if err != nil {
			if ee, ok := err.(*exec.ExitError); ok {
				err = fmt.Errorf("%w: %s", err, ee.Stderr)
			}
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
