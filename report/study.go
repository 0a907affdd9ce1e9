package report

import (
	"encoding/gob"
	"fmt"
	"io"
	"os"
	"path/filepath"
)

// KeepStudy keeps the state of an interrupted study in its folder. asked says which study it is:
// command, case and every flag that has a say in the results. items is a *work.Items.
func KeepStudy(dir, asked string, items any) error {
	return WriteFile(dir, unfinished, func(w io.Writer) error {
		enc := gob.NewEncoder(w)
		if err := enc.Encode(asked); err != nil {
			return err
		}
		return enc.Encode(items)
	})
}

// ReadStudy reads into items what KeepStudy has kept. It refuses another study.
func ReadStudy(dir, asked string, items any) error {
	f, err := os.Open(filepath.Join(dir, unfinished))
	if err != nil {
		return err
	}
	defer f.Close()
	dec := gob.NewDecoder(f)
	was := ""
	if err := dec.Decode(&was); err != nil {
		return fmt.Errorf("%s cannot be read (%w): start anew with --replace", f.Name(), err)
	}
	if was != asked {
		return fmt.Errorf("--resume: %s was started with another case or other flags; use the same, or --replace to start anew", dir)
	}
	if err := dec.Decode(items); err != nil {
		return fmt.Errorf("%s cannot be read (%w): start anew with --replace", f.Name(), err)
	}
	return nil
}
