package replay

import "testing"

// In these cases f0 = 50 Hz and E = 25,000 MW·s: 1 MW missing for 1 s costs 1 mHz.
const oneMHz = 25_000

// A surplus is not banked: the second dip starts from nominal.
func TestSecondDipStartsFromNominal(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{
		{{1, 0}, {1, 1}, {5, 1}, {5, 0}}, // out at 1 s, gone at 5 s
		{{8, 0}, {8, 1}},
	})
	e := Event{LossMW: 100, InertiaMWs: oneMHz, ResponseMW: []float64{200, 150}}
	// 0 to 1 s: 100 MW missing: 0.1 Hz. Then 100 MW too much: nominal at 2 s, held until
	// 5 s. Then 100 MW missing for 3 s: 0.3 Hz at 8 s. Then 50 MW too much: nominal at 14 s.
	// Banked, 5 s would stand at −0.2 Hz and the nadir would be 0.1 Hz.
	got := s.Run(e)
	near(t, "nadir", got.NadirHz, 0.3, 1e-12)
	near(t, "its time", got.NadirS, 8, 1e-9)
	near(t, "RoCoF", got.RoCoFHzPerS, 0.1, 1e-12)
	at, dev := s.Trajectory(e, 0.5)
	for i, want := range map[float64]float64{0.5: 0.05, 1: 0.1, 1.5: 0.05, 2: 0, 3.5: 0, 5: 0, 6: 0.1, 8: 0.3, 11: 0.15, 14: 0, 20: 0} {
		near(t, "time", at[int(2*i)], i, 0)
		near(t, "deviation", dev[int(2*i)], want, 1e-12)
	}
	near(t, "steady", got.SteadyHz, 0, 1e-12)
}

// It leaves nominal when the imbalance turns, in the middle of a withdrawal.
func TestReleaseWithinARamp(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{
		{{1, 0}, {1, 1}, {5, 1}, {7, 0}},
		{{8, 0}, {8, 1}},
	})
	// Missing: −100 MW at 5 s, +100 MW at 7 s, none at 6 s. From there 0.1 Hz/s at the
	// end of a ramp: 0.05 Hz at 7 s, 0.15 Hz at 8 s.
	got := s.Run(Event{LossMW: 100, InertiaMWs: oneMHz, ResponseMW: []float64{200, 150}})
	near(t, "nadir", got.NadirHz, 0.15, 1e-12)
	near(t, "its time", got.NadirS, 8, 1e-9)
}

// It touches nominal and leaves it again between two knots.
func TestDipBelowNominalWithinOneSegment(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{
		{{1, 0}, {1, 1}, {3, -0.5}, {3, 0.25}},
	})
	// Missing with 400 MW held: 100 MW until 1 s (0.1 Hz), then straight from −300 to
	// +300 MW at 3 s, then none. Unheld, the parabola would bottom at −0.05 Hz at 2 s and
	// reach 0.1 Hz at 3 s. Held, it meets nominal at 1 + (1 − √⅓) s, leaves it at 2 s and
	// gains ½·1 s·300 MW = 0.15 Hz.
	e := Event{LossMW: 100, InertiaMWs: oneMHz, ResponseMW: []float64{400}}
	got := s.Run(e)
	near(t, "nadir", got.NadirHz, 0.15, 1e-12)
	near(t, "its time", got.NadirS, 3, 1e-9)
	near(t, "steady", got.SteadyHz, 0.15, 1e-12)
	_, dev := s.Trajectory(e, 0.001)
	near(t, "just before nominal", dev[1422], 0.001*(100-300*0.422+150*0.422*0.422), 1e-12)
	near(t, "at nominal", dev[1423], 0, 0)
	near(t, "held", dev[1999], 0, 0)
	near(t, "released", dev[2010], 0.001*150*0.01*0.01, 1e-12)
}

// Response that meets the loss at once leaves nothing to see.
func TestLossMetAtOnce(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 20, SteadyUntilS: 30}, [][]Knot{{{0, 1}}, {{0, 0}, {0, 1}}})
	for _, held := range [][]float64{{100, 0}, {0, 100}, {70, 70}} {
		if got := s.Run(Event{LossMW: 100, InertiaMWs: oneMHz, DampingMWPerHz: 5, ResponseMW: held}); got != (Outcome{}) {
			t.Errorf("%v MW at once: %+v, want zeros", held, got)
		}
	}
}
