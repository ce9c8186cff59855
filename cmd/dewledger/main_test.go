package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){
		"dewledger": func() {
			os.Exit(run(context.Background(), env{args: os.Args[1:], stdin: os.Stdin, stdout: os.Stdout, stderr: os.Stderr}))
		},
	})
}

// Each script runs the program as a shell would and looks at what it says,
// writes and returns.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{Dir: "testdata"})
}

// call runs the program in this process.
func call(t *testing.T, args ...string) (stdout, stderr string, status int) {
	t.Helper()
	var out, errs bytes.Buffer
	status = run(context.Background(), env{args: args, stdin: strings.NewReader(""), stdout: &out, stderr: &errs})
	return out.String(), errs.String(), status
}

func table(t *testing.T, file string) []map[string]string {
	t.Helper()
	f, err := os.Open(file)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, r := range rows[1:] {
		m := map[string]string{}
		for i, name := range rows[0] {
			m[name] = r[i]
		}
		out = append(out, m)
	}
	return out
}

// checkTruth holds findings against a truth.csv: every fault found under the
// name that it should have, within its time; nothing pressing on a healthy unit.
func checkTruth(t *testing.T, truth, findings []map[string]string) {
	t.Helper()
	for _, tr := range truth {
		if tr["rule"] == "" {
			for _, f := range findings {
				if f["unit"] == tr["unit"] && (f["priority"] == "urgent" || f["priority"] == "high") {
					t.Errorf("healthy unit %s has a finding of priority %s: %s", f["unit"], f["priority"], f["statement"])
				}
			}
			continue
		}
		if !slices.ContainsFunc(findings, func(f map[string]string) bool { return f["unit"] == tr["unit"] && f["rule"] == tr["rule"] }) {
			t.Errorf("%s: %s was not named by %s", tr["unit"], tr["fault"], tr["rule"])
		}
	}
}

func TestExamples(t *testing.T) {
	stories, err := filepath.Glob("../../examples/*/site.toml")
	if err != nil || len(stories) < 2 {
		t.Fatalf("%d stories, %v", len(stories), err)
	}
	for _, s := range stories {
		dir := filepath.Dir(s)
		t.Run(filepath.Base(dir), func(t *testing.T) {
			out := t.TempDir()
			stdout, stderr, status := call(t, "audit", dir, "--out", out)
			if status != 0 {
				t.Fatalf("status %d\n%s", status, stderr)
			}
			if !strings.Contains(stdout, "Report: "+filepath.Join(out, "index.html")) {
				t.Errorf("it does not say where to look:\n%s", stdout)
			}
			checkTruth(t, table(t, filepath.Join(dir, "truth.csv")), table(t, filepath.Join(out, "findings.csv")))
			for _, f := range []string{"index.html", "findings.csv", "findings.json", "findings.parquet", "spans.csv", "coverage.csv", "run.json"} {
				if st, err := os.Stat(filepath.Join(out, f)); err != nil || st.Size() == 0 {
					t.Errorf("%s: %v", f, err)
				}
			}
		})
	}
}

func TestDemoIsFound(t *testing.T) {
	if testing.Short() {
		t.Skip("six unit-months")
	}
	dir, out := filepath.Join(t.TempDir(), "site"), t.TempDir()
	if _, stderr, status := call(t, "demo", dir); status != 0 {
		t.Fatal(stderr)
	}
	if _, stderr, status := call(t, "audit", dir, "--out", out, "--quiet"); status != 0 || stderr != "" {
		t.Fatalf("status %d: %s", status, stderr)
	}
	checkTruth(t, table(t, filepath.Join(dir, "truth.csv")), table(t, filepath.Join(out, "findings.csv")))
	if pages, _ := filepath.Glob(filepath.Join(out, "units", "*.html")); len(pages) != 6 {
		t.Errorf("%d unit pages", len(pages))
	}
}

// The same input gives the same bytes in every output but run.json, whatever the
// number of workers.
func TestSameBytes(t *testing.T) {
	a, b := t.TempDir(), t.TempDir()
	for dir, jobs := range map[string]string{a: "1", b: "4"} {
		if _, stderr, status := call(t, "audit", "../../examples/valve-behind-a-mask", "--out", dir, "--ledger", "--jobs", jobs, "--quiet"); status != 0 {
			t.Fatal(stderr)
		}
	}
	n := 0
	err := filepath.WalkDir(a, func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() || d.Name() == "run.json" {
			return err
		}
		rel, err := filepath.Rel(a, path)
		if err != nil {
			return err
		}
		x, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		y, err := os.ReadFile(filepath.Join(b, rel))
		if err != nil {
			return err
		}
		if !bytes.Equal(x, y) {
			t.Errorf("%s differs between two runs", rel)
		}
		n++
		return nil
	})
	if err != nil || n < 7 {
		t.Errorf("%d files compared, %v", n, err)
	}
}

// run.json lists what was written, and a second run into the same folder leaves
// nothing of the first behind.
func TestNothingStale(t *testing.T) {
	dir, out := filepath.Join(t.TempDir(), "site"), t.TempDir()
	if _, stderr, status := call(t, "demo", dir, "--count", "2", "--days", "7"); status != 0 {
		t.Fatal(stderr)
	}
	if _, stderr, status := call(t, "audit", dir, "--out", out, "--quiet"); status != 0 {
		t.Fatal(stderr)
	}
	mine := filepath.Join(out, "notes.txt")
	if err := os.WriteFile(mine, []byte("mine"), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, stderr, status := call(t, "audit", "../../examples/valve-behind-a-mask", "--out", out, "--quiet"); status != 0 {
		t.Fatal(stderr)
	}
	if left, _ := filepath.Glob(filepath.Join(out, "units", "*")); len(left) != 0 {
		t.Errorf("pages of the earlier run are left: %v", left)
	}
	if _, err := os.Stat(mine); err != nil {
		t.Errorf("a file that the program did not write is gone: %v", err)
	}
	raw, err := os.ReadFile(filepath.Join(out, "run.json"))
	if err != nil {
		t.Fatal(err)
	}
	var rec struct{ Files []string }
	if err := json.Unmarshal(raw, &rec); err != nil || !slices.Contains(rec.Files, "index.html") {
		t.Errorf("run.json lists %v, %v", rec.Files, err)
	}
}

// The README's commands are the ones that a newcomer types.
func TestReadmeCommands(t *testing.T) {
	raw, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	cmds := regexp.MustCompile(`(?m)^go (run|test) .*$`).FindAllString(string(raw), -1)
	if len(cmds) != 2 || !strings.HasPrefix(cmds[0], "go run ./cmd/dewledger audit ") || cmds[1] != "go test ./..." {
		t.Fatalf("the README's commands are %q", cmds)
	}
	args := strings.Fields(cmds[0])[3:]
	args[1] = filepath.Join("..", "..", args[1])
	if _, stderr, status := call(t, append(args, "--out", t.TempDir())...); status != 0 {
		t.Errorf("%s: status %d\n%s", cmds[0], status, stderr)
	}
	for _, name := range regexp.MustCompile("`--([a-z-]+)").FindAllStringSubmatch(string(raw), -1) {
		help, _, _ := call(t, "audit", "--help")
		if !strings.Contains(help, "--"+name[1]) {
			t.Errorf("the README names --%s, which audit has not", name[1])
		}
	}
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.5g, published %.5g (± %.2g)", what, got, want, tol)
	}
}
