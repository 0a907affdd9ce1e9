package solve

import (
	"math"

	"evenkeel/formulate"
	"evenkeel/solve/simplex"
)

// round tries the commitments next to a relaxation: all fractions up, and to the
// nearest.
func (s *search) round(n *node, units []float64) {
	counts := make([]int, len(units))
	for _, up := range []float64{1 - 1e-6, 0.5} {
		for c, x := range units {
			counts[c] = min(max(int(math.Floor(x+up)), n.lo[c]), n.hi[c])
		}
		s.dispatch(counts, n.basis, n.capped)
	}
}

// dispatch finds the cheapest mix under a commitment, exactly, and keeps it if it is the
// best so far. A basis that was found under a cap of the largest loss is not dual
// feasible without it, so then only its rows are taken over.
func (s *search) dispatch(counts []int, from *simplex.Basis, capped bool) {
	s.key = s.key[:0]
	for _, k := range counts {
		s.key = append(s.key, byte(k), byte(k>>8))
	}
	if _, ok := s.tried[string(s.key)]; ok {
		return
	}
	s.tried[string(s.key)] = struct{}{}
	s.nodes++
	n := &node{lo: counts, hi: counts, high: math.Inf(1)}
	if !capped {
		n.basis = from.WithRows(loosen)
	}
	s.load(s.fix, n)
	if capped {
		for _, r := range from.Rows()[s.m.always():] {
			if loosen(r) == r {
				s.fix.AddRow(r)
			}
		}
	}
	tol := 0.9 * roundingShare * s.m.shortMW
	for {
		if st := s.fix.Solve(s.best); st != simplex.Optimal {
			return
		}
		if s.sep.add(s.fix, counts, 0, 0, tol) == 0 {
			break
		}
	}
	if cost := s.fix.Objective(); cost < s.best {
		s.best = cost
		s.commit = append(s.commit[:0], counts...)
		s.fix.DropSlack(s.m.always(), 1)
		s.basis = s.fix.Save()
	}
}

// loosen frees a row that holds in part of the search only.
func loosen(r *simplex.Row) *simplex.Row {
	tag, ok := r.Tag.(*rowTag)
	if !ok || tag.floor || !tag.cap && tag.row.Loss != formulate.AnyLoss {
		return r
	}
	free := *r
	free.RHS = -1e12
	return &free
}
