package dynamic

import (
	"math"

	"evenkeel/limits/replay"
)

// passes looks for the first instant within the step attempted at which a watched level
// is passed outwards.
func (s *Simulator) passes(h float64) (at float64, ok bool) {
	low, high := s.armed() // the nearest levels below and above nominal
	y0, y1 := s.y[0], s.try[0]
	a := replay.At(s.t, y0, s.k1[0])
	b := replay.At(s.t+h, y1, s.k4[0])
	first := math.Inf(1)
	look := func(sign, level float64) {
		if math.IsInf(level, 1) || sign*y0 >= level {
			return
		}
		end, top := s.t+h, sign*y1
		if top < level {
			// It may have been beyond in between.
			if !(sign*s.k1[0] > 0 && sign*s.k4[0] < 0) {
				return
			}
			t, y := replay.Turn(a, b)
			if sign*y < level {
				return
			}
			end = t
		}
		lo, hi := s.t, end
		for range 50 {
			mid := lo + (hi-lo)/2
			if y, _ := replay.Between(a, b, mid); sign*y >= level {
				hi = mid
			} else {
				lo = mid
			}
		}
		first = min(first, hi)
	}
	look(1, low)
	look(-1, high)
	return first, !math.IsInf(first, 1)
}

// armed gives the nearest level not yet passed that anything watches, on either side.
func (s *Simulator) armed() (low, high float64) {
	low, high = math.Inf(1), math.Inf(1)
	x := s.y[0]
	for i := range s.steps {
		st := &s.steps[i]
		if st.active || s.t < st.readyAt {
			continue
		}
		if st.sign > 0 && x < st.level {
			low = min(low, st.level)
		}
		if st.sign < 0 && -x < st.level {
			high = min(high, st.level)
		}
	}
	for i := range s.relay {
		r := &s.relay[i]
		if r.done || r.beyond || r.LevelHz <= 0 {
			continue
		}
		if !r.Over && x < r.LevelHz {
			low = min(low, r.LevelHz)
		}
		if r.Over && -x < r.LevelHz {
			high = min(high, r.LevelHz)
		}
	}
	return low, high
}

// near is how near to a level counts as there: the step that ends on it is off by its error.
func (s *Simulator) near() float64 { return 5*s.opt.TolHz + 1e-6 }

// passed sets off what watches the levels that frequency is at.
func (s *Simulator) passed(t float64) {
	x := s.y[0]
	for i := range s.steps {
		st := &s.steps[i]
		if !st.active && t >= st.readyAt && st.sign*x >= st.level-s.near() {
			s.setOff(st)
		}
	}
	for i := range s.relay {
		r := &s.relay[i]
		if r.done || r.beyond || r.LevelHz <= 0 || r.side()*x < r.LevelHz-s.near() {
			continue
		}
		s.pickUp(r)
	}
}

func (r *relay) side() float64 {
	if r.Over {
		return -1
	}
	return 1
}

func (s *Simulator) pickUp(r *relay) {
	r.beyond, r.since = true, s.t
	if at := s.t + r.DelayS; at < s.horizon {
		s.events = append(s.events, at)
	}
}

// watch follows relays after a step: rates of change passed, levels come back from. It tells
// whether the line of events has changed.
func (s *Simulator) watch() (changed bool) {
	for i := range s.relay {
		r := &s.relay[i]
		if r.done {
			continue
		}
		beyond := false
		if r.LevelHz > 0 {
			if !r.beyond {
				continue // picked up where the level is passed
			}
			beyond = r.side()*s.y[0] >= r.LevelHz-s.near()
		}
		if r.HzPerS > 0 {
			rate := s.k1[0]
			if r.WindowS > 0 {
				rate = (s.y[0] - s.past(s.t-r.WindowS)) / r.WindowS
			}
			beyond = beyond || math.Abs(rate) >= r.HzPerS
		}
		switch {
		case beyond && !r.beyond:
			s.pickUp(r)
			changed = true
		case !beyond && r.beyond:
			r.beyond = false
		}
	}
	return changed
}

// past gives the deviation at an instant passed, searching from the end.
func (s *Simulator) past(t float64) float64 {
	if t <= 0 {
		return 0
	}
	for i := len(s.points) - 2; i >= 0; i-- {
		if at, _, _ := s.points[i].TYG(); at <= t {
			y, _ := replay.Between(s.points[i], s.points[i+1], t)
			return y
		}
	}
	return 0
}
