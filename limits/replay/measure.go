package replay

import (
	"math"
	"sort"
)

// laterByHz is how much deeper a later instant must be to count as the nadir: less is
// rounding on a plateau.
const laterByHz = 1e-9

// deepest gives the largest deviation between from and to, which must both be bounds
// of segments, and when it is first reached.
func deepest(points []point, from, to float64) (y, t float64) {
	i := sort.Search(len(points), func(i int) bool { return points[i].t >= from })
	y, t = points[i].y, points[i].t
	marked := y
	take := func(v, at float64) {
		y = max(y, v)
		if v > marked+laterByHz {
			marked, t = v, at
		}
	}
	for ; i+1 < len(points) && points[i+1].t <= to; i++ {
		a, b := points[i], points[i+1]
		if a.g > 0 && b.g < 0 && b.t > a.t {
			at, v := turn(a, b)
			take(v, at)
		}
		if b.y > y {
			take(b.y, b.t)
		}
	}
	return y, t
}

// rocof gives the steepest rise of the deviation up to SteadyUntilS, and when.
func (s *System) rocof(points []point) (hzPerS, atS float64) {
	if s.lim.WindowS > 0 {
		return steepestWindow(points, s.lim.WindowS, s.lim.SteadyUntilS)
	}
	// Between points the slope is monotone, so its largest value is at one of them.
	hzPerS = max(0, points[0].g)
	for i := 0; i+1 < len(points) && points[i+1].t <= s.lim.SteadyUntilS; i++ {
		a, b := points[i], points[i+1]
		if a.t == b.t {
			continue // a jump: its sides belong to the pieces before and after it
		}
		if a.g > hzPerS {
			hzPerS, atS = a.g, a.t
		}
		if b.g > hzPerS {
			hzPerS, atS = b.g, b.t
		}
	}
	return hzPerS, atS
}

// roundingS is how far a window's end may miss the instant it was computed from.
const roundingS = 1e-9

// steepestWindow gives the largest (y(t+w) − y(t))/w of all t > −w with t+w ≤ until (or
// t ≤ 0), and its t: before the loss frequency was at rest, so that a window that starts
// there sees all of the deviation at its end. In later ones both ends of the window travel along the points; as long as
// neither passes one, the rise is a cubic in t, whose own turning point is looked at too.
func steepestWindow(points []point, w, until float64) (hzPerS, atS float64) {
	last := len(points) - 1
	i, j := 0, 0 // the window starts in the piece after point i and ends in that after point j
	for j < last-1 && points[j+1].t <= w {
		j++
	}
	start := 0.0
	yEnd, gEnd := between(points[j], points[j+1], w)
	rise := point{t: start, y: yEnd - points[0].y, g: gEnd - points[0].g}
	best := max(0, rise.y)
	if y, t := highest(points, w); y > best {
		best, atS = y, t-w
	}

	// Windows that start after the last slope steeper than the best average cannot beat it.
	stop := last
	for stop > 0 && points[stop].g*w <= best {
		stop--
	}
	stopS := points[min(stop+1, last)].t

	for start < stopS && j < last && start+w < until-roundingS {
		dStart, dEnd := points[i+1].t-start, points[j+1].t-w-start
		next := point{}
		if dStart <= dEnd {
			next.t = points[i+1].t
		} else {
			next.t = max(start, points[j+1].t-w)
		}
		if next.t > start {
			y0, g0 := between(points[i], points[i+1], next.t)
			y1, g1 := between(points[j], points[j+1], next.t+w)
			// Slopes at the start of the interval are those of the pieces just entered.
			_, h0 := between(points[i], points[i+1], start)
			_, h1 := between(points[j], points[j+1], start+w)
			rise.g = h1 - h0
			next.y, next.g = y1-y0, g1-g0
			if rise.g > 0 && next.g < 0 {
				if at, v := turn(rise, next); v > best {
					best, atS = v, at
				}
			}
			if next.y > best {
				best, atS = next.y, next.t
			}
			rise, start = next, next.t
		}
		if dStart <= dEnd {
			i++
		} else {
			j++
		}
	}
	return best / w, atS
}

// highest gives the largest deviation before an instant, and when it is reached.
func highest(points []point, before float64) (y, t float64) {
	for i := 0; i+1 < len(points) && points[i].t < before; i++ {
		a, b := points[i], points[i+1]
		if a.y > y {
			y, t = a.y, a.t
		}
		if a.g > 0 && b.g < 0 && b.t > a.t {
			if at, v := turn(a, b); v > y && at < before {
				y, t = v, at
			}
		}
	}
	return y, t
}

// balanceTolMW is the imbalance that counts as none when nothing damps it.
const balanceTolMW = 1e-6

// steady gives Outcome.SteadyHz of the trajectory in sc.
func (s *System) steady(e Event, sc *scratch) float64 {
	worst, _ := deepest(sc.points, s.lim.SteadyByS, s.lim.SteadyUntilS)

	// push runs straight within a segment: its largest value, where response is least,
	// is at an end of one.
	push := math.Inf(-1)
	for _, v := range sc.push[2*s.steadyFrom : 2*s.steadyTo] {
		push = max(push, v)
	}
	if s.steadyFrom == s.steadyTo { // an instant, not an interval
		push = s.pushAt(sc, s.steadyFrom)
	}
	i := sort.Search(len(sc.points), func(i int) bool { return sc.points[i].t >= s.lim.SteadyUntilS })
	accel := s.lim.NominalHz / (2 * e.InertiaMWs)
	return max(worst, settle(sc.points[i].y, push, accel*e.DampingMWPerHz, accel*balanceTolMW))
}

// pushAt gives the push just after the start of segment i, or at the end of the replay.
func (s *System) pushAt(sc *scratch, i int) float64 {
	if 2*i == len(sc.push) {
		return sc.push[2*i-1]
	}
	return sc.push[2*i]
}

// leastDecayPerS is a time constant of 30,000 years: slower damping counts as none.
const leastDecayPerS = 1e-12

// settle goes on from the deviation y under a constant push in Hz/s, in steps of one
// time constant, until the deviation stands still. Without damping it stands still if
// the push is within tol of none, ends at zero if it is negative, and never if positive.
func settle(y, push, decay, tol float64) float64 {
	if decay < leastDecayPerS {
		switch {
		case push > tol:
			return math.Inf(1)
		case push < -tol:
			return 0
		}
		return y
	}
	// Each step takes the distance from rest down to 0.37 of itself.
	r := newRadau(decay, 1/decay)
	for range 2000 {
		next := max(0, r.step(y, push-decay*y, 0))
		still := math.Abs(next-y) <= 1e-13*max(1, next)
		y = next
		if still {
			break
		}
	}
	return y
}
