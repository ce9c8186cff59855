package main

import (
	"context"

	"github.com/spf13/pflag"
)

func demo(ctx context.Context, e env) error {
	fs := pflag.NewFlagSet("demo", pflag.ContinueOnError)
	if err := parse(e, fs, "DIR [flags]"); err != nil {
		return err
	}
	return nil
}
