package dynamic

import (
	"math"

	"evenkeel/limits"
	"evenkeel/limits/replay"
)

// line lays the promises and the triggered responses out as one straight line up to the
// next event.
func (s *Simulator) line(to float64) {
	a, b := 0.0, 0.0
	for i := range s.promised {
		if p := &s.promised[i]; p.mw != 0 && s.t >= p.from {
			a += p.mw * after(p.shape, s.t-p.from)
			b += p.mw * before(p.shape, to-p.from)
		}
	}
	// Both directions of a unit are joined first: sums must not depend on which is which.
	for i := 0; i < len(s.steps); {
		unit := s.steps[i].unit
		n := s.count(unit)
		ua, ub := 0.0, 0.0
		for ; i < len(s.steps) && s.steps[i].unit == unit; i++ {
			if st := &s.steps[i]; st.active {
				ua += st.sign * st.mw * n * after(st.shape, s.t-st.from)
				ub += st.sign * st.mw * n * before(st.shape, to-st.from)
			}
		}
		a, b = a+ua, b+ub
	}
	s.lineFrom, s.lineMW, s.lineSlope = s.t, a, (b-a)/(to-s.t)
}

// Instants are sums, off by rounding: a shape that jumps at one is read a hair to the side.
const hairS = 1e-9

func after(shape limits.Shape, t float64) float64  { return shape.At(t + hairS) }
func before(shape limits.Shape, t float64) float64 { return shape.Before(t - hairS) }

// derive fills dy at instant t.
func (s *Simulator) derive(t float64, y, dy []float64) {
	x := y[0]
	mw := s.lineMW + s.lineSlope*(t-s.lineFrom)
	for i := range s.lumps {
		l := &s.lumps[i]
		seen := x
		if l.delay > 0 {
			seen = s.before(l, t-l.delay)
		}
		l.p = l.derive(seen, y, dy)
		mw += l.p
	}
	dy[0] = s.accel * (s.lost - mw - s.damping*x)
}

// before gives the deviation at an instant passed.
func (s *Simulator) before(l *lump, t float64) float64 {
	n := len(s.points)
	if t <= 0 || n == 0 {
		return 0
	}
	i := min(l.cursor, n-1)
	at := func(i int) float64 { t, _, _ := s.points[i].TYG(); return t }
	for i > 0 && at(i) > t {
		i--
	}
	for i+1 < n && at(i+1) <= t {
		i++
	}
	l.cursor = i
	if i+1 >= n {
		_, y, _ := s.points[i].TYG()
		return y
	}
	y, _ := replay.Between(s.points[i], s.points[i+1], t)
	return y
}

const (
	firstStepS = 0.01
	leastStepS = 1e-7
)

// segment integrates up to the next event, or to the instant at which a level is passed.
// It tells whether nothing moves any more to the end.
func (s *Simulator) segment() (still bool) {
	to := s.after(s.t)
	s.line(to)
	s.derive(s.t, s.y, s.k1)
	s.mark()
	if s.watch() { // a rate can be passed at once
		return false
	}
	h := firstStepS
	for s.t < to {
		h = min(h, s.maxDelayS, to-s.t)
		if math.Abs(s.k1[0]) > s.rateFrom {
			h = min(h, s.rateStepS)
		}
		if s.opt.MaxStepS > 0 {
			h = min(h, s.opt.MaxStepS)
		}
		if to-s.t-h < leastStepS { // no crumb before the event
			h = to - s.t
		}
		worst := s.attempt(h)
		if !(worst <= s.opt.TolHz) && h > leastStepS { // a number gone wild is no good either
			if shorter := 0.9 * math.Cbrt(s.opt.TolHz/worst); shorter > 0.2 {
				h *= shorter
			} else {
				h *= 0.2
			}
			continue
		}
		if at, ok := s.passes(h); ok && at < s.t+h-leastStepS {
			if at-s.t <= leastStepS {
				s.passed(s.t)
				return false
			}
			s.attempt(at - s.t)
			s.accept(at - s.t)
			s.passed(s.t)
			return false
		} else if ok {
			s.accept(h)
			s.passed(s.t)
			return false
		}
		s.accept(h)
		if s.watch() {
			return false
		}
		grow := 4.0
		if worst > 0 {
			grow = min(grow, 0.9*math.Cbrt(s.opt.TolHz/worst))
		}
		h *= max(grow, 0.3)
		if s.t < to && (to == s.horizon || len(s.events) <= 3) { // at an event, it has its say first
			if s.quiet() {
				s.rest()
				return true
			}
		}
	}
	s.t = to
	return false
}

// attempt takes one step of length h into s.try and gives its error in Hz.
func (s *Simulator) attempt(h float64) float64 {
	y, try := s.y, s.try
	for j := range y {
		try[j] = y[j] + h/2*s.k1[j]
	}
	s.derive(s.t+h/2, try, s.k2)
	s.keep(s.p2)
	for j := range y {
		try[j] = y[j] + 0.75*h*s.k2[j]
	}
	s.derive(s.t+0.75*h, try, s.k3)
	s.keep(s.p3)
	for j := range y {
		try[j] = y[j] + h*(2.0/9*s.k1[j]+1.0/3*s.k2[j]+4.0/9*s.k3[j])
	}
	s.derive(s.t+h, try, s.k4)
	// Summed, so that units alike weigh the same joined or apart.
	sum := 0.0
	for j := range y {
		sum += math.Abs(-5.0/72*s.k1[j]+1.0/12*s.k2[j]+1.0/9*s.k3[j]-1.0/8*s.k4[j]) * s.weight[j]
	}
	return h * sum
}

// accept makes the attempt of length h the state.
func (s *Simulator) accept(h float64) {
	if s.opt.Record {
		s.energy(h)
	}
	s.y, s.try = s.try, s.y
	s.k1, s.k4 = s.k4, s.k1
	s.t += h
	s.out.Steps++
	s.mark()
}

// mark records a corner of the trajectory.
func (s *Simulator) mark() {
	s.points = append(s.points, replay.At(s.t, s.y[0], s.k1[0]))
	if s.opt.Record {
		s.keep(s.p1) // the first stage of the next step, however often that is tried
		s.record()
	}
}

// quiet tells whether nothing moves any more.
func (s *Simulator) quiet() bool {
	if s.next < len(s.losses) || s.opt.Record { // what is recorded is followed to the end
		return false
	}
	for _, e := range s.events {
		if e > s.t && e != s.first+s.opt.SteadyByS && e != s.first+s.opt.UntilS && e != s.horizon {
			return false
		}
	}
	if s.lineSlope != 0 {
		return false
	}
	if limit := s.opt.SteadyHz; limit > 0 && s.t >= s.first+s.opt.SteadyByS && math.Abs(s.y[0])+60*math.Abs(s.k1[0]) < limit {
		return true
	}
	for j, d := range s.k1 {
		if math.Abs(d)*s.weight[j] > s.opt.StillHzPerS {
			return false
		}
	}
	for i := range s.lumps {
		if l := &s.lumps[i]; l.delay > 0 {
			if math.Abs(s.before(l, s.t-l.delay)-s.y[0]) > 10*l.delay*s.opt.StillHzPerS {
				return false
			}
		}
	}
	return true
}

// rest goes on to the end in a straight line.
func (s *Simulator) rest() {
	for _, at := range []float64{s.first + s.opt.SteadyByS, s.first + s.opt.UntilS, s.horizon} {
		if at > s.t {
			s.t = at
			s.k1[0] = 0
			s.mark()
		}
	}
}
