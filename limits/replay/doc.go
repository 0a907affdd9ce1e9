// Package replay simulates, second by second, what frequency does after a loss, and
// measures the three values that limits are set on. It is the independent check of
// a mix: it takes plain numbers, shares no code with the rest of the program, and
// knows nothing of rows, prices or the optimiser.
//
// What is integrated is the swing equation of the centre of inertia,
//
//	d(dev)/dt = f0/(2·E)·(P − Σ R_s·φ_s(t) − D·dev),   dev(0) = 0,
//
// with dev the deviation below nominal in Hz, E the kinetic energy left in MW·s, P the
// loss in MW, R_s the MW held with shape φ_s and D the load's damping in MW/Hz.
// Response is a promise, not a feedback: what it delivers beyond the loss is not
// banked as frequency above nominal, so dev is held at zero until the net imbalance is
// positive again.
//
// # Method
//
// The shapes are summed into one piecewise linear imbalance whose segments end at every
// knot of every shape. Within a segment the equation is integrated with the three-stage
// Radau IIA method (order 5, L-stable; Hairer and Wanner, Solving Ordinary Differential
// Equations II, section IV.5, from memory), and read between steps from the cubic that
// has the value and the slope of both ends. Being L-stable, it needs no small steps
// where inertia is almost gone.
//
// Within a segment the solution is a straight line plus one decaying exponential, or a
// parabola where there is no damping. Both the method and the cubic are exact for the
// line and for the parabola, so the length of a step follows from the exponential
// alone: its curvature bounds the error of the cubic, the larger of the two errors.
// A step therefore grows as the exponential dies, and is a whole segment without
// damping. Tests compare the outcome with steps of half the length and with a plain
// Runge–Kutta integration in steps of 1 ms.
package replay
