package fleet

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// Finding is one thing in a case that is wrong (an error) or unusual (a warning).
type Finding struct {
	File    string // the case file or a series file, as it can be opened from here
	Line    int    // counted from 1; 0: the whole file
	Key     string // path of the key, such as machines[Hollin 1].rating_mva, or a column; may be empty
	Found   string
	Want    string // what is allowed or usual; for a warning with the source beside it
	Warning bool   // unusual, but the case can be used
}

// String gives the finding as one line: case.yaml:41: machines[Hollin 1].min_output_mw:
// found 220, want at most max_output_mw (200).
func (f Finding) String() string {
	var b strings.Builder
	b.WriteString(f.File)
	if f.Line > 0 {
		fmt.Fprintf(&b, ":%d", f.Line)
	}
	b.WriteString(": ")
	if f.Warning {
		b.WriteString("warning: ")
	}
	if f.Key != "" {
		b.WriteString(f.Key)
		b.WriteString(": ")
	}
	b.WriteString("found ")
	b.WriteString(f.Found)
	if f.Want != "" {
		b.WriteString(", want ")
		b.WriteString(f.Want)
	}
	return b.String()
}

// Findings are all findings of a case: the case file first, then the series files by
// name; within a file by line.
type Findings []Finding

// Errors lists the findings that keep the case from being used.
func (fs Findings) Errors() Findings { return fs.pick(false) }

// Warnings lists the findings that a planner should look at.
func (fs Findings) Warnings() Findings { return fs.pick(true) }

func (fs Findings) pick(warning bool) Findings {
	var out Findings
	for _, f := range fs {
		if f.Warning == warning {
			out = append(out, f)
		}
	}
	return out
}

// String gives one finding a line.
func (fs Findings) String() string {
	lines := make([]string, len(fs))
	for i, f := range fs {
		lines[i] = f.String()
	}
	return strings.Join(lines, "\n")
}

// maxFindings bounds what a hopeless file can produce.
const maxFindings = 1000

// sorted puts findings in their final order and cuts a flood short, errors being kept
// before warnings.
func (fs Findings) sorted(caseFile string) Findings {
	slices.SortStableFunc(fs, func(a, b Finding) int {
		if c := cmp.Compare(rank(a, caseFile), rank(b, caseFile)); c != 0 {
			return c
		}
		return cmp.Or(cmp.Compare(a.File, b.File), cmp.Compare(a.Line, b.Line))
	})
	if len(fs) <= maxFindings {
		return fs
	}
	errs, warns := fs.Errors(), fs.Warnings()
	left := len(fs) - maxFindings
	kept := append(errs, warns...)[:maxFindings]
	out := kept.sorted(caseFile)
	return append(out, Finding{
		File:    caseFile,
		Found:   fmt.Sprintf("%d more findings", left),
		Want:    "the ones above put right first",
		Warning: len(errs) == 0,
	})
}

func rank(f Finding, caseFile string) int {
	if f.File == caseFile {
		return 0
	}
	return 1
}
