package replay

import "math"

// Event is one loss, and what is left to meet it.
type Event struct {
	LossMW         float64   // P
	InertiaMWs     float64   // E, kinetic energy left after the loss
	DampingMWPerHz float64   // D, at least 0
	ResponseMW     []float64 // R_s, MW held with each shape after the loss, in the order of NewSystem
}

// Outcome is what a replay measures. Deviations are below nominal and never negative.
type Outcome struct {
	// RoCoFHzPerS is the steepest fall of frequency: over WindowS, of all windows that
	// end between the loss and SteadyUntilS (frequency being at rest before the loss); at
	// an instant if WindowS is 0, jumps taken from both sides. A recovery does not count.
	// RoCoFS is that instant, or the start of that window, which may be before the loss.
	RoCoFHzPerS, RoCoFS float64

	// NadirHz is the largest deviation up to the latest of 60 s, SteadyUntilS and
	// WindowS, NadirS the first instant at which it is reached (to 1e-9 Hz).
	NadirHz, NadirS float64

	// SteadyHz is the larger of two values. The first is the largest deviation from
	// SteadyByS to SteadyUntilS. The second is the deviation at which frequency settles
	// if response stays at the least that all shapes together deliver between SteadyByS
	// and SteadyUntilS (a jump at either end counts with its inner side). It is +Inf
	// where that response is short of the loss and there is no damping.
	SteadyHz float64
}

// noInertiaMWs is a kilojoule: no machine has so little, but rounding may leave less of
// a sum that should be 0.
const noInertiaMWs = 1e-3

// scratch is the memory of one replay.
type scratch struct {
	push   []float64 // f0/(2E)·(P − response) just after the start and before the end of each segment, Hz/s
	points []point
}

// Run replays one event. It allocates nothing once warm and may be called from several
// goroutines.
//
// A loss that is not above 0 gives zeros. With no inertia left (a kilojoule or less), or
// with numbers that cannot be replayed (NaN, infinite, negative damping), every value is
// +Inf and both instants are 0. It panics if e.ResponseMW has not one number a shape.
func (s *System) Run(e Event) Outcome {
	sc := s.pool.Get().(*scratch)
	defer s.pool.Put(sc)
	return s.run(e, sc)
}

func (s *System) run(e Event, sc *scratch) Outcome {
	switch s.replay(e, sc) {
	case nothing:
		return Outcome{}
	case hopeless:
		inf := math.Inf(1)
		return Outcome{RoCoFHzPerS: inf, NadirHz: inf, SteadyHz: inf}
	}
	var o Outcome
	o.RoCoFHzPerS, o.RoCoFS = s.rocof(sc.points)
	o.NadirHz, o.NadirS = deepest(sc.points, 0, s.horizonS)
	o.SteadyHz = s.steady(e, sc)
	return o
}

// Trajectory gives the deviation in Hz at 0, everyS, 2·everyS, ... up to the end of the
// replay. Where Run gives +Inf for want of inertia, so does it after time 0. It panics
// if everyS is not above 0.
func (s *System) Trajectory(e Event, everyS float64) (t, dev []float64) {
	if !(everyS > 0) {
		panic("replay: a trajectory needs an interval above 0 s")
	}
	sc := s.pool.Get().(*scratch)
	defer s.pool.Put(sc)
	state := s.replay(e, sc)
	at := 0
	for i := 0; ; i++ {
		now := float64(i) * everyS
		if now > s.horizonS {
			return t, dev
		}
		v := 0.0
		switch {
		case state == hopeless && i > 0:
			v = math.Inf(1)
		case state == moving:
			for sc.points[at+1].t < now {
				at++
			}
			v, _ = between(sc.points[at], sc.points[at+1], now)
		}
		t, dev = append(t, now), append(dev, v)
	}
}

type state int

const (
	moving   state = iota
	nothing        // there is no loss
	hopeless       // there is no inertia, or no sense in the numbers
)

// replay integrates e from 0 to the horizon and leaves the trajectory in sc.points.
func (s *System) replay(e Event, sc *scratch) state {
	if len(e.ResponseMW) != len(s.shares) {
		panic("replay: an event needs the MW held with each shape")
	}
	if e.LossMW <= 0 {
		return nothing
	}
	if !(e.InertiaMWs > noInertiaMWs) || !(e.DampingMWPerHz >= 0) {
		return hopeless
	}
	accel := s.lim.NominalHz / (2 * e.InertiaMWs) // Hz/s for each MW
	decay := accel * e.DampingMWPerHz             // 1/s
	if !finite(accel) || !finite(decay) || !s.sum(e, accel, sc) {
		return hopeless
	}
	tr := tracer{decay: decay, tolHz: s.tolHz, points: sc.points[:0]}
	for i := range len(s.times) - 1 {
		tr.segment(s.times[i], s.times[i+1], sc.push[2*i], sc.push[2*i+1])
	}
	sc.points = tr.points
	if !finite(tr.y) {
		return hopeless
	}
	return moving
}

// sum fills sc.push and tells whether all of it is finite.
func (s *System) sum(e Event, accel float64, sc *scratch) bool {
	n := 2 * (len(s.times) - 1)
	if cap(sc.push) < n {
		sc.push = make([]float64, n)
	}
	push := sc.push[:n]
	for i := range push {
		push[i] = e.LossMW
	}
	for j, mw := range e.ResponseMW {
		if mw == 0 {
			continue
		}
		row := s.shares[j][:n]
		for i := range push {
			push[i] -= mw * row[i]
		}
	}
	ok := true
	for i := range push {
		push[i] *= accel
		ok = ok && finite(push[i])
	}
	sc.push = push
	return ok
}

func finite(v float64) bool { return math.Abs(v) <= math.MaxFloat64 }
