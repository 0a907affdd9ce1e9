package floor

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"evenkeel/fleet"
	"evenkeel/solve"
	"evenkeel/study/ranges"
)

// DefaultCells is how many losses and responses a chart has unless said otherwise.
const DefaultCells = 20

const (
	mostCells   = 200
	mostBracket = 24
)

// Axis is one chart: the response held with one shape against the loss.
type Axis struct {
	Shape int
	Held  ranges.Range // N = 0: by default
}

// Ask is what a study is asked for.
type Ask struct {
	Hours    []int // of the case; none: the charts alone
	Options  solve.Options
	Loss     ranges.Range // MW; N = 0: by default
	Axes     []Axis       // none: one, of the shape held most
	HeldMW   []float64    // of the shapes that are no axis, one a shape; NaN: by default
	LoadMW   float64      // in the charts; NaN: by default
	Brackets int          // of the largest loss, in the rule by its size
	Policies []float64    // further rules, MW·s for all hours
}

// Words are what a user asks for in flags.
type Words struct {
	Loss     string   // A:B:N
	Axes     []string // names of shapes and models
	Held     []string // NAME=MW or NAME=A:B:N
	LoadMW   float64  // 0: by default
	Brackets int
	Policies []float64
}

// Read makes an Ask of the words. It reports every fault.
func (w Words) Read(c *fleet.Case) (*Ask, error) {
	a := &Ask{LoadMW: math.NaN(), Brackets: w.Brackets, Policies: w.Policies, HeldMW: make([]float64, len(c.Shapes))}
	for i := range a.HeldMW {
		a.HeldMW[i] = math.NaN()
	}
	var faults []error
	fault := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	var names []string
	for i := range c.Shapes {
		names = append(names, c.Shapes[i].Name)
	}
	if len(names) == 0 {
		fault("the case has no shapes and no models: nothing answers a loss, so a floor has nothing to go with")
	}
	find := func(flag, word, name string) int {
		i := slices.Index(names, name)
		if i < 0 && len(names) > 0 {
			fault("--%s is %q, want a shape or model of the case: %s", flag, word, strings.Join(names, ", "))
		}
		return i
	}
	if w.Loss != "" {
		r, ok := ranges.Parse(w.Loss, mostCells)
		if !ok || !(r.From > 0) {
			fault("--loss is %q, want A:B:N in MW with 0 < A ≤ B and N from 1 to %d", w.Loss, mostCells)
		}
		a.Loss = r
	}
	for _, name := range w.Axes {
		i := find("axis", name, name)
		if slices.ContainsFunc(a.Axes, func(x Axis) bool { return x.Shape == i }) && i >= 0 {
			fault("--axis names %q twice, want each once", name)
		}
		a.Axes = append(a.Axes, Axis{Shape: i})
	}
	seen := map[string]bool{}
	for _, word := range w.Held {
		name, value, ok := strings.Cut(word, "=")
		if !ok {
			fault("--held is %q, want SHAPE=MW or, for an axis, SHAPE=A:B:N", word)
			continue
		}
		i := find("held", word, name)
		if seen[name] {
			fault("--held names %q twice, want each once", name)
		}
		seen[name] = true
		axis := slices.IndexFunc(a.Axes, func(x Axis) bool { return x.Shape == i })
		if strings.Contains(value, ":") {
			r, ok := ranges.Parse(value, mostCells)
			switch {
			case !ok || !(r.From >= 0):
				fault("--held is %q, want SHAPE=A:B:N in MW with 0 ≤ A ≤ B and N from 1 to %d", word, mostCells)
			case axis < 0 && i >= 0:
				fault("--held %s gives a range, but --axis does not name %s; want both or SHAPE=MW", word, name)
			case axis >= 0:
				a.Axes[axis].Held = r
			}
			continue
		}
		mw, err := strconv.ParseFloat(value, 64)
		switch {
		case err != nil || !(mw >= 0) || math.IsInf(mw, 0):
			fault("--held is %q, want SHAPE=MW of 0 or more", word)
		case axis >= 0 && len(a.Axes) == 1:
			fault("--held %s gives one number, but %s is the axis; want a range A:B:N", word, name)
		case i >= 0:
			a.HeldMW[i] = mw
		}
	}
	switch {
	case math.IsNaN(w.LoadMW) || w.LoadMW < 0 || math.IsInf(w.LoadMW, 0):
		fault("--load is %g, want MW above 0", w.LoadMW)
	case w.LoadMW > 0:
		a.LoadMW = w.LoadMW
	}
	if w.Brackets < 1 || w.Brackets > mostBracket {
		fault("--brackets is %d, want 1 to %d", w.Brackets, mostBracket)
	}
	for _, p := range w.Policies {
		if !(p > 0) || math.IsInf(p, 0) {
			fault("--policy is %g, want MW·s above 0", p)
		}
	}
	return a, errors.Join(faults...)
}
