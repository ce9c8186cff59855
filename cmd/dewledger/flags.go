package main

import (
	"github.com/spf13/pflag"

	"dewledger/ingest"
	"dewledger/rules"
	"dewledger/rules/finding"
)

// common are the flags that every analysing command has.
type common struct {
	out, site, points, from, to, measure string
	only                                 []string
	factor                               float64
	jobs                                 int
	ledger, quiet, verbose               bool
}

func (c *common) register(fs *pflag.FlagSet) {
	fs.StringVar(&c.out, "out", "dewledger-out", "folder for the results")
	fs.StringVar(&c.site, "site", "", "site.toml to use instead of the site folder's own")
	fs.StringVar(&c.points, "points", "", "points.csv to use instead of the site folder's own")
	fs.StringVar(&c.from, "from", "", "begin here: a date or an RFC 3339 time, local to the site")
	fs.StringVar(&c.to, "to", "", "end here; a date is included whole")
	fs.StringArrayVar(&c.only, "rule", nil, "ask only this rule (may be repeated)")
	fs.StringVar(&c.measure, "measure", "", "units of measure for readers: si or ip (default: the site's, else si)")
	fs.Float64Var(&c.factor, "coverage-factor", 2, "k: every ± is this many standard uncertainties")
	fs.IntVar(&c.jobs, "jobs", 0, "units at once (default: all cores)")
	fs.BoolVar(&c.ledger, "ledger", false, "also write every interval's balances, as Parquet")
	fs.BoolVar(&c.quiet, "quiet", false, "print nothing but errors")
	fs.BoolVar(&c.verbose, "verbose", false, "every note about the input, one a line")
}

// check holds the flags against what they may be.
func (c *common) check() error {
	if !(c.factor >= 1 && c.factor <= 4) {
		return usageErrorf("2 is usual (95 %), 1 is one standard uncertainty", "--coverage-factor %v is not between 1 and 4", c.factor)
	}
	if _, ok := finding.ParseMeasure(c.measure); c.measure != "" && !ok {
		return usageErrorf("say --measure si or --measure ip", "--measure %q is neither si nor ip", c.measure)
	}
	for _, name := range c.only {
		if rules.Find(name) == nil {
			return noSuchRule(name)
		}
	}
	if c.out == "" {
		return usageErrorf("name a folder, or leave the flag out", "--out is empty")
	}
	return nil
}

// ingest are the flags as the reader of trends takes them.
func (c *common) ingest(e env, paths []string) ingest.Options {
	return ingest.Options{Paths: paths, Stdin: e.stdin, SitePath: c.site, PointsPath: c.points, From: c.from, To: c.to, MeasureFlag: c.measure, Jobs: c.jobs}
}
