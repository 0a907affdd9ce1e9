package solve

import (
	"context"
	"path/filepath"
	"testing"

	"evenkeel/fleet"
)

// A least inertia is kept, costs no less than none, and what cannot be had of it is reported.
func TestLeastInertia(t *testing.T) {
	c := readCase(t, filepath.Join("..", "testdata", "skerra", "case.yaml"))
	s := New(c, Options{Gap: -1})
	for _, i := range []int{12, 4000, 7777} {
		free, err := s.Hour(context.Background(), c.Hour(i, fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		h := c.Hour(i, fleet.HourOptions{})
		h.LeastInertiaMWs = free.InertiaMWs + 300
		kept, err := s.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		if kept.Status != Secure || kept.InertiaMWs < h.LeastInertiaMWs-1e-6 || kept.Cost < free.Cost-1e-6 {
			t.Errorf("hour %d: %v %s, %.1f of %.1f MW·s at %.2f after %.2f", i, kept.Status, kept.Why, kept.InertiaMWs, h.LeastInertiaMWs, kept.Cost, free.Cost)
		}
		h = c.Hour(i, fleet.HourOptions{})
		h.LeastInertiaMWs = free.InertiaMWs * 0.9
		same, err := s.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		if same.Cost > free.Cost*(1+1e-8) {
			t.Errorf("hour %d: a floor that does not bind costs %.4f after %.4f", i, same.Cost, free.Cost)
		}
		h = c.Hour(i, fleet.HourOptions{})
		h.LeastInertiaMWs = 1e6
		short, err := s.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		if short.Status != Short || short.FloorShortMWs < 1e5 {
			t.Errorf("hour %d: an impossible floor is %v, short by %g MW·s", i, short.Status, short.FloorShortMWs)
		}
	}
}

// With the steady state alone the cost lies between those of no limits and of all.
func TestSteadyOnly(t *testing.T) {
	c := readCase(t, filepath.Join("..", "testdata", "skerra", "case.yaml"))
	cost := func(o Options, i int) float64 {
		o.Gap = -1
		h, err := New(c, o).Hour(context.Background(), c.Hour(i, fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		return h.Cost
	}
	for _, i := range []int{3, 2500, 6001} {
		none, steady, all := cost(Options{WithoutLimits: true}, i), cost(Options{SteadyOnly: true, RowsOnly: true}, i), cost(Options{RowsOnly: true}, i)
		if !(none <= steady*(1+1e-8) && steady <= all*(1+1e-8)) || none == all {
			t.Errorf("hour %d: none %.3f, steady %.3f, all %.3f", i, none, steady, all)
		}
	}
}
