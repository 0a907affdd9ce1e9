package main

import (
	"fmt"
	"time"

	"github.com/spf13/cobra"

	"evenkeel/report"
	"evenkeel/solve"
	"evenkeel/study/floor"
	"evenkeel/study/work"
)

func floorCommand() *cobra.Command {
	var f studyFlags
	var w floor.Words
	var noYear bool
	cmd := &cobra.Command{
		Use:   "floor CASE --out DIR",
		Short: "Find how much inertia must be online, when it lacks and what a rule costs",
		Long: "Find the least kinetic energy that keeps every limit: on a chart of losses and of response held, by the\n" +
			"rows and by closed-loop bisection; for every hour, against what would be online without limits on RoCoF\n" +
			"and nadir, with the cost of each way to close the gap; and as a rule, one number or a table by the\n" +
			"size of the largest loss, with what the rule costs above the hour-by-hour mix.\n\n" +
			"An interrupt leaves whole files; --resume goes on to the same bytes. Exit codes: 0 done, 3 some hours cannot\n" +
			"be made secure, 2 bad input, 1 failure.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error { return floors(cmd, args[0], &f, w, noYear) },
	}
	f.add(cmd, solve.DefaultGap)
	fl := cmd.Flags()
	fl.StringVar(&w.Loss, "loss", "", "losses of the charts, `A:B:N`: N from A to B MW (default: 20 up to just above the largest)")
	fl.StringArrayVar(&w.Axes, "axis", nil, "`SHAPE` or model whose response is a chart's other axis; may be repeated (default: the most held)")
	fl.StringArrayVar(&w.Held, "held", nil, "response held in the charts, `SHAPE=A:B:N` of an axis, SHAPE=MW of another (default: the median of the hours with the largest losses; 0 with --no-year)")
	fl.Float64Var(&w.LoadMW, "load", 0, "load in the charts, `MW`; 0: the hours' least, which damps least")
	fl.IntVar(&w.Brackets, "brackets", 4, "steps of the rule by the size of the largest loss; 1: none")
	fl.Float64SliceVar(&w.Policies, "policy", nil, "try this rule too: so many `MWS` online in every hour; may be repeated")
	fl.BoolVar(&noYear, "no-year", false, "the charts alone, for quick use")
	return cmd
}

func floors(cmd *cobra.Command, path string, f *studyFlags, w floor.Words, noYear bool) error {
	started := time.Now()
	if err := f.check(cmd); err != nil {
		return err
	}
	c, err := read(cmd, path, f.quiet)
	if err != nil {
		return err
	}
	ask, err := w.Read(c)
	if err != nil {
		return bad("%w", err)
	}
	if noYear && (len(w.Policies) > 0 || f.hours != "" || f.every > 1) {
		return bad("--no-year leaves no hours for --hours, --every or --policy")
	}
	if ask.Options = f.options(); !noYear {
		if ask.Hours, err = f.list(c); err != nil {
			return err
		}
	}
	s := floor.New(c, ask)
	items := work.New[floor.Item](s.Items())
	asked := fmt.Sprintf("floor %s %+v %s %d %t %+v", c.Hash, ask.Options, f.hours, f.every, noYear, w)
	if err := runStudy(cmd.Context(), f, asked, "steps", items, s.Start(items)); err != nil {
		return err
	}
	r := s.Result(items)
	if err := report.WriteFloor(f.out, r); err != nil {
		return err
	}
	if err := endStudy(f, path, started); err != nil {
		return err
	}
	if !f.quiet {
		if err := report.FloorText(cmd.OutOrStdout(), r); err != nil {
			return err
		}
	}
	if r.Year != nil && r.Year.Short > 0 {
		return exit{code: exitShort}
	}
	return nil
}
