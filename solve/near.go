package solve

import (
	"context"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/limits/replay"
)

// Trail is what solving an hour has found that helps to solve the same hour of a case that
// differs a little.
type Trail struct {
	on     []int          // units on, one a resource
	shapes []limits.Shape // as mended; nil: those of the case
	mended int
	calm   [2][]bool // losses, then those of load, that stayed under calmShare of every limit in closed loop
}

// calmShare is how much of every limit a loss may take and still be passed over on a mix between
// two that were proven.
const calmShare = 0.5

// HourNear is Hour with a look at neighbours: the same hour solved, in closed loop too, with a
// little less and a little more on offer. Their commitments are tried first, the search starts
// from the shapes of the one that was mended least, and a loss that stayed under half of every
// limit in both of them and in this mix's open-loop replay is not simulated again. Without
// neighbours it is Hour. The mix is optimal to the gap all the same, against the rows it was
// solved with.
func (s *Solver) HourNear(ctx context.Context, h *fleet.Hour, near []*Trail) (Hour, *Trail, error) {
	t := &Trail{}
	sys := s.sys
	if least := leastMended(near); least != nil {
		t.shapes, t.mended = least.shapes, least.mended
		sys = s.systemOf(t.shapes)
	}
	p, q, err := s.search(ctx, h, t.shapes, near)
	if err != nil {
		return Hour{}, nil, err
	}
	out, st := s.finish(p, q, sys)
	if s.closed && !s.opt.RowsOnly && !s.opt.SteadyOnly && !p.WithoutLimits {
		if out, q, err = s.proven(ctx, h, near, t, q, st, out); err != nil {
			return Hour{}, nil, err
		}
		t.mended += out.Closed.Mended
		out.Closed.Mended = t.mended
	}
	if s.opt.Settle {
		out.Settlement = q.settlement()
	}
	t.on = make([]int, len(h.Units))
	for c := range q.m.p.Classes {
		t.on[q.m.p.Classes[c].Unit] = q.commit[c]
	}
	return out, t, nil
}

// leastMended gives the neighbour whose shapes were lowered least often; nil where one of them
// holds with the shapes of the case.
func leastMended(near []*Trail) *Trail {
	var least *Trail
	for _, t := range near {
		if t.shapes == nil {
			return nil
		}
		if least == nil || t.mended <= least.mended {
			least = t
		}
	}
	return least
}

// systemOf prepares the replay of shapes.
func (s *Solver) systemOf(shapes []limits.Shape) *replay.System {
	var knots [][]replay.Knot
	for _, sh := range shapes {
		knots = append(knots, knotsOf(sh))
	}
	return s.system(knots)
}

// calmNear tells whether a loss was calm in every neighbour.
func calmNear(near []*Trail, side, loss, losses int) bool {
	if len(near) < 2 {
		return false
	}
	for _, t := range near {
		if len(t.calm[side]) != losses || !t.calm[side][loss] {
			return false
		}
	}
	return true
}

// follow tries the commitments of neighbours, once, from the root's relaxation.
func (s *search) follow(n *node) {
	counts := make([]int, len(s.m.p.Classes))
	for _, t := range s.near {
		if len(t.on) != len(s.m.p.Hour.Units) {
			continue
		}
		for c := range counts {
			counts[c] = min(max(t.on[s.m.p.Classes[c].Unit], n.lo[c]), n.hi[c])
		}
		s.dispatch(counts, n.basis, n.capped)
	}
	s.near = nil
}
