package replay

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// The state (dev, net imbalance, slope of the imbalance) is linear with constant
// coefficients in each segment, so the matrix exponential (gonum) gives it exactly.
func TestAgainstMatrixExponential(t *testing.T) {
	shapes := [][]Knot{
		{{0.2, 0}, {1.2, 1}, {6, 1}, {9, -0.2}, {14, 0}},
		{{1, 0}, {10, 1}},
		{{0.5, 0}, {0.5, 1}},
	}
	e := Event{LossMW: 900, InertiaMWs: 12_000, DampingMWPerHz: 150, ResponseMW: []float64{300, 700, 50}}
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 30, SteadyUntilS: 60}, shapes)
	const every = 0.05
	at, dev := s.Trajectory(e, every)
	accel := 50. / (2 * e.InertiaMWs)
	// Corners lie on multiples of 0.05 s, so that one matrix does for every interval.
	var step mat.Dense
	gen := mat.NewDense(3, 3, []float64{
		-accel * e.DampingMWPerHz, accel, 0,
		0, 0, 1,
		0, 0, 0,
	})
	gen.Scale(every, gen)
	step.Exp(gen)
	net := func(t float64) float64 {
		n := e.LossMW
		for i, mw := range e.ResponseMW {
			n -= mw * share(shapes[i], t)
		}
		return n
	}
	y, lowest := 0.0, math.Inf(1) // lowest: after the start
	for i := 1; i < len(at); i++ {
		n0, n1 := net(at[i-1]+1e-9), net(at[i]-1e-9)
		state := mat.NewVecDense(3, []float64{y, n0, (n1 - n0) / every})
		state.MulVec(&step, state)
		y = state.AtVec(0)
		if at[i] > 1 {
			lowest = math.Min(lowest, y)
		}
		near(t, "deviation", dev[i], y, 1e-9)
	}
	if lowest <= 0 {
		t.Fatal("the case is not linear: dev would be held at 0")
	}
}

// Butcher's table of Radau IIA with three stages (Hairer and Wanner, section IV.5, from
// memory). Solving its stages must give what newRadau gives.
func TestRadauIsTheThreeStageMethod(t *testing.T) {
	r6 := math.Sqrt(6)
	c := []float64{(4 - r6) / 10, (4 + r6) / 10, 1}
	a := []float64{
		(88 - 7*r6) / 360, (296 - 169*r6) / 1800, (-2 + 3*r6) / 225,
		(296 + 169*r6) / 1800, (88 + 7*r6) / 360, (-2 - 3*r6) / 225,
		(16 - r6) / 36, (16 + r6) / 36, 1. / 9,
	}
	for _, k := range []float64{0, 0.01, 0.3, 4, 200} {
		const y0, q0, slope, h = 0.4, 0.13, -0.07, 0.8
		// Stages K = q(t + c·h) − k·(y0 + h·A·K), so (I + k·h·A)·K = q(t + c·h) − k·y0.
		m := mat.NewDense(3, 3, nil)
		b := mat.NewVecDense(3, nil)
		for i := range 3 {
			for j := range 3 {
				m.Set(i, j, k*h*a[3*i+j])
			}
			m.Set(i, i, m.At(i, i)+1)
			b.SetVec(i, q0+slope*c[i]*h-k*y0)
		}
		var stage mat.VecDense
		if err := stage.SolveVec(m, b); err != nil {
			t.Fatal(err)
		}
		want := y0
		for j := range 3 {
			want += h * a[6+j] * stage.AtVec(j)
		}
		near(t, "one step", newRadau(k, h).step(y0, q0-k*y0, slope), want, 1e-13)
	}
}

// With damping, frequency settles where the load's relief covers what is missing:
// (P − least)/D, or at nominal.
func TestSettledValue(t *testing.T) {
	for _, c := range []struct{ p, held, d float64 }{
		{100, 40, 12}, {100, 100, 12}, {100, 140, 12}, {100, 300, 12}, {1000, 999, 0.01}, {30, 0, 400},
	} {
		s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 60},
			[][]Knot{{{0.5, 0}, {1, 1}, {40, 1}, {40, 0.5}, {45, 1}}})
		e := Event{LossMW: c.p, InertiaMWs: 3000, DampingMWPerHz: c.d, ResponseMW: []float64{c.held}}
		sc := new(scratch)
		if s.replay(e, sc) != moving {
			t.Fatal("nothing to replay")
		}
		want := math.Max(0, (c.p-c.held/2)/c.d)
		accel := 50. / (2 * e.InertiaMWs)
		got := settle(0.3, accel*(c.p-c.held/2), accel*c.d, 0)
		near(t, "settled", got, want, 1e-9*math.Max(1, want))
		worst, _ := deepest(sc.points, 20, 60)
		near(t, "steady", s.Run(e).SteadyHz, math.Max(worst, want), 1e-9*math.Max(1, want))
	}
}

func TestSteadyWithoutDamping(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 60}, [][]Knot{ramp(0, 10)})
	run := func(held float64) float64 {
		return s.Run(Event{LossMW: 100, InertiaMWs: 5000, ResponseMW: []float64{held}}).SteadyHz
	}
	// 50·100·10/(4·5000) = 2.5 Hz at 10 s, and there it stays.
	near(t, "balanced", run(100), 2.5, 1e-9)
	near(t, "balanced but for rounding", run(100-1e-7), 2.5, 1e-6)
	if got := run(99.99); !math.IsInf(got, 1) {
		t.Errorf("10 kW short: steady %v Hz, want +Inf", got)
	}
	// 20 MW too much: nadir 50·100²·10/(4·5000·120) = 2.08333 Hz at 8.33333 s. By 10 s
	// 0.005·½·20·1.66667 = 0.08333 Hz are back, then 0.1 Hz a second: 1 Hz at 20 s.
	near(t, "surplus", run(120), 1, 1e-9)
}
