package dynamic

import (
	"math"

	"evenkeel/limits"
)

// Test is the course of frequency in which a resource shows what it delivers: a straight
// fall at HzPerS (0: at once) to ToHz below nominal, where frequency stays.
type Test struct {
	HzPerS float64
	ToHz   float64
}

// At is the deviation below nominal after t seconds.
func (q Test) At(t float64) float64 {
	if q.HzPerS > 0 {
		return min(q.HzPerS*t, q.ToHz)
	}
	return q.ToHz
}

// Deliver gives what one unit delivers while frequency follows a given course, as a share of
// UpMW, every so many seconds. deviation is in Hz below nominal.
func (s *Simulator) Deliver(u *Unit, nominalHz float64, deviation func(t float64) float64, untilS, everyS float64) []float64 {
	n := int(math.Round(untilS/everyS)) + 1
	out := make([]float64, n)
	m := u.Model
	if m.Kind == Step {
		shape, err := m.Course.Shape()
		if err != nil {
			return out
		}
		set := math.Inf(1)
		for i := range out {
			at := float64(i) * everyS
			if math.IsInf(set, 1) && deviation(at) >= m.LevelHz-1e-12 {
				set = at
				if i > 0 { // where it passed the level
					a, b := deviation(at-everyS), deviation(at)
					if b > a {
						set = at - everyS*(b-m.LevelHz)/(b-a)
					}
				}
			}
			if at >= set {
				out[i] = shape.At(at - set)
			}
		}
		return out
	}
	var l lump
	one := *u
	one.N = 1
	l.prepare(m, 0)
	l.parts = append(l.parts, partOf(&one, nominalHz))
	l.total()
	y, k1, k2, k3, k4, try := make([]float64, l.states), make([]float64, l.states), make([]float64, l.states), make([]float64, l.states), make([]float64, l.states), make([]float64, l.states)
	seen := func(t float64) float64 {
		if t -= l.delay; t >= 0 {
			return deviation(t)
		}
		return 0
	}
	// Steps short beside the shortest lag, of the classic method of order 4.
	fastest := 0.0
	for _, r := range []float64{l.r1, l.r2, l.r3} {
		fastest = max(fastest, r)
	}
	steps := max(1, int(math.Ceil(everyS*fastest/0.2)))
	h := everyS / float64(steps)
	for i := range out {
		at := float64(i) * everyS
		out[i] = l.derive(seen(at), y, k1) / u.UpMW
		for j := range steps {
			t := at + float64(j)*h
			l.derive(seen(t), y, k1)
			add(try, y, k1, h/2)
			l.derive(seen(t+h/2), try, k2)
			add(try, y, k2, h/2)
			l.derive(seen(t+h/2), try, k3)
			add(try, y, k3, h)
			l.derive(seen(t+h), try, k4)
			for x := range y {
				y[x] += h / 6 * (k1[x] + 2*k2[x] + 2*k3[x] + k4[x])
			}
		}
	}
	return out
}

func add(out, y, k []float64, h float64) {
	for i := range out {
		out[i] = y[i] + h*k[i]
	}
}

// ShapeBelow makes a shape of a course sampled every so many seconds that nowhere lies above
// it: straight lines between few of its points, at most within below it where it is smooth,
// lowered where a line would lie above. The last knot is kept for ever, at the least of the
// last tenth of the course.
func ShapeBelow(share []float64, everyS, within float64) (limits.Shape, error) {
	n := len(share)
	at := []int{0}
	for i := 0; i < n-1; {
		// The farthest point that a line reaches without leaving the samples by more than within.
		j := i + 1
		for step := 2; i+step < n && fits(share, i, i+step, within); step *= 2 {
			j = i + step
		}
		lo, hi := j, min(n-1, i+2*(j-i))
		for lo < hi {
			if mid := (lo + hi + 1) / 2; fits(share, i, mid, within) {
				lo = mid
			} else {
				hi = mid - 1
			}
		}
		i = lo
		at = append(at, i)
	}
	lower := make([]float64, len(at))
	for k := 1; k < len(at); k++ {
		over, slope := 0.0, (share[at[k]]-share[at[k-1]])/float64(at[k]-at[k-1])
		for x := at[k-1] + 1; x < at[k]; x++ {
			over = max(over, share[at[k-1]]+slope*float64(x-at[k-1])-share[x])
		}
		lower[k-1], lower[k] = max(lower[k-1], over), max(lower[k], over)
	}
	last := share[n-1]
	for _, v := range share[n-max(1, n/10):] {
		last = min(last, v)
	}
	var knots []limits.Knot
	for k, i := range at {
		v := share[i]
		if lower[k] > 1e-9 {
			v -= lower[k]
		}
		if k == len(at)-1 {
			v = min(v, last)
		}
		if k == 0 && v < 0 && share[0] >= 0 {
			v = 0 // nothing is delivered before the loss
			knots = append(knots, limits.Knot{S: 0, Share: 0})
			continue
		}
		knots = append(knots, limits.Knot{S: float64(i) * everyS, Share: min(max(v, -1), 1)})
	}
	return limits.NewShape(knots)
}

// fits tells whether all samples between i and j lie near to the line from i to j.
func fits(share []float64, i, j int, within float64) bool {
	slope := (share[j] - share[i]) / float64(j-i)
	for k := i + 1; k < j; k++ {
		if math.Abs(share[i]+slope*float64(k-i)-share[k]) > within {
			return false
		}
	}
	return true
}
