package dynamic

import (
	"math"

	"evenkeel/limits"
	"evenkeel/limits/replay"
)

// keep notes what each source delivers at the stage just derived.
func (s *Simulator) keep(stage []float64) {
	if !s.opt.Record {
		return
	}
	for i := range s.home {
		stage[i] = s.unitMW(i)
	}
}

// unitMW is a unit's share of what its lump delivers now, by its room.
func (s *Simulator) unitMW(i int) float64 {
	at := s.home[i]
	l := &s.lumps[at[0]]
	if len(l.parts) == 1 {
		return l.p
	}
	p := &l.parts[at[1]]
	room, all := p.up, l.up
	if l.p < 0 {
		room, all = p.down, l.down
	}
	if all <= 0 {
		return 0
	}
	return l.p * p.n * room / all
}

// stepMW gives what the triggered responses of a unit deliver at an instant of the present
// segment; before tells the side of a jump.
func (s *Simulator) stepMW(unit int, t float64, before bool) float64 {
	mw := 0.0
	for i := range s.steps {
		if st := &s.steps[i]; st.unit == unit && st.active {
			mw += st.sign * st.mw * s.count(unit) * share(st.shape, t-st.from, before)
		}
	}
	return mw
}

func share(shape limits.Shape, t float64, early bool) float64 {
	if early {
		return before(shape, t)
	}
	return after(shape, t)
}

func (s *Simulator) promisedMW(i int, t float64, before bool) float64 {
	p := &s.promised[i]
	if t < p.from || before && t <= p.from {
		return 0
	}
	return p.mw * share(p.shape, t-p.from, before)
}

// energy adds what was delivered over the step accepted, by the weights of the method, so
// that the balance closes to rounding.
func (s *Simulator) energy(h float64) {
	o := &s.out
	for i := range s.home {
		o.EnergyMWs[i] += h * (2.0/9*s.p1[i] + 1.0/3*s.p2[i] + 4.0/9*s.p3[i])
		if s.lumps[s.home[i][0]].kind == Step {
			o.EnergyMWs[i] += h / 2 * (s.stepMW(i, s.t, false) + s.stepMW(i, s.t+h, true))
		}
	}
	for i := range s.promised {
		o.EnergyMWs[len(s.home)+i] += h / 2 * (s.promisedMW(i, s.t, false) + s.promisedMW(i, s.t+h, true))
	}
	x1, x2, x3 := s.y[0], s.y[0]+h/2*s.k1[0], s.y[0]+0.75*h*s.k2[0]
	o.DampedMWs += h * s.damping * (2.0/9*x1 + 1.0/3*x2 + 4.0/9*x3)
	o.LostMWs += h * s.lost
	o.KineticMWs += (s.try[0] - s.y[0]) / s.accel
}

// record notes what each source delivers now.
func (s *Simulator) record() {
	o := &s.out
	o.Times = append(o.Times, s.t)
	o.Deviation = append(o.Deviation, s.y[0])
	for i := range s.home {
		o.MW[i] = append(o.MW[i], s.unitMW(i)+s.stepMW(i, s.t, false))
	}
	for i := range s.promised {
		o.MW[len(s.home)+i] = append(o.MW[len(s.home)+i], s.promisedMW(i, s.t, false))
	}
}

// measure reads the outcome off the trajectory.
func (s *Simulator) measure() {
	o := &s.out
	o.EndHz = s.y[0]
	if math.IsInf(s.y[0], 0) {
		o.NadirHz, o.RoCoFHzPerS, o.SteadyHz, o.InstantHzPerS = math.Inf(1), math.Inf(1), math.Inf(1), math.Inf(1)
		if s.y[0] < 0 {
			o.NadirHz, o.RoCoFHzPerS, o.SteadyHz = 0, 0, 0
			o.PeakHz, o.RiseHzPerS, o.SteadyOverHz = math.Inf(1), math.Inf(1), math.Inf(1)
		}
		return
	}
	by, until := min(s.first+s.opt.SteadyByS, s.horizon), min(s.first+max(s.opt.UntilS, s.opt.SteadyByS), s.horizon)
	o.Points = o.Points[:0]
	steepest, fall, rise := 0.0, 0.0, 0.0
	for _, p := range s.points {
		t, y, g := p.TYG()
		o.Points = append(o.Points, Point{t, y, g})
		steepest = max(steepest, math.Abs(g))
		if t <= until {
			if g > fall {
				fall, o.RoCoFS = g, t
			}
			if -g > rise {
				rise, o.RiseS = -g, t
			}
		}
	}
	o.InstantHzPerS = steepest
	o.RoCoFHzPerS, o.RiseHzPerS = fall, rise
	if s.opt.WindowS > 0 {
		o.RoCoFHzPerS, o.RoCoFS = replay.SteepestWindow(s.points, s.opt.WindowS, until)
	}
	o.NadirHz, o.NadirS = replay.Deepest(s.points, 0, s.horizon)
	o.SteadyHz, _ = replay.Deepest(s.points, by, until)
	o.NadirHz, o.SteadyHz = max(o.NadirHz, 0), max(o.SteadyHz, 0)
	if !s.rises() {
		o.RiseHzPerS, o.RiseS = 0, 0
		return
	}
	for i, p := range s.points {
		t, y, g := p.TYG()
		s.points[i] = replay.At(t, -y, -g)
	}
	if s.opt.WindowS > 0 {
		o.RiseHzPerS, o.RiseS = replay.SteepestWindow(s.points, s.opt.WindowS, until)
	}
	o.PeakHz, o.PeakS = replay.Deepest(s.points, 0, s.horizon)
	o.SteadyOverHz, _ = replay.Deepest(s.points, by, until)
	o.PeakHz, o.SteadyOverHz = max(o.PeakHz, 0), max(o.SteadyOverHz, 0)
}

// rises tells whether frequency ever goes above nominal.
func (s *Simulator) rises() bool {
	for _, p := range s.points {
		if _, y, _ := p.TYG(); y < 0 {
			return true
		}
	}
	return false
}
