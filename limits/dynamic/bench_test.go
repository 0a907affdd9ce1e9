package dynamic

import (
	"fmt"
	"testing"
)

// hundred is 100 machines in 10 kinds, lumped.
func hundred() *System {
	sys := &System{NominalHz: 50, LoadMW: 20_000, DampingPctPerHz: 1, InertiaMWs: 80_000}
	for i := range 10 {
		m := Defaults([]Kind{Steam, Steam, Steam, Gas, Gas, Hydro, Hydro, Droop, Step, Synthetic}[i])
		m.Name = fmt.Sprint("m", i)
		m.LevelHz = 0.3
		m.GovernorS *= 1 + 0.1*float64(i%3)
		u := Unit{Name: m.Name, Model: &m, N: 10, RatingMW: 300, UpMW: 15, DownMW: 15}
		if m.Kind == Synthetic {
			u.SyntheticMWs = 200
		}
		sys.Units = append(sys.Units, u)
	}
	return sys
}

// One trajectory of 60 s of 100 machines in 10 kinds.
func BenchmarkTrajectory(b *testing.B) {
	sys := hundred()
	var s Simulator
	var steps int
	for b.Loop() {
		o := s.Run(sys, []Loss{{MW: 1200}}, Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60})
		steps = o.Steps
		if o.NadirHz < 0.1 || o.NadirHz > 2 {
			b.Fatal(o.NadirHz)
		}
	}
	b.ReportMetric(float64(steps), "steps")
}
