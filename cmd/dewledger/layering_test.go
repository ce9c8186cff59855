package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// layers is the import table of DEVELOPERS.md: which of our packages each may
// import outside its tests. It is read from the sources, since the go command's
// answer would be hidden by the test cache.
var layers = map[string][]string{
	"psy":                {},
	"ingest/trend":       {},
	"rules/finding":      {},
	"ingest/columnfile":  {},
	"ingest/model":       {"ingest/trend"},
	"ingest":             {"ingest/trend", "ingest/model", "psy"},
	"ingest/synth":       {"ingest/trend", "psy", "ingest/columnfile"},
	"rules/balance":      {"ingest/trend", "psy"},
	"rules":              {"ingest/trend", "rules/balance", "rules/finding", "psy", "ingest/synth"},
	"rules/ruletest":     {"ingest/trend", "rules/balance", "rules/finding", "psy", "ingest/synth", "rules"},
	"report":             {"ingest/trend", "rules/finding", "psy", "rules/balance", "ingest/columnfile"},
	"cmd/internal/fleet": nil, // all
	"cmd/dewledger":      nil,
}

func TestLayering(t *testing.T) {
	root := filepath.Join("..", "..")
	seen := map[string]bool{}
	err := filepath.WalkDir(root, func(file string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() {
			if name := d.Name(); name == "testdata" || name != ".." && strings.HasPrefix(name, ".") {
				return filepath.SkipDir
			}
			return nil
		}
		if !strings.HasSuffix(file, ".go") || strings.HasSuffix(file, "_test.go") {
			return nil
		}
		src, err := os.ReadFile(file)
		if err != nil {
			return err
		}
		if strings.Contains(string(src), "//go:build ignore") {
			return nil // a generator, run by hand
		}
		rel, err := filepath.Rel(root, filepath.Dir(file))
		if err != nil {
			return err
		}
		pkg := filepath.ToSlash(rel)
		allowed, known := layers[pkg]
		if !known {
			// Tools below a package follow that package's row.
			parent := path.Dir(pkg)
			if allowed, known = layers[parent]; !known {
				t.Errorf("package %s is not in the table", pkg)
				return nil
			}
			allowed = append(slices.Clip(allowed), parent)
		}
		seen[pkg] = true
		f, err := parser.ParseFile(token.NewFileSet(), file, src, parser.ImportsOnly)
		if err != nil {
			return err
		}
		if layers[pkg] == nil && strings.HasPrefix(pkg, "cmd") {
			return nil
		}
		for _, imp := range f.Imports {
			p, err := strconv.Unquote(imp.Path.Value)
			if err != nil {
				return err
			}
			if ours, ok := strings.CutPrefix(p, "dewledger/"); ok && !slices.Contains(allowed, ours) {
				t.Errorf("%s imports %s: the table in DEVELOPERS.md does not allow it", filepath.ToSlash(file), ours)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for pkg := range layers {
		if !seen[pkg] {
			t.Errorf("package %s is in the table and not in the sources", pkg)
		}
	}
}
