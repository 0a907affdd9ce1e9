// Package report turns solved hours into what a planner reads: the files of a run
// folder (hours.csv, schedule.csv, summary.json, about.json and three plots, each as
// SVG and PNG) and a plain summary for the terminal.
//
// Every number is printed with a fixed count of decimals and everything is listed in
// the order of the case, so the same results always give the same bytes. about.json is
// the only file that may differ between two runs of one case. COLUMNS.md explains
// every column and key.
package report

// Caution is the one sentence that every report carries.
const Caution = "A planning aid on a single-bus model: limits, protection settings and " +
	"operating decisions stay with the local grid code and the licensed engineers who answer for them."

// Options say how the hours were solved, where the hours themselves do not tell.
type Options struct {
	// Gap is the relative gap the run was asked to reach (0.001 for 0.1 %); 0: not stated.
	Gap float64
	// StartSpreadH is the run length in hours over which start costs were spread; 0: start costs were left out.
	StartSpreadH float64
	// WithoutLimits says that the hours reported were themselves solved without frequency limits.
	WithoutLimits bool
}
