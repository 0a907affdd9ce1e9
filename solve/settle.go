package solve

import (
	"math"

	"evenkeel/formulate"
	"evenkeel/solve/simplex"
)

// Settlement is what the schedule of an hour earns at its prices, two ways.
//
// Marginal prices are the duals of the dispatch, its commitment held. Convex hull prices are the
// duals of the relaxation in which every resource may take any mean of its operating points (the
// Dantzig–Wolfe master): of all prices they leave the least uplift, what they pay for surplus counted
// in. In both, every possible loss has rows of its own: what is lost counts in them by its output, which it pays for, and is paid
// nothing for the inertia and the response that go with it. In the convex hull a fraction of a
// machine is a fraction of a loss, and identical units are lost at the mean of all of them, on or
// off; so its price of a smaller loss is low, and none of it depends on how the optimiser bounds the
// largest loss.
type Settlement struct {
	Marginal, Hull Settled
}

// Settled is the settlement at one set of prices, per hour.
type Settled struct {
	Prices    Prices    // of inertia: that of a least inertia included
	DownPerMW []float64 // one a shape; nil without limits above nominal
	OverPerMW float64   // what 1 MW less of the binding losses of load saves
	Resources []Earning // one a resource of the case, all its units together
	Unpaid    []Unpaid  // one a resource
	Uplift    float64   // of all resources
	// SlackValue is what the prices pay for more of the rows than they need; marginal prices do
	// not. With it, Uplift is the cost less the bound that the prices prove, unless the hour is short:
	// what a shortfall costs above the prices is no resource's.
	SlackValue float64
}

// Earning is what a resource earns with its schedule, and what it forgoes, in currency per hour.
// Profit = Energy + Inertia + Response + Down − LossCharge − Cost. MakeWhole + LostOpportunity is
// what its own best answer to the prices would earn beyond that: MakeWhole as far as it pays for a
// loss, LostOpportunity the rest. Who must run has no better answer in being off.
type Earning struct {
	Energy, Inertia, Response, Down float64
	LossCharge                      float64 // paid for what the system holds against its loss
	Cost, Profit, Best              float64
	MakeWhole, LostOpportunity      float64
}

// Unpaid is what a unit of a resource is not paid of the prices, as its own loss takes along what it
// holds: the part of its LossCharge that is for what it holds, not for its output.
type Unpaid struct{ InertiaPerMWs, ResponsePerMW, DownPerMW float64 }

// tariff is a set of row duals, summed to what the columns see.
type tariff struct {
	energy, inertia float64
	r               []float64 // as the rows' R
	own             []ownPart // one a group: the charge for losses that take all of it,
	single          []ownPart // and for that of one of its units
}

// ownPart is what a group's columns are charged for their own loss.
type ownPart struct{ p, e, r, d float64 }

// tariffOf sums the duals.
func (m *master) tariffOf(rows []*simplex.Row, duals []float64) *tariff {
	t := &tariff{r: make([]float64, m.rowShapes()), own: make([]ownPart, len(m.groups)), single: make([]ownPart, len(m.groups))}
	for i, row := range rows {
		y := duals[i]
		t.energy += y * row.P
		t.inertia += y * row.E
		for s, c := range row.R {
			t.r[s] += y * c
		}
		list := t.own
		if m.single(row) {
			list = t.single
		}
		for _, o := range row.Own {
			w := &list[o.Group]
			w.p += y * o.P
			w.e += y * o.E
			w.r += y * o.R
			w.d += y * o.D
		}
	}
	return t
}

// single tells whether a row is that of the loss of one of several identical units.
func (m *master) single(r *simplex.Row) bool {
	tag, ok := r.Tag.(*rowTag)
	if !ok || tag.cap || tag.floor || tag.row.Loss == formulate.AnyLoss {
		return false
	}
	if tag.row.Over {
		return m.p.OverLosses[tag.row.Loss].Single
	}
	return m.p.Losses[tag.row.Loss].Single
}

func (o *ownPart) add(x ownPart, share float64) {
	o.p += share * x.p
	o.e += share * x.e
	o.r += share * x.r
	o.d += share * x.d
}

// earn is what a column earns under a tariff.
func (t *tariff) earn(g *simplex.Group, c *simplex.Column, own ownPart) Earning {
	e := Earning{Energy: t.energy * c.P, Inertia: t.inertia * c.E, Cost: c.Cost}
	if g.Shape >= 0 {
		e.Response = t.r[g.Shape] * c.R
	}
	if g.Down > 0 {
		e.Down = t.r[g.Down] * c.D
	}
	e.LossCharge = own.p*c.P + own.e*c.E + own.r*c.R + own.d*c.D
	e.Profit = e.Energy + e.Inertia + e.Response + e.Down - e.LossCharge - e.Cost
	return e
}

func (e *Earning) add(x *Earning, share float64) {
	e.Energy += share * x.Energy
	e.Inertia += share * x.Inertia
	e.Response += share * x.Response
	e.Down += share * x.Down
	e.LossCharge += share * x.LossCharge
	e.Cost += share * x.Cost
	e.Profit += share * x.Profit
}

// settlement settles the mix of a search whose dispatch is in s.fix.
func (s *search) settlement() *Settlement {
	out := &Settlement{}
	out.Marginal = s.settled(s.fix.Rows(), s.fix.Duals(), 0)
	s.hull()
	out.Hull = s.settled(s.lp.Rows(), s.lp.Duals(), 1)
	return out
}

// hull solves the relaxation of the whole hour, without any bound of the largest loss, to the
// last row.
func (s *search) hull() {
	root := s.root()
	root.high = math.Inf(1)
	s.load(s.lp, root)
	tol := 0.9 * roundingShare * s.m.shortMW
	for s.lp.Solve(math.Inf(1)) == simplex.Optimal && s.sep.add(s.lp, root.hi, 0, 0, tol) > 0 {
	}
}

// settled settles the schedule at the duals of rows. A unit that is on bears its share of the charge
// for the loss of one of several identical units, as their rows are a mean of theirs; one that is
// not bears off times that. Where the mean is one over the units on, who is off has no loss.
func (s *search) settled(rows []*simplex.Row, duals []float64, off float64) Settled {
	m := s.m
	p := m.p
	t := m.tariffOf(rows, duals)
	out := Settled{Resources: make([]Earning, len(p.Hour.Units)), Unpaid: make([]Unpaid, len(p.Hour.Units))}
	out.Prices.EnergyPerMWh = duals[0]
	out.Prices.InertiaPerMWs = t.inertia
	out.Prices.ResponsePerMW = append([]float64(nil), t.r[:len(p.Shapes)]...)
	if p.Above != nil {
		at := m.downAt(0)
		out.DownPerMW = append([]float64(nil), t.r[at:at+len(p.Shapes)]...)
	}
	for i, r := range rows {
		if tag, ok := r.Tag.(*rowTag); ok && !tag.cap && !tag.floor {
			if tag.row.Over {
				out.OverPerMW += duals[i]
			} else {
				out.Prices.LossPerMW += duals[i]
			}
		}
	}
	must := s.root()
	for c := range p.Classes {
		cl, g := &p.Classes[c], m.groups[c]
		e := &out.Resources[cl.Unit]
		for i := range cl.Count {
			own := t.own[c]
			if i < s.commit[c] {
				own.add(t.single[c], 1)
			} else {
				own.add(t.single[c], off)
			}
			if i == 0 {
				out.Unpaid[cl.Unit] = Unpaid{own.e, own.r, own.d}
			}
			var unit Earning
			s.fix.Each(m.first[c]+i, func(j int32, x float64) {
				col := t.earn(g, &g.Cols[j], own)
				unit.add(&col, x)
			})
			unit.Best = math.Inf(-1)
			for j := range g.Cols {
				if g.HasOff && j == 0 && i < must.lo[c] {
					continue
				}
				if g.HasOff && j > 0 && i >= must.hi[c] {
					break
				}
				col := t.earn(g, &g.Cols[j], own)
				unit.Best = max(unit.Best, col.Profit)
			}
			forgone := max(unit.Best-unit.Profit, 0)
			whole := min(forgone, max(-unit.Profit, 0))
			e.add(&unit, 1)
			e.Best += unit.Best
			e.MakeWhole += whole
			e.LostOpportunity += forgone - whole
			out.Uplift += forgone
		}
	}
	out.SlackValue = s.slackValue(rows, duals)
	return out
}

// slackValue is what duals pay for the surplus that the schedule leaves in rows.
func (s *search) slackValue(rows []*simplex.Row, duals []float64) float64 {
	value := 0.0
	for i, r := range rows {
		if duals[i] != 0 {
			value += duals[i] * s.surplus(r)
		}
	}
	return value
}

// surplus is how much more than its right-hand side the schedule in s.fix puts into a row.
func (s *search) surplus(r *simplex.Row) float64 {
	sum := -r.RHS
	for set, g := range s.m.sets {
		group := s.m.groups[g]
		s.fix.Each(set, func(j int32, x float64) { sum += x * r.Coef(g, group, &group.Cols[j]) })
	}
	return sum
}
