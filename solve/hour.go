package solve

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
	"evenkeel/limits/dynamic"
	"evenkeel/limits/replay"
	"evenkeel/solve/simplex"
)

// Solver solves the hours of one case. It is safe for concurrent use.
type Solver struct {
	c    *fleet.Case
	opt  Options
	sys  *replay.System
	fast []bool // shapes fully out within FastS

	closed bool             // some resource has a dynamic model
	models []*dynamic.Model // one a shape; nil: a promise
	sims   sync.Pool        // of *dynamic.Simulator
}

// New prepares the hours of a case.
func New(c *fleet.Case, opt Options) *Solver {
	s := &Solver{c: c, opt: opt}
	var shapes [][]replay.Knot
	for _, n := range c.Shapes {
		shapes = append(shapes, knotsOf(n.Shape))
		s.fast = append(s.fast, n.Shape.FullActivationS() <= FastS)
	}
	s.sys = s.system(shapes)
	s.prepareClosed()
	return s
}

// system prepares the open-loop replay of shapes.
func (s *Solver) system(shapes [][]replay.Knot) *replay.System {
	l := s.c.Limits
	return replay.NewSystem(replay.Limits{NominalHz: l.NominalHz, WindowS: l.WindowS, SteadyByS: l.SteadyByS, SteadyUntilS: l.SteadyUntilS}, shapes)
}

func knotsOf(sh limits.Shape) []replay.Knot {
	var knots []replay.Knot
	for _, k := range sh.Knots() {
		knots = append(knots, replay.Knot{S: k.S, Share: k.Share})
	}
	return knots
}

const (
	shortTolMW  = 1e-4 // a shortfall below this is rounding
	replayTolHz = 1e-6 // by which a replayed value may pass its limit by rounding
)

// Hour finds, prices and replays the mix of one hour, and proves it in closed loop where the
// case has dynamic models. The only error is the context's.
func (s *Solver) Hour(ctx context.Context, h *fleet.Hour) (Hour, error) {
	out, _, err := s.HourNear(ctx, h, nil)
	return out, err
}

// finish describes, prices and replays the mix that a search has found.
func (s *Solver) finish(p *formulate.Problem, q *search, sys *replay.System) (Hour, *state) {
	st, excess := q.mix()
	out := s.describe(q, &st, excess)
	if !p.WithoutLimits {
		s.price(q, &st, &out)
	}
	if !s.opt.RowsOnly {
		s.replay(sys, q, &st, &out)
	}
	out.Effort = Effort{Nodes: q.nodes, Pivots: q.lp.Pivots + q.fix.Pivots, Rows: len(q.sep.order)}
	return out, &st
}

// mix goes back to the incumbent and measures it.
func (s *search) mix() (state, float64) {
	n := &node{lo: s.commit, hi: s.commit, high: math.Inf(1), basis: s.basis}
	s.load(s.fix, n)
	s.fix.Solve(math.Inf(1))
	var st state
	s.m.measure(s.fix, &st)
	excess := st.unserved - s.m.p.Hour.DemandMW
	for _, c := range st.class {
		excess += c.mw
	}
	return st, excess
}

func (s *Solver) describe(q *search, st *state, excess float64) Hour {
	p := q.m.p
	h := p.Hour
	out := Hour{
		Index: h.Index, Time: h.Time, Cost: q.best, Bound: min(q.bound(), q.best),
		DemandMW: h.DemandMW, UnservedMW: clip(st.unserved), ExcessMW: clip(excess),
		InertiaMWs: st.inertia, Dispatch: make([]Dispatch, len(h.Units)),
	}
	if out.Cost != 0 {
		out.Gap = (out.Cost - out.Bound) / math.Abs(out.Cost)
	}
	for c := range p.Classes {
		cl := &p.Classes[c]
		u := &h.Units[cl.Unit]
		part := &st.class[c]
		d := &out.Dispatch[cl.Unit]
		*d = Dispatch{On: q.commit[c], OutputMW: part.mw, ResponseMW: part.response, DownMW: part.down, InertiaMWs: part.inertia, Cost: part.cost, CO2T: part.mw * u.CO2TPerMWh}
		if u.Renewable {
			d.CurtailedMW = clip(float64(cl.Count)*u.MaxMW - part.mw)
		}
		out.CurtailedMW += d.CurtailedMW
		out.CO2T += d.CO2T
		if cl.Shape >= 0 && s.fast[cl.Shape] {
			out.FastMW += part.response
		} else {
			out.PrimaryMW += part.response
		}
	}
	for k := range out.Limits {
		out.Limits[k].ShortMW = clip(st.short[k])
	}
	out.FloorShortMWs = clip(st.lack)
	if p.Above != nil {
		out.Above = &Above{DownPerMW: make([]float64, len(p.Shapes))}
		for k := range out.Above.Limits {
			out.Above.Limits[k].ShortMW = clip(st.over[k])
		}
		for _, mw := range st.down {
			out.Above.DownMW += mw
		}
	}
	return out
}

func clip(mw float64) float64 {
	if mw < shortTolMW {
		return 0
	}
	return mw
}

// price reads the prices of an hour off the dispatch of its mix, with the commitment held:
// the duals say what the cost does as a limit is relaxed a little, or as a little more of a
// service is there.
func (s *Solver) price(q *search, st *state, out *Hour) {
	p := q.m.p
	served := 1.0 // share of the load, which damps
	if p.Hour.DemandMW > 0 {
		served = max(0, 1-st.unserved/p.Hour.DemandMW)
	}
	out.Prices.ResponsePerMW = make([]float64, len(p.Shapes))
	for i, r := range q.fix.Rows() {
		y := q.fix.Duals()[i]
		tag, ok := r.Tag.(*rowTag)
		if !ok {
			out.Prices.EnergyPerMWh = y
			continue
		}
		if tag.floor {
			out.FloorPricePerMWs = max(y, 0)
			continue
		}
		if tag.cap || y <= 1e-9 {
			continue
		}
		out.Prices.InertiaPerMWs += y * tag.row.InertiaPerMWs
		left := st.inertia
		results, each := &out.Limits, out.Prices.ResponsePerMW
		if tag.row.Over {
			out.Above.LossPerMW += y
			results, each = &out.Above.Limits, out.Above.DownPerMW
			left += p.AboveInertiaMWs - p.Hour.LoadInertiaMWs
		} else {
			out.Prices.LossPerMW += y
		}
		for k, v := range tag.row.Response {
			each[k] += y * v
		}
		for _, o := range r.Own {
			if tag.row.InertiaPerMWs > 0 {
				left -= o.E / tag.row.InertiaPerMWs * st.class[o.Group].inertia
			}
		}
		l := &results[tag.row.At.Kind]
		l.Binds = true
		l.Price += y * (tag.row.HzPerInertia*left + tag.row.HzDamping*served)
	}
	settle(&out.Limits)
	if out.Above != nil {
		settle(&out.Above.Limits)
	}
}

// settle drops prices that count for nothing.
func settle(list *[limits.Kinds]LimitResult) {
	for k := range list {
		if l := &list[k]; l.Price < leastPrice {
			l.Binds, l.Price = false, 0
		}
	}
}

// leastPrice is the smallest price of a limit that counts: a row can be tight at no cost.
const leastPrice = 1e-4

// after is what a loss takes and what it leaves: MW lost, kinetic energy and response left;
// for a loss of load or export, the load lost and the response downwards left.
func (s *search) after(st *state, l *formulate.Loss, over bool) (mw, left float64, response []float64) {
	p := s.m.p
	sign := 1.0
	mw, left, response = l.FixedMW, st.inertia, st.response
	if over {
		sign = -1
		left += p.AboveInertiaMWs - p.Hour.LoadInertiaMWs
		response = st.down
	}
	response = slices.Clone(response)
	for _, c := range l.Classes {
		share := s.share(l, c)
		part, cl := &st.class[c], &p.Classes[c]
		mw += sign * share * part.mw
		left -= share * part.inertia
		shape, held := cl.Shape, part.response
		if over {
			shape, held = cl.Down, part.down
		}
		if shape >= 0 {
			response[shape] -= share * held
		}
	}
	return mw, left, response
}

// share is the share of a class that a loss takes.
func (s *search) share(l *formulate.Loss, c int) float64 {
	switch {
	case !l.Single:
		return 1
	case s.commit[c] == 0:
		return 0
	}
	return 1 / float64(s.commit[c])
}

// replay puts the mix through every loss in the time domain.
func (s *Solver) replay(sys *replay.System, q *search, st *state, out *Hour) {
	p := q.m.p
	limit := [limits.Kinds]float64{p.Limits.MaxHzPerS, p.Limits.NadirHz, p.Limits.SteadyHz}
	damping := p.Hour.DampingMWPerHz
	if p.Hour.DemandMW > 0 {
		damping *= 1 - out.UnservedMW/p.Hour.DemandMW
	}
	r := q.replayed(sys, st, p.Losses, false, damping)
	st.replayed = r.outcomes
	out.RoCoFHzPerS, out.NadirHz, out.SteadyHz = r.worst[limits.RoCoF], r.worst[limits.Nadir], r.worst[limits.Steady]
	out.WorstLoss, out.WorstLossMW, out.InertiaLeftMWs, out.NadirS = r.loss[limits.Nadir], r.deepestMW, r.deepestLeft, r.deepestS
	why := r.judge(&out.Limits, limit, limits.Kind.Word)
	if out.Above != nil {
		why = append(why, s.replayAbove(sys, q, st, out)...)
	}
	if out.UnservedMW > 0 {
		why = append(why, fmt.Sprintf("%.1f MW of load not served", out.UnservedMW))
	}
	if out.FloorShortMWs > 0 {
		why = append(why, fmt.Sprintf("%.0f MW·s of the least inertia lacking", out.FloorShortMWs))
	}
	if out.ExcessMW > 0 {
		why = append(why, fmt.Sprintf("%.1f MW of output above the load", out.ExcessMW))
	}
	if len(why) > 0 {
		out.Status, out.Why = Short, strings.Join(why, "; ")
	}
}

// replayAbove puts the mix through every loss of load and export: the same course as below
// nominal, mirrored. It says what is wrong.
func (s *Solver) replayAbove(sys *replay.System, q *search, st *state, out *Hour) (why []string) {
	p := q.m.p
	a := out.Above
	limit := [limits.Kinds]float64{p.Above.MaxHzPerS, p.Above.NadirHz, p.Above.SteadyHz}
	damping := p.AboveDampingMWPerHz
	if p.Hour.DemandMW > 0 {
		damping *= max(0, 1-out.UnservedMW/p.Hour.DemandMW)
	}
	r := q.replayed(sys, st, p.OverLosses, true, damping)
	st.replayedOver = r.outcomes
	a.RoCoFHzPerS, a.PeakHz, a.SteadyHz = r.worst[limits.RoCoF], r.worst[limits.Nadir], r.worst[limits.Steady]
	a.WorstLoss, a.WorstLossMW, a.PeakS = r.loss[limits.Nadir], r.deepestMW, r.deepestS
	return r.judge(&a.Limits, limit, limits.Kind.WordAbove)
}

// replays is what the replays of a mix's losses on one side of nominal show.
type replays struct {
	outcomes []replay.Outcome // one a loss; zero where nothing is lost
	worst    [limits.Kinds]float64
	loss     [limits.Kinds]string // the worst one's name

	// Of the loss with the deepest nadir, or the highest peak.
	deepestMW, deepestLeft, deepestS float64 // lost, MW; kinetic energy left, MW·s; its instant, s
}

func (s *search) replayed(sys *replay.System, st *state, losses []formulate.Loss, over bool, damping float64) *replays {
	r := &replays{outcomes: make([]replay.Outcome, len(losses))}
	for k := range losses {
		mw, left, response := s.after(st, &losses[k], over)
		if mw <= 0 {
			continue
		}
		o := sys.Run(replay.Event{LossMW: mw, InertiaMWs: left, DampingMWPerHz: damping, ResponseMW: response})
		r.outcomes[k] = o
		for kind, v := range [limits.Kinds]float64{o.RoCoFHzPerS, o.NadirHz, o.SteadyHz} {
			if v > r.worst[kind] {
				r.worst[kind], r.loss[kind] = v, losses[k].Name
				if limits.Kind(kind) == limits.Nadir {
					r.deepestMW, r.deepestLeft, r.deepestS = mw, left, o.NadirS
				}
			}
		}
	}
	return r
}

// judge holds the replays against the limits, fills in the results and says what is wrong.
func (r *replays) judge(results *[limits.Kinds]LimitResult, limit [limits.Kinds]float64, word func(limits.Kind) string) (why []string) {
	for k := range results {
		l, kind := &results[k], limits.Kind(k)
		l.Loss, l.Margin = r.loss[k], limit[k]-r.worst[k]
		switch {
		case l.ShortMW > 0:
			why = append(why, fmt.Sprintf("%s short by %.1f MW of the loss", word(kind), l.ShortMW))
		case !(l.Margin >= -replayTolHz):
			why = append(why, fmt.Sprintf("%s %s in the replay, limit %.3g", word(kind), beyond(kind, r.worst[k]), limit[k]))
		}
	}
	return why
}

// collapseHz is a deviation far beyond any protection (common practice): what a replay shows
// there is only that nothing holds frequency.
const collapseHz = 5

func beyond(k limits.Kind, v float64) string {
	switch {
	case k == limits.RoCoF:
		return fmt.Sprintf("%.3f Hz/s", v)
	case v > collapseHz:
		return fmt.Sprintf("beyond %d Hz (collapse)", collapseHz)
	}
	return fmt.Sprintf("%.3f Hz", v)
}

// capRows keeps every loss on several resources under a cap that it could pass.
func (s *search) capRows(capMW float64) []*simplex.Row {
	var rows []*simplex.Row
	for k := range s.m.p.Losses {
		if l := &s.m.p.Losses[k]; l.Commits(s.m.p) && !l.Single && s.m.possible(k) > capMW {
			rows = append(rows, s.m.capRow(k, capMW))
		}
	}
	return rows
}
