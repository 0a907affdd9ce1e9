package replay

import "math"

// between gives value and slope at t of the cubic that has the values and slopes of a
// and b (a.t ≤ t ≤ b.t).
func between(a, b point, t float64) (y, g float64) {
	h := b.t - a.t
	if h <= 0 {
		return b.y, b.g
	}
	x := min(1, max(0, (t-a.t)/h))
	m, c2, c3 := bends(a, b, h)
	return a.y + x*(m+x*(c2+x*c3)), (m + x*(2*c2+3*x*c3)) / h
}

// turn gives the instant and the value at which the cubic between a and b turns, its
// slopes at the two ends being of opposite sign.
func turn(a, b point) (t, y float64) {
	h := b.t - a.t
	m, c2, c3 := bends(a, b, h)
	// m + 2·c2·x + 3·c3·x² has one zero in [0, 1]. Written with the root in the
	// denominator it stays exact when c3 vanishes; the sign of m picks the zero.
	root := math.Sqrt(max(0, c2*c2-3*c3*m))
	x := m / (math.Copysign(root, m) - c2)
	x = min(1, max(0, x))
	return a.t + x*h, a.y + x*(m+x*(c2+x*c3))
}

// bends gives the coefficients of x, x², x³, with x = (t − a.t)/h.
func bends(a, b point, h float64) (m, c2, c3 float64) {
	m = h * a.g
	m1 := h * b.g
	rise := b.y - a.y
	return m, 3*rise - 2*m - m1, m + m1 - 2*rise
}
