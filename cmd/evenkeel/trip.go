package main

import (
	"fmt"
	"os"

	"github.com/spf13/cobra"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/study"
)

type tripFlags struct {
	run, state, out string
	hour            int
	lose, without   []string
	limit           []string
	inertia         float64
}

func tripCommand() *cobra.Command {
	var f tripFlags
	cmd := &cobra.Command{
		Use:   "trip CASE (--run DIR --hour N | --state FILE.yaml) --lose NAME[@SECONDS] ...",
		Short: "Simulate any sequence of losses in closed loop",
		Long: "Simulate a sequence of losses in one hour of a finished run, or in a hand-set state. NAME is a resource\n" +
			"(one unit of it), a connection or a loss of the case, or plain MW (negative: load lost).\n\n" +
			"What if: --inertia adds or takes MW·s, --without takes the response of a resource or of all with a shape or\n" +
			"model away, --limit changes a limit (rocof=0.5, nadir=0.6, steady=0.4).",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error { return trip(cmd, args[0], f) },
	}
	fl := cmd.Flags()
	fl.StringVar(&f.run, "run", "", "folder of a finished run of the case")
	fl.IntVar(&f.hour, "hour", -1, "hour of that run, counted from 0")
	fl.StringVar(&f.state, "state", "", "YAML file of a hand-set state")
	fl.StringArrayVar(&f.lose, "lose", nil, "what is lost, and the second it is lost at (0)")
	fl.Float64Var(&f.inertia, "inertia", 0, "what if: MW·s more kinetic energy, or less")
	fl.StringArrayVar(&f.without, "without", nil, "what if: no response of this `resource, shape or model`")
	fl.StringArrayVar(&f.limit, "limit", nil, "what if: another `limit`")
	fl.StringVar(&f.out, "out", "", "folder to write trip.csv, trip.svg and trip.png to")
	return cmd
}

func trip(cmd *cobra.Command, path string, f tripFlags) error {
	switch {
	case (f.run == "") == (f.state == ""):
		return bad("trip needs either --run DIR with --hour N, or --state FILE.yaml")
	case f.run != "" && f.hour < 0:
		return bad("--run needs --hour N, counted from 0")
	case len(f.lose) == 0:
		return bad("trip needs --lose NAME[@SECONDS], once or more")
	}
	c, err := read(cmd, path, false)
	if err != nil {
		return err
	}
	mix, err := mixOf(cmd, c, f)
	if err != nil {
		return bad("%w", err)
	}
	var losses []study.LossAt
	for _, text := range f.lose {
		l, err := study.ParseLoss(text)
		if err != nil {
			return bad("%w", err)
		}
		losses = append(losses, l)
	}
	l, above := c.Limits, c.Above
	for _, text := range f.limit {
		if l, above, err = study.ParseLimit(l, above, text); err != nil {
			return bad("%w", err)
		}
	}
	t, err := study.RunTrip(mix, losses, study.WhatIf{InertiaMWs: f.inertia, Without: f.without}, l, above)
	if err != nil {
		return bad("%w", err)
	}
	if f.out != "" {
		if err := os.MkdirAll(f.out, 0o777); err != nil {
			return err
		}
		if err := report.WriteTrip(f.out, t); err != nil {
			return err
		}
	}
	return report.TripText(cmd.OutOrStdout(), t)
}

func mixOf(cmd *cobra.Command, c *fleet.Case, f tripFlags) (*study.Mix, error) {
	if f.run != "" {
		return study.RunHour(c, f.run, f.hour)
	}
	m, warnings, err := study.StateFile(c, f.state)
	for _, w := range warnings {
		fmt.Fprintln(cmd.ErrOrStderr(), "warning: "+w)
	}
	return m, err
}
