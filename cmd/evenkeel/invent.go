package main

import (
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"

	"github.com/spf13/cobra"

	"evenkeel/fleet/invent"
)

func inventCommand() *cobra.Command {
	var (
		o   invent.Options
		out string
	)
	cmd := &cobra.Command{
		Use:   "invent --machines N --seed S --out DIR",
		Short: "Write an invented, plausible case of any size with a year of hours",
		Long: "Write an invented, plausible case: DIR/case.yaml and its series. A start for one's own case, and what\n" +
			"the benchmarks run on. The same flags always give the same bytes.",
		Args: func(_ *cobra.Command, args []string) error {
			if len(args) > 0 {
				return bad("invent takes flags only, found %q", args[0])
			}
			return nil
		},
		RunE: func(cmd *cobra.Command, _ []string) error {
			switch {
			case out == "":
				return bad("invent needs --out DIR")
			case o.Machines < invent.MinMachines || o.Machines > invent.MaxMachines:
				return bad("--machines is %d, want %d to %d", o.Machines, invent.MinMachines, invent.MaxMachines)
			case o.Hours < 1:
				return bad("--hours is %d, want at least 1", o.Hours)
			}
			if err := invent.Write(out, o); errors.Is(err, fs.ErrExist) {
				return bad("%s is there already and not empty; invent overwrites nothing", out)
			} else if err != nil {
				return err
			}
			path := filepath.Join(out, "case.yaml")
			fmt.Fprintf(cmd.OutOrStdout(), "%s: an invented system; solve it with\n  evenkeel mix %s --out %s\n", path, path, filepath.Clean(out)+"-run/")
			return nil
		},
	}
	cmd.Flags().IntVar(&o.Machines, "machines", 30, "synchronised units, condensers included, about")
	cmd.Flags().Uint64Var(&o.Seed, "seed", 1, "what the system is drawn from")
	cmd.Flags().IntVar(&o.Hours, "hours", 8760, "hours of series")
	cmd.Flags().StringVar(&out, "out", "", "folder to write")
	return cmd
}
