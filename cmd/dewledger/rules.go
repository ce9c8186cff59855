package main

import (
	"context"
	"fmt"
	"strings"

	"github.com/spf13/pflag"

	"dewledger/rules"
)

func listRules(_ context.Context, e env) error {
	fs := pflag.NewFlagSet("rules", pflag.ContinueOnError)
	if err := parse(e, fs, "[NAME]"); err != nil {
		return err
	}
	switch fs.NArg() {
	case 0:
		for _, r := range rules.All() {
			fmt.Fprintf(e.stdout, "%-32s %s\n", r.Name, r.Doc.Title)
		}
		fmt.Fprintln(e.stdout, "\n`dewledger rules NAME` says what a rule asks, needs and assumes, and its sources.")
		return nil
	case 1:
		r := rules.Find(fs.Arg(0))
		if r == nil {
			return noSuchRule(fs.Arg(0))
		}
		fmt.Fprint(e.stdout, r.Text())
		return nil
	}
	return usageErrorf("name one rule, or none for the list", "rules takes one name, not %d", fs.NArg())
}

func noSuchRule(name string) error {
	hint := "`dewledger rules` lists them"
	for _, r := range rules.All() {
		if strings.Contains(r.Name, name) || strings.Contains(name, r.Name) {
			hint = "did you mean " + r.Name + "? " + hint
			break
		}
	}
	return usageErrorf(hint, "there is no rule %q", name)
}
