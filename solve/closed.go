package solve

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
	"evenkeel/limits/dynamic"
)

// ClosedTolHz is by how much a closed-loop simulation may pass a limit, in Hz or Hz/s: its own error,
// see dynamic.
const ClosedTolHz = 1e-3

const (
	mostMends     = 8
	closedTolStep = 2e-5
	closedStill   = 2e-5 // Hz/s: less than a millihertz until the slowest dashpot has settled
)

// prepareClosed notes which responses follow a model.
func (s *Solver) prepareClosed() {
	s.models = s.c.ModelOf()
	s.closed = len(s.c.Models) > 0
	for i := range s.c.Resources {
		s.closed = s.closed || s.c.Resources[i].SyntheticS > 0
	}
	s.sims.New = func() any { return new(dynamic.Simulator) }
}

// proven simulates a mix in closed loop. Where it leaves the corridor the rows of the hour are
// rebuilt from what was delivered and the hour is solved again, until it holds.
func (s *Solver) proven(ctx context.Context, h *fleet.Hour, near []*Trail, t *Trail, q *search, st *state, out Hour) (Hour, *search, error) {
	sim := s.sims.Get().(*dynamic.Simulator)
	defer s.sims.Put(sim)
	first := out.Cost
	effort := out.Effort
	for mends := 0; ; mends++ {
		if out.Status == Short { // nothing to prove
			out.Closed.Mended = mends
			return out, q, nil
		}
		on := NewOnline(s.c, q.m.p.Hour, out.Dispatch, st.unserved)
		t.calm = [2][]bool{} // of this mix, not of one before
		failed := s.simulate(sim, on, q.m.p, near, t, st, &out, false)
		if out.Above != nil && failed == nil { // the other side once this one holds
			failed = s.simulate(sim, on, q.m.p, near, t, st, &out, true)
		}
		out.Closed.Mended, out.Closed.MendedCost = mends, out.Cost-first
		if failed == nil {
			return out, q, nil
		}
		if mends == mostMends {
			out.Status = Short
			out.Why = fmt.Sprintf("leaves the corridor in closed loop: RoCoF %.3f Hz/s, nadir %.3f Hz, steady %.3f Hz", out.Closed.RoCoFHzPerS, out.Closed.NadirHz, out.Closed.SteadyHz)
			if a := out.Above; a != nil {
				out.Why += fmt.Sprintf("; upwards %.3f Hz/s, peak %.3f Hz, steady %.3f Hz", a.ClosedRoCoFHzPerS, a.ClosedPeakHz, a.ClosedSteadyHz)
			}
			return out, q, nil
		}
		t.shapes = s.mend(sim, st, t.shapes, failed, mends)
		p, r, err := s.search(ctx, h, t.shapes, near)
		if err != nil {
			return Hour{}, nil, err
		}
		q = r
		out, st = s.finish(p, q, s.systemOf(t.shapes))
		out.Effort.Nodes += effort.Nodes
		out.Effort.Pivots += effort.Pivots
		out.Effort.Rows += effort.Rows
		effort = out.Effort
	}
}

// failure is a loss after which a mix leaves the corridor in closed loop.
type failure struct {
	loss   dynamic.Loss
	sys    *dynamic.System
	over   bool // a loss of load
	early  bool // RoCoF or nadir fails
	steady bool
	nadirS float64
	rocofS float64
}

// simulate runs the losses of one side of nominal and fills in out: a small one can do more harm
// than a large one, where response that it sets off goes again. It stops at the first that fails
// and gives it: what the rows rebuilt from that one do not cure shows in the next round. Losses that
// are calm in every neighbour, and in their replays here, are passed over.
func (s *Solver) simulate(sim *dynamic.Simulator, on *Online, p *formulate.Problem, near []*Trail, t *Trail, st *state, out *Hour, over bool) *failure {
	l, losses, replayed, side := p.Limits, p.Losses, st.replayed, 0
	if over {
		l, losses, replayed, side = *p.Above, p.OverLosses, st.replayedOver, 1
	} else {
		out.Closed = Closed{MarginHz: math.Inf(1)}
	}
	opt := s.ClosedOptions()
	opt.SteadyHz = l.SteadyHz
	calm := make([]bool, len(losses))
	t.calm[side] = calm
	type candidate struct {
		index    int
		trip     dynamic.Loss
		severity float64 // of the open-loop replay, by the limit nearest to it
	}
	var list []candidate
	for k := range losses {
		c := candidate{index: k, trip: s.trip(on, p, &losses[k])}
		if over { // what is lost is load
			c.trip.MW -= losses[k].FixedMW
			on.LoseLoad(&c.trip, losses[k].FixedMW)
		}
		if over && c.trip.MW >= 0 || !over && c.trip.MW <= 0 {
			continue
		}
		o := replayed[k]
		c.severity = swing{rocof: o.RoCoFHzPerS, peak: o.NadirHz, steady: o.SteadyHz}.severity(l)
		if c.severity < calmShare && calmNear(near, side, k, len(losses)) {
			calm[k] = true
			continue
		}
		list = append(list, c)
	}
	// The worst come first.
	slices.SortStableFunc(list, func(a, b candidate) int { return cmp.Compare(b.severity, a.severity) })
	for _, c := range list {
		w := swingOf(sim.Run(&on.Sys, []dynamic.Loss{c.trip}, opt), over)
		calm[c.index] = w.severity(l) < calmShare
		if over {
			a := out.Above
			a.ClosedRoCoFHzPerS, a.ClosedPeakHz, a.ClosedSteadyHz = max(a.ClosedRoCoFHzPerS, w.rocof), max(a.ClosedPeakHz, w.peak), max(a.ClosedSteadyHz, w.steady)
		} else {
			out.Closed.note(&w, losses[c.index].Name, l)
		}
		f := failure{loss: c.trip, sys: &on.Sys, over: over, nadirS: w.peakS, rocofS: w.rocofS,
			early:  w.rocof > l.MaxHzPerS+ClosedTolHz || w.peak > l.NadirHz+ClosedTolHz,
			steady: w.steady > l.SteadyHz+ClosedTolHz}
		if f.early || f.steady {
			return &f
		}
	}
	return nil
}

// swing is what a loss does to frequency on its own side of nominal, in Hz and Hz/s away from it.
type swing struct{ rocof, rocofS, peak, peakS, steady float64 }

func swingOf(o *dynamic.Outcome, over bool) swing {
	if over {
		return swing{o.RiseHzPerS, o.RiseS, o.PeakHz, o.PeakS, o.SteadyOverHz}
	}
	return swing{o.RoCoFHzPerS, o.RoCoFS, o.NadirHz, o.NadirS, o.SteadyHz}
}

// severity is the share of the limit that a swing comes nearest to.
func (w swing) severity(l limits.Limits) float64 {
	return max(w.rocof/l.MaxHzPerS, w.peak/l.NadirHz, w.steady/l.SteadyHz)
}

// note counts the swing after a loss in.
func (c *Closed) note(w *swing, loss string, l limits.Limits) {
	c.Simulated++
	c.RoCoFHzPerS, c.SteadyHz = max(c.RoCoFHzPerS, w.rocof), max(c.SteadyHz, w.steady)
	if w.peak > c.NadirHz {
		c.NadirHz, c.NadirS, c.Loss = w.peak, w.peakS, loss
	}
	c.MarginHz = min(c.MarginHz, l.NadirHz-w.peak, l.SteadyHz-w.steady)
}

// trip is a loss of the hour as the simulation sees it.
func (s *Solver) trip(on *Online, p *formulate.Problem, l *formulate.Loss) dynamic.Loss {
	d := dynamic.Loss{Name: l.Name, MW: l.FixedMW}
	for _, c := range l.Classes {
		units := 1.0
		if !l.Single {
			units = float64(p.Classes[c].Count)
		}
		on.Lose(&d, p.Classes[c].Unit, units)
	}
	return d
}

// ClosedOptions are those with which mixes are proven in closed loop.
func (s *Solver) ClosedOptions() dynamic.Options {
	l := s.c.Limits
	return dynamic.Options{WindowS: l.WindowS, SteadyByS: l.SteadyByS, UntilS: l.SteadyUntilS, TolHz: closedTolStep, StillHzPerS: closedStill, SteadyHz: l.SteadyHz}
}

const (
	mendSampleS = 0.1
	mendWithin  = 0.01
	mendStep    = 0.01 // lower in each round than what was delivered, so that few rounds do
)

// mend lowers the shapes of the models to what was delivered in the simulation that failed: up
// to the nadir as it came; after it no less than at the nadir, as droop only gives way where
// frequency recovers; and within the steady band's time, where that fails, as it came.
func (s *Solver) mend(sim *dynamic.Simulator, st *state, shapes []limits.Shape, f *failure, mends int) []limits.Shape {
	if shapes == nil {
		for i := range s.c.Shapes {
			shapes = append(shapes, s.c.Shapes[i].Shape)
		}
	}
	l := s.c.Limits
	until := max(f.nadirS+5, f.rocofS+l.WindowS+5) // what comes later stays as it is
	if f.steady {
		until = max(until, min(l.SteadyUntilS, l.SteadyByS+15))
	}
	n := int(until/mendSampleS) + 1
	samples := make([][]float64, len(shapes))
	changed := make([]bool, len(shapes))
	for i, m := range s.models {
		if m == nil || st.response[i] <= 1e-6 && st.down[i] <= 1e-6 {
			continue
		}
		samples[i] = make([]float64, n)
		for j := range samples[i] {
			samples[i][j] = shapes[i].At(float64(j) * mendSampleS)
		}
	}
	opt := s.ClosedOptions()
	opt.Record, opt.UntilS = true, until
	opt.EndS = until
	if !f.steady { // what comes after the nadir is not looked at
		opt.EndS = max(f.nadirS, f.rocofS+l.WindowS) + mendSampleS
	}
	o := sim.Run(f.sys, []dynamic.Loss{f.loss}, opt)
	gone := make([]float64, len(f.sys.Units))
	for _, g := range f.loss.Units {
		gone[g.Index] += g.Much
	}
	for i, m := range s.models {
		if samples[i] == nil {
			continue
		}
		held := 0.0
		delivered := make([]float64, len(o.Times))
		for u := range f.sys.Units {
			v := &f.sys.Units[u]
			room, sign := v.UpMW, 1.0
			if f.over {
				room, sign = v.DownMW, -1
			}
			if v.Model == m && room > 0 {
				held += (v.N - gone[u]) * room
				for t := range delivered {
					delivered[t] += sign * o.MW[u][t]
				}
			}
		}
		if held <= 1e-6 {
			continue
		}
		at, atNadir := 0, math.Inf(1)
		for j := range samples[i] {
			t := float64(j) * mendSampleS
			for at+1 < len(o.Times) && o.Times[at+1] <= t {
				at++
			}
			share := delivered[at] / held
			if at+1 < len(o.Times) && o.Times[at+1] > o.Times[at] {
				share += (delivered[at+1] - delivered[at]) / held * (t - o.Times[at]) / (o.Times[at+1] - o.Times[at])
			}
			share *= 1 - mendStep*float64(mends+1) // so that every round changes something
			least := math.Inf(1)
			if f.early {
				if t <= f.nadirS {
					least, atNadir = share, share
				} else {
					least = max(share, atNadir)
					if math.IsInf(atNadir, 1) {
						least = share
					}
					if t > opt.EndS {
						least = atNadir
					}
				}
			}
			if f.steady && t >= l.SteadyByS {
				least = min(least, share)
			}
			if least < samples[i][j] {
				samples[i][j], changed[i] = least, true
			}
		}
	}
	out := append([]limits.Shape(nil), shapes...)
	for i := range samples {
		if changed[i] {
			out[i] = lowered(shapes[i], samples[i])
		}
	}
	return out
}

// lowered is a shape made of samples, and after them of what is left of the old one.
func lowered(old limits.Shape, samples []float64) limits.Shape {
	end := float64(len(samples)-1) * mendSampleS
	part := 1.0
	if v := old.At(end); v > 0 {
		part = min(1, max(0, samples[len(samples)-1]/v))
	}
	low, err := dynamic.ShapeBelow(samples, mendSampleS, mendWithin)
	if err != nil {
		return nothing
	}
	knots := low.Knots()
	for _, k := range old.Knots() {
		if k.S > end+mendSampleS {
			knots = append(knots, limits.Knot{S: k.S, Share: k.Share * part})
		}
	}
	sh, err := limits.NewShape(knots)
	if err != nil {
		return nothing
	}
	return sh
}

// nothing is the shape of a response that is of no use: it comes long after all is over.
var nothing = func() limits.Shape {
	s, err := limits.Timing{DelayS: 1e5, RampS: 1}.Shape()
	if err != nil {
		panic(err)
	}
	return s
}()
