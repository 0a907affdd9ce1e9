package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"runtime"
	"time"

	"github.com/schollz/progressbar/v3"
	"github.com/spf13/cobra"
	"golang.org/x/term"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/solve"
	"evenkeel/study/work"
)

// studyFlags are the flags that every study over the hours of a case has.
type studyFlags struct {
	out, hours       string
	every            int
	workers          int
	gap, startSpread float64
	replace, resume  bool
	quiet            bool
}

func (f *studyFlags) add(cmd *cobra.Command) {
	fl := cmd.Flags()
	fl.StringVar(&f.out, "out", "", "folder to write the study to")
	fl.StringVar(&f.hours, "hours", "", "only hours A to B-1, counted from 0, as `A:B`")
	fl.IntVar(&f.every, "every", 1, "only every `N`th of the hours: a sample, counted up to a year")
	fl.IntVar(&f.workers, "workers", runtime.NumCPU(), "hours worked on at the same time; results do not depend on it")
	fl.Float64Var(&f.gap, "gap", solve.DefaultGap, "relative gap between cost and proven bound; 0 solves to optimality")
	fl.Float64Var(&f.startSpread, "start-spread", 0, "spread start costs over this many `hours` of running; 0 leaves them out")
	fl.BoolVar(&f.replace, "replace", false, "replace what --out already holds")
	fl.BoolVar(&f.resume, "resume", false, "go on with the interrupted study that --out holds")
	fl.BoolVar(&f.quiet, "quiet", false, "no summary, progress or warnings")
}

// check judges the common flags of a study called name.
func (f *studyFlags) check(name string) error {
	switch {
	case f.out == "":
		return bad("%s needs --out DIR, the folder to write the study to", name)
	case f.workers < 1:
		return bad("--workers is %d, want at least 1", f.workers)
	case f.every < 1:
		return bad("--every is %d, want at least 1", f.every)
	case !(f.gap >= 0 && f.gap < 1):
		return bad("--gap is %g, want at least 0 and less than 1 (0.001 is 0.1 %%)", f.gap)
	case !(f.startSpread >= 0) || math.IsInf(f.startSpread, 0):
		return bad("--start-spread is %g, want 0 or more hours", f.startSpread)
	case f.replace && f.resume:
		return bad("--replace and --resume exclude each other")
	}
	return nil
}

// options are the optimiser's.
func (f *studyFlags) options() solve.Options {
	opt := solve.Options{Gap: f.gap, StartSpreadH: f.startSpread}
	if f.gap == 0 {
		opt.Gap = -1
	}
	return opt
}

// list gives the hours of the case that a study looks at.
func (f *studyFlags) list(c *fleet.Case) ([]int, error) {
	from, to, err := hourRange(f.hours, c.Hours())
	if err != nil {
		return nil, err
	}
	var hours []int
	for h := from; h < to; h += f.every {
		hours = append(hours, h)
	}
	return hours, nil
}

// open makes the folder of a study, or goes on with an interrupted one: items then holds what was
// done. asked says in words what has a say in the results.
func (f *studyFlags) open(asked string, items any) error {
	held, err := report.Holds(f.out)
	if err != nil {
		return err
	}
	going := false
	switch {
	case held == report.NoFolder || held == report.NoRun || f.replace:
		if f.resume {
			return bad("--resume: %s holds no interrupted study", f.out)
		}
		err = report.DropProgress(f.out)
	case held == report.FinishedRun:
		return bad("%s holds a finished run or study; --replace overwrites it", f.out)
	case !f.resume:
		return bad("%s holds an interrupted run or study; --resume goes on with it, --replace starts anew", f.out)
	default:
		going = true
	}
	if err != nil {
		return err
	}
	if going {
		if err := report.ReadStudy(f.out, asked, items); err != nil {
			return exit{exitBadInput, err}
		}
		return nil
	}
	return os.MkdirAll(f.out, 0o777)
}

// runStudy does the items of a study that are not done yet. Where it is interrupted it keeps what
// was done in the study's folder.
func runStudy[T any](ctx context.Context, f *studyFlags, asked, what string, items *work.Items[T], start func() func(context.Context, int) (T, error)) error {
	n := len(items.Done)
	fresh := work.New[T](n)
	if err := f.open(asked, items); err != nil {
		return err
	}
	if !items.Whole(n) {
		*items = *fresh
		return bad("--resume: %s does not hold this study; --replace starts anew", f.out)
	}
	step, finish := steps(n, items.Count(), what, f.quiet)
	defer finish()
	err := items.Run(ctx, f.workers, start, step)
	if err == nil || !errors.Is(err, context.Canceled) {
		return err
	}
	if err := report.KeepStudy(f.out, asked, items); err != nil {
		return err
	}
	return fmt.Errorf("interrupted after %d of %d %s; the same command with --resume goes on", items.Count(), n, what)
}

// steps shows progress on a terminal: step is to be called after each item, finish at the end.
func steps(n, done int, what string, quiet bool) (step, finish func()) {
	if quiet || !term.IsTerminal(int(os.Stderr.Fd())) {
		return afterHour, func() {}
	}
	bar := progressbar.NewOptions(n,
		progressbar.OptionSetWriter(os.Stderr), progressbar.OptionSetDescription(what),
		progressbar.OptionShowCount(), progressbar.OptionThrottle(100*time.Millisecond),
		progressbar.OptionClearOnFinish(), progressbar.OptionSetPredictTime(true))
	_ = bar.Set(done)
	return func() {
		_ = bar.Add(1)
		if afterHour != nil {
			afterHour()
		}
	}, func() { _ = bar.Finish() }
}

// endStudy writes about.json and drops what an interrupt had left: the study is whole.
func endStudy(f *studyFlags, path string, started time.Time) error {
	if err := report.WriteAbout(f.out, about(path, f.workers, f.resume, started)); err != nil {
		return err
	}
	return report.DropProgress(f.out)
}
