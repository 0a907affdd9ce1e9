package main

import (
	"context"
	"errors"
	"fmt"
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
	runFlags
	withoutLimits bool
	noComparison  bool
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
	f.add(cmd, "run", solve.DefaultGap)
	fl := cmd.Flags()
	fl.BoolVar(&f.withoutLimits, "without-limits", false, "dispatch without frequency limits; the replay says what they would have needed")
	fl.BoolVar(&f.noComparison, "no-comparison", false, "do not also solve without limits (no cost of security)")
	return cmd
}

func mix(cmd *cobra.Command, path string, f mixFlags) error {
	started := time.Now()
	if err := f.check(cmd); err != nil {
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
	opt := f.options()
	opt.WithoutLimits = f.withoutLimits
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
	going, err := f.goesOn("run")
	if err != nil || !going {
		return fresh, err
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
