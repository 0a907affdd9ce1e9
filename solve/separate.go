package solve

import (
	"math"

	"evenkeel/formulate"
	"evenkeel/limits"
	"evenkeel/solve/simplex"
)

// separator finds the frequency rows that a solution breaks.
type separator struct {
	m    *master
	scan *limits.Scan
	over *limits.Scan // above nominal; nil: no limits there
	st   state

	lost     []lost
	response []float64
	broken   [2 * limits.Worsts][]violation // those above nominal after those below

	found map[foundKey]struct{} // every (loss, instant) a row was made for
	order []foundKey
}

type foundKey struct {
	loss int
	over bool
	at   limits.Instant
}

type violation struct {
	lost   lost
	at     limits.Instant
	excess float64
}

func newSeparator(m *master) *separator {
	p := m.p
	s := &separator{
		m:        m,
		scan:     limits.NewScan(p.Limits, p.Shapes, p.DampingA0, p.Hour.DampingMWPerHz),
		response: make([]float64, len(p.Shapes)),
		found:    map[foundKey]struct{}{},
	}
	if p.Above != nil {
		s.over = limits.NewScan(*p.Above, p.Shapes, p.AboveA0, p.AboveDampingMWPerHz)
	}
	return s
}

const (
	rowsPerLimit = 4   // rows added for each limit in one round
	worthAdding  = 0.3 // of the worst violation
)

// add measures the solution of lp and adds the rows it breaks by more than tolMW.
// units is the most units of each class that may be on. floorMW > 0 asks besides that
// some loss of at least that size, taking at least floorInertia, be survived. It
// reports how many rows were added.
func (s *separator) add(lp *simplex.LP, units []int, floorMW, floorInertia, tolMW float64) int {
	s.m.measure(lp, &s.st)
	if s.m.p.WithoutLimits {
		return 0
	}
	s.lost = s.m.losses(&s.st, units, s.lost)
	for k := range s.broken {
		s.broken[k] = s.broken[k][:0]
	}
	for i := range s.lost {
		s.check(s.lost[i], tolMW)
	}
	if floorMW > 0 {
		s.check(lost{loss: formulate.AnyLoss, average: 1, mw: floorMW, inertia: floorInertia}, tolMW)
	}
	added := 0
	for k := range s.broken {
		list := s.broken[k]
		worst := 0.0
		for _, v := range list {
			worst = max(worst, v.excess)
		}
		for n := 0; n < rowsPerLimit; n++ {
			at := -1
			for i, v := range list {
				if v.excess >= worthAdding*worst && (at < 0 || v.excess > list[at].excess) {
					at = i
				}
			}
			if at < 0 || worst <= 0 {
				break
			}
			v := list[at]
			list[at].excess = math.Inf(-1)
			if has(lp, v) {
				continue
			}
			key := foundKey{v.lost.loss, v.lost.over, v.at}
			if _, ok := s.found[key]; !ok {
				s.found[key] = struct{}{}
				s.order = append(s.order, key)
			}
			var row formulate.Row
			if v.lost.over {
				row = s.m.p.OverRow(v.lost.loss, s.over.Row(v.at))
			} else {
				row = s.m.p.Row(v.lost.loss, s.scan.Row(v.at))
			}
			if v.lost.loss == formulate.AnyLoss {
				row.MW = v.lost.mw
			}
			lp.AddRow(s.m.row(row, v.lost.average, v.lost.inertia))
			added++
		}
	}
	return added
}

// has tells whether the program holds the row of a violation already: it is then broken
// by no more than rounding.
func has(lp *simplex.LP, v violation) bool {
	const sameS = 1e-9
	for _, r := range lp.Rows() {
		tag, ok := r.Tag.(*rowTag)
		if !ok || tag.cap || tag.floor || tag.row.Loss != v.lost.loss || tag.row.Over != v.lost.over || tag.average != v.lost.average {
			continue
		}
		a, b := tag.row.At, v.at
		if a.Kind == b.Kind && a.Balance == b.Balance && a.Before == b.Before && math.Abs(a.FromS-b.FromS) < sameS && math.Abs(a.ToS-b.ToS) < sameS &&
			(v.lost.loss != formulate.AnyLoss || tag.row.MW >= v.lost.mw) {
			return true
		}
	}
	return false
}

// worst is the worst instants after a loss, in MW of the loss not covered once
// shortfalls are counted in.
func (s *separator) worst(st *state, v *lost, out *[limits.Worsts]limits.Worst) {
	p := s.m.p
	scan, held, short, inertia := s.scan, st.response, &st.short, st.inertia
	steady, damping := p.Limits.SteadyHz, p.Hour.DampingMWPerHz
	if v.over {
		scan, held, short, inertia = s.over, st.down, &st.over, st.inertia-p.Hour.LoadInertiaMWs+p.AboveInertiaMWs
		steady, damping = p.Above.SteadyHz, p.AboveDampingMWPerHz
	}
	copy(s.response, held)
	for _, r := range v.response {
		s.response[r.shape] -= r.mw
	}
	left := max(inertia-v.inertia, 0)
	// Where the steady band is short, nothing is asked of the nadir within its time: rows there
	// would not hold for mixes that keep it. The replay shows what such an hour reaches.
	scan.Worst(v.mw, left, s.response, out)
	// A shortfall makes the loss smaller for its limit. The instant that is worst then is
	// not the one that is worst for the whole loss.
	for kind, short := range short {
		if short <= 0 {
			continue
		}
		var less [limits.Worsts]limits.Worst
		scan.Worst(v.mw-short, left, s.response, &less)
		for k := range out {
			if int(out[k].At.Kind) == kind {
				out[k] = less[k]
			}
		}
	}
	if p.Hour.DemandMW > 0 {
		out[limits.WorstBalance].ExcessMW += steady * damping * st.unserved / p.Hour.DemandMW
	}
}

func (s *separator) check(v lost, tolMW float64) {
	var worst [limits.Worsts]limits.Worst
	s.worst(&s.st, &v, &worst)
	list := s.broken[:limits.Worsts]
	if v.over {
		list = s.broken[limits.Worsts:]
	}
	for k := range worst {
		if worst[k].ExcessMW > tolMW {
			list[k] = append(list[k], violation{v, worst[k].At, worst[k].ExcessMW})
		}
	}
}

// hidden is the loss of a fraction of a machine, taken whole: the worst excess over all
// instants of a loss as it would be if the units behind it ran at the output that their
// fractions run at now.
func (s *separator) hidden(st *state, v *lost) float64 {
	var worst [limits.Worsts]limits.Worst
	s.worst(st, v, &worst)
	excess := math.Inf(-1)
	for k := range worst {
		excess = max(excess, worst[k].ExcessMW)
	}
	return excess
}
