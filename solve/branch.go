package solve

import (
	"math"
	"slices"

	"evenkeel/solve/simplex"
)

// branch splits a node by whichever of a few splits raises the bounds of both halves most.
func (s *search) branch(n *node, units []float64) {
	var splits [][2]*node
	if cover, whole, ok := s.hiddenLoss(n, units); ok {
		splits = append(splits, s.splitLoss(n, cover, whole))
	}
	for _, c := range s.fractional(n, units) {
		splits = append(splits, splitUnits(n, c, units[c]))
	}
	switch len(splits) {
	case 0:
		// Every count is fixed and its dispatch was tried: nothing better is in here.
		s.prune(max(n.bound, s.best))
		return
	case 1:
		s.push(splits[0][0])
		s.push(splits[0][1])
		return
	}
	best, at := -1.0, 0
	least := 1e-4 * (s.cutoff() - n.bound)
	for i, pair := range splits {
		score := 1.0
		for _, half := range pair {
			score *= max(s.probe(half)-n.bound, least)
		}
		if score > best {
			best, at = score, i
		}
		if math.IsInf(score, 1) {
			break
		}
	}
	for _, half := range splits[at] {
		switch {
		case math.IsInf(half.bound, 1): // no mix at all
		case half.bound >= s.cutoff():
			s.prune(half.bound)
		default:
			s.push(half)
		}
	}
}

// probe solves the relaxation of a node and keeps its bound and basis in it. The bound
// counts up to the cutoff only; an infeasible node has an infinite one.
func (s *search) probe(n *node) float64 {
	switch s.relax(n) {
	case simplex.Infeasible:
		n.bound = math.Inf(1)
		return s.cutoff()
	case simplex.Optimal:
		s.lp.DropSlack(s.m.always(), 1)
		n.basis = s.lp.Save()
	}
	n.bound = max(n.bound, s.lp.Objective())
	return min(n.bound, s.cutoff())
}

// splitLoss splits the interval of the largest loss.
func (s *search) splitLoss(n *node, cover, whole float64) [2]*node {
	width := n.high - n.low
	at := max(cover, n.low)
	at += 0.5 * (whole - at)
	at = min(max(at, n.low+0.1*width), n.high-0.1*width)
	low, high := n.copy(), n.copy()
	low.high = at
	low.capped = true
	low.caps = s.capRows(at)
	high.low = at
	return [2]*node{low, high}
}

const unitCandidates = 3 // classes whose split is tried

// fractional lists the classes to split, those nearest to a half first.
func (s *search) fractional(n *node, units []float64) []int {
	var list []int
	near := func(c int) float64 {
		f := units[c] - math.Floor(units[c])
		return math.Min(f, 1-f)
	}
	for c := range units {
		if n.lo[c] < n.hi[c] {
			list = append(list, c)
		}
	}
	slices.SortStableFunc(list, func(a, b int) int {
		switch d := near(b) - near(a); {
		case d < 0:
			return -1
		case d > 0:
			return 1
		}
		return 0
	})
	keep := 0
	for keep < len(list) && keep < unitCandidates && (keep == 0 || near(list[keep]) > 0) {
		keep++
	}
	return list[:keep]
}

// splitUnits splits the number of units on of a class.
func splitUnits(n *node, c int, units float64) [2]*node {
	k := min(max(int(math.Floor(units)), n.lo[c]), n.hi[c]-1)
	down, up := n.copy(), n.copy()
	down.hi[c] = k
	up.lo[c] = k + 1
	return [2]*node{down, up}
}

// copy is a node to be changed on its own.
func (n *node) copy() *node {
	c := *n
	c.lo, c.hi = slices.Clone(n.lo), slices.Clone(n.hi)
	return &c
}
