// Dewledger keeps the moisture and energy books of air-handling units from
// their trend logs, and says what cannot be true, how sure that is, what it
// costs and what to check first.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"runtime/debug"
	"strings"

	"github.com/spf13/pflag"
)

// env is what a command may touch of the world.
type env struct {
	args   []string
	stdin  io.Reader
	stdout io.Writer
	stderr io.Writer
}

// command is one verb of the program.
type command struct {
	name  string
	args  string
	brief string
	run   func(ctx context.Context, e env) error
}

func commands() []command {
	return []command{
		{"audit", "TREND...", "everything about one unit, or a few, in depth", audit},
		{"points", "TREND...", "propose a points schedule from column names, units and the data", points},
		{"rules", "[NAME]", "the catalogue: what each rule asks, needs, assumes, and its sources", listRules},
		{"demo", "DIR", "write an invented site with known faults, and the truth beside it", demo},
	}
}

// run is the program without the process around it.
func run(ctx context.Context, e env) int {
	if len(e.args) == 0 {
		usage(e.stderr)
		return exitUsage
	}
	switch e.args[0] {
	case "help", "-h", "--help":
		usage(e.stdout)
		return exitDone
	case "version", "--version":
		fmt.Fprintln(e.stdout, "dewledger", version())
		return exitDone
	}
	for _, c := range commands() {
		if c.name == e.args[0] {
			e.args = e.args[1:]
			return exitStatus(e.stderr, c.run(ctx, e))
		}
	}
	return exitStatus(e.stderr, usageErrorf("run `dewledger help` for the list of commands", "there is no command %q", e.args[0]))
}

func usage(w io.Writer) {
	fmt.Fprint(w, "Dewledger reads the trend logs of air-handling units, keeps their moisture and energy\nbooks, and reports what cannot be true: how sure, what it costs, what to check first.\n\nUsage:\n")
	for _, c := range commands() {
		fmt.Fprintf(w, "  dewledger %-18s %s\n", c.name+" "+c.args, c.brief)
	}
	fmt.Fprint(w, "\n`dewledger COMMAND --help` lists a command's flags.\n\nExit status: 0 finished, whatever was found; 1 finished, but some unit could not be\nanalysed; 2 the command line or a configuration file is wrong, nothing was written.\n")
}

// parse reads a command's flags. A request for help is errHelp after printing.
func parse(e env, fs *pflag.FlagSet, synopsis string) error {
	fs.SetOutput(io.Discard)
	fs.SortFlags = false
	err := fs.Parse(e.args)
	if errors.Is(err, pflag.ErrHelp) {
		fmt.Fprintf(e.stdout, "Usage: dewledger %s %s\n\n%s", fs.Name(), synopsis, fs.FlagUsagesWrapped(96))
		return errHelp
	}
	if err != nil {
		return usageErrorf("`dewledger "+fs.Name()+" --help` lists the flags", "%s", strings.TrimSpace(err.Error()))
	}
	return nil
}

// version is the module's version as built, or "devel".
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok || info.Main.Version == "" || info.Main.Version == "(devel)" {
		return "devel"
	}
	return info.Main.Version
}

// progress prints to standard error unless quiet.
type progress struct {
	w     io.Writer
	quiet bool
}

func (p progress) say(format string, args ...any) {
	if !p.quiet {
		fmt.Fprintf(p.w, "dewledger: "+format+"\n", args...)
	}
}

// canWrite makes the folder and proves that a file can be written there.
func canWrite(dir string) error {
	hint := "give another folder with --out"
	if st, err := os.Stat(dir); err == nil && !st.IsDir() {
		return usageErrorf(hint, "%s is a file, not a folder", dir)
	}
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return usageErrorf(hint, "the output folder cannot be made: %s", plain(err))
	}
	f, err := os.CreateTemp(dir, ".dewledger-*")
	if err != nil {
		return usageErrorf(hint, "the output folder cannot be written: %s", plain(err))
	}
	f.Close()
	return os.Remove(f.Name())
}

// plain is an error of the operating system without the operation's name.
func plain(err error) string {
	var pe *os.PathError
	if errors.As(err, &pe) {
		return pe.Path + ": " + pe.Err.Error()
	}
	return err.Error()
}
