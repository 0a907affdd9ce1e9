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
			if out.Above != nil {
				short += out.Above.Limits[k].ShortMW
			}
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
		if a := out.Above; a != nil {
			l := c.Above
			for k, limit := range [limits.Kinds]float64{l.MaxHzPerS, l.NadirHz, l.SteadyHz} {
				if got := [limits.Kinds]float64{a.RoCoFHzPerS, a.PeakHz, a.SteadyHz}[k]; got > limit+replayTolHz {
					t.Errorf("above nominal, %s: %g in the replay, limit %g", limits.Kind(k), got, limit)
				}
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
			if u.DownCapMW > 0 {
				u.DownShape = shape[u.DownShape]
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
		switch rapid.SampledFrom([]string{"rocof", "nadir", "steady", "until", "loss", "response", "above", "feeder"}).Draw(t, "harder") {
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
			for i := range g.Losses {
				if !g.Losses[i].Over {
					g.Losses[i].FixedMW /= by
				}
			}
		case "above":
			if c.Above == nil {
				return
			}
			a := *c.Above
			a.NadirHz *= by
			a.MaxHzPerS *= by
			a.SteadyHz = min(a.SteadyHz, a.NadirHz)
			d.Above = &a
		case "feeder":
			g.Losses = append([]fleet.HourLoss(nil), h.Losses...)
			for i := range g.Losses {
				if g.Losses[i].Over {
					g.Losses[i].FixedMW /= by
				}
			}
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

// The price of a limit is what relaxing it a little saves, and that of a response or of
// inertia what a little more of it, for nothing, saves: finite differences, wherever the
// commitment stays the same.
func TestPricesPredictSmallChanges(t *testing.T) {
	compared := 0
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 12)
		what := rapid.SampledFrom([]string{"rocof", "nadir", "steady", "inertia", "response"}).Draw(t, "what")
		free := 0.02 * h.DemandMW
		if what == "response" { // of a unit that costs nothing and is no loss there will be a little more, or less
			h.Units = append(h.Units, fleet.Unit{Count: 1, HeadMW: free, ResponseCapMW: free, FromHead: true, Shape: 3})
			c.Resources = append(c.Resources, fleet.Resource{Name: "free"})
		}
		freeMWs := 0.1 * h.DemandMW
		if what == "inertia" { // how much damping rows may count moves with the inertia there is
			h.DampingMWPerHz = 0
			h.Units = append(h.Units, fleet.Unit{Count: 1, InertiaMWs: freeMWs, Shape: -1})
			c.Resources = append(c.Resources, fleet.Resource{Name: "free"})
		}
		a := solved(t, c, h, -1)
		try := func(step float64) (cost, predicted float64, same bool) {
			d, g := *c, *h
			switch what {
			case "rocof":
				d.Limits.MaxHzPerS += step * c.Limits.MaxHzPerS
				predicted = -step * c.Limits.MaxHzPerS * a.Limits[limits.RoCoF].Price
			case "nadir":
				d.Limits.NadirHz += step * c.Limits.NadirHz
				predicted = -step * c.Limits.NadirHz * a.Limits[limits.Nadir].Price
			case "steady":
				d.Limits.SteadyHz += step * c.Limits.SteadyHz
				predicted = -step * c.Limits.SteadyHz * a.Limits[limits.Steady].Price
			case "inertia":
				more := step * freeMWs
				g.Units = append([]fleet.Unit(nil), h.Units...)
				g.Units[len(g.Units)-1].InertiaMWs += more
				predicted = -more * a.Prices.InertiaPerMWs
			case "response":
				more := step * free
				g.Units = append([]fleet.Unit(nil), h.Units...)
				u := &g.Units[len(g.Units)-1]
				u.HeadMW, u.ResponseCapMW = free+more, free+more
				predicted = -more * a.Prices.ResponsePerMW[3]
			}
			b := solved(t, &d, &g, -1)
			same = true
			for i := range a.Dispatch {
				same = same && a.Dispatch[i].On == b.Dispatch[i].On
			}
			return b.Cost - a.Cost, predicted, same
		}
		const step = 1e-3
		up, want, same := try(step)
		if !same || a.Status == Short { // a shortfall can end within the step, and its price drowns the rest
			return
		}
		// Where the dispatch is degenerate the slope differs on either side: the price lies
		// between the two.
		down, _, sameDown := try(-step)
		lo, hi := min(up, -down), max(up, -down)
		if !sameDown {
			lo, hi = up, 0
		}
		slack := 0.08*math.Abs(want) + 5e-7*math.Abs(a.Cost) + 1e-3
		if want < lo-slack || want > hi+slack {
			t.Errorf("%s: predicted %.6f, up %.6f, down %.6f, cost %.3f", what, want, up, down, a.Cost)
		}
		if want < -1e-2 {
			compared++
		}
	})
	if compared < 5 {
		t.Errorf("only %d prices compared", compared)
	}
}
