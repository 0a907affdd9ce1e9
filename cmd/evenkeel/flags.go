package main

import (
	"math"
	"runtime"

	"github.com/spf13/cobra"

	"evenkeel/report"
	"evenkeel/solve"
)

// runFlags are the flags of every command that works through the hours of a case into a folder.
type runFlags struct {
	out, hours       string
	workers          int
	gap, startSpread float64
	replace, resume  bool
	quiet            bool
}

// add adds them to a command that writes a what (run, study), with its usual gap.
func (f *runFlags) add(cmd *cobra.Command, what string, gap float64) {
	fl := cmd.Flags()
	fl.StringVar(&f.out, "out", "", "folder to write the "+what+" to")
	fl.StringVar(&f.hours, "hours", "", "only hours A to B-1, counted from 0, as `A:B`")
	fl.IntVar(&f.workers, "workers", runtime.NumCPU(), "hours worked on at the same time; results do not depend on it")
	fl.Float64Var(&f.gap, "gap", gap, "relative gap between cost and proven bound; 0 solves to optimality")
	fl.Float64Var(&f.startSpread, "start-spread", 0, "spread start costs over this many `hours` of running; 0 leaves them out")
	fl.BoolVar(&f.replace, "replace", false, "replace what --out already holds")
	fl.BoolVar(&f.resume, "resume", false, "go on with the interrupted "+what+" that --out holds")
	fl.BoolVar(&f.quiet, "quiet", false, "no summary, progress or warnings")
}

// check judges them.
func (f *runFlags) check(cmd *cobra.Command) error {
	switch {
	case f.out == "":
		return bad("%s needs --out DIR, the folder to write to", cmd.Name())
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

// options are the optimiser's.
func (f *runFlags) options() solve.Options {
	opt := solve.Options{Gap: f.gap, StartSpreadH: f.startSpread}
	if f.gap == 0 {
		opt.Gap = -1
	}
	return opt
}

// goesOn decides what --out may be used for: it tells whether an interrupted what is to be gone on
// with. Where it is not, what an earlier interrupt left is dropped.
func (f *runFlags) goesOn(what string) (bool, error) {
	held, err := report.Holds(f.out)
	if err != nil {
		return false, err
	}
	switch {
	case f.replace || held == report.NoFolder || held == report.NoRun:
		if f.resume {
			return false, bad("--resume: %s holds no interrupted %s", f.out, what)
		}
		return false, report.DropProgress(f.out)
	case held == report.FinishedRun:
		return false, bad("%s holds a finished run or study; --replace overwrites it", f.out)
	case !f.resume:
		return false, bad("%s holds an interrupted run or study; --resume goes on with it, --replace starts anew", f.out)
	}
	return true, nil
}
