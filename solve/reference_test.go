package solve

import (
	"context"
	"fmt"
	"math"
	"testing"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
)

// reserve is response on offer in a reference hour: all of mw, held for nothing.
type reserve struct{ mw, delayS, rampS float64 }

// perMWs is what 1 MW·s of inertia costs in reference hours.
const perMWs = 0.01

// referenceHour loses lossMW and buys inertia, freely divisible; its load is served by
// plant that is no loss.
func referenceHour(t testing.TB, l limits.Limits, lossMW, damping float64, held ...reserve) (*fleet.Case, *fleet.Hour) {
	c := &fleet.Case{Name: "reference", Limits: l, UnservedPerMWh: 1e5, ShortPerMW: 1e6}
	h := &fleet.Hour{DemandMW: 1000, DampingMWPerHz: damping, Losses: []fleet.HourLoss{{Name: "incident", FixedMW: lossMW}}}
	add := func(name string, u fleet.Unit) {
		u.Count = 1
		h.Units = append(h.Units, u)
		c.Resources = append(c.Resources, fleet.Resource{Name: name})
	}
	add("plant", fleet.Unit{MinMW: 1000, MaxMW: 1000, HeadMW: 1000, Shape: -1})
	add("inertia", fleet.Unit{HeadMW: 1, Shape: -1, SyntheticCapMWs: 1e6, SyntheticPerMWs: perMWs})
	for i, r := range held {
		s, err := limits.Timing{DelayS: r.delayS, RampS: r.rampS}.Shape()
		if err != nil {
			t.Fatal(err)
		}
		c.Shapes = append(c.Shapes, fleet.NamedShape{Name: fmt.Sprint("s", i), Shape: s})
		add(fmt.Sprint("response", i), fleet.Unit{HeadMW: r.mw, FromHead: true, Shape: i, ResponseCapMW: r.mw})
	}
	return c, h
}

func solveExactly(t testing.TB, c *fleet.Case, h *fleet.Hour) Hour {
	t.Helper()
	out, err := New(c, Options{Gap: -1}).Hour(context.Background(), h)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.9g, want %.9g within %.2g", what, got, want, tol)
	}
}

// wide is a corridor in which nothing binds.
func wide() limits.Limits {
	return limits.Limits{NominalHz: 50, MaxHzPerS: 20, NadirHz: 20, SteadyHz: 20, SteadyByS: 60, SteadyUntilS: 120}
}

// R1. RoCoF = f0·ΔP/(2·E). ENTSO-E, Frequency stability evaluation criteria for the
// synchronous zone of Continental Europe, 2016 (from memory): 1,000 MW at 50 Hz with
// 0.125 Hz/s allowed needs 200,000 MW·s (computed). Prices follow by differentiation.
func TestReferenceRoCoF(t *testing.T) {
	l := wide()
	l.MaxHzPerS = 0.125
	c, h := referenceHour(t, l, 1000, 0, reserve{5000, 0, 30})
	out := solveExactly(t, c, h)
	near(t, "kinetic energy", out.InertiaMWs, 200_000, 0.01)
	near(t, "replayed RoCoF", out.RoCoFHzPerS, 0.125, 1e-6)
	near(t, "price of inertia", out.Prices.InertiaPerMWs, perMWs, 1e-9)
	near(t, "price of the limit", out.Limits[limits.RoCoF].Price, perMWs*200_000/0.125, 0.01)
	near(t, "price of the loss", out.Prices.LossPerMW, perMWs*200, 1e-6)
	for k := range out.Limits {
		if out.Limits[k].Binds != (limits.Kind(k) == limits.RoCoF) {
			t.Errorf("%s binds: %v", limits.Kind(k), out.Limits[k].Binds)
		}
	}
}

// R4. UCTE Operation Handbook, appendix 1 (from memory): 3,000 MW lost, load of 150 GW,
// 1 %/Hz: 15,000 MW/Hz of primary control keep 0.182 Hz (computed). Held to just that, the
// cheapest mix must buy what 15,000 MW/Hz deliver there.
func TestReferenceSteadyState(t *testing.T) {
	l := wide()
	l.SteadyHz, l.SteadyByS = 3000.0/16_500, 600
	l.SteadyUntilS = 900
	c, h := referenceHour(t, l, 3000, 0.01*150_000, reserve{20_000, 0, 30})
	h.Units[2].ResponsePerMW = 4
	h.Units[1].InertiaMWs, h.Units[1].SyntheticCapMWs = 900_000, 0
	out := solveExactly(t, c, h)
	near(t, "response", out.PrimaryMW, 15_000*3000.0/16_500, 0.01)
	near(t, "steady deviation, rounded as published", out.SteadyHz, 0.182, 5e-4)
	near(t, "steady deviation", out.SteadyHz, 3000.0/16_500, 1e-5)
	near(t, "price of the limit", out.Limits[limits.Steady].Price, 4*1500, 0.1)
}

// R5. Chávez, Baldick, Sharma, IEEE Trans. Power Systems 29(3), 2014 (form from memory;
// computed): X = f0·ΔP²·T/(4·E·R) + f0·ΔP·d/(2E) with one ramp over T after a delay d.
func TestReferenceNadirOfOneRamp(t *testing.T) {
	for _, x := range []struct{ nadir, loss, response, ramp, delay float64 }{
		{0.8, 1000, 1500, 10, 0}, {0.8, 1000, 1100, 10, 0}, {1, 700, 900, 8, 0.5}, {0.5, 1800, 4000, 6, 2},
	} {
		l := wide()
		l.NadirHz = x.nadir
		c, h := referenceHour(t, l, x.loss, 0, reserve{x.response, x.delay, x.ramp})
		out := solveExactly(t, c, h)
		quick := 50 * x.loss * x.loss * x.ramp / (4 * x.nadir * x.response)
		e := quick + 50*x.loss*x.delay/(2*x.nadir)
		near(t, "kinetic energy", out.InertiaMWs, e, 1e-6*e)
		near(t, "replayed nadir", out.NadirHz, x.nadir, 1e-3*x.nadir) // 0.1 %, as asked
		near(t, "replayed nadir", out.NadirHz, x.nadir, 1e-6)
		near(t, "instant of the nadir", out.NadirS, x.delay+x.ramp*x.loss/x.response, 1e-3)
		// Derivatives of the cost perMWs·E.
		near(t, "price of the limit", out.Limits[limits.Nadir].Price, perMWs*e/x.nadir, 1e-3*perMWs*e)
		near(t, "price of response", out.Prices.ResponsePerMW[0], perMWs*quick/x.response, 1e-3*perMWs*quick/x.response)
		near(t, "price of the loss", out.Prices.LossPerMW, perMWs*(2*quick/x.loss+50*x.delay/(2*x.nadir)), 1e-3*perMWs*e/x.loss)
	}
}

// R6. Badesa, Teng, Strbac, IEEE Trans. Power Systems 34(5), 2019 (form from memory;
// computed): ΔP = 1,200, R = 1,500 in 10 s, F = 300 in 1 s and X = 1.1875 Hz need
// E = f0·(F·T1 + (ΔP−F)²·T2/R)/(4X) = 60,000 MW·s, nadir at 6 s.
func TestReferenceNadirOfTwoRamps(t *testing.T) {
	l := wide()
	l.NadirHz = 1.1875
	c, h := referenceHour(t, l, 1200, 0, reserve{1500, 0, 10}, reserve{300, 0, 1})
	out := solveExactly(t, c, h)
	near(t, "kinetic energy", out.InertiaMWs, 60_000, 0.1)
	near(t, "replayed nadir", out.NadirHz, 1.1875, 1e-6)
	near(t, "instant of the nadir", out.NadirS, 6, 1e-3)
	near(t, "fast", out.FastMW, 300, 1e-6)
	near(t, "primary", out.PrimaryMW, 1500, 1e-6)
	// ∂E/∂R = −f0·(ΔP−F)²·T2/(4X·R²), ∂E/∂F = f0·(T1 − 2(ΔP−F)·T2/R)/(4X), ∂E/∂ΔP = f0·2(ΔP−F)·T2/(4X·R).
	k := perMWs * 50 / (4 * 1.1875)
	near(t, "price of the slow", out.Prices.ResponsePerMW[0], k*900*900*10/(1500*1500), 1e-4)
	near(t, "price of the fast", out.Prices.ResponsePerMW[1], k*(2*900*10/1500.0-1), 1e-4)
	near(t, "price of the loss", out.Prices.LossPerMW, k*2*900*10/1500, 1e-4)
	near(t, "price of the limit", out.Limits[limits.Nadir].Price, perMWs*60_000/1.1875, 0.05)
}

// S1. Commission Regulation (EU) 2017/1485, annex V (read): full activation of containment
// reserve; annex III (from memory): the largest deviation. The kinetic energy bought is R5's.
func TestReferenceActivationTimes(t *testing.T) {
	for _, area := range []struct {
		name           string
		fullS, nadirHz float64
	}{
		{"Continental Europe", 30, 0.8}, {"Great Britain", 10, 0.8}, {"Ireland and Northern Ireland", 15, 1}, {"Nordic", 30, 1},
	} {
		l := wide()
		l.NadirHz = area.nadirHz
		c, h := referenceHour(t, l, 500, 0, reserve{600, 0, area.fullS})
		want := 50 * 500 * 500 * area.fullS / (4 * area.nadirHz * 600)
		out := solveExactly(t, c, h)
		near(t, area.name, out.InertiaMWs, want, 1e-5*want)
		near(t, area.name, out.NadirS, area.fullS*500/600, 1e-2)
	}
}

// scarf is R8: the modified Scarf example, Hogan, Ring, "On minimum-uplift pricing for
// electricity markets", 2003 (from memory). Six plants of 16, start 53, marginal 3; five of
// 7, start 30, marginal 2; five of 6, minimum 2, marginal 7.
func scarf(demand float64) (*fleet.Case, *fleet.Hour) {
	c := &fleet.Case{Name: "Scarf", Limits: wide(), UnservedPerMWh: 1000, ShortPerMW: 1000}
	h := &fleet.Hour{DemandMW: demand}
	for _, x := range []struct {
		count                 int
		most, least, on, cost float64
	}{{6, 16, 0, 53, 3}, {5, 7, 0, 30, 2}, {5, 6, 2, 0, 7}} {
		h.Units = append(h.Units, fleet.Unit{Count: x.count, Commit: true, OnCost: x.on, MinMW: x.least, MaxMW: x.most, HeadMW: x.most,
			Steps: []fleet.Step{{ToMW: x.most, CostPerMWh: x.cost}}, Shape: -1})
		c.Resources = append(c.Resources, fleet.Resource{Name: fmt.Sprint("plant", len(h.Units))})
	}
	return c, h
}

// scarfCost is the least cost by trying every number of plants of each kind.
func scarfCost(demand float64) float64 {
	best := math.Inf(1)
	for a := 0.0; a <= 6; a++ {
		for b := 0.0; b <= 5; b++ {
			for d := 0.0; d <= 5; d++ {
				left := demand - 2*d // the minimum of the third kind comes first
				if left < 0 {
					continue
				}
				cost := 53*a + 30*b + 14*d
				for _, x := range []struct{ most, price float64 }{{7 * b, 2}, {16 * a, 3}, {4 * d, 7}} {
					mw := min(left, x.most)
					cost += mw * x.price
					left -= mw
				}
				if left == 0 {
					best = min(best, cost)
				}
			}
		}
	}
	return best
}

func TestReferenceScarfCosts(t *testing.T) {
	published := map[float64]float64{16: 101, 35: 220, 40: 254, 55: 347, 70: 443, 100: 634, 131: 826, 140: 889, 161: 1036}
	for demand := 1.0; demand <= 161; demand++ {
		want := scarfCost(demand)
		if p, ok := published[demand]; ok && p != want {
			t.Errorf("the enumeration gives %g at %g, R8 %g", want, demand, p)
		}
		c, h := scarf(demand)
		out, err := New(c, Options{Gap: -1, WithoutLimits: true}).Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		near(t, fmt.Sprintf("cost at %g", demand), out.Cost, want, 1e-6)
		if out.Bound > want+1e-6 || out.Bound < want-1e-5 {
			t.Errorf("bound at %g: %.9g, cost %g", demand, out.Bound, want)
		}
	}
}

// The convex hull price is the dual of the balance in the relaxation over operating points:
// 2 + 30/7 up to a demand of 35, 3 + 53/16 up to 131, then 7 up to 161.
func TestReferenceScarfConvexHullPrices(t *testing.T) {
	for demand := 0.5; demand < 161; demand++ {
		want := 7.0
		switch {
		case demand < 35:
			want = 2 + 30.0/7
		case demand < 131:
			want = 3 + 53.0/16
		}
		c, h := scarf(demand)
		p := formulate.Build(c, h)
		p.WithoutLimits = true
		q := newSearch(p, Options{})
		q.relax(q.root())
		near(t, fmt.Sprintf("price at %g", demand), q.lp.Duals()[0], want, 1e-6)
	}
}

// The other side of nominal is the first one mirrored: the same kinetic energy for a load lost
// as R1 and R5 ask for an infeed lost, and the same prices.
func TestReferenceMirrored(t *testing.T) {
	for _, x := range []struct{ nadir, rocof, response, ramp, delay float64 }{{20, 0.125, 5000, 30, 0}, {0.8, 20, 1500, 10, 0}, {1, 20, 1400, 8, 0.5}} {
		l := wide()
		l.NadirHz, l.MaxHzPerS = x.nadir, x.rocof
		c, h := referenceHour(t, l, 1000, 0, reserve{x.response, x.delay, x.ramp})
		below := solveExactly(t, c, h)
		free := wide()
		c.Limits, c.Above = free, &l
		h.Losses = []fleet.HourLoss{{Name: "feeder", FixedMW: 1000, Over: true}}
		u := &h.Units[2]
		u.DownCapMW, u.DownPerMW, u.DownShape, u.FootMW = u.ResponseCapMW, u.ResponsePerMW, u.Shape, -u.HeadMW
		u.ResponseCapMW = 0
		above := solveExactly(t, c, h)
		near(t, "kinetic energy", above.InertiaMWs, below.InertiaMWs, 1e-6*below.InertiaMWs)
		near(t, "price of inertia", above.Prices.InertiaPerMWs, below.Prices.InertiaPerMWs, 1e-9)
		near(t, "price of the loss", above.Above.LossPerMW, below.Prices.LossPerMW, 1e-6)
		near(t, "peak", above.Above.PeakHz, below.NadirHz, 1e-6)
		near(t, "instant of the peak", above.Above.PeakS, below.NadirS, 1e-3)
		near(t, "RoCoF", above.Above.RoCoFHzPerS, below.RoCoFHzPerS, 1e-6)
		near(t, "response", above.Above.DownMW, below.PrimaryMW, 1e-6)
		near(t, "price of response", above.Above.DownPerMW[0], below.Prices.ResponsePerMW[0], 1e-6)
		for k := range above.Above.Limits {
			near(t, "price of the limit", above.Above.Limits[k].Price, below.Limits[k].Price, 1e-3)
		}
	}
}
