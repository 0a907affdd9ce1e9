package replay

import (
	"math"
	"testing"
)

func TestNothingLostOrNothingLeft(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, WindowS: 0.5, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{ramp(0, 1)})
	nan, inf := math.NaN(), math.Inf(1)
	all := Outcome{RoCoFHzPerS: inf, NadirHz: inf, SteadyHz: inf}
	for _, c := range []struct {
		e    Event
		want Outcome
	}{
		{Event{0, 1000, 10, []float64{5}}, Outcome{}},
		{Event{-3, 1000, 10, []float64{5}}, Outcome{}},
		{Event{0, 0, 0, []float64{0}}, Outcome{}},
		{Event{10, 0, 10, []float64{5}}, all},
		{Event{10, -1, 10, []float64{5}}, all},
		{Event{10, 1e-13, 10, []float64{5}}, all},
		{Event{10, 5e-324, 0, []float64{5}}, all},
		{Event{nan, 1000, 10, []float64{5}}, all},
		{Event{10, nan, 10, []float64{5}}, all},
		{Event{10, 1000, nan, []float64{5}}, all},
		{Event{10, 1000, -1, []float64{5}}, all},
		{Event{10, 1000, inf, []float64{5}}, all},
		{Event{10, 1000, 10, []float64{nan}}, all},
		{Event{inf, 1000, 10, []float64{5}}, all},
		{Event{10, 1000, 10, []float64{-inf}}, all},
	} {
		if got := s.Run(c.e); got != c.want {
			t.Errorf("%+v: got %+v, want %+v", c.e, got, c.want)
		}
	}
	if _, dev := s.Trajectory(Event{10, 0, 10, []float64{5}}, 30); dev[0] != 0 || !math.IsInf(dev[1], 1) {
		t.Errorf("trajectory without inertia: %v", dev)
	}
	if at, dev := s.Trajectory(Event{0, 10, 10, []float64{5}}, 30); len(at) != 3 || dev[2] != 0 {
		t.Errorf("trajectory without a loss: %v, %v", at, dev)
	}
}

// The less inertia there is, the closer frequency follows the imbalance at once:
// dev = (P − response)/D. No step gets lost, and the number of points stays small.
func TestAlmostNoInertia(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, WindowS: 0.5, SteadyByS: 20, SteadyUntilS: 30},
		[][]Knot{{{1, 0}, {3, 1}, {5, 1}, {5, 0.5}}})
	for _, e := range []float64{1, 0.1, 1e-2, 1.1e-3} {
		ev := Event{LossMW: 100, InertiaMWs: e, DampingMWPerHz: 200, ResponseMW: []float64{80}}
		got := s.Run(ev)
		near(t, "RoCoF over 0.5 s", got.RoCoFHzPerS, 1, 1e-6)
		near(t, "nadir", got.NadirHz, 0.5, 1e-6)
		near(t, "steady", got.SteadyHz, 0.3, 1e-6)
		_, dev := s.Trajectory(ev, 1)
		for i, want := range []float64{0, 0.5, 0.3, 0.1, 0.1, 0.1, 0.3} {
			near(t, "deviation", dev[i], want, 1e-8+2e-3*e)
		}
		sc := new(scratch)
		s.replay(ev, sc)
		if len(sc.points) > 1000 {
			t.Errorf("E = %g MW·s: %d points", e, len(sc.points))
		}
	}
}

// Damping too weak to be told from none ends in a plain answer too.
func TestAlmostNoDamping(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{ramp(0, 1)})
	for _, d := range []float64{0, 5e-324, 1e-300, 1e-14} {
		short := s.Run(Event{LossMW: 100, InertiaMWs: oneMHz, DampingMWPerHz: d, ResponseMW: []float64{99}})
		near(t, "nadir", short.NadirHz, 0.0505+0.059, 1e-9) // 100 − 99/2 MW·s, then 1 MW for 59 s
		if !math.IsInf(short.SteadyHz, 1) {
			t.Errorf("D = %g MW/Hz: steady %v Hz, want +Inf", d, short.SteadyHz)
		}
		near(t, "steady", s.Run(Event{LossMW: 100, InertiaMWs: oneMHz, DampingMWPerHz: d, ResponseMW: []float64{100}}).SteadyHz, 0.05, 1e-9)
	}
}

func TestBadPreparationPanics(t *testing.T) {
	good := Limits{NominalHz: 50}
	for name, f := range map[string]func(){
		"no frequency":      func() { NewSystem(Limits{}, nil) },
		"NaN frequency":     func() { NewSystem(Limits{NominalHz: math.NaN()}, nil) },
		"negative window":   func() { NewSystem(Limits{NominalHz: 50, WindowS: -1}, nil) },
		"endless interval":  func() { NewSystem(Limits{NominalHz: 50, SteadyUntilS: math.Inf(1)}, nil) },
		"unordered knots":   func() { NewSystem(good, [][]Knot{{{2, 0}, {1, 1}}}) },
		"negative knot":     func() { NewSystem(good, [][]Knot{{{-1, 0}}}) },
		"NaN knot":          func() { NewSystem(good, [][]Knot{{{math.NaN(), 0}}}) },
		"NaN share":         func() { NewSystem(good, [][]Knot{{{1, math.NaN()}}}) },
		"a number missing":  func() { NewSystem(good, [][]Knot{{{1, 1}}}).Run(Event{LossMW: 1, InertiaMWs: 1}) },
		"no interval given": func() { NewSystem(good, nil).Trajectory(Event{}, 0) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			f()
		}()
	}
}

// Zero limits work: everything is measured at the loss itself, the nadir over 60 s.
func TestZeroLimits(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50}, [][]Knot{ramp(0, 10)})
	got := s.Run(Event{LossMW: 100, InertiaMWs: oneMHz, DampingMWPerHz: 50, ResponseMW: []float64{100}})
	near(t, "RoCoF", got.RoCoFHzPerS, 0.1, 1e-12)
	near(t, "steady", got.SteadyHz, 2, 1e-9) // nothing is delivered yet: 100 MW / 50 MW/Hz
	if got.NadirHz < 0.3 || got.NadirHz > 0.5 {
		t.Errorf("nadir %v Hz", got.NadirHz)
	}
}
