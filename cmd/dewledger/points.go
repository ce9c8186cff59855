package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"path/filepath"
	"strings"

	"github.com/spf13/pflag"

	"dewledger/ingest"
	"dewledger/ingest/trend"
	"dewledger/report"
)

// points drafts a points schedule.
func points(ctx context.Context, e env) error {
	var c common
	var as []string
	fs := pflag.NewFlagSet("points", pflag.ContinueOnError)
	fs.StringVar(&c.out, "out", "dewledger-out", "folder for points.csv")
	fs.StringVar(&c.site, "site", "", "site.toml to use instead of the site folder's own")
	fs.StringVar(&c.points, "points", "", "a points schedule, or a Brick or Haystack model, to start from")
	fs.StringVar(&c.from, "from", "", "judge the data from here: a date or an RFC 3339 time, local to the site")
	fs.StringVar(&c.to, "to", "", "judge the data up to here")
	fs.StringSliceVar(&as, "as", nil, "also write the schedule as a model: "+strings.Join(ingest.ModelFormats(), ", "))
	fs.BoolVar(&c.quiet, "quiet", false, "print nothing but errors")
	fs.BoolVar(&c.verbose, "verbose", false, "every row with its ground")
	if err := parse(e, fs, "TREND... [flags]"); err != nil {
		return err
	}
	if fs.NArg() == 0 {
		return usageErrorf("name a trend file, a folder of them or a site folder; - is standard input", "points needs at least one TREND")
	}
	c.factor = 2
	if err := c.check(); err != nil {
		return err
	}
	for _, f := range as {
		if !ingest.IsModelFormat(f) {
			return usageErrorf("it is one of "+strings.Join(ingest.ModelFormats(), ", "), "--as %q is no format of models", f)
		}
	}
	in, err := ingest.Read(ctx, c.ingest(e, fs.Args()))
	if err != nil {
		return err
	}
	defer in.Close()
	if err := canWrite(c.out); err != nil {
		return err
	}
	rows, err := in.Propose(ctx)
	if err != nil {
		return err
	}
	failed := false
	for _, u := range in.Units {
		if u.Err != nil {
			failed = true
			complain(e.stderr, u.Name+": "+u.Err.Error(), ingest.Hint(u.Err))
		}
	}
	write := func(name string, to func(io.Writer) error) error {
		var b bytes.Buffer
		if err := to(&b); err != nil {
			return err
		}
		return report.WriteFile(filepath.Join(c.out, name), func(w io.Writer) error { _, err := w.Write(b.Bytes()); return err })
	}
	if err := write("points.csv", func(w io.Writer) error { return ingest.WriteSchedule(w, rows) }); err != nil {
		return err
	}
	for _, f := range as {
		if err := write("points."+ingest.ModelExtension(f), func(w io.Writer) error { return ingest.WriteModel(w, f, in.Site.Name, rows) }); err != nil {
			return err
		}
	}
	if !c.quiet {
		tellPoints(e.stdout, rows, filepath.ToSlash(filepath.Join(c.out, "points.csv")), c.verbose)
	}
	if failed {
		return errUnits
	}
	return nil
}

// tellPoints prints the draft in brief: by unit, what is sure, what to look at, what
// is open.
func tellPoints(w io.Writer, rows []ingest.Proposal, file string, verbose bool) {
	name := func(unit string) string {
		if unit == "*" {
			return "all units"
		}
		return unit
	}
	for i := 0; i < len(rows); {
		j := i
		sure, look, open, other := 0, 0, 0, 0
		for ; j < len(rows) && rows[j].Unit == rows[i].Unit; j++ {
			switch p := &rows[j]; {
			case p.Role != trend.NoRole && p.Confidence >= ingest.Sure:
				sure++
			case p.Role != trend.NoRole:
				look++
			case p.Known:
				other++
			default:
				open++
			}
		}
		fmt.Fprintf(w, "%s: %d columns: %d sure, %d to look at, %d left open, %d of another kind\n", name(rows[i].Unit), j-i, sure, look, open, other)
		for _, p := range rows[i:j] {
			switch {
			case p.Role != trend.NoRole && (verbose || p.Confidence < ingest.Sure):
				fmt.Fprintf(w, "  %-28s %-16s %3.0f %%  %s\n", p.Column, p.Role, 100*p.Confidence, p.Ground)
			case p.Role == trend.NoRole && (verbose || !p.Known):
				role := "?"
				if p.Known {
					role = "-"
				}
				fmt.Fprintf(w, "  %-28s %-16s        %s\n", p.Column, role, p.Ground)
			}
		}
		i = j
	}
	fmt.Fprintf(w, "The draft is in %s. Look it over, settle the rows with ?, and put it beside trends/ or name it with --points.\n", file)
}
