package formulate

import (
	"math"
	"slices"

	"evenkeel/fleet"
	"evenkeel/limits"
)

// Problem is one hour: identical units to pick operating points for, and the losses
// that each limit must hold after.
type Problem struct {
	Hour   *fleet.Hour
	Limits limits.Limits
	Shapes []limits.Shape

	UnservedPerMWh float64
	ShortPerMW     float64

	Classes []Class
	Losses  []Loss

	// The other side of nominal: its limits (nil: none) and the losses of load and of
	// exports, whose size is FixedMW less the output of what they take with them.
	Above      *limits.Limits
	OverLosses []Loss
	// AboveDampingMWPerHz and AboveInertiaMWs are what is sure to be left of the load's damping
	// and of its own kinetic energy after the largest of those losses; AboveA0 is as DampingA0.
	AboveDampingMWPerHz float64
	AboveInertiaMWs     float64
	AboveA0             float64

	// DampingA0 is a lower bound of D·f0/(2·E) over every mix that serves the load, 1/s.
	DampingA0 float64
	// MostInertiaMWs is the bound of E it comes from.
	MostInertiaMWs float64

	// WithoutLimits leaves the frequency rows out.
	WithoutLimits bool
}

// Class is the identical units of one resource.
type Class struct {
	Unit    int // index into Hour.Units
	Count   int
	Commit  bool
	MustRun bool
	Shape   int // −1: none
	Down    int // shape of the response downwards; −1: none
}

// MostUnservedMW is the most that can be short of supply: the load, and what runs and draws
// power whatever is decided.
func (p *Problem) MostUnservedMW() float64 {
	mw := max(p.Hour.DemandMW, 0)
	for c := range p.Classes {
		u := &p.Hour.Units[p.Classes[c].Unit]
		mw += float64(p.Classes[c].Count) * max(-u.MinMW, 0)
	}
	return mw
}

// Loss is one loss: FixedMW plus the output of what it takes with it.
type Loss struct {
	Name    string
	FixedMW float64
	Classes []int // indices into Problem.Classes
	Single  bool  // one unit of Classes[0]; otherwise all units of each
}

// Commits tells whether the size of the loss hangs on a commitment.
func (l *Loss) Commits(p *Problem) bool {
	for _, c := range l.Classes {
		if p.Classes[c].Commit {
			return true
		}
	}
	return false
}

// Build makes the problem of one hour of a case.
func Build(c *fleet.Case, h *fleet.Hour) *Problem {
	p := &Problem{
		Hour: h, Limits: c.Limits,
		UnservedPerMWh: c.UnservedPerMWh, ShortPerMW: c.ShortPerMW,
	}
	for _, s := range c.Shapes {
		p.Shapes = append(p.Shapes, s.Shape)
	}
	class := make([]int, len(h.Units))
	for i := range h.Units {
		u := &h.Units[i]
		class[i] = -1
		if u.Count <= 0 {
			continue
		}
		class[i] = len(p.Classes)
		shape := u.Shape
		if u.ResponseCapMW <= 0 {
			shape = -1
		}
		down := u.DownShape
		if u.DownCapMW <= 0 {
			down = -1
		}
		p.Classes = append(p.Classes, Class{Unit: i, Count: u.Count, Commit: u.Commit, MustRun: u.MustRun, Shape: shape, Down: down})
	}
	for _, l := range h.Losses {
		var members []int
		for _, m := range l.Members {
			if class[m] >= 0 {
				members = append(members, class[m])
			}
		}
		if len(members) == 0 && l.FixedMW <= 0 {
			continue
		}
		loss := Loss{Name: l.Name, FixedMW: l.FixedMW, Classes: members, Single: l.Single}
		if !l.Over {
			p.Losses = append(p.Losses, loss)
		} else if c.Above != nil {
			p.OverLosses = append(p.OverLosses, loss)
		}
	}
	p.MostInertiaMWs = max(mostInertia(h), h.MostInertiaMWs)
	p.DampingA0 = h.DampingMWPerHz * c.Limits.NominalHz / (2 * p.MostInertiaMWs)
	if p.MostInertiaMWs <= 0 {
		p.DampingA0 = 0
	}
	if c.Above != nil {
		p.above(c, h)
	}
	return p
}

// lackHzPerS prices what is lacking of the least inertia: as the MW of a loss that it would cover
// at this rate of change (common practice: between the usual limits).
const lackHzPerS = 1

// LackPerMWs is the price of each MW·s that is lacking of Hour.LeastInertiaMWs.
func (p *Problem) LackPerMWs() float64 { return p.ShortPerMW * 2 * lackHzPerS / p.Limits.NominalHz }

// SteadyOnly lifts the limits of RoCoF and of the nadir, on both sides of nominal, far above
// anything that could happen.
func (p *Problem) SteadyOnly() {
	const far = 1e6 // Hz, Hz/s
	p.Limits.MaxHzPerS, p.Limits.NadirHz = far, far
	if p.Above != nil {
		above := *p.Above
		above.MaxHzPerS, above.NadirHz = far, far
		p.Above = &above
	}
}

// above prepares the other side of nominal: load that is lost damps no more.
func (p *Problem) above(c *fleet.Case, h *fleet.Hour) {
	p.Above = c.Above
	most := 0.0
	for k := range p.OverLosses {
		most = max(most, p.OverLosses[k].FixedMW)
	}
	left := 1.0
	if h.DemandMW > 0 {
		left = max(0, 1-most/h.DemandMW)
	}
	p.AboveDampingMWPerHz = left * h.DampingMWPerHz
	p.AboveInertiaMWs = left * h.LoadInertiaMWs
	if p.MostInertiaMWs > 0 {
		p.AboveA0 = p.AboveDampingMWPerHz * c.Limits.NominalHz / (2 * p.MostInertiaMWs)
	}
}

// mostInertia bounds the kinetic energy that any mix can have online: what runs at its
// minimum must fit under the load, so machines are taken in order of kinetic energy per
// MW of minimum output until it is reached, the last one in part. Converters' exports
// and machines that consume make room.
func mostInertia(h *fleet.Hour) float64 {
	type item struct{ e, minMW float64 }
	total := h.LoadInertiaMWs
	room := h.DemandMW
	var items []item
	for i := range h.Units {
		u := &h.Units[i]
		n := float64(max(u.Count, 0))
		total += n * u.SyntheticCapMWs
		switch {
		case n == 0:
		case !u.Commit:
			total += n * u.InertiaMWs
			room -= n * min(u.MinMW, 0)
			if u.MinMW > 0 {
				room -= n * u.MinMW
			}
		case u.MustRun || u.MinMW <= 0:
			total += n * u.InertiaMWs
			room -= n * u.MinMW
		case u.InertiaMWs > 0:
			items = append(items, item{n * u.InertiaMWs, n * u.MinMW})
		}
	}
	slices.SortStableFunc(items, func(a, b item) int {
		return -cmpFloat(a.e*b.minMW, b.e*a.minMW)
	})
	for _, it := range items {
		if room <= 0 {
			break
		}
		share := math.Min(1, room/it.minMW)
		total += share * it.e
		room -= share * it.minMW
	}
	return total
}

func cmpFloat(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}
