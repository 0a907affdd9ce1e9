package solve

import (
	"container/heap"
	"context"
	"math"

	"evenkeel/formulate"
	"evenkeel/solve/simplex"
)

// Options of the optimiser. The zero value solves to the default gap.
type Options struct {
	Gap float64 // relative; 0: DefaultGap; below 0: to optimality
	// StartSpreadH is passed on to fleet.Hour.
	StartSpreadH float64
	// WithoutLimits dispatches without frequency limits.
	WithoutLimits bool
	// SteadyOnly asks for the steady-state limits alone, not for RoCoF and the nadir.
	SteadyOnly bool
	// RowsOnly takes the rows' word for a mix: it is neither replayed nor simulated.
	RowsOnly bool
	// Settle settles each mix at its prices: Hour.Settlement.
	Settle bool
	// NodeLimit bounds the relaxations of one hour; 0: DefaultNodeLimit. An hour that
	// reaches it is reported with the gap it has.
	NodeLimit int
}

// DefaultGap is the relative gap to which an hour is solved.
const DefaultGap = 0.001

// DefaultNodeLimit is far above what hours need.
const DefaultNodeLimit = 200_000

func (o Options) gap() float64 {
	switch {
	case o.Gap == 0:
		return DefaultGap
	case o.Gap < 0:
		return 1e-9
	}
	return o.Gap
}

// search is the branch and bound of one hour.
type search struct {
	m    *master
	sep  *separator
	opt  Options
	lp   *simplex.LP // relaxations
	fix  *simplex.LP // dispatch under a given commitment
	open nodeHeap

	tried map[string]struct{} // commitments dispatched
	key   []byte

	best   float64        // cost of the incumbent
	commit []int          // its units on, one a class
	basis  *simplex.Basis // its dispatch
	whole  state          // of the relaxation being split
	pruned float64        // least bound of the nodes given up
	nodes  int
	seq    int
	near   []*Trail // mixes of neighbours, tried first
}

// node is a part of the search: bounds on the units on, and on the largest loss.
type node struct {
	lo, hi    []int // units on, one a class
	low, high float64
	bound     float64
	basis     *simplex.Basis
	caps      []*simplex.Row
	capped    bool // high is below what losses can be
	seq       int
}

type nodeHeap []*node

func (h nodeHeap) Len() int { return len(h) }
func (h nodeHeap) Less(i, j int) bool {
	return h[i].bound < h[j].bound || h[i].bound == h[j].bound && h[i].seq > h[j].seq
}
func (h nodeHeap) Swap(i, j int) { h[i], h[j] = h[j], h[i] }
func (h *nodeHeap) Push(x any)   { *h = append(*h, x.(*node)) }
func (h *nodeHeap) Pop() any {
	old := *h
	n := old[len(old)-1]
	old[len(old)-1] = nil
	*h = old[:len(old)-1]
	return n
}

func newSearch(p *formulate.Problem, opt Options) *search {
	m := newMaster(p)
	s := &search{m: m, sep: newSeparator(m), opt: opt, tried: map[string]struct{}{}, best: math.Inf(1), pruned: math.Inf(1)}
	s.lp = simplex.New(m.groups, m.sets, m.rowShapes())
	s.fix = simplex.New(m.groups, m.sets, m.rowShapes())
	return s
}

// root is the whole hour.
func (s *search) root() *node {
	p := s.m.p
	root := &node{lo: make([]int, len(p.Classes)), hi: make([]int, len(p.Classes)), bound: math.Inf(-1)}
	for c := range p.Classes {
		cl := &p.Classes[c]
		root.hi[c] = cl.Count
		if !cl.Commit || cl.MustRun {
			root.lo[c] = cl.Count
		}
		if s.m.groups[c].HasOff && len(s.m.groups[c].Cols) == 1 {
			root.lo[c], root.hi[c] = 0, 0
		}
	}
	for k := range p.Losses {
		if p.Losses[k].Commits(p) {
			root.high = max(root.high, s.m.possible(k))
		}
	}
	return root
}

// run searches until the gap is closed. It reports the context's error if interrupted.
func (s *search) run(ctx context.Context) error {
	root := s.root()
	heap.Push(&s.open, root)
	limit := s.opt.NodeLimit
	if limit == 0 {
		limit = DefaultNodeLimit
	}
	for s.open.Len() > 0 {
		n := heap.Pop(&s.open).(*node)
		if n.bound >= s.cutoff() {
			s.prune(n.bound)
			break // best first: the rest is no better
		}
		if s.nodes >= limit {
			s.prune(n.bound)
			break
		}
		if s.nodes%16 == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
		}
		s.expand(n)
	}
	for _, n := range s.open {
		s.prune(n.bound)
	}
	s.open = nil
	return nil
}

func (s *search) cutoff() float64 {
	if math.IsInf(s.best, 1) {
		return s.best
	}
	return s.best - s.opt.gap()*math.Abs(s.best)
}

func (s *search) prune(bound float64) { s.pruned = min(s.pruned, bound) }

// bound is what the search has proven.
func (s *search) bound() float64 { return min(s.pruned, s.best) }

// load puts a node into a linear program.
func (s *search) load(lp *simplex.LP, n *node) {
	s.m.use(lp, n.high)
	for c := range s.m.p.Classes {
		for i := range s.m.p.Classes[c].Count {
			lp.Allow(s.m.first[c]+i, i >= n.lo[c], i < n.hi[c])
		}
	}
	if n.basis == nil {
		lp.Reset()
		lp.AddRow(s.m.balance())
		lp.Merit()
		if s.m.floored() {
			lp.AddRow(s.m.floorRow())
		}
	} else {
		lp.Load(n.basis)
	}
	for _, r := range n.caps {
		lp.AddRow(r)
	}
	n.caps = nil
}

// relax solves the relaxation of a node, finding rows as it goes.
func (s *search) relax(n *node) simplex.Status {
	s.nodes++
	s.load(s.lp, n)
	inertia := s.floorInertia(n)
	tol := 2e-4 * max(n.low, 0.1*n.high, 1)
	for {
		st := s.lp.Solve(s.cutoff())
		if st != simplex.Optimal {
			return st
		}
		if s.sep.add(s.lp, n.hi, n.low, inertia, tol) == 0 {
			return simplex.Optimal
		}
	}
}

// floorInertia is the least kinetic energy that a loss of at least n.low takes along.
func (s *search) floorInertia(n *node) float64 {
	if n.low <= 0 {
		return 0
	}
	p := s.m.p
	least := math.Inf(1)
	for k := range p.Losses {
		l := &p.Losses[k]
		if !l.Commits(p) || s.m.possible(k) < n.low {
			continue
		}
		if !l.Single {
			return 0
		}
		if c := l.Classes[0]; n.hi[c] > 0 {
			least = min(least, p.Hour.Units[p.Classes[c].Unit].InertiaMWs)
		}
	}
	if math.IsInf(least, 1) {
		return 0
	}
	return least
}

// expand solves a node, tries to round it, and splits it.
func (s *search) expand(n *node) {
	st := s.relax(n)
	obj := s.lp.Objective()
	if st == simplex.Infeasible {
		return
	}
	if st == simplex.Cutoff {
		s.prune(max(obj, n.bound))
		return
	}
	n.bound = max(n.bound, obj)
	s.lp.DropSlack(s.m.always(), 1)
	n.basis = s.lp.Save()
	units := s.units()
	s.m.measure(s.lp, &s.whole) // rounding measures its own solutions
	s.follow(n)
	s.round(n, units)
	if n.bound >= s.cutoff() {
		s.prune(n.bound)
		return
	}
	s.tighten(n)
	s.branch(n, units)
}

// units is how many units of each class are on, in fractions.
func (s *search) units() []float64 {
	on := make([]float64, len(s.m.p.Classes))
	for c := range on {
		on[c] = s.sep.st.class[c].on
		if r := math.Round(on[c]); math.Abs(r-on[c]) < 1e-6 {
			on[c] = r
		}
	}
	return on
}

// tighten drops unit counts whose reduced cost alone exceeds what is left to gain.
func (s *search) tighten(n *node) {
	gap := s.cutoff() - s.lp.Objective() // the node's own bound may be its parent's
	if math.IsInf(gap, 1) {
		return
	}
	for c := range s.m.p.Classes {
		if n.lo[c] == n.hi[c] {
			continue
		}
		dearOff, dearOn := math.Inf(1), math.Inf(1)
		for i := n.lo[c]; i < n.hi[c]; i++ {
			set := s.m.first[c] + i
			off, on := s.lp.Slack(set)
			if s.lp.Mixed(set) {
				off, on = 0, 0
			}
			dearOff, dearOn = min(dearOff, off), min(dearOn, on)
		}
		lo, hi := n.lo[c], n.hi[c]
		if dearOff > 1e-9 {
			n.lo[c] = max(lo, hi-int(min(gap/dearOff, 1e6)))
		} else if dearOn > 1e-9 {
			n.hi[c] = min(hi, lo+int(min(gap/dearOn, 1e6)))
		}
		if lo != n.lo[c] || hi != n.hi[c] {
			s.prune(s.cutoff()) // what was dropped is proven no better than that
		}
	}
}

// hiddenLoss looks for a loss that the relaxation hides in a fraction of a machine, and
// says how much of it is covered and how large it is when taken whole.
func (s *search) hiddenLoss(n *node, units []float64) (cover, whole float64, ok bool) {
	p := s.m.p
	if p.WithoutLimits || n.high-n.low < 1e-3*n.high {
		return 0, 0, false
	}
	worst := 0.0
	for k := range p.Losses {
		l := &p.Losses[k]
		if !l.Commits(p) {
			continue
		}
		v := lost{loss: k, average: 1, mw: l.FixedMW}
		fraction := false
		for _, c := range l.Classes {
			part := &s.whole.class[c]
			if part.on < 1e-6 {
				continue
			}
			scale := 1 / part.on
			if !l.Single {
				scale = math.Ceil(part.on-1e-6) / part.on
			}
			if scale > 1+1e-6 || math.Abs(units[c]-math.Round(units[c])) > 0 || l.Single && part.on < float64(n.hi[c])-1e-6 {
				fraction = true
			}
			v.mw += scale * part.mw
			v.inertia += scale * part.inertia
			if sh := p.Classes[c].Shape; sh >= 0 {
				v.response = append(v.response, lostResponse{sh, scale * part.response})
			}
		}
		if !fraction || v.mw <= n.low {
			continue
		}
		if x := s.sep.hidden(&s.whole, &v); x > worst && x > max(0.5, 5e-3*v.mw) {
			worst, cover, whole, ok = x, v.mw-x, min(v.mw, n.high), true
		}
	}
	return cover, whole, ok
}

func (s *search) push(n *node) {
	s.seq++
	n.seq = s.seq
	heap.Push(&s.open, n)
}
