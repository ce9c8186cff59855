//go:build ignore

// Make writes the examples' data anew, all but their READMEs. Run it in the
// folder above this one:
//
//	go run ./examples/make.go
package main

import (
	"context"
	"fmt"
	"os"
	"path/filepath"

	"dewledger/ingest/synth"
)

func main() {
	if err := run("examples"); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(root string) error {
	for _, s := range synth.Stories() {
		tmp, err := os.MkdirTemp(root, ".new-*")
		if err != nil {
			return err
		}
		defer os.RemoveAll(tmp)
		fresh := filepath.Join(tmp, s.Name)
		if err := s.Write(context.Background(), fresh); err != nil {
			return err
		}
		home := filepath.Join(root, s.Name)
		if err := os.MkdirAll(home, 0o755); err != nil {
			return err
		}
		for _, name := range []string{"site.toml", "points.csv", "truth.csv", "trends"} {
			if err := os.RemoveAll(filepath.Join(home, name)); err != nil {
				return err
			}
			if err := os.Rename(filepath.Join(fresh, name), filepath.Join(home, name)); err != nil {
				return err
			}
		}
	}
	return nil
}
