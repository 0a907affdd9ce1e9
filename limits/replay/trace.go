package replay

import "math"

// point is a corner of the trajectory: the deviation y in Hz and its slope g in Hz/s at
// t. Where the slope jumps, two points have the same t.
type point struct{ t, y, g float64 }

// leastStepS keeps time moving where the time constant is below its rounding.
const leastStepS = 1e-9

// tracer integrates y' = q(t) − decay·y, y ≥ 0, over segments in which q is linear.
type tracer struct {
	decay  float64 // D·f0/(2·E), 1/s
	tolHz  float64
	y      float64
	points []point
}

// segment goes on from t0 to t1, q running straight from q0 to q1.
//
// The slope of an exponential plus a line is monotone, so within a segment y bends one
// way only: it can touch zero once at most, and rise from it once at most.
func (tr *tracer) segment(t0, t1, q0, q1 float64) {
	slope := (q1 - q0) / (t1 - t0)
	t := t0
	if tr.y <= 0 && q0 <= 0 {
		t = tr.hold(t0, t0, t1, q0, q1, slope)
	} else {
		tr.add(point{t, tr.y, q0 - tr.decay*tr.y})
	}
	for t < t1 {
		from := tr.points[len(tr.points)-1]
		h, n, last := tr.steps(from.g, slope, t1-t)
		r := newRadau(tr.decay, h)
		start := t
		for i := 1; i <= n; i++ {
			to := point{t: start + float64(i)*h, y: r.step(from.y, from.g, slope)}
			if last && i == n {
				to.t = t1
				to.g = q1 - tr.decay*to.y
			} else {
				to.g = q0 + slope*(to.t-t0) - tr.decay*to.y
			}
			if hit, ok := touchdown(from, to); ok {
				tr.add(point{hit, 0, q0 + slope*(hit-t0)})
				t = tr.hold(hit, t0, t1, q0, q1, slope)
				break
			}
			tr.add(to)
			t, tr.y, from = to.t, to.y, to
		}
	}
}

// hold keeps y at zero from t until q is positive or the segment ends, and returns
// when that is.
func (tr *tracer) hold(t, t0, t1, q0, q1, slope float64) float64 {
	tr.y = 0
	tr.add(point{t, 0, 0})
	free := t1
	if slope > 0 && q1 > 0 {
		free = min(t1, max(t, t0-q0/slope))
	}
	if free > t {
		tr.add(point{free, 0, 0})
	}
	return free
}

// add appends p unless it is already there.
func (tr *tracer) add(p point) {
	if n := len(tr.points); n == 0 || tr.points[n-1] != p {
		tr.points = append(tr.points, p)
	}
}

// steps chooses the length h of the next steps and their number n, given the slope g of
// y, the slope of q and the time left in the segment; last says whether they fill it.
//
// With A = |d²y/dt²|/decay², the amplitude of the exponential in y, and z = decay·h, the
// cubic misses y by A·z⁴/384 at most, and in a long step, where the exponential dies on
// the way, by A·(1 + 4/27·z). Radau IIA misses it by A·z⁶/7200 at most, and in a long
// step by A. As A only shrinks, h stays good enough; it is kept for a quarter of a time
// constant, over which it could have grown by 6 %.
func (tr *tracer) steps(g, slope, left float64) (h float64, n int, last bool) {
	k := tr.decay
	bend := math.Abs(slope - k*g) // |d²y/dt²|
	if bend > tr.tolHz*k*k {
		h = math.Sqrt(math.Sqrt(384 * tr.tolHz / (bend * k * k)))
	} else {
		h = 3.5 * tr.tolHz * k / bend // A within the tolerance: misses by 1.5 of it
	}
	// Without curvature h is NaN or infinite, and any step is exact.
	if !(h < left) {
		return left, 1, true
	}
	all := math.Ceil(left / max(h, leastStepS)) // no crumb at the end
	h = left / all
	some := 1 + math.Floor(0.25/(k*h))
	if some >= all {
		return h, int(all), true
	}
	return h, int(some), false
}

// radau is one step h of the three-stage Radau IIA method for y' = q(t) − decay·y with
// q linear. For a linear equation the stages can be eliminated, which leaves
// y + atG·y' + atSlope·q', the weights being rational functions of decay·h.
type radau struct{ atG, atSlope float64 }

func newRadau(decay, h float64) radau {
	z := decay * h
	d := h / (1 + z*(3./5+z*(3./20+z/60)))
	return radau{
		atG:     d * (1 + z*(1./10+z/60)),
		atSlope: d * h * (1./2 + z*(2./15+z/60)),
	}
}

// step gives y at the end of a step that starts at y with the slope g, slope being q'.
func (r radau) step(y, g, slope float64) float64 {
	return y + r.atG*g + r.atSlope*slope
}

// touchdown gives the first instant between a and b at which y falls below zero.
func touchdown(a, b point) (float64, bool) {
	lo, hi := a.t, b.t
	switch {
	case b.y < 0:
		if a.g > 0 {
			lo, _ = turn(a, b)
		}
	case a.g < 0 && b.g > 0:
		at, low := turn(a, b)
		if low >= 0 {
			return 0, false
		}
		hi = at
	default:
		return 0, false
	}
	for range 60 {
		mid := (lo + hi) / 2
		if y, _ := between(a, b, mid); y > 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi, true
}
