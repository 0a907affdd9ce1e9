package main

import (
	"io"
	"path/filepath"

	"github.com/spf13/cobra"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/solve"
)

func modelCommand() *cobra.Command {
	var (
		hour int
		out  string
		gap  float64
	)
	cmd := &cobra.Command{
		Use:   "model CASE --hour N --out FILE.mps",
		Short: "Write one hour's whole problem as MPS, for any solver to check",
		Long: "Write the whole problem of one hour (counted from 0) as standard MPS: machines binary, every row the\n" +
			"optimiser found, and a coarse grid of further instants for every possible loss.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error {
			if out == "" {
				return bad("model needs --out FILE.mps")
			}
			c, err := read(cmd, args[0], false)
			if err != nil {
				return err
			}
			if hour < 0 || hour >= c.Hours() {
				return bad("--hour is %d, want 0 to %d", hour, c.Hours()-1)
			}
			h := c.Hour(hour, fleet.HourOptions{})
			s := solve.New(c, solve.Options{Gap: gap})
			return report.WriteFile(filepath.Dir(out), filepath.Base(out), func(w io.Writer) error { return s.Model(cmd.Context(), h, w) })
		},
	}
	cmd.Flags().IntVar(&hour, "hour", 0, "the hour, counted from 0")
	cmd.Flags().StringVar(&out, "out", "", "file to write")
	cmd.Flags().Float64Var(&gap, "gap", solve.DefaultGap, "relative gap of the run that finds the rows")
	return cmd
}
