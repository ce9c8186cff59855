package main

import (
	"context"
	"fmt"
	"time"

	"github.com/spf13/pflag"

	"dewledger/ingest/synth"
)

func demo(ctx context.Context, e env) error {
	var o synth.SiteOptions
	var from string
	fs := pflag.NewFlagSet("demo", pflag.ContinueOnError)
	fs.IntVar(&o.Count, "count", 6, "units to write")
	fs.IntVar(&o.Days, "days", 28, "days of trends")
	fs.StringVar(&from, "from", "", "first day, 2026-02-23 for instance")
	fs.DurationVar(&o.Step, "step", 5*time.Minute, "time between rows")
	fs.StringVar(&o.Format, "format", "csv", "csv or parquet")
	fs.Uint64Var(&o.Seed, "seed", 2, "another seed is another site")
	if err := parse(e, fs, "DIR [flags]"); err != nil {
		return err
	}
	if fs.NArg() != 1 {
		return usageErrorf("name one folder that is not there yet, or is empty", "demo takes one DIR, not %d", fs.NArg())
	}
	// A zero means "the default" to the writer, so it is refused here.
	switch {
	case o.Count < 1 || o.Days < 1 || o.Step <= 0:
		return usageErrorf("`dewledger demo --help` lists the flags", "--count, --days and --step are at least one")
	case o.Seed == 0:
		return usageErrorf("any other number will do", "--seed is not 0")
	}
	if from != "" {
		t, err := time.Parse(time.DateOnly, from)
		if err != nil {
			return usageErrorf("write it as 2026-02-23", "--from %q is no date", from)
		}
		o.From = t
	}
	dir := fs.Arg(0)
	if err := synth.WriteSite(ctx, dir, o); err != nil {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		return usageErrorf("`dewledger demo --help` lists the flags", "%s", plain(err))
	}
	fmt.Fprintf(e.stdout, "An invented site of %d units with known faults is in %s; truth.csv there says which.\n\nNext: dewledger audit %s\n", o.Count, dir, dir)
	return nil
}
