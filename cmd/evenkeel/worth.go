package main

import (
	"context"
	"fmt"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/study/ranges"
	"evenkeel/study/work"
	"evenkeel/study/worth"
)

type worthFlags struct {
	studyFlags
	product, volumes string
	activations      []float64
	primary          string
	held             []string
	inertia, losses  []float64
	at               float64
}

func worthCommand() *cobra.Command {
	var f worthFlags
	cmd := &cobra.Command{
		Use:   "worth CASE --out DIR",
		Short: "Say what a service is worth, and what a new product would save",
		Long: "Price every hour two ways (marginal, and convex hull), say what each resource earns and misses at\n" +
			"those prices, and how much of one service replaces another. With --product FILE also run the year\n" +
			"without that product, with it, and over volumes and activation times.\n\n" +
			"Under hull prices every possible loss has rows of its own; a fraction of a machine is a fraction of a\n" +
			"loss there, so where machines are the largest loss its hull price is low (report/COLUMNS.md).\n\n" +
			"An interrupt leaves whole files; --resume goes on to the same bytes. Exit codes: 0 all hours secure\n" +
			"without the product, 3 some hours short, 2 bad input, 1 failure.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error { return runWorth(cmd, args[0], f) },
	}
	f.add(cmd, worthGap)
	fl := cmd.Flags()
	fl.StringVar(&f.product, "product", "", "product `FILE`")
	fl.StringVar(&f.volumes, "volumes", "", "MW of the product there may be, N from A to B, as `A:B:N`; A is 0 (default 11 up to its cap)")
	fl.Float64SliceVar(&f.activations, "activation", nil, "look at other activation times too, at the last volume, `seconds`, comma-separated")
	fl.StringVar(&f.primary, "primary", "", "`SHAPE` that the exchange rates count in (default: the slowest that is held and stays)")
	fl.StringArrayVar(&f.held, "held", nil, "MW of another response held in the exchange rates, as `SHAPE=MW`; can be repeated")
	fl.Float64SliceVar(&f.inertia, "inertia", nil, "kinetic energies left after the loss for the exchange rates, `MW·s`, comma-separated (default: P10, P50, P90 of the hours)")
	fl.Float64SliceVar(&f.losses, "loss", nil, "losses for the exchange rates, `MW`, comma-separated (default: P10, P50, P90 and the largest of the hours)")
	fl.Float64Var(&f.at, "at", 0, "yearly `price` per MW of the product, paid on top of what holding it asks for by the hour (price_steps): find the volume to buy at it")
	for _, name := range []string{"activation", "inertia", "loss"} {
		fl.Lookup(name).DefValue = "" // an empty list is no default to print
	}
	return cmd
}

// worthGap is smaller than the usual gap: savings are differences of costs.
const worthGap = 0.0002

func runWorth(cmd *cobra.Command, path string, f worthFlags) error {
	started := time.Now()
	if err := f.check(cmd); err != nil {
		return err
	}
	c, err := read(cmd, path, f.quiet)
	if err != nil {
		return err
	}
	plan := worth.Plan{Case: c, ActivationsS: f.activations, Options: f.options()}
	hash := ""
	if f.product != "" {
		var found fleet.Findings
		plan.Product, found = fleet.ReadProduct(f.product, c)
		if err := judged(cmd, f.product, found, plan.Product != nil, f.quiet); err != nil {
			return err
		}
		hash = plan.Product.Hash
		if plan.VolumesMW, err = volumes(f.volumes, plan.Product.MostMW()); err != nil {
			return err
		}
	} else if f.volumes != "" || len(f.activations) > 0 || f.at != 0 {
		return bad("--volumes, --activation and --at are about a product: give --product FILE")
	}
	const dearest = 1e12 // far above any price, and still a number that figures have room for
	if !(f.at >= 0 && f.at <= dearest) {
		return bad("--at is %g, want 0 or more a MW and year, at most %g", f.at, dearest)
	}
	if plan.Hours, err = f.list(c); err != nil {
		return err
	}
	s, err := plan.Prepare()
	if err != nil {
		return bad("%w", err)
	}
	asked := worth.Asked{Primary: f.primary, InertiaMWs: f.inertia, LossMW: f.losses}
	if asked.HeldMW, err = heldMW(f.held); err != nil {
		return err
	}
	x, err := s.Exchange(asked)
	if err != nil {
		return bad("%w", err)
	}
	items := work.New[worth.Record](len(plan.Hours))
	what := fmt.Sprint("worth ", c.Hash, hash, plan.Hours, plan.VolumesMW, s.ActivationsS, plan.Options)
	err = runStudy(cmd.Context(), &f.studyFlags, what, "hours", items, func() func(context.Context, int) (worth.Record, error) { return s.Hour })
	if err != nil {
		return err
	}
	r := s.Tally(items.Out)
	x.Levels(items.Out)
	o := report.WorthOptions{
		Gap: f.gap, StartSpreadH: f.startSpread, Sample: f.every > 1 || len(plan.Hours) < c.Hours(),
		AtGiven: cmd.Flags().Changed("at"), At: f.at,
	}
	if err := report.WriteWorth(f.out, r, x, o); err != nil {
		return err
	}
	if err := endStudy(&f.studyFlags, path, started); err != nil {
		return err
	}
	if !f.quiet {
		if err := report.WorthText(cmd.OutOrStdout(), r, x, o); err != nil {
			return err
		}
	}
	if r.AnyShort() {
		return exit{code: exitShort}
	}
	return nil
}

// volumes reads A:B:N; without it none and ten volumes up to the most there is.
func volumes(text string, most float64) ([]float64, error) {
	r := ranges.Range{To: most, N: 11}
	if text != "" {
		var ok bool
		if r, ok = ranges.Parse(text, 100); !ok || r.From != 0 || !(r.To > 0 && r.To <= most) || r.N < 2 {
			return nil, bad("--volumes is %q, want A:B:N with A 0, B above it and at most %g MW (the product's cap), N from 2 to 100", text, most)
		}
	}
	return r.Values(), nil
}

// heldMW reads SHAPE=MW.
func heldMW(list []string) (map[string]float64, error) {
	out := map[string]float64{}
	for _, text := range list {
		i := strings.LastIndex(text, "=")
		if i < 1 {
			return nil, bad("--held is %q, want SHAPE=MW", text)
		}
		mw, err := strconv.ParseFloat(text[i+1:], 64)
		if err != nil {
			return nil, bad("--held is %q, want SHAPE=MW", text)
		}
		out[text[:i]] = mw
	}
	return out, nil
}
