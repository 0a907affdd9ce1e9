package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"time"

	"github.com/schollz/progressbar/v3"
	"github.com/spf13/cobra"
	"golang.org/x/term"

	"evenkeel/fleet"
	"evenkeel/report"
	"evenkeel/study/work"
)

// studyFlags are the flags that every study over the hours of a case has.
type studyFlags struct {
	runFlags
	every int
}

// add adds them, with the study's usual gap.
func (f *studyFlags) add(cmd *cobra.Command, gap float64) {
	f.runFlags.add(cmd, "study", gap)
	cmd.Flags().IntVar(&f.every, "every", 1, "only every `N`th of the hours: a sample, counted up to a year")
}

// check judges them.
func (f *studyFlags) check(cmd *cobra.Command) error {
	if f.every < 1 {
		return bad("--every is %d, want at least 1", f.every)
	}
	return f.runFlags.check(cmd)
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
	going, err := f.goesOn("study")
	switch {
	case err != nil:
		return err
	case !going:
		return os.MkdirAll(f.out, 0o777)
	}
	if err := report.ReadStudy(f.out, asked, items); err != nil {
		return exit{exitBadInput, err}
	}
	return nil
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
