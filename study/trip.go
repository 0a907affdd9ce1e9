package study

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/limits/dynamic"
	"evenkeel/solve"
)

// WhatIf changes a mix before it is tripped.
type WhatIf struct {
	InertiaMWs float64  // more kinetic energy, or less
	Without    []string // resources or shapes whose response is taken away
}

// Trip is a sequence of losses in closed loop.
type Trip struct {
	Mix     *Mix
	Limits  limits.Limits
	Above   *limits.Limits // nil: none
	Losses  []dynamic.Loss
	Sys     dynamic.System
	Sources []string // names of Outcome.MW
	Held    []float64
	dynamic.Outcome
}

// LossAt is a loss as the command line names it: NAME or MW, and the second it happens at.
type LossAt struct {
	Name string
	AtS  float64
}

// ParseLoss reads NAME[@SECONDS].
func ParseLoss(text string) (LossAt, error) {
	name, at, ok := text, "", false
	if i := strings.LastIndex(text, "@"); i >= 0 {
		name, at, ok = text[:i], text[i+1:], true
	}
	l := LossAt{Name: strings.TrimSpace(name)}
	if ok {
		s, err := strconv.ParseFloat(strings.TrimSpace(at), 64)
		if err != nil || !(s >= 0) || s > 3600 {
			return l, fmt.Errorf("--lose %q: want NAME or NAME@SECONDS, 0 to 3600 s", text)
		}
		l.AtS = s
	}
	if l.Name == "" {
		return l, fmt.Errorf("--lose %q: want the name of a resource, a connection or a loss of the case, or MW", text)
	}
	return l, nil
}

// RunTrip simulates the losses, in order of time.
func RunTrip(m *Mix, losses []LossAt, w WhatIf, l limits.Limits, above *limits.Limits) (*Trip, error) {
	d := append([]solve.Dispatch(nil), m.Dispatch...)
	for _, name := range w.Without {
		if err := silence(m.Case, d, name); err != nil {
			return nil, err
		}
	}
	on := solve.NewOnline(m.Case, m.Hour, d, m.Unserved)
	on.Sys.InertiaMWs += w.InertiaMWs
	if !(on.Sys.InertiaMWs > 0) {
		return nil, fmt.Errorf("no kinetic energy is left: %.1f MW·s with the change of %.1f", on.Sys.InertiaMWs, w.InertiaMWs)
	}
	t := &Trip{Mix: m, Limits: l, Above: above, Sys: on.Sys}
	lost := map[int]float64{}
	last := 0.0
	for _, a := range losses {
		one, err := lossOf(m, on, d, a, lost)
		if err != nil {
			return nil, err
		}
		last = max(last, a.AtS)
		t.Losses = append(t.Losses, one)
	}
	for i := range on.Sys.Units {
		u := &on.Sys.Units[i]
		t.Sources = append(t.Sources, u.Name)
		t.Held = append(t.Held, u.N*max(u.UpMW, u.DownMW))
	}
	for i := range on.Sys.Promises {
		p := &on.Sys.Promises[i]
		t.Sources = append(t.Sources, p.Name+" (promised)")
		t.Held = append(t.Held, p.MW)
	}
	var sim dynamic.Simulator
	// The steady band counts from the last loss on.
	first := last
	for _, a := range losses {
		first = min(first, a.AtS)
	}
	t.Outcome = *sim.Run(&on.Sys, t.Losses, dynamic.Options{WindowS: l.WindowS, SteadyByS: last - first + l.SteadyByS, UntilS: last - first + l.SteadyUntilS, Record: true})
	return t, nil
}

// silence takes the response of a resource, or of all with a shape, away.
func silence(c *fleet.Case, d []solve.Dispatch, name string) error {
	found := false
	for i := range c.Resources {
		r := &c.Resources[i]
		if r.Name == name || r.Response.Shape >= 0 && c.Shapes[r.Response.Shape].Name == name {
			d[i].ResponseMW = 0
			found = true
		}
		if r.Name == name || r.Down.Shape >= 0 && c.Shapes[r.Down.Shape].Name == name {
			d[i].DownMW = 0
			found = true
		}
	}
	if !found {
		return fmt.Errorf("--without %q: want a resource, shape or model of the case", name)
	}
	return nil
}

// lossOf finds what a name stands for: a resource (one unit), a connection (all of them), a loss of
// the case, or MW.
func lossOf(m *Mix, on *solve.Online, d []solve.Dispatch, a LossAt, lost map[int]float64) (dynamic.Loss, error) {
	l := dynamic.Loss{Name: a.Name, AtS: a.AtS}
	take := func(i int, units float64) {
		units = min(units, float64(d[i].On)-lost[i])
		if units > 0 {
			on.Lose(&l, i, units)
			lost[i] += units
		}
	}
	c := m.Case
	for i := range c.Resources {
		if c.Resources[i].Name == a.Name {
			if float64(d[i].On) <= lost[i] {
				return l, fmt.Errorf("--lose %s: no unit of it is on", a.Name)
			}
			take(i, 1)
			return l, nil
		}
	}
	for _, g := range c.Connections {
		if g.Name == a.Name {
			for _, i := range g.Resources {
				take(i, math.Inf(1))
			}
			return l, nil
		}
	}
	for _, x := range c.Losses {
		if x.Name == a.Name {
			if mw := x.MW.At(m.Hour.Index); x.Over {
				on.LoseLoad(&l, mw)
			} else {
				l.MW = mw
			}
			for _, i := range x.Resources {
				take(i, math.Inf(1))
			}
			return l, nil
		}
	}
	if mw, err := strconv.ParseFloat(a.Name, 64); err == nil && !math.IsNaN(mw) && !math.IsInf(mw, 0) {
		if l.Name = fmt.Sprintf("%g MW", mw); mw < 0 {
			on.LoseLoad(&l, -mw)
		} else {
			l.MW = mw
		}
		return l, nil
	}
	return l, fmt.Errorf("--lose %q: want the name of a resource, a connection or a loss of the case, or MW", a.Name)
}

// FirstStage is the shedding stage nearest to acting, and the margin to it in Hz: below 0, it
// was reached. ok is false where the case has none.
func (t *Trip) FirstStage() (name string, marginHz float64, ok bool) {
	marginHz = math.Inf(1)
	for _, r := range t.Sys.Relays {
		if r.ShedShare <= 0 || r.LevelHz <= 0 || r.Over {
			continue
		}
		if d := r.LevelHz - t.NadirHz; d < marginHz {
			name, marginHz, ok = r.Name, d, true
		}
	}
	return name, marginHz, ok
}

// ParseLimit changes one limit: rocof=, nadir= or steady=, or above nominal rise=, peak= or
// steady_over=.
func ParseLimit(l limits.Limits, above *limits.Limits, text string) (limits.Limits, *limits.Limits, error) {
	name, value, _ := strings.Cut(text, "=")
	x, err := strconv.ParseFloat(value, 64)
	bad := fmt.Errorf("--limit %q: want rocof=, nadir= or steady= and a number above 0; above nominal rise=, peak= or steady_over=", text)
	if err != nil || !(x > 0) {
		return l, above, bad
	}
	up := limits.Limits{NominalHz: l.NominalHz, MaxHzPerS: math.Inf(1), NadirHz: math.Inf(1), SteadyHz: math.Inf(1)}
	if above != nil {
		up = *above
	}
	switch name {
	case "rocof":
		l.MaxHzPerS = x
	case "nadir":
		l.NadirHz = x
	case "steady":
		l.SteadyHz = x
	case "rise":
		up.MaxHzPerS, above = x, &up
	case "peak":
		up.NadirHz, above = x, &up
	case "steady_over":
		up.SteadyHz, above = x, &up
	default:
		return l, above, bad
	}
	return l, above, nil
}
