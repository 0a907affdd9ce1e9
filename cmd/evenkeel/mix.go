package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"runtime"
	"runtime/debug"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/solve"
)

type mixFlags struct {
	out, hours       string
	workers          int
	gap, startSpread float64
	withoutLimits    bool
	noComparison     bool
	replace, resume  bool
	quiet            bool
}

func mixCommand() *cobra.Command {
	var f mixFlags
	cmd := &cobra.Command{
		Use:   "mix CASE --out DIR",
		Short: "Find the cheapest secure mix of every hour",
		Long: "Find the cheapest secure mix of every hour of a case, replay each against every loss, and write a run\n" +
			"folder: hours.csv, schedule.csv, summary.json, about.json and three plots. Each hour is solved by itself.\n\n" +
			"An interrupt leaves whole files; --resume goes on to the same bytes. " +
			"Exit codes: 0 all hours secure,\n3 some hours short (named in the summary), 2 bad input, 1 failure.",
		Args: caseFile,
		RunE: func(cmd *cobra.Command, args []string) error { return mix(cmd, args[0], f) },
	}
	fl := cmd.Flags()
	fl.StringVar(&f.out, "out", "", "folder to write the run to")
	fl.StringVar(&f.hours, "hours", "", "solve hours A to B-1 only, counted from 0, as `A:B`")
	fl.IntVar(&f.workers, "workers", runtime.NumCPU(), "hours solved at the same time; results do not depend on it")
	fl.Float64Var(&f.gap, "gap", solve.DefaultGap, "relative gap between cost and proven bound; 0 solves to optimality")
	fl.Float64Var(&f.startSpread, "start-spread", 0, "spread start costs over this many `hours` of running; 0 leaves them out")
	fl.BoolVar(&f.withoutLimits, "without-limits", false, "dispatch without frequency limits; the replay says what they would have needed")
	fl.BoolVar(&f.noComparison, "no-comparison", false, "do not also solve without limits (no cost of security)")
	fl.BoolVar(&f.replace, "replace", false, "replace a run that --out already holds")
	fl.BoolVar(&f.resume, "resume", false, "go on with the interrupted run that --out holds")
	fl.BoolVar(&f.quiet, "quiet", false, "no summary, progress or warnings")
	return cmd
}

func mix(cmd *cobra.Command, path string, f mixFlags) error {
	started := time.Now()
	if err := f.check(); err != nil {
		return err
	}
	c, err := read(cmd, path, f.quiet)
	if err != nil {
		return err
	}
	from, to, err := hourRange(f.hours, c.Hours())
	if err != nil {
		return err
	}
	opt := solve.Options{Gap: f.gap, StartSpreadH: f.startSpread, WithoutLimits: f.withoutLimits}
	if f.gap == 0 {
		opt.Gap = -1
	}
	p := &report.Progress{CaseHash: c.Hash, Options: opt, Year: solve.NewYear(from, to, !f.noComparison && !f.withoutLimits)}
	if p, err = openRun(f, p); err != nil {
		return err
	}
	if err := os.MkdirAll(f.out, 0o777); err != nil {
		return err
	}
	if err := solveYear(cmd.Context(), c, p, f); err != nil {
		if !errors.Is(err, context.Canceled) {
			return err
		}
		if err := report.SaveProgress(f.out, p); err != nil {
			return err
		}
		return fmt.Errorf("interrupted after %d of %s; the same command with --resume goes on", p.Year.Done(), count(to-from, "hour"))
	}
	y := p.Year
	o := report.Options{Gap: f.gap, StartSpreadH: f.startSpread, WithoutLimits: f.withoutLimits}
	var without []solve.Hour
	if y.Compare {
		without = y.Without
	}
	if err := report.Write(f.out, c, y.Hours, without, o); err != nil {
		return err
	}
	if err := report.WriteAbout(f.out, about(path, f.workers, f.resume, started)); err != nil {
		return err
	}
	if err := report.DropProgress(f.out); err != nil {
		return err
	}
	if !f.quiet {
		if err := report.Summary(cmd.OutOrStdout(), c, y.Hours, without, o); err != nil {
			return err
		}
	}
	if solve.AnyShort(y.Hours) {
		return exit{code: exitShort}
	}
	return nil
}

func (f mixFlags) check() error {
	switch {
	case f.out == "":
		return bad("mix needs --out DIR, the folder to write the run to")
	case f.workers < 1:
		return bad("--workers is %d, want at least 1", f.workers)
	case !(f.gap >= 0 && f.gap < 1):
		return bad("--gap is %g, want at least 0 and less than 1 (0.001 is 0.1 %%)", f.gap)
	case !(f.startSpread >= 0) || math.IsInf(f.startSpread, 0):
		return bad("--start-spread is %g, want 0 or more hours", f.startSpread)
	case f.replace && f.resume:
		return bad("--replace and --resume exclude each other")
	}
	return nil
}

// hourRange reads A:B; either side may be left out.
func hourRange(text string, hours int) (from, to int, err error) {
	if text == "" {
		return 0, hours, nil
	}
	a, b, ok := strings.Cut(text, ":")
	to = hours
	var errA, errB error
	if a != "" {
		from, errA = strconv.Atoi(a)
	}
	if b != "" {
		to, errB = strconv.Atoi(b)
	}
	if !ok || errA != nil || errB != nil || from < 0 || to > hours || from >= to {
		return 0, 0, bad("--hours is %q, want A:B with 0 ≤ A < B ≤ %d", text, hours)
	}
	return from, to, nil
}

// openRun decides what --out may be used for: a new run, one to replace or one to resume.
func openRun(f mixFlags, fresh *report.Progress) (*report.Progress, error) {
	held, err := report.Holds(f.out)
	if err != nil {
		return nil, err
	}
	switch {
	case held == report.NoFolder || f.replace:
		if f.resume {
			return nil, bad("--resume: %s holds no interrupted run", f.out)
		}
		return fresh, report.DropProgress(f.out)
	case held == report.FinishedRun:
		return nil, bad("%s holds a finished run; --replace overwrites it", f.out)
	case held == report.InterruptedRun && !f.resume:
		return nil, bad("%s holds an interrupted run; --resume goes on with it, --replace starts anew", f.out)
	case held == report.NoRun && f.resume:
		return nil, bad("--resume: %s holds no interrupted run", f.out)
	case held == report.NoRun:
		return fresh, nil
	}
	p, err := report.LoadProgress(f.out)
	if err != nil {
		return nil, exit{exitBadInput, err}
	}
	y, z := p.Year, fresh.Year
	switch {
	case p.CaseHash != fresh.CaseHash:
		return nil, bad("--resume: the case has changed since %s was interrupted; --replace starts anew", f.out)
	case p.Options != fresh.Options || y.From != z.From || y.To != z.To || y.Compare != z.Compare:
		return nil, bad("--resume: %s was started with other flags; use the same, or --replace to start anew", f.out)
	}
	return p, nil
}

// afterHour, if set, runs after each hour: tests slow a run down with it.
var afterHour func()

func solveYear(ctx context.Context, c *fleet.Case, p *report.Progress, f mixFlags) error {
	y := p.Year
	step, finish := steps(len(y.Solved), y.Done(), "hours", f.quiet)
	defer finish()
	return y.Run(ctx, c, p.Options, f.workers, step)
}

func about(path string, workers int, resumed bool, started time.Time) report.About {
	version := "unknown"
	if info, ok := debug.ReadBuildInfo(); ok {
		version = info.Main.Version
	}
	return report.About{
		Program: "evenkeel", Version: version, Go: runtime.Version(), OS: runtime.GOOS, Arch: runtime.GOARCH,
		CPUs: runtime.NumCPU(), Workers: workers, Command: append([]string{"evenkeel"}, os.Args[1:]...), CasePath: path,
		Started: started.UTC(), RunS: time.Since(started).Seconds(), Resumed: resumed,
	}
}
