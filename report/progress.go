package report

import (
	"encoding/gob"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"evenkeel/solve"
)

// Finished is the file whose presence says that a run folder is complete.
const Finished = "summary.json"

// unfinished holds the hours solved so far of a run that was interrupted. It is Go's own
// binary form, which keeps every bit of a number, so that a run that goes on from it
// writes the same bytes as one that was never interrupted.
const unfinished = "unfinished.bin"

// Progress is an interrupted run: what was asked for, and the hours solved so far.
type Progress struct {
	CaseHash string
	Options  solve.Options
	Year     *solve.Year
}

// SaveProgress keeps an interrupted run in its folder.
func SaveProgress(dir string, p *Progress) error {
	return WriteFile(dir, unfinished, func(w io.Writer) error { return gob.NewEncoder(w).Encode(p) })
}

// LoadProgress reads an interrupted run; nil if there is none.
func LoadProgress(dir string) (*Progress, error) {
	f, err := os.Open(filepath.Join(dir, unfinished))
	if errors.Is(err, fs.ErrNotExist) {
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	defer f.Close()
	var p Progress
	if err := gob.NewDecoder(f).Decode(&p); err != nil {
		return nil, fmt.Errorf("%s cannot be read (%w): start the run anew with --replace", f.Name(), err)
	}
	if y := p.Year; y == nil || y.From < 0 || y.To-y.From != len(y.Solved) || len(y.Hours) != len(y.Solved) || y.Compare && len(y.Without) != len(y.Solved) {
		return nil, fmt.Errorf("%s does not hold a run: start anew with --replace", f.Name())
	}
	return &p, nil
}

// DropProgress removes the file of an interrupted run, if there is one.
func DropProgress(dir string) error {
	err := os.Remove(filepath.Join(dir, unfinished))
	if errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	return err
}

// Held says what a folder holds.
type Held uint8

const (
	NoFolder       Held = iota // it does not exist
	NoRun                      // a folder without a run
	FinishedRun                // a complete run
	InterruptedRun             // a run that can go on
)

// Holds tells what dir holds. A run that was interrupted while it was to replace a
// finished one counts as interrupted.
func Holds(dir string) (Held, error) {
	info, err := os.Stat(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return NoFolder, nil
	case err != nil:
		return NoFolder, err
	case !info.IsDir():
		return NoFolder, fmt.Errorf("%s is a file, not a folder", dir)
	}
	for _, f := range []struct {
		name string
		held Held
	}{{unfinished, InterruptedRun}, {Finished, FinishedRun}} {
		if _, err := os.Stat(filepath.Join(dir, f.name)); err == nil {
			return f.held, nil
		} else if !errors.Is(err, fs.ErrNotExist) {
			return NoFolder, err
		}
	}
	return NoRun, nil
}
