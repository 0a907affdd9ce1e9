// Command evenkeel finds the cheapest secure mix of inertia, primary reserve and fast
// response for every hour of a case.
package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/signal"
	"syscall"

	"github.com/spf13/cobra"

	"evenkeel/report"
)

// The exit codes, for scripts.
const (
	exitSecure   = 0
	exitFailure  = 1
	exitBadInput = 2
	exitShort    = 3
)

// exit is an error that carries its exit code.
type exit struct {
	code int
	err  error // nil: everything was said already
}

func (e exit) Error() string {
	if e.err == nil {
		return ""
	}
	return e.err.Error()
}

// bad marks an error of the user's input.
func bad(format string, args ...any) error { return exit{exitBadInput, fmt.Errorf(format, args...)} }

func main() { os.Exit(run()) }

func run() int {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	err := root().ExecuteContext(ctx)
	if err == nil {
		return exitSecure
	}
	code := exitFailure
	var e exit
	if errors.As(err, &e) {
		code = e.code
	}
	if text := err.Error(); text != "" {
		fmt.Fprintln(os.Stderr, "evenkeel: "+text)
	}
	return code
}

func root() *cobra.Command {
	cmd := &cobra.Command{
		Use:   "evenkeel",
		Short: "The cheapest mix of inertia, reserve and fast response that keeps frequency in its limits",
		Long: "evenkeel finds, for every hour, the cheapest mix of committed inertia, primary reserve and fast\n" +
			"converter response that keeps frequency inside its limits after the loss of any single infeed,\n" +
			"says which limit binds, and proves each mix in a time-domain replay.\n\n" +
			"Exit codes: 0 all hours secure, 3 some hours short, 2 bad input, 1 failure.\n\n" + report.Caution,
		SilenceErrors: true,
		SilenceUsage:  true,
		Args:          cobra.ArbitraryArgs,
		RunE: func(cmd *cobra.Command, args []string) error {
			if len(args) == 0 {
				return cmd.Help()
			}
			text := ""
			for _, near := range cmd.SuggestionsFor(args[0]) {
				text += " (" + near + "?)"
			}
			return bad("unknown command %q%s; see 'evenkeel --help'", args[0], text)
		},
		SuggestionsMinimumDistance: 2,
	}
	cmd.CompletionOptions.HiddenDefaultCmd = true
	cmd.SetFlagErrorFunc(func(c *cobra.Command, err error) error {
		return bad("%w; see 'evenkeel %s --help'", err, c.Name())
	})
	cmd.AddCommand(mixCommand(), vetCommand(), modelCommand(), tripCommand(), matchCommand(), inventCommand(), floorCommand(), worthCommand(), sizeCommand())
	return cmd
}

// caseFile asks for exactly one argument, the case.
func caseFile(c *cobra.Command, args []string) error {
	if len(args) != 1 {
		return bad("%s takes one case file, not %d; see 'evenkeel %s --help'", c.Name(), len(args), c.Name())
	}
	return nil
}
