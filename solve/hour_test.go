package solve

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"evenkeel/fleet"
)

// A mix whose rows hold never leaves the corridor in the replay, an independent
// integration; its dispatch adds up to the load and to its cost.
func TestHourHoldsInReplay(t *testing.T) {
	secure := 0
	for seed := uint64(0); seed < 150; seed++ {
		rng := rand.New(rand.NewPCG(seed, 11))
		c, h := randomHour(rng, 6+rng.IntN(30))
		out, err := New(c, Options{}).Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		short := out.UnservedMW + out.ExcessMW
		cost := c.UnservedPerMWh * short
		mw := out.UnservedMW - out.ExcessMW
		for k := range out.Limits {
			short += out.Limits[k].ShortMW
			cost += c.ShortPerMW * out.Limits[k].ShortMW
		}
		if out.Above != nil {
			for k := range out.Above.Limits {
				short += out.Above.Limits[k].ShortMW
				cost += c.ShortPerMW * out.Above.Limits[k].ShortMW
			}
		}
		for _, d := range out.Dispatch {
			mw += d.OutputMW
			cost += d.Cost
		}
		if short == 0 {
			secure++
			if out.Status != Secure {
				t.Errorf("seed %d: %s", seed, out.Why)
			}
		}
		if math.Abs(mw-h.DemandMW) > 1e-3 {
			t.Errorf("seed %d: %.6f MW for a load of %.6f", seed, mw, h.DemandMW)
		}
		if math.Abs(cost-out.Cost) > 10+1e-6*math.Abs(out.Cost) {
			t.Errorf("seed %d: parts cost %.4f, hour %.4f", seed, cost, out.Cost)
		}
		if out.Bound > out.Cost || out.Gap > DefaultGap*1.000001 {
			t.Errorf("seed %d: bound %g, cost %g", seed, out.Bound, out.Cost)
		}
	}
	if secure < 100 {
		t.Errorf("only %d secure hours looked at", secure)
	}
}

// A tighter limit never costs less, beyond the gap.
func TestTighterCostsNoLess(t *testing.T) {
	for seed := uint64(0); seed < 40; seed++ {
		rng := rand.New(rand.NewPCG(seed, 12))
		c, h := randomHour(rng, 6+rng.IntN(20))
		solve := func(change func(*fleet.Case)) float64 {
			d := *c
			change(&d)
			out, err := New(&d, Options{Gap: -1}).Hour(context.Background(), h)
			if err != nil {
				t.Fatal(err)
			}
			return out.Cost
		}
		base := solve(func(*fleet.Case) {})
		for name, change := range map[string]func(*fleet.Case){
			"rocof":  func(d *fleet.Case) { d.Limits.MaxHzPerS *= 0.8 },
			"nadir":  func(d *fleet.Case) { d.Limits.NadirHz *= 0.85 },
			"steady": func(d *fleet.Case) { d.Limits.SteadyHz *= 0.8 },
		} {
			if got := solve(change); got < base-1e-5*math.Abs(base) {
				t.Errorf("seed %d: tighter %s costs %.6f, was %.6f", seed, name, got, base)
			}
		}
	}
}
