// Package reference runs the general reference libraries of this folder under Node, for
// tests. It is the one place that decides what happens where they are not installed.
package reference

import (
	"bytes"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"testing"
)

// Run gives in to a script of this folder and returns what it prints. Where Node or the
// library that the script needs is missing the test is skipped, and fails instead where
// DEWLEDGER_NO_SKIP is 1, as CI sets it.
func Run(t testing.TB, library, script string, in []byte) ([]byte, error) {
	t.Helper()
	_, file, _, _ := runtime.Caller(0)
	dir := filepath.Dir(file)
	lack := func(why string) {
		t.Helper()
		if os.Getenv("DEWLEDGER_NO_SKIP") == "1" {
			t.Fatal(why)
		}
		t.Skip(why)
	}
	node, err := exec.LookPath("node")
	if err != nil {
		lack("no Node on the path")
	}
	if _, err := os.Stat(filepath.Join(dir, "node_modules", library)); err != nil {
		lack("the reference library is not installed: run npm ci in testdata/reference")
	}
	cmd := exec.CommandContext(t.Context(), node, script)
	cmd.Dir, cmd.Stdin = dir, bytes.NewReader(in)
	out, err := cmd.Output()
	var ee *exec.ExitError
	if errors.As(err, &ee) {
		err = errors.New(string(ee.Stderr))
	}
	return out, err
}
