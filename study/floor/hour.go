package floor

import (
	"context"
	"slices"
	"time"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/solve"
)

// The ways to close a gap, each alone.
const (
	Machines = iota // constraining machines on
	Response        // holding more response, synthetic inertia included
	Smaller         // cutting the largest loss
	Ways
)

// WayNames name the ways in files.
var WayNames = [Ways]string{"machines", "response", "loss"}

// Priced is a mix as far as its cost goes: the true least cost lies between Bound and Cost.
type Priced struct {
	Met         bool // every limit holds by the rows, and the load is served
	Cost, Bound float64
}

func priced(h *solve.Hour) Priced { return Priced{h.Met(), h.Cost, h.Bound} }

// Hour is what an hour of the year shows.
type Hour struct {
	Index int
	Time  time.Time

	Mix      Need // of the secure mix
	Short    bool // there is none
	MixCost  Priced
	MendCost float64 // of its cost, what closed loop added
	Held     []float64

	// Bare is the dispatch that knows the steady-state limits alone.
	Bare     Need
	BareCost Priced
	Ways     [Ways]Priced // where Bare has a gap

	FreeMWs float64 // online without any limit
}

// Gap tells whether the bare dispatch lacks kinetic energy by more than rounding.
func (h *Hour) Gap() bool { return h.Bare.GapMWs() > gapTolMWs }

const gapTolMWs = 0.01

// solvers are those of all dispatches of an hour. They are safe for concurrent use.
type solvers struct {
	c                       *fleet.Case
	spread                  float64
	secure, rows, bare, any *solve.Solver
	firm                    *solve.Solver // of rules
}

// firmly makes what lacks of a rule, and any other shortfall, so dear that only what cannot be had
// lacks. It has no say in the cost of what is kept. What machines put out above the load is as dear,
// as a rule kept that way is none.
const firmly = 1000

func newSolvers(c *fleet.Case, o solve.Options) *solvers {
	dear := *c
	dear.ShortPerMW *= firmly
	dear.UnservedPerMWh *= firmly
	s := &solvers{c: c, spread: o.StartSpreadH, secure: solve.New(c, o), firm: solve.New(&dear, o)}
	o.RowsOnly = true
	s.rows = solve.New(c, o)
	o.SteadyOnly = true
	s.bare = solve.New(c, o)
	o.SteadyOnly, o.WithoutLimits = false, true
	s.any = solve.New(c, o)
	return s
}

// hour solves one hour in all its dispatches.
func (s *solvers) hour(ctx context.Context, n *needs, index int) (*Hour, error) {
	h := s.c.Hour(index, fleet.HourOptions{StartSpreadH: s.spread})
	p := formulate.Build(s.c, h)
	mix, err := s.secure.Hour(ctx, h)
	if err != nil {
		return nil, err
	}
	bare, err := s.bare.Hour(ctx, h)
	if err != nil {
		return nil, err
	}
	free, err := s.any.Hour(ctx, h)
	if err != nil {
		return nil, err
	}
	out := &Hour{Index: index, Time: h.Time, Mix: n.of(p, &mix), Short: mix.Status == solve.Short, MixCost: priced(&mix), MendCost: mix.Closed.MendedCost,
		Held: make([]float64, len(s.c.Shapes)), Bare: n.of(p, &bare), BareCost: priced(&bare), FreeMWs: free.InertiaMWs}
	for i := range mix.Dispatch {
		if shape := h.Units[i].Shape; shape >= 0 {
			out.Held[shape] += mix.Dispatch[i].ResponseMW
		}
	}
	if !out.Gap() {
		return out, nil
	}
	for w := range out.Ways {
		closed, err := s.rows.Hour(ctx, way(w, p, &bare, out.Bare.LargestMW))
		if err != nil {
			return nil, err
		}
		out.Ways[w] = priced(&closed)
	}
	return out, nil
}

// way is the hour with no more freedom than one way to close the gap of the dispatch d needs. Its
// rows count damping as those of the hour p do, so that no way costs less than the mix.
func way(w int, p *formulate.Problem, d *solve.Hour, largestMW float64) *fleet.Hour {
	h := p.Hour
	out := *h
	out.MostInertiaMWs = p.MostInertiaMWs
	out.Units = append([]fleet.Unit(nil), h.Units...)
	out.Losses = append([]fleet.HourLoss(nil), h.Losses...)
	for i := range h.Units {
		u, part := &out.Units[i], &d.Dispatch[i]
		if w != Machines && u.Commit { // who runs stays
			u.Count, u.MustRun = part.On, true
		}
		if w != Response { // what is held stays
			n := float64(max(part.On, 1))
			synthetic := part.InertiaMWs
			if u.Commit {
				synthetic = 0
			}
			u.ResponseCapMW = min(u.ResponseCapMW, part.ResponseMW/n)
			u.DownCapMW = min(u.DownCapMW, part.DownMW/n)
			u.SyntheticCapMWs = min(u.SyntheticCapMWs, synthetic/n)
		}
		if more := u.Count - part.On; u.Commit && more > 0 && u.ResponseCapMW+u.DownCapMW > 0 && w == Machines {
			further := *u // who comes on beside them holds nothing
			further.Count, further.ResponseCapMW, further.DownCapMW = more, 0, 0
			u.Count = part.On
			out.Units = append(out.Units, further)
			out.Losses = lostToo(out.Losses, i, len(out.Units)-1)
		}
	}
	if w != Smaller && largestMW > 0 { // the largest loss stays, whatever is dispatched
		out.Losses = append(out.Losses, fleet.HourLoss{Name: "the largest loss as it was", FixedMW: largestMW})
	}
	return &out
}

// lostToo lets a unit that was split off another one be lost as that one is.
func lostToo(losses []fleet.HourLoss, was, split int) []fleet.HourLoss {
	for k := range losses {
		l := losses[k]
		if !slices.Contains(l.Members, was) {
			continue
		}
		if l.Single {
			l.Members = []int{split}
			losses = append(losses, l)
		} else {
			losses[k].Members = append(slices.Clone(l.Members), split)
		}
	}
	return losses
}

// Word names what sets a floor.
func (n *Need) Word() string {
	if n.Over {
		return n.By.WordAbove()
	}
	return n.By.Word()
}
