package invent

import (
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"time"
)

// Options say what case to invent. The zero value of every field but Machines is fine.
type Options struct {
	Machines int       // synchronised units, condensers included; at least MinMachines
	Seed     uint64    // another seed, another system
	Hours    int       // hours of series; 0: a year of 8760
	Start    time.Time // first hour; zero: 2030-01-01 00:00 UTC
	Name     string    // of the case; "": one is made up
}

// MinMachines is the smallest system that can be invented: with fewer units, losing one
// is losing the system.
const MinMachines = 5

func (o Options) withDefaults() (Options, error) {
	if o.Machines < MinMachines {
		return o, fmt.Errorf("invent: %d machines: at least %d are needed", o.Machines, MinMachines)
	}
	if o.Hours < 0 {
		return o, fmt.Errorf("invent: %d hours: at least 1 is needed", o.Hours)
	}
	if o.Hours == 0 {
		o.Hours = yearH
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
