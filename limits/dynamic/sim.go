package dynamic

import (
	"math"
	"slices"

	"evenkeel/limits"
	"evenkeel/limits/replay"
)

// Simulator runs simulations and keeps their memory. It is not for concurrent use.
type Simulator struct {
	sys   *System
	opt   Options
	out   Outcome
	lumps []lump
	home  [][2]int // lump and part of each unit
	steps []step
	relay []relay

	promised []promised

	t       float64
	y       []float64 // y[0] is x, the deviation below nominal; then the states of the lumps
	horizon float64
	first   float64 // instant of the first loss
	events  []float64
	losses  []Loss
	next    int // into losses

	lost      float64 // MW
	inertia   float64
	load      float64
	accel     float64 // f0/(2·E)
	damping   float64 // MW/Hz
	maxDelayS float64 // least measuring delay: no step may be longer
	rateStepS float64 // nor longer than this where frequency changes faster than rateFrom: relays watch
	rateFrom  float64 // Hz/s

	lineFrom, lineMW, lineSlope float64 // promises and triggered responses: MW at lineFrom and MW/s

	points []replay.Point

	k1, k2, k3, k4, try, weight []float64
	p1, p2, p3                  []float64 // recorded stages
}

// promised is a promise under way.
type promised struct {
	shape limits.Shape
	mw    float64
	from  float64
}

// step is a triggered response of one direction.
type step struct {
	unit    int
	name    string
	sign    float64
	level   float64
	mw      float64 // of one unit
	shape   limits.Shape
	ends    float64 // of the course, from the trigger on; +Inf: never
	rest    float64
	active  bool
	from    float64 // instant of the trigger
	readyAt float64
}

// relay is a relay's state.
type relay struct {
	Relay
	done   bool
	beyond bool
	since  float64
}

// Run simulates a sequence of losses. The outcome is valid until the next run.
func (s *Simulator) Run(sys *System, losses []Loss, o Options) *Outcome {
	s.start(sys, losses, o)
	for s.t < s.horizon {
		s.happen()
		if !(s.inertia > 0) { // nothing to hold frequency
			s.collapse()
			break
		}
		if s.segment() {
			break
		}
	}
	s.measure()
	return &s.out
}

func (s *Simulator) start(sys *System, losses []Loss, o Options) {
	if o.TolHz == 0 {
		o.TolHz = DefaultTolHz
	}
	if o.StillHzPerS == 0 {
		o.StillHzPerS = DefaultStillHzPerS
	}
	s.sys, s.opt = sys, o
	s.losses = append(s.losses[:0], losses...)
	slices.SortStableFunc(s.losses, func(a, b Loss) int {
		switch {
		case a.AtS < b.AtS:
			return -1
		case a.AtS > b.AtS:
			return 1
		}
		return 0
	})
	s.next, s.first = 0, 0
	if len(s.losses) > 0 {
		s.first = s.losses[0].AtS
	}
	last := s.first
	if n := len(s.losses); n > 0 {
		last = s.losses[n-1].AtS
	}
	s.horizon = max(s.first+max(o.UntilS, LeastHorizonS), last+LeastHorizonS)
	if o.EndS > 0 {
		s.horizon = min(s.horizon, o.EndS)
	}
	s.lumps = s.lumps[:0]
	s.steps = s.steps[:0]
	n := 1
	s.maxDelayS, s.rateStepS, s.rateFrom = math.Inf(1), math.Inf(1), math.Inf(1)
	s.home = s.home[:0]
	for i := range sys.Units {
		u := &sys.Units[i]
		p := partOf(u, sys.NominalHz)
		at := -1
		for j := range s.lumps {
			if s.lumps[j].takes(u.Model, &p, o.Record) {
				at = j
				break
			}
		}
		if at < 0 {
			at = len(s.lumps)
			if at < cap(s.lumps) { // keep the old parts' memory
				s.lumps = s.lumps[:at+1]
			} else {
				s.lumps = append(s.lumps, lump{})
			}
			l := &s.lumps[at]
			l.prepare(u.Model, n)
			n += l.states
			if l.delay > 0 {
				s.maxDelayS = min(s.maxDelayS, l.delay)
			}
		}
		l := &s.lumps[at]
		s.home = append(s.home, [2]int{at, len(l.parts)})
		l.parts = append(l.parts, p)
		if l.kind == Step {
			s.addSteps(i)
		}
	}
	for i := range s.lumps {
		s.lumps[i].total()
	}
	grow := func(v *[]float64) {
		if cap(*v) < n {
			*v = make([]float64, n, 2*n)
		}
		*v = (*v)[:n]
		clear(*v)
	}
	for _, v := range []*[]float64{&s.y, &s.k1, &s.k2, &s.k3, &s.k4, &s.try, &s.weight} {
		grow(v)
	}
	s.relay = s.relay[:0]
	for _, r := range sys.Relays {
		s.relay = append(s.relay, relay{Relay: r})
		if r.HzPerS > 0 && r.WindowS > 0 {
			s.rateStepS, s.rateFrom = min(s.rateStepS, r.WindowS/20), min(s.rateFrom, r.HzPerS/3)
		}
	}
	s.promised = s.promised[:0]
	for _, p := range sys.Promises {
		from := math.Inf(1)
		for _, l := range s.losses {
			if l.MW*p.MW > 0 {
				from = min(from, l.AtS)
			}
		}
		s.promised = append(s.promised, promised{p.Shape, p.MW, from})
	}
	s.events = append(s.events[:0], s.horizon)
	for _, at := range []float64{s.first + o.SteadyByS, s.first + o.UntilS} {
		if at < s.horizon {
			s.events = append(s.events, at)
		}
	}
	for _, p := range s.promised {
		if p.mw != 0 && p.from < s.horizon {
			s.knots(p.shape, p.from)
		}
	}
	s.t, s.lost, s.inertia, s.load = 0, 0, sys.InertiaMWs, sys.LoadMW
	s.points = s.points[:0]
	keep := s.out
	s.out = Outcome{Points: keep.Points[:0], Happenings: keep.Happenings[:0], Times: keep.Times[:0], Deviation: keep.Deviation[:0], MW: keep.MW[:0], EnergyMWs: keep.EnergyMWs[:0]}
	if o.Record {
		sources := len(sys.Units) + len(s.promised)
		s.out.MW, s.out.EnergyMWs = make([][]float64, sources), make([]float64, sources)
		s.out.Times, s.out.Deviation, s.out.Happenings = nil, nil, nil
		s.p1, s.p2, s.p3 = make([]float64, sources), make([]float64, sources), make([]float64, sources)
	}
	s.settleConstants()
}

func (s *Simulator) addSteps(i int) {
	u := &s.sys.Units[i]
	shape, err := u.Model.Course.Shape()
	if err != nil {
		return // Check refuses it
	}
	c := u.Model.Course
	ends := math.Inf(1)
	if c.HoldS > 0 {
		ends = c.DelayS + c.RampS + c.HoldS + c.WithdrawS + c.RecoveryS + c.ReturnS
	}
	for _, d := range []struct{ sign, mw float64 }{{1, u.UpMW}, {-1, u.DownMW}} {
		if d.mw > 0 {
			s.steps = append(s.steps, step{unit: i, name: u.Name, sign: d.sign, level: u.Model.LevelHz, mw: d.mw, shape: shape, ends: ends, rest: u.Model.RestS, readyAt: math.Inf(-1)})
		}
	}
}

// count is how many of a unit are left.
func (s *Simulator) count(unit int) float64 {
	at := s.home[unit]
	return s.lumps[at[0]].parts[at[1]].n
}

// knots lists the instants at which a shape changes its course.
func (s *Simulator) knots(shape limits.Shape, from float64) {
	for _, k := range shape.Knots() {
		if at := from + k.S; at < s.horizon {
			s.events = append(s.events, at)
		}
	}
}

// settleConstants works out what the swing equation divides by, and what an error in each
// state weighs in Hz: what it moves in half a second.
func (s *Simulator) settleConstants() {
	s.accel = s.sys.NominalHz / (2 * max(s.inertia, 1e-9))
	s.damping = s.sys.DampingPctPerHz / 100 * s.load
	s.weight[0] = 1
	for i := range s.lumps {
		l := &s.lumps[i]
		for j := range l.states {
			s.weight[l.at+j] = 0.5 * s.accel * l.weight()
		}
	}
}

// after gives the next instant after t at which something is known to change.
func (s *Simulator) after(t float64) float64 {
	next := s.horizon
	keep := s.events[:0]
	for _, e := range s.events {
		if e > t {
			keep = append(keep, e)
			next = min(next, e)
		}
	}
	s.events = keep
	if s.next < len(s.losses) && s.losses[s.next].AtS > t {
		next = min(next, s.losses[s.next].AtS)
	}
	return next
}

// happen carries out what is due now.
func (s *Simulator) happen() {
	changed := false
	for s.next < len(s.losses) && s.losses[s.next].AtS <= s.t {
		s.lose(&s.losses[s.next])
		s.next++
		changed = true
	}
	for i := range s.relay {
		r := &s.relay[i]
		if !r.done && r.beyond && s.t >= r.since+r.DelayS-1e-12 {
			s.act(r)
			changed = true
		}
	}
	for i := range s.steps {
		st := &s.steps[i]
		if st.active && s.t >= st.from+st.ends {
			st.active = false
			st.readyAt = st.from + st.ends + st.rest
			if st.readyAt < s.horizon {
				s.events = append(s.events, st.readyAt)
			}
		}
		if !st.active && s.t >= st.readyAt && st.sign*s.y[0] >= st.level {
			s.setOff(st)
		}
	}
	if changed {
		s.settleConstants()
	}
}

func (s *Simulator) lose(l *Loss) {
	s.lost += l.MW
	s.load = max(s.load-l.LoadMW, 0)
	s.inertia -= l.InertiaMWs
	for _, g := range l.Units {
		at := s.home[g.Index]
		lump := &s.lumps[at[0]]
		p := &lump.parts[at[1]]
		left := max(p.n-g.Much, 0)
		if total := lump.up + lump.down; total > 0 { // what the lost ones delivered goes with them
			keep := 1 - (p.n-left)*(p.up+p.down)/total
			for j := range lump.states {
				s.y[lump.at+j] *= keep
			}
		}
		p.n = left
		lump.total()
	}
	for _, g := range l.Promises { // less of either sign
		p := &s.promised[g.Index]
		p.mw = math.Copysign(max(math.Abs(p.mw)-g.Much, 0), p.mw)
	}
	s.note(l.Name, "lost", l.MW)
}

func (s *Simulator) act(r *relay) {
	r.done = true
	if r.ShedShare > 0 {
		mw := min(r.ShedShare*s.sys.LoadMW, s.load)
		s.load -= mw
		s.lost -= mw
		s.note(r.Name, "shed", mw)
	}
	if r.LostMW != 0 || r.InertiaMWs != 0 {
		s.lost += r.LostMW
		s.inertia -= r.InertiaMWs
		s.note(r.Name, "tripped", r.LostMW)
	}
}

func (s *Simulator) setOff(st *step) {
	st.active, st.from = true, s.t
	s.knots(st.shape, s.t)
	if end := s.t + st.ends; end < s.horizon {
		s.events = append(s.events, end)
	}
	s.note(st.name, "set off", st.sign*st.mw*s.count(st.unit))
}

func (s *Simulator) note(name, what string, mw float64) {
	s.out.Happenings = append(s.out.Happenings, Happening{s.t, name, what, mw})
}

// collapse ends a run in which no kinetic energy is left.
func (s *Simulator) collapse() {
	s.y[0] = math.Inf(1)
	if s.lost < 0 {
		s.y[0] = math.Inf(-1)
	}
	s.note("", "nothing synchronised is left", 0)
}
