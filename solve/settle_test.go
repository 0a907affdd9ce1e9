package solve

import (
	"context"
	"fmt"
	"math"
	"path/filepath"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/fleet"
)

// Uplift of R8, the modified Scarf example (Hogan, Ring, "On minimum-uplift pricing for electricity
// markets", 2003, from memory), derived: at 3 + 53/16 = 6.3125 a plant of 16 earns
// 16·(6.3125 − 3) − 53 = 0 at best, one of 7 earns 7·(6.3125 − 2) − 30 = 0.1875, one of 6 loses and stays
// off, or can. All plants' best answers earn 5·0.1875 = 0.9375, so that demand 40 can cost no less than
// 40·6.3125 − 0.9375 = 251.5625 at these prices and costs 254: uplift 2.4375. Demand 100:
// 631.25 − 0.9375 = 630.3125 of 634: 3.6875 (computed).
func TestReferenceScarfUplift(t *testing.T) {
	for _, x := range []struct{ demand, cost, uplift float64 }{{40, 254, 2.4375}, {100, 634, 3.6875}} {
		c, h := scarf(x.demand)
		out, err := New(c, Options{Gap: -1, WithoutLimits: true, Settle: true}).Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		s := out.Settlement
		near(t, "cost", out.Cost, x.cost, 1e-6)
		near(t, "hull price", s.Hull.Prices.EnergyPerMWh, 6.3125, 1e-6)
		near(t, "hull uplift", s.Hull.Uplift, x.uplift, 1e-6)
		near(t, "surplus paid for", s.Hull.SlackValue, 0, 1e-6)

		// Marginal: at the price p of the dispatch every plant's best answer and profit follow from
		// the three kinds' numbers.
		p := s.Marginal.Prices.EnergyPerMWh
		best := 6*max(0, 16*(p-3)-53) + 5*max(0, 7*(p-2)-30) + 5*max(0, 6*(p-7))
		near(t, "marginal uplift", s.Marginal.Uplift, best-(p*x.demand-x.cost), 1e-6)
		if p != 2 && p != 3 && p != 7 {
			t.Errorf("marginal price %g is no plant's marginal cost", p)
		}
		if s.Marginal.Uplift < s.Hull.Uplift-1e-9 {
			t.Errorf("marginal prices leave less uplift (%g) than hull prices (%g)", s.Marginal.Uplift, s.Hull.Uplift)
		}
	}
}

// settlementHolds checks what must hold of any settled hour.
func settlementHolds(t interface{ Errorf(string, ...any) }, name string, q *search, out *Hour) {
	s := out.Settlement
	tol := 1e-5 * (1 + math.Abs(out.Cost))
	for _, way := range []struct {
		name string
		*Settled
	}{{name + ", marginal", &s.Marginal}, {name + ", hull", &s.Hull}} {
		uplift, pseudo := 0.0, out.Cost
		for i, e := range way.Resources {
			if d := e.Energy + e.Inertia + e.Response + e.Down - e.LossCharge - e.Cost - e.Profit; math.Abs(d) > tol {
				t.Errorf("%s: resource %d's profit is off by %g", way.name, i, d)
			}
			if d := e.Best - e.Profit - e.MakeWhole - e.LostOpportunity; math.Abs(d) > tol || e.MakeWhole < 0 || e.LostOpportunity < 0 {
				t.Errorf("%s: resource %d: %+v", way.name, i, e)
			}
			uplift += e.MakeWhole + e.LostOpportunity
			pseudo -= e.Cost
		}
		if math.Abs(uplift-way.Uplift) > tol || way.SlackValue < -tol {
			t.Errorf("%s: uplift %g of %g, slack %g", way.name, uplift, way.Uplift, way.SlackValue)
		}
		if way.Settled == &s.Marginal && math.Abs(way.SlackValue) > tol {
			t.Errorf("%s: marginal prices pay %g for slack", way.name, way.SlackValue)
		}
		if out.Status == Secure && math.Abs(pseudo) > tol {
			t.Errorf("%s: costs of %g belong to nobody", way.name, pseudo)
		}
	}
	if s.Hull.Uplift > s.Marginal.Uplift+tol {
		t.Errorf("%s: hull prices leave more uplift (%g) than marginal ones (%g)", name, s.Hull.Uplift, s.Marginal.Uplift)
	}
	// Cost − the bound that hull prices prove = uplift + what they pay for surplus.
	if out.Status == Secure {
		if gap := out.Cost - q.lp.Objective(); math.Abs(gap-s.Hull.Uplift-s.Hull.SlackValue) > tol {
			t.Errorf("%s: duality gap %g, uplift %g and slack %g", name, gap, s.Hull.Uplift, s.Hull.SlackValue)
		}
	}
	splits(t, name, q, tol)
}

// splits checks that the value of each row of the dispatch goes into its services' payments without
// remainder: what inertia, response and the load's own parts are paid is what the losses are charged.
func splits(t interface{ Errorf(string, ...any) }, name string, q *search, tol float64) {
	m := q.m
	for i, r := range q.fix.Rows() {
		y := q.fix.Duals()[i]
		tag, ok := r.Tag.(*rowTag)
		if !ok || tag.cap || tag.floor || y <= 0 {
			continue
		}
		paid, charged, fixed := 0.0, 0.0, r.RHS // the right-hand side: losses that are no resource's, less the load's own parts
		for set, g := range m.sets {
			group := m.groups[g]
			q.fix.Each(set, func(j int32, x float64) {
				c := &group.Cols[j]
				if group.Shape >= 0 {
					paid += x * y * r.R[group.Shape] * c.R
				}
				if group.Down > 0 {
					paid += x * y * r.R[group.Down] * c.D
				}
				paid += x * y * r.E * c.E
				for _, o := range r.Own {
					if o.Group == g {
						charged += x * y * (o.P*c.P + o.E*c.E + o.R*c.R + o.D*c.D)
					}
				}
			})
		}
		if d := paid - charged - y*fixed; math.Abs(d) > tol {
			t.Errorf("%s: row %v of loss %d: paid %g, charged %g and %g: %g left", name, tag.row.At, tag.row.Loss, paid, charged, y*fixed, d)
		}
	}
}

func settledHour(t interface{ Fatal(...any) }, c *fleet.Case, h *fleet.Hour, o Options) (*search, Hour) {
	s := New(c, o)
	p, q, err := s.search(context.Background(), h, nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	out, _ := s.finish(p, q, s.sys)
	out.Settlement = q.settlement()
	return q, out
}

func TestSettlementOfRandomHours(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, h := drawHour(t, 12)
		q, out := settledHour(t, c, h, Options{Gap: 1e-6})
		settlementHolds(t, "random hour", q, &out)
	})
}

// The same of the demo case, with losses of load, shapes of models and units in numbers; and the
// marginal prices are those that the hour reports.
func TestSettlementOfTheDemo(t *testing.T) {
	c := readCase(t, filepath.Join("..", "testdata", "skerra", "case.yaml"))
	for i := 11; i < c.Hours(); i += 379 {
		q, out := settledHour(t, c, c.Hour(i, fleet.HourOptions{}), Options{})
		settlementHolds(t, fmt.Sprint("hour ", i), q, &out)
		m := out.Settlement.Marginal
		near(t, "energy price", m.Prices.EnergyPerMWh, out.Prices.EnergyPerMWh, 1e-9)
		near(t, "inertia price", m.Prices.InertiaPerMWs, out.Prices.InertiaPerMWs, 1e-6)
		for k, v := range m.Prices.ResponsePerMW {
			near(t, "response price", v, out.Prices.ResponsePerMW[k], 1e-6)
		}
		proven, err := New(c, Options{Settle: true}).Hour(context.Background(), c.Hour(i, fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		if s := proven.Settlement; s == nil || s.Hull.Uplift > s.Marginal.Uplift+1e-3 {
			t.Errorf("hour %d proven: %+v", i, s)
		}
	}
}

// Two wind farms can hold response, and the loss of the first is the only one: what it holds itself is
// gone then, so it is paid nothing for it, while the second is paid the whole price.
func TestWhatIsLostIsNotPaid(t *testing.T) {
	c, found := fleet.Read(filepath.Join("testdata", "two-farms.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	out, err := New(c, Options{Gap: -1, Settle: true}).Hour(context.Background(), c.Hour(0, fleet.HourOptions{}))
	if err != nil {
		t.Fatal(err)
	}
	const large, small = 1, 2
	for name, s := range map[string]*Settled{"marginal": &out.Settlement.Marginal, "hull": &out.Settlement.Hull} {
		price := s.Prices.ResponsePerMW[0]
		if price <= 0 {
			t.Errorf("%s: response has no price", name)
		}
		near(t, name+": the large one's", s.Unpaid[large].ResponsePerMW, price, 1e-9*price)
		near(t, name+": the small one's", s.Unpaid[small].ResponsePerMW, 0, 1e-9)
	}
}
