package main

import (
	"fmt"

	"github.com/spf13/cobra"

	"evenkeel/fleet"
)

func vetCommand() *cobra.Command {
	return &cobra.Command{
		Use:   "vet CASE",
		Short: "Read a case and judge it",
		Long: "Read a case and report every fault and doubt at once, each with file, line, key, what was found and\n" +
			"what is allowed. Exit code 2 if there is any fault; warnings alone leave the case usable.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error {
			c, found := fleet.Read(args[0])
			for _, f := range found {
				fmt.Fprintln(cmd.OutOrStdout(), f)
			}
			errs, warns := len(found.Errors()), len(found.Warnings())
			if errs > 0 {
				fmt.Fprintf(cmd.OutOrStdout(), "%s: %s, %s\n", args[0], count(errs, "error"), count(warns, "warning"))
				return exit{code: exitBadInput}
			}
			verdict := "good"
			if warns > 0 {
				verdict = "usable"
			}
			fmt.Fprintf(cmd.OutOrStdout(), "%s: %s; %s, %s, %s, %s\n", args[0], verdict,
				count(c.Hours(), "hour"), count(len(c.Resources), "resource"), count(len(c.Shapes), "response shape"), count(warns, "warning"))
			for _, line := range c.Totals() {
				fmt.Fprintln(cmd.OutOrStdout(), "  "+line)
			}
			return nil
		},
	}
}

// read vets a case for a command that uses it: faults end it, warnings go to standard error.
func read(cmd *cobra.Command, path string, quiet bool) (*fleet.Case, error) {
	c, found := fleet.Read(path)
	if err := judged(cmd, path, found, c != nil, quiet); err != nil {
		return nil, err
	}
	return c, nil
}

// judged says what was found in a file that a command uses: faults end it, warnings go to standard
// error unless it is to be quiet.
func judged(cmd *cobra.Command, path string, found fleet.Findings, usable, quiet bool) error {
	if !usable || !quiet {
		for _, f := range found {
			fmt.Fprintln(cmd.ErrOrStderr(), f)
		}
	}
	if !usable {
		return bad("%s: %s; nothing was written", path, count(len(found.Errors()), "error"))
	}
	return nil
}

func count(n int, what string) string {
	if n != 1 {
		what += "s"
	}
	return fmt.Sprintf("%d %s", n, what)
}
