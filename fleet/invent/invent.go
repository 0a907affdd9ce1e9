package invent

import (
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"
)

// Options say what case to invent. The zero value of every field but Machines is fine.
type Options struct {
	Machines int       // synchronised units, condensers included; at least MinMachines
	Seed     uint64    // another seed, another system
	Hours    int       // hours of series; 0: a year of 8760
	Start    time.Time // first hour; zero: 2030-01-01 00:00 UTC
	Name     string    // of the case; "": one is made up
}

// The systems that can be invented. With fewer units, losing one is losing the system
// (below ten, some hours cannot be made secure); with more, a case is more than a reader
// takes.
const (
	MinMachines = 5
	MaxMachines = 3000
)

const (
	maxCells = 30_000_000 // numbers in one series file
	maxName  = 80         // characters
)

func (o Options) withDefaults() (Options, error) {
	if o.Machines < MinMachines || o.Machines > MaxMachines {
		return o, fmt.Errorf("invent: %d machines: %d to %d can be had", o.Machines, MinMachines, MaxMachines)
	}
	if o.Hours < 0 {
		return o, fmt.Errorf("invent: %d hours: at least 1 is needed", o.Hours)
	}
	if o.Hours == 0 {
		o.Hours = yearH
	}
	if o.Hours > maxCells/(o.Machines+1) {
		return o, fmt.Errorf("invent: %d hours: at most %d can be had with %d machines", o.Hours, maxCells/(o.Machines+1), o.Machines)
	}
	if !goodName(o.Name) {
		return o, fmt.Errorf("invent: name %q: at most %d printable characters, no blank at either end", o.Name, maxName)
	}
	if o.Start.IsZero() {
		o.Start = time.Date(2030, 1, 1, 0, 0, 0, 0, time.UTC)
	}
	o.Start = o.Start.UTC()
	if !o.Start.Equal(o.Start.Truncate(time.Hour)) {
		return o, fmt.Errorf("invent: start %s: a full hour is needed", o.Start.Format(time.RFC3339Nano))
	}
	return o, nil
}

// goodName tells whether a case can be called so; "" asks for a name to be made up.
func goodName(s string) bool {
	for _, c := range s {
		if !unicode.IsPrint(c) || c == utf8.RuneError {
			return false
		}
	}
	return utf8.RuneCountInString(s) <= maxName && strings.TrimSpace(s) == s
}

// Write invents a case and writes dir/case.yaml and its series. The folder appears
// whole or not at all; dir must not exist yet, or be empty. An error wraps fs.ErrExist
// when it is neither.
func Write(dir string, o Options) (err error) {
	o, err = o.withDefaults()
	if err != nil {
		return err
	}
	switch entries, err := os.ReadDir(dir); {
	case err == nil && len(entries) > 0:
		return fmt.Errorf("invent: %s: %w and is not empty", dir, fs.ErrExist)
	case err != nil && !os.IsNotExist(err):
		return fmt.Errorf("invent: %w", err)
	}

	parent := filepath.Dir(filepath.Clean(dir))
	if err := os.MkdirAll(parent, 0o755); err != nil {
		return fmt.Errorf("invent: %w", err)
	}
	draft, err := os.MkdirTemp(parent, "."+filepath.Base(dir)+"-*")
	if err != nil {
		return fmt.Errorf("invent: %w", err)
	}
	defer func() {
		if err != nil {
			os.RemoveAll(draft)
		}
	}()
	if err := os.Chmod(draft, 0o755); err != nil {
		return fmt.Errorf("invent: %w", err)
	}

	p := makePlan(o)
	if err := os.WriteFile(filepath.Join(draft, "case.yaml"), p.yaml(o), 0o644); err != nil {
		return fmt.Errorf("invent: %w", err)
	}
	for _, t := range p.book.tables {
		if err := os.WriteFile(filepath.Join(draft, t.file), p.book.csv(t), 0o644); err != nil {
			return fmt.Errorf("invent: %w", err)
		}
	}
	// An empty folder is in the way on some systems.
	if err := os.Remove(dir); err != nil && !os.IsNotExist(err) {
		return fmt.Errorf("invent: %w", err)
	}
	if err := os.Rename(draft, dir); err != nil {
		return fmt.Errorf("invent: %w", err)
	}
	return nil
}
