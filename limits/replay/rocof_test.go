package replay

import (
	"math"
	"testing"
)

// f0 = 50 Hz and E = 25,000 MW·s again: 1 MW for 1 s is 1 mHz.

// The steepest window may lie between corners.
func TestSteepestWindowBetweenKnots(t *testing.T) {
	shapes := [][]Knot{{{0.1, 0}, {0.1, 1}, {5, 1}, {6, 0}, {7, 1}}}
	e := Event{LossMW: 100, InertiaMWs: oneMHz, ResponseMW: []float64{100}}
	// Missing: 100 MW for 0.1 s; a triangle from 5 s over 100 MW at 6 s to 7 s. A window of
	// 1 s sees most of it centred: 100 − ½·2·½·50 = 75 MW·s from 5.5 s on.
	s := NewSystem(Limits{NominalHz: 50, WindowS: 1, SteadyByS: 20, SteadyUntilS: 30}, shapes)
	got := s.Run(e)
	near(t, "RoCoF", got.RoCoFHzPerS, 0.075, 1e-12)
	near(t, "its start", got.RoCoFS, 5.5, 1e-9)

	// At an instant the loss itself and the tip of the triangle are equally steep: the
	// first counts.
	s = NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, shapes)
	got = s.Run(e)
	near(t, "RoCoF", got.RoCoFHzPerS, 0.1, 1e-12)
	near(t, "its time", got.RoCoFS, 0, 0)
}

// Jumps count from both sides, but nothing before the loss does.
func TestSlopeAtJumps(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{
		{{0, 0}, {0, 1}, {2, 1}, {3, 0.2}, {3, 1}},
		{{9, 0}, {9, -1}, {9.5, 1}},
	})
	// Missing: 20 MW from the start; at 3 s, before the jump, 84 MW; at 9 s, after the
	// jump, 20 + 70 MW.
	e := Event{LossMW: 100, InertiaMWs: oneMHz, ResponseMW: []float64{80, 0}}
	got := s.Run(e)
	near(t, "before a jump", got.RoCoFHzPerS, 0.084, 1e-12)
	near(t, "its time", got.RoCoFS, 3, 1e-9)
	e.ResponseMW[1] = 70
	got = s.Run(e)
	near(t, "after a jump", got.RoCoFHzPerS, 0.09, 1e-12)
	near(t, "its time", got.RoCoFS, 9, 1e-9)
	e.ResponseMW[0] = 0
	got = s.Run(e)
	near(t, "two jumps", got.RoCoFHzPerS, 0.17, 1e-12)
}

// What happens after SteadyUntilS is not looked at, and a recovery is no RoCoF.
func TestWhatDoesNotCount(t *testing.T) {
	shapes := [][]Knot{{{0, 0.9}, {10, 0.9}, {11, 2}, {40, 2}, {40, 0}}}
	e := Event{LossMW: 100, InertiaMWs: oneMHz, ResponseMW: []float64{100}}
	for _, w := range []float64{0, 0.5} {
		s := NewSystem(Limits{NominalHz: 50, WindowS: w, SteadyByS: 20, SteadyUntilS: 40}, shapes)
		near(t, "RoCoF until 40 s", s.Run(e).RoCoFHzPerS, 0.01, 1e-12)
		s = NewSystem(Limits{NominalHz: 50, WindowS: w, SteadyByS: 20, SteadyUntilS: 41}, shapes)
		near(t, "RoCoF until 41 s", s.Run(e).RoCoFHzPerS, 0.1, 1e-12)
	}
	// A window longer than the interval is measured once, from the loss on: by 50 s
	// there is 1 Hz since 40 s on top of nothing.
	s := NewSystem(Limits{NominalHz: 50, WindowS: 50, SteadyByS: 20, SteadyUntilS: 40}, shapes)
	near(t, "one long window", s.Run(e).RoCoFHzPerS, 1./50, 1e-12)
}

// Withdrawal by a jump at the very end of the interval is still in time, and so is a
// jump to full delivery at its very start.
func TestJumpsAtTheEndsOfTheSteadyInterval(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 10, SteadyUntilS: 30},
		[][]Knot{{{10, 0}, {10, 1}, {30, 1}, {30, 0}}})
	e := Event{LossMW: 100, InertiaMWs: oneMHz, DampingMWPerHz: 1, ResponseMW: []float64{100}}
	got := s.Run(e)
	// Missing 100 MW for 10 s; 1 MW/Hz over 1,000 MW·s/Hz: 100·(1 − e^(−0.01)) Hz at 10 s.
	near(t, "steady", got.SteadyHz, 0.99501662508319, 1e-9)
}

// A peak that is over before a window has passed counts against the rest before the loss.
// 100 MW are missing for 0.1 s; then D·dev brings frequency back. With k = 25·D/E:
// dev(0.1) = (100/D)·(1 − e^(−0.1·k)).
func TestShortPeakCountsAgainstRest(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, WindowS: 0.5, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{{{0.1, 0}, {0.1, 1}}})
	e := Event{LossMW: 100, InertiaMWs: 25, DampingMWPerHz: 10, ResponseMW: []float64{100}}
	got := s.Run(e)
	near(t, "k = 10", got.RoCoFHzPerS, 2*10*(1-math.Exp(-1)), 1e-8)
	near(t, "start of the window", got.RoCoFS, -0.4, 1e-9)
	e.InertiaMWs = 250
	near(t, "k = 1", s.Run(e).RoCoFHzPerS, 2*10*(1-math.Exp(-0.1)), 1e-8)
}
