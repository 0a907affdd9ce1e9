package solve

import (
	"cmp"
	"slices"

	"evenkeel/limits"
	"evenkeel/limits/replay"
	"evenkeel/solve/simplex"
)

// state is what a solution of a linear program puts into the rows.
type state struct {
	inertia  float64   // MW·s, the load's own included
	response []float64 // MW, one a shape
	down     []float64 // the same downwards
	unserved float64
	short    [limits.Kinds]float64
	over     [limits.Kinds]float64 // short above nominal
	lack     float64               // MW·s lacking of the least inertia
	class    []part                // all units of each class

	replayed     []replay.Outcome // one a loss, once replayed
	replayedOver []replay.Outcome // the same of losses of load
}

// part is what one class puts in.
type part struct{ on, cost, mw, inertia, response, down float64 }

func (m *master) measure(lp *simplex.LP, st *state) {
	if st.class == nil {
		st.class = make([]part, len(m.p.Classes))
		st.response = make([]float64, len(m.p.Shapes))
		st.down = make([]float64, len(m.p.Shapes))
	}
	st.inertia = m.p.Hour.LoadInertiaMWs
	clear(st.response)
	clear(st.down)
	for c := range m.p.Classes {
		cl := &m.p.Classes[c]
		g := m.groups[c]
		var sum part
		for i := range cl.Count {
			lp.Each(m.first[c]+i, func(j int32, x float64) {
				col := &g.Cols[j]
				if !g.HasOff || j > 0 {
					sum.on += x
				}
				sum.cost += x * col.Cost
				sum.mw += x * col.P
				sum.inertia += x * col.E
				sum.response += x * col.R
				sum.down += x * col.D
			})
		}
		st.class[c] = sum
		st.inertia += sum.inertia
		if cl.Shape >= 0 {
			st.response[cl.Shape] += sum.response
		}
		if cl.Down >= 0 {
			st.down[cl.Down] += sum.down
		}
	}
	st.unserved = lp.Share(m.unserved, 1) * m.groups[m.sets[m.unserved]].Cols[1].P
	for k, s := range m.short {
		st.short[k] = lp.Share(s, 1) * m.groups[m.sets[s]].Cols[1].R
	}
	if m.floored() {
		st.lack = lp.Share(m.lack, 1) * m.groups[m.sets[m.lack]].Cols[1].R
	}
	if m.p.Above != nil {
		for k, s := range m.over {
			st.over[k] = lp.Share(s, 1) * m.groups[m.sets[s]].Cols[1].R
		}
	}
}

// lost is one loss as it stands in a state.
type lost struct {
	loss     int
	over     bool // of Problem.OverLosses
	average  int  // units that a single loss is averaged over
	mw       float64
	inertia  float64
	response []lostResponse
}

type lostResponse struct {
	shape int
	mw    float64
}

// losses lists the losses of a state that no other one is worse than in every respect.
// units is the most units of each class that may be on.
func (m *master) losses(st *state, units []int, out []lost) []lost {
	out = out[:0]
	for k := range m.p.Losses {
		out = m.addLost(out, st, units, k, false)
	}
	for k := range m.p.OverLosses {
		out = m.addLost(out, st, units, k, true)
	}
	// Dropping the dominated ones swaps, so the order is fixed first: largest first.
	slices.SortFunc(out, func(a, b lost) int {
		if a.mw != b.mw {
			return cmp.Compare(b.mw, a.mw)
		}
		if a.loss != b.loss {
			return a.loss - b.loss
		}
		return cmp.Compare(sideOf(a), sideOf(b))
	})
	n := 0
	for i := range out {
		dominated := false
		for j := 0; j < n && !dominated; j++ {
			dominated = out[j].atLeast(&out[i], m.recovers)
		}
		if !dominated {
			out[n], out[i] = out[i], out[n]
			n++
		}
	}
	return out[:n]
}

func sideOf(v lost) int {
	if v.over {
		return 1
	}
	return 0
}

// addLost adds a loss, of Problem.OverLosses if over, unless nothing is lost by it.
func (m *master) addLost(out []lost, st *state, units []int, k int, over bool) []lost {
	losses, sign := m.p.Losses, 1.0
	if over { // infeed that goes with the load makes the loss smaller
		losses, sign = m.p.OverLosses, -1
	}
	l := &losses[k]
	v := lost{loss: k, over: over, average: 1, mw: l.FixedMW}
	if len(out) < cap(out) { // keep the old slice's memory
		v.response = out[:len(out)+1][len(out)].response[:0]
	}
	for _, c := range l.Classes {
		part, cl := &st.class[c], &m.p.Classes[c]
		share := 1.0
		if l.Single {
			if units[c] == 0 {
				continue
			}
			v.average = units[c]
			share = 1 / float64(units[c])
		}
		v.mw += sign * share * part.mw
		v.inertia += share * part.inertia
		shape, response := cl.Shape, part.response
		if over {
			shape, response = cl.Down, part.down
		}
		if shape >= 0 && response > 0 {
			v.response = append(v.response, lostResponse{shape, share * response})
		}
	}
	if v.mw <= 0 {
		return out
	}
	return append(out, v)
}

// atLeast tells whether v is at least as bad as w at every instant. A lost response that
// would have drawn power later is only comparable with the same.
func (v *lost) atLeast(w *lost, recovers []bool) bool {
	if v.over != w.over || v.mw < w.mw || v.inertia < w.inertia {
		return false
	}
	for _, b := range w.response {
		if v.of(b.shape) < w.of(b.shape) { // several of its resources may share a shape
			return false
		}
	}
	for _, a := range v.response {
		if recovers[a.shape] && w.of(a.shape) != v.of(a.shape) {
			return false
		}
	}
	return true
}

func (v *lost) of(shape int) float64 {
	mw := 0.0
	for _, a := range v.response {
		if a.shape == shape {
			mw += a.mw
		}
	}
	return mw
}
