package report

import (
	"encoding/json"
	"io"
	"time"
)

// About says how and where a run was made. It is the content of about.json, the only
// file of a run folder that may differ between two runs of the same case.
type About struct {
	Program  string    `json:"program"`
	Version  string    `json:"version"`
	Go       string    `json:"go"`
	OS       string    `json:"os"`
	Arch     string    `json:"arch"`
	CPUs     int       `json:"cpus"`
	Workers  int       `json:"workers"`
	Command  []string  `json:"command"` // as typed
	CasePath string    `json:"case_path"`
	Started  time.Time `json:"started"`
	RunS     float64   `json:"run_s"`
	Resumed  bool      `json:"resumed"` // the run went on from an interrupted one
}

// WriteAbout writes about.json into dir, whole or not at all.
func WriteAbout(dir string, a About) error {
	return WriteFile(dir, "about.json", func(w io.Writer) error { return writeJSON(w, a) })
}

func writeJSON(w io.Writer, v any) error {
	enc := json.NewEncoder(w)
	enc.SetEscapeHTML(false)
	enc.SetIndent("", "  ")
	return enc.Encode(v)
}
