package report

import (
	"errors"
	"fmt"
	"io"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// Write writes every file of a run folder except about.json into dir, which must exist:
// hours.csv, schedule.csv, inertia, mix and binding as .svg and .png, and summary.json.
// Each is written whole or not at all, summary.json last, so that a folder that holds
// summary.json holds all of them. hours are in the order of time; without are the same
// hours solved without frequency limits, matched by index, or nil.
func Write(dir string, c *fleet.Case, hours, without []solve.Hour, o Options) error {
	if err := checkRun(c, hours, without); err != nil {
		return err
	}
	files := []struct {
		name string
		fill func(io.Writer) error
	}{
		{"hours.csv", func(w io.Writer) error { return WriteHours(w, c, hours) }},
		{"schedule.csv", func(w io.Writer) error { return WriteSchedule(w, c, hours) }},
	}
	for _, f := range files {
		if err := WriteFile(dir, f.name, f.fill); err != nil {
			return err
		}
	}
	figures := []struct {
		name string
		fig  figure
	}{
		{"inertia", inertiaFigure(c, hours, without, o)},
		{"mix", mixFigure(c, hours, without, o)},
		{"binding", bindingFigure(c, hours, o)},
	}
	for _, f := range figures {
		if err := WriteFile(dir, f.name+".svg", f.fig.svg); err != nil {
			return err
		}
		if err := WriteFile(dir, f.name+".png", f.fig.png); err != nil {
			return err
		}
	}
	return WriteFile(dir, "summary.json", func(w io.Writer) error { return WriteSummary(w, c, hours, without, o) })
}

// checkRun refuses what no report can be made of.
func checkRun(c *fleet.Case, hours, without []solve.Hour) error {
	if len(hours) == 0 {
		return errors.New("there are no hours to report")
	}
	for i := range hours {
		if err := checkDispatch(c, &hours[i]); err != nil {
			return err
		}
		if i > 0 && !hours[i].Time.After(hours[i-1].Time) {
			return fmt.Errorf("hour %d is not later than hour %d before it", hours[i].Index, hours[i-1].Index)
		}
	}
	for i := range without {
		if err := checkDispatch(c, &without[i]); err != nil {
			return fmt.Errorf("without limits: %w", err)
		}
	}
	return nil
}
