package solve

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/fleet"
	"evenkeel/limits"
)

// drawHour is a random hour whose seed rapid draws.
func drawHour(t *rapid.T, most int) (*fleet.Case, *fleet.Hour) {
	rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 31))
	return randomHour(rng, rapid.IntRange(4, most).Draw(t, "machines"))
}

func solved(t *rapid.T, c *fleet.Case, h *fleet.Hour, gap float64) Hour {
	out, err := New(c, Options{Gap: gap}).Hour(context.Background(), h)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// exactly is how near two optimal costs of one hour must lie: rows are met to
// roundingShare of a loss, and no MW of it is dearer than the price of a shortfall.
func exactly(cost float64) float64 { return 1 + 1e-5*math.Abs(cost) }

// A mix whose rows hold never leaves the corridor in the replay; cost never lies below
// bound, and never further above it than the gap.
func TestSecureMixesHold(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 30)
		out := solved(t, c, h, 0)
		if out.Bound > out.Cost || out.Gap > DefaultGap*(1+1e-9) {
			t.Errorf("bound %g, cost %g, gap %g", out.Bound, out.Cost, out.Gap)
		}
		short := out.UnservedMW + out.ExcessMW
		for k := range out.Limits {
			short += out.Limits[k].ShortMW
		}
		if short > 0 {
			if out.Status != Short || out.Why == "" {
				t.Errorf("%g MW short, status %s", short, out.Status)
			}
			return
		}
		l := c.Limits
		for k, limit := range [limits.Kinds]float64{l.MaxHzPerS, l.NadirHz, l.SteadyHz} {
			if got := [limits.Kinds]float64{out.RoCoFHzPerS, out.NadirHz, out.SteadyHz}[k]; got > limit+replayTolHz {
				t.Errorf("%s: %g in the replay, limit %g", limits.Kind(k), got, limit)
			}
		}
		if out.Status != Secure {
			t.Errorf("nothing is short, but %s", out.Why)
		}
	})
}

// The order in which a case lists its resources, shapes and losses changes nothing.
func TestOrderChangesNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 14)
		place := rapid.Permutation(indices(len(h.Units))).Draw(t, "units")
		shape := rapid.Permutation(indices(len(c.Shapes))).Draw(t, "shapes")
		d, g := *c, *h
		d.Shapes = make([]fleet.NamedShape, len(c.Shapes))
		for i, s := range c.Shapes {
			d.Shapes[shape[i]] = s
		}
		d.Resources = make([]fleet.Resource, len(c.Resources))
		g.Units = make([]fleet.Unit, len(h.Units))
		for i, u := range h.Units {
			if u.Shape >= 0 {
				u.Shape = shape[u.Shape]
			}
			g.Units[place[i]], d.Resources[place[i]] = u, c.Resources[i]
		}
		g.Losses = nil
		for _, i := range rapid.Permutation(indices(len(h.Losses))).Draw(t, "losses") {
			l := h.Losses[i]
			l.Members = nil
			for _, m := range h.Losses[i].Members {
				l.Members = append(l.Members, place[m])
			}
			g.Losses = append(g.Losses, l)
		}
		a, b := solved(t, c, h, -1), solved(t, &d, &g, -1)
		if math.Abs(a.Cost-b.Cost) > exactly(a.Cost) {
			t.Errorf("cost %.6f, in another order %.6f", a.Cost, b.Cost)
		}
	})
}

func indices(n int) []int {
	list := make([]int, n)
	for i := range list {
		list[i] = i
	}
	return list
}

// A tighter limit never costs less; nor does a larger loss, or a costlier response.
func TestHarderCostsNoLess(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 14)
		d, g := *c, *h
		by := rapid.Float64Range(0.5, 1).Draw(t, "by")
		switch rapid.SampledFrom([]string{"rocof", "nadir", "steady", "until", "loss", "response"}).Draw(t, "harder") {
		case "rocof":
			d.Limits.MaxHzPerS *= by
		case "nadir":
			d.Limits.NadirHz *= by
		case "steady":
			d.Limits.SteadyHz *= by
		case "until":
			d.Limits.SteadyUntilS /= by
		case "loss":
			g.Losses = append([]fleet.HourLoss(nil), h.Losses...)
			g.Losses[len(g.Losses)-1].FixedMW /= by
		case "response":
			g.Units = append([]fleet.Unit(nil), h.Units...)
			for i := range g.Units {
				g.Units[i].ResponsePerMW /= by
			}
		}
		a, b := solved(t, c, h, -1), solved(t, &d, &g, -1)
		if b.Cost < a.Cost-exactly(a.Cost) {
			t.Errorf("cost %.6f, harder %.6f", a.Cost, b.Cost)
		}
	})
}

// No price is below zero where no shape draws power, and something is priced just where
// a limit binds.
func TestPricesAreNotNegative(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 20)
		out := solved(t, c, h, 0)
		p := out.Prices
		if p.InertiaPerMWs < 0 || p.LossPerMW < 0 {
			t.Errorf("prices %+v", p)
		}
		for s, v := range p.ResponsePerMW {
			if v < 0 && !c.Shapes[s].Shape.Recovery() {
				t.Errorf("price of %s: %g", c.Shapes[s].Name, v)
			}
		}
		priced := false
		for k := range out.Limits {
			l := out.Limits[k]
			priced = priced || l.Binds
			if l.Price < 0 || l.Price > 0 && !l.Binds {
				t.Errorf("%s: binds %v, price %g", limits.Kind(k), l.Binds, l.Price)
			}
		}
		if priced != (p.LossPerMW > 0) {
			t.Errorf("a limit binds: %v; price of the loss %g", priced, p.LossPerMW)
		}
	})
}

// The same hour gives the same answer to the last bit, whoever solved what before.
func TestSameAnswerAgain(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 20)
		s := New(c, Options{})
		a, err := s.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		b := solved(t, c, h, 0)
		if a.Cost != b.Cost || a.Bound != b.Bound || a.NadirHz != b.NadirHz || a.Effort != b.Effort || a.Prices.InertiaPerMWs != b.Prices.InertiaPerMWs {
			t.Errorf("%+v and %+v", a, b)
		}
	})
}
