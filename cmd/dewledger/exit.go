package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"syscall"
	_ "time/tzdata" // zones where the machine has none: one file runs anywhere

	"dewledger/ingest"
)

// The exit statuses.
const (
	exitDone  = 0 // finished, whatever was found
	exitUnits = 1 // finished, but some unit could not be analysed
	exitUsage = 2 // command line or configuration wrong; nothing was written
)

// errHelp means that help was asked for and printed; errUnits that the run
// finished and some unit could not be analysed, which has been said already.
var (
	errHelp  = errors.New("help")
	errUnits = errors.New("some units could not be analysed")
)

// usageError is a mistake on the command line: what is wrong, and what to do.
type usageError struct{ msg, hint string }

func (e *usageError) Error() string { return e.msg }

func usageErrorf(hint, format string, args ...any) error {
	return &usageError{msg: fmt.Sprintf(format, args...), hint: hint}
}

// exitStatus says what went wrong, once, and gives the status.
func exitStatus(w io.Writer, err error) int {
	if err == nil || errors.Is(err, errHelp) {
		return exitDone
	}
	if errors.Is(err, errUnits) {
		return exitUnits
	}
	if wrong := ingest.ConfigErrors(err); len(wrong) > 0 {
		for _, ce := range wrong {
			complain(w, ce.Error(), ce.Hint)
		}
		return exitUsage
	}
	var ue *usageError
	switch {
	case errors.As(err, &ue):
		complain(w, ue.msg, ue.hint)
		return exitUsage
	case errors.Is(err, context.Canceled):
		complain(w, "interrupted before the end", "what is in the output folder may be of an earlier run; run.json says which")
		return exitUnits
	}
	complain(w, plain(err), "")
	return exitUnits
}

func complain(w io.Writer, msg, hint string) {
	fmt.Fprintf(w, "dewledger: %s\n", msg)
	if hint != "" {
		fmt.Fprintf(w, "dewledger: hint: %s\n", hint)
	}
}

func main() {
	if os.Getenv("GOGC") == "" {
		// Columns are large and few: half the usual headroom is as fast, in a third less
		// memory.
		debug.SetGCPercent(50)
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	code := run(ctx, env{args: os.Args[1:], stdin: os.Stdin, stdout: os.Stdout, stderr: os.Stderr})
	stop()
	os.Exit(code)
}
