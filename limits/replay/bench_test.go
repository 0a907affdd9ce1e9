package replay

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

// benchSystem invents a system of n shapes and 100 losses on it.
func benchSystem(n int, untilS float64) (*System, []Event) {
	rng := rand.New(rand.NewPCG(7, 11))
	shapes := make([][]Knot, n)
	for i := range shapes {
		delay := 0.1 + 2*rng.Float64()
		full := delay + 0.2 + 9*rng.Float64()
		shapes[i] = []Knot{{delay, 0}, {full, 1}}
		if i%3 == 2 { // a fast product that is withdrawn
			shapes[i] = append(shapes[i], Knot{full + 10, 1}, Knot{full + 15, 0})
		}
	}
	s := NewSystem(Limits{NominalHz: 50, WindowS: 0.5, SteadyByS: 30, SteadyUntilS: untilS}, shapes)
	events := make([]Event, 100)
	for i := range events {
		p := 50 + 400*rng.Float64()
		e := Event{LossMW: p, InertiaMWs: 3_000 + 20_000*rng.Float64(), DampingMWPerHz: 20 + 60*rng.Float64()}
		for range n {
			e.ResponseMW = append(e.ResponseMW, 2.4*p*rng.Float64()/float64(n))
		}
		events[i] = e
	}
	return s, events
}

func BenchmarkRun(b *testing.B) {
	for _, c := range []struct {
		shapes   int
		untilS   float64
		undamped bool
		windowS  float64
	}{
		{shapes: 3, untilS: 60, windowS: 0.5},
		{shapes: 10, untilS: 60, windowS: 0.5},
		{shapes: 10, untilS: 60},
		{shapes: 10, untilS: 900, windowS: 0.5},
		{shapes: 10, untilS: 60, undamped: true, windowS: 0.5},
		{shapes: 30, untilS: 60, windowS: 0.5},
	} {
		b.Run(fmt.Sprintf("shapes=%d/until=%gs/window=%gs/undamped=%v", c.shapes, c.untilS, c.windowS, c.undamped), func(b *testing.B) {
			s, events := benchSystem(c.shapes, c.untilS)
			s.lim.WindowS = c.windowS
			if c.undamped {
				for i := range events {
					events[i].DampingMWPerHz = 0
				}
			}
			b.ReportAllocs()
			i := 0
			for b.Loop() {
				s.Run(events[i%len(events)])
				i++
			}
		})
	}
}

func BenchmarkNewSystem(b *testing.B) {
	for b.Loop() {
		benchSystem(10, 60)
	}
}

func TestRunAllocatesNothing(t *testing.T) {
	s, events := benchSystem(10, 60)
	for _, e := range events {
		s.Run(e)
	}
	sc := new(scratch)
	i := 0
	got := testing.AllocsPerRun(200, func() {
		// The scratch is given, because a pool may be emptied at any time.
		s.run(events[i%len(events)], sc)
		i++
	})
	if got >= 1 {
		t.Errorf("%v allocations a run", got)
	}
}
