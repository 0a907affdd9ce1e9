package replay

import (
	"math"
	"testing"
)

// ramp delivers nothing until delayS, all of it fullS later, for ever.
func ramp(delayS, fullS float64) []Knot {
	return []Knot{{delayS, 0}, {delayS + fullS, 1}}
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.12g, want %.12g (± %g)", what, got, want, tol)
	}
}

// slow is a second simulation to compare with: the classic Runge–Kutta method of order
// 4 in steps of 1 ms, reading the knots afresh at every step, dev clipped at 0. Knots
// must lie on whole milliseconds.
func slow(l Limits, shapes [][]Knot, e Event, untilS float64) []float64 {
	const h = 1e-3
	n := int(math.Round(untilS / h))
	dev := make([]float64, n+1)
	accel := l.NominalHz / (2 * e.InertiaMWs)
	for i := range n {
		// Read just inside the step, so that a jump belongs to the right side.
		at := func(x float64) float64 {
			net := e.LossMW
			for s, mw := range e.ResponseMW {
				net -= mw * share(shapes[s], (float64(i)+x)*h)
			}
			return net
		}
		n0, nm, n1 := at(1e-6), at(0.5), at(1-1e-6)
		f := func(net, y float64) float64 { return accel * (net - e.DampingMWPerHz*y) }
		y := dev[i]
		k1 := f(n0, y)
		k2 := f(nm, y+h/2*k1)
		k3 := f(nm, y+h/2*k2)
		k4 := f(n1, y+h*k3)
		dev[i+1] = math.Max(0, y+h/6*(k1+2*k2+2*k3+k4))
	}
	return dev
}

// share reads a shape in the plainest way: the last knot passed and the one after it.
func share(knots []Knot, t float64) float64 {
	v := 0.0
	for i, k := range knots {
		if k.S > t {
			break
		}
		v = k.Share
		if i+1 < len(knots) && knots[i+1].S > t {
			next := knots[i+1]
			v += (next.Share - k.Share) * (t - k.S) / (next.S - k.S)
		}
	}
	return v
}
