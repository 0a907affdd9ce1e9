package main

import (
	"context"
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/study/ranges"
	"evenkeel/study/size"
	"evenkeel/study/work"
)

type sizeFlags struct {
	studyFlags
	project, mw, energy string
	activation          []string
	pay                 string
}

func sizeCommand() *cobra.Command {
	var f sizeFlags
	cmd := &cobra.Command{
		Use:   "size CASE --project PROJECT.yaml --out DIR",
		Short: "How much of one resource pays, how fast and for how long",
		Long: "Solve every hour with a battery, a flywheel, a condenser or a wind farm's recovery of growing size, and set\n" +
			"what the system saves and what the owner earns against what it costs to build: net value a year, break-even\n" +
			"capital cost, the size after which the next MW no longer pays, the energy that goes with it, and what matters most.\n\n" +
			"The gap is noise in a difference of two runs, so it is smaller here than elsewhere. --every 7 looks at every\n" +
			"7th hour and counts up to a year. An interrupt leaves whole files; --resume goes on to the same bytes.\n" +
			"Exit codes: 0 all hours secure without the project, 3 some hours short, 2 bad input, 1 failure.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error { return sizeUp(cmd, args[0], &f) },
	}
	const gap = 0.0002
	f.add(cmd, gap)
	fl := cmd.Flags()
	fl.StringVar(&f.project, "project", "", "YAML file of what may be built")
	fl.StringVar(&f.mw, "mw", "", "sizes to try: `A:B:N`, N sizes from A to B, or a list A,B,...; default: up to what covers the largest loss")
	fl.StringVar(&f.energy, "energy", "", "`LIST` of energies to try: MWh, or 1x for what the response of all MW needs (default 0.5x,1x,2x)")
	fl.StringSliceVar(&f.activation, "activation", nil, "activation time to try, `seconds`; may be repeated (default: the project's own)")
	fl.StringVar(&f.pay, "pay", "marginal", "what the owner is paid: marginal or (convex) hull prices")
	return cmd
}

func sizeUp(cmd *cobra.Command, path string, f *sizeFlags) error {
	started := time.Now()
	if err := f.check(cmd); err != nil {
		return err
	}
	rule, ok := map[string]size.Rule{"marginal": size.Marginal, "hull": size.Hull}[f.pay]
	if !ok {
		return bad("--pay is %q, want marginal or hull", f.pay)
	}
	if f.project == "" {
		return bad("size needs --project PROJECT.yaml, what may be built")
	}
	c, err := read(cmd, path, f.quiet)
	if err != nil {
		return err
	}
	p, found := fleet.ReadProject(f.project, c)
	if err := judged(cmd, f.project, found, p != nil, f.quiet); err != nil {
		return err
	}
	hours, err := f.list(c)
	if err != nil {
		return err
	}
	grid, err := f.grid(c, p)
	if err != nil {
		return err
	}
	plan, err := size.NewPlan(c, p, grid)
	if err != nil {
		return bad("%s: found %w", f.project, err)
	}
	climber := plan.Climber(f.options())
	items := work.New[[][]size.Rung](len(hours))
	asked := fmt.Sprintf("size %s %s %v %v %v", c.Hash, p.Hash, grid, hours, f.options())
	err = runStudy(cmd.Context(), &f.studyFlags, asked, "hours", items, func() func(context.Context, int) ([][]size.Rung, error) {
		return func(ctx context.Context, i int) ([][]size.Rung, error) { return climber.Hour(ctx, hours[i]) }
	})
	if err != nil {
		return err
	}
	study := &report.Sized{Gap: f.gap, StartSpreadH: f.startSpread, Study: size.New(plan, rule, hours, items.Out), Other: size.New(plan, rule.Other(), hours, items.Out)}
	if err := report.WriteSize(f.out, study); err != nil {
		return err
	}
	if err := endStudy(&f.studyFlags, path, started); err != nil {
		return err
	}
	if !f.quiet {
		if err := report.SizeText(cmd.OutOrStdout(), study); err != nil {
			return err
		}
	}
	if study.Study.Years[0][0].ShortH > 0 {
		return exit{code: exitShort}
	}
	return nil
}

// grid reads what to try.
func (f *sizeFlags) grid(c *fleet.Case, p *fleet.Project) (size.Grid, error) {
	var g size.Grid
	if f.mw == "" {
		g.SizesMW = size.DefaultSizes(c, p)
	} else {
		list, err := sizeList(f.mw)
		if err != nil {
			return g, err
		}
		g.SizesMW = list
	}
	energy := f.energy
	if energy == "" && p.Kind.Stores() {
		energy = "0.5x,1x,2x"
	}
	for _, word := range split(energy) {
		number, times := strings.CutSuffix(word, "x")
		v, ok := above0(number)
		if !ok {
			return g, bad("--energy holds %q, want MWh above 0 (5) or times what the response of all MW needs (1x)", word)
		}
		a := size.Amount{MWh: v}
		if times {
			a = size.Amount{Times: v}
		}
		g.Energies = append(g.Energies, a)
	}
	for _, word := range f.activation {
		v, ok := above0(word)
		if !ok {
			return g, bad("--activation is %q, want seconds above 0", word)
		}
		g.Activations = append(g.Activations, v)
	}
	return g, nil
}

// sizeList reads A:B:N or A,B,...
func sizeList(text string) ([]float64, error) {
	const most = 100
	fault := bad("--mw is %q, want A:B:N with 0 ≤ A ≤ B, B above 0, and N from 1 to %d, or a list of numbers above 0", text, most)
	if strings.Count(text, ":") == 2 {
		r, ok := ranges.Parse(text, most)
		if !ok || r.From < 0 || r.To == 0 || r.N == 1 && r.From != r.To {
			return nil, fault
		}
		return size.Spread(r), nil
	}
	var out []float64
	for _, word := range split(text) {
		v, ok := above0(word)
		if !ok || len(out) == most {
			return nil, fault
		}
		out = append(out, v)
	}
	return out, nil
}

func split(text string) []string {
	if text == "" {
		return nil
	}
	return strings.Split(text, ",")
}

func above0(word string) (float64, bool) {
	v, err := strconv.ParseFloat(strings.TrimSpace(word), 64)
	return v, err == nil && v > 0 && !math.IsInf(v, 0)
}
