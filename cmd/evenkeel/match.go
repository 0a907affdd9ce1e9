package main

import (
	"math"
	"os"
	"path/filepath"

	"github.com/spf13/cobra"

	"evenkeel/report"
	"evenkeel/study"
)

func matchCommand() *cobra.Command {
	var (
		event, state, out string
		lost, load, after float64
	)
	cmd := &cobra.Command{
		Use:   "match CASE --event EVENT.csv --lost MW",
		Short: "Fit inertia, damping and response to a recorded event",
		Long: "Fit kinetic energy, load damping and the gain and lag of the response to a recorded frequency trace: two\n" +
			"columns, time (seconds or time stamps) and Hz, sampled every 10 ms to 1 s. Gaps, noise, an offset and an\n" +
			"unknown start are taken. What the record cannot tell is said to be so.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error {
			if event == "" || lost == 0 || math.IsNaN(lost) || math.IsInf(lost, 0) {
				return bad("match needs --event EVENT.csv and --lost MW, not 0 (negative: load)")
			}
			if !(after >= 1) {
				return bad("--after is %g s, want at least 1", after)
			}
			c, err := read(cmd, args[0], true)
			if err != nil {
				return err
			}
			if state != "" {
				m, _, err := study.StateFile(c, state)
				if err != nil {
					return bad("%w", err)
				}
				load = m.Hour.DemandMW
			}
			if load == 0 {
				load = c.MeanDemandMW()
			}
			if !(load > 0) {
				return bad("--load is %g MW, want the load at the event", load)
			}
			f, err := os.Open(event)
			if err != nil {
				return bad("%w", err)
			}
			defer f.Close()
			rec, dropped, err := study.ReadRecord(f, event)
			if err != nil {
				return bad("%w", err)
			}
			fit, err := study.Match(rec, c.Limits.NominalHz, load, lost, after)
			if err != nil {
				return bad("%s: %w", event, err)
			}
			if out != "" {
				if err := os.MkdirAll(out, 0o777); err != nil {
					return err
				}
				if err := report.WriteMatch(out, fit, filepath.Base(event)); err != nil {
					return err
				}
			}
			return report.MatchText(cmd.OutOrStdout(), fit, filepath.Base(event), dropped)
		},
	}
	fl := cmd.Flags()
	fl.StringVar(&event, "event", "", "CSV of the recorded frequency")
	fl.Float64Var(&lost, "lost", 0, "what was lost, `MW`")
	fl.Float64Var(&load, "load", 0, "load at the event, `MW`; 0: the case's mean")
	fl.Float64Var(&after, "after", study.DefaultAfterS, "`seconds` after the loss that are fitted")
	fl.StringVar(&state, "state", "", "YAML file of the state at the event, for its load")
	fl.StringVar(&out, "out", "", "folder to write match.csv, match.svg, match.png and fitted.yaml to")
	return cmd
}
