package solve

import (
	"fmt"
	"math"
	"math/rand/v2"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
)

// randomHour invents one hour of a system: machines of several technologies, converters,
// losses; the demand is one that the machines can serve. It is a case of one hour, in
// memory.
func randomHour(rng *rand.Rand, machines int) (*fleet.Case, *fleet.Hour) {
	uniform := func(a, b float64) float64 { return a + (b-a)*rng.Float64() }
	c := &fleet.Case{
		Name: "random", UnservedPerMWh: 10000, ShortPerMW: 3000,
		Limits: limits.Limits{NominalHz: 50, MaxHzPerS: uniform(0.4, 1), WindowS: []float64{0, 0.1, 0.5}[rng.IntN(3)],
			NadirHz: uniform(0.6, 1), SteadyHz: 0.5, SteadyByS: 30, SteadyUntilS: 60},
	}
	shape := func(t limits.Timing) int {
		s, err := t.Shape()
		if err != nil {
			panic(err)
		}
		c.Shapes = append(c.Shapes, fleet.NamedShape{Name: fmt.Sprint("s", len(c.Shapes)), Shape: s})
		return len(c.Shapes) - 1
	}
	slow := []int{shape(limits.Timing{DelayS: 0.3, RampS: 9.7}), shape(limits.Timing{DelayS: 0.5, RampS: 5.5}), shape(limits.Timing{DelayS: 1, RampS: 14})}
	fast := shape(limits.Timing{DelayS: 0.2, RampS: 0.3})
	brief := shape(limits.Timing{DelayS: 0.3, RampS: 0.7, HoldS: 12, WithdrawS: 5})
	dip := shape(limits.Timing{DelayS: 0.2, RampS: 0.8, HoldS: 8, WithdrawS: 2, RecoveryShare: 0.3, RecoveryS: 15, ReturnS: 5})

	h := &fleet.Hour{}
	capacity := 0.0
	scale := uniform(0.5, 3)
	for i := 0; i < machines; {
		n := 1
		if rng.IntN(5) == 0 {
			n = 2 + rng.IntN(3)
		}
		size := scale * uniform(20, 200)
		if rng.IntN(6) == 0 {
			size *= 2
		}
		base := uniform(15, 90)
		u := fleet.Unit{
			Count: n, Commit: true, MustRun: rng.IntN(12) == 0,
			OnCost: size * uniform(1, 8),
			MinMW:  size * uniform(0.2, 0.5), MaxMW: size,
			HeadMW: size, FromHead: true,
			InertiaMWs:    size * 1.2 * uniform(2, 7),
			Shape:         slow[rng.IntN(len(slow))],
			ResponseCapMW: size * uniform(0, 0.25), ResponsePerMW: uniform(0, 8),
		}
		for k, steps := 1, 1+rng.IntN(3); k <= steps; k++ {
			u.Steps = append(u.Steps, fleet.Step{ToMW: size * float64(k) / float64(steps), CostPerMWh: base + float64(k)*uniform(1, 4)})
		}
		for k := 1; k < len(u.Steps); k++ {
			u.Steps[k].CostPerMWh = max(u.Steps[k].CostPerMWh, u.Steps[k-1].CostPerMWh)
		}
		if rng.IntN(15) == 0 { // a synchronous condenser
			u = fleet.Unit{Count: n, Commit: true, OnCost: uniform(20, 200), MinMW: -2, MaxMW: -2, InertiaMWs: uniform(300, 2000), Shape: -1}
		} else {
			capacity += float64(n) * size
		}
		h.Units = append(h.Units, u)
		i += n
	}
	wind := capacity * uniform(0, 0.7)
	h.Units = append(h.Units,
		fleet.Unit{Count: 1, MaxMW: wind, HeadMW: wind, FromHead: true, Shape: fast, ResponseCapMW: 0.1 * wind, ResponsePerMW: 1, Renewable: true,
			SyntheticCapMWs: wind * uniform(0, 2), SyntheticPerMWs: 0.01, HeadPerMWs: 2 / 50.0 * c.Limits.MaxHzPerS},
		fleet.Unit{Count: 1, MaxMW: wind / 3, HeadMW: wind / 3, Shape: dip, ResponseCapMW: wind / 30, ResponsePerMW: 2, ShareOfOutput: 0.1, Renewable: true},
		fleet.Unit{Count: 1, HeadMW: capacity / 20, Shape: []int{fast, brief}[rng.IntN(2)], FromHead: true, ResponseCapMW: capacity / 20, ResponsePerMW: uniform(1, 15)},
		fleet.Unit{Count: 1, HeadMW: capacity / 40, Shape: brief, FromHead: true, ResponseCapMW: capacity / 40, ResponsePerMW: uniform(3, 25)},
	)
	link := capacity * uniform(0.02, 0.15)
	h.Units = append(h.Units, fleet.Unit{Count: 1, MinMW: -link / 2, MaxMW: link, HeadMW: link, FromHead: true, Shape: fast,
		ResponseCapMW: link / 4, ResponsePerMW: uniform(0, 10), Steps: []fleet.Step{{ToMW: link, CostPerMWh: uniform(10, 80)}}})
	for i := range h.Units {
		c.Resources = append(c.Resources, fleet.Resource{Name: fmt.Sprint("r", i)})
		if u := &h.Units[i]; u.MaxMW > 0 && !(i == machines) {
			h.Losses = append(h.Losses, fleet.HourLoss{Name: fmt.Sprint("r", i), Members: []int{i}, Single: true})
		}
	}
	if len(h.Units) > 3 {
		h.Losses = append(h.Losses, fleet.HourLoss{Name: "line", Members: []int{0, 1}})
	}
	h.Losses = append(h.Losses, fleet.HourLoss{Name: "busbar", FixedMW: capacity * uniform(0, 0.05)})
	if rng.IntN(2) == 0 { // the other side of nominal
		above := c.Limits
		above.MaxHzPerS, above.NadirHz, above.SteadyHz = uniform(0.4, 1), uniform(0.6, 1), 0.5
		c.Above = &above
		for i := range h.Units {
			u := &h.Units[i]
			if u.Shape < 0 || rng.IntN(3) == 0 {
				continue
			}
			u.DownShape, u.DownCapMW, u.DownPerMW, u.FootMW = u.Shape, u.MaxMW*uniform(0, 0.3), uniform(0, 6), min(u.MinMW, 0)
			if u.Commit {
				u.FootMW = u.MinMW
			} else if u.MaxMW == 0 { // a battery
				u.FootMW, u.DownCapMW = -u.HeadMW, u.HeadMW
			}
		}
		h.Losses = append(h.Losses, fleet.HourLoss{Name: "feeder", FixedMW: capacity * uniform(0, 0.06), Over: true},
			fleet.HourLoss{Name: "export", Members: []int{len(h.Units) - 1}, Single: true, Over: true})
	}
	h.DemandMW = capacity * uniform(0.3, 0.8)
	h.DampingMWPerHz = h.DemandMW * uniform(0, 0.02)
	h.LoadInertiaMWs = h.DemandMW * uniform(0, 0.3)
	return c, h
}

// bruteForce is the least cost over every commitment, each dispatched exactly.
func bruteForce(p *formulate.Problem) float64 {
	s := newSearch(p, Options{})
	n := len(p.Classes)
	lo, hi := make([]int, n), make([]int, n)
	for c := range p.Classes {
		hi[c] = p.Classes[c].Count
		if !p.Classes[c].Commit || p.Classes[c].MustRun {
			lo[c] = hi[c]
		}
	}
	counts := append([]int(nil), lo...)
	s.lp.AddRow(s.m.balance())
	s.lp.Solve(math.Inf(1))
	from := s.lp.Save()
	for {
		s.dispatch(counts, from, false)
		c := 0
		for ; c < n; c++ {
			if counts[c] < hi[c] {
				counts[c]++
				break
			}
			counts[c] = lo[c]
		}
		if c == n {
			return s.best
		}
	}
}
