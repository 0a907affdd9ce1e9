package worth

import (
	"fmt"
	"math"

	"evenkeel/limits"
)

// Exchange asks how much of one response replaces another, at given kinetic energies and losses.
type Exchange struct {
	Limits limits.Limits
	// DampingMWPerHz is the load's damping D. As the kinetic energy E of a cell is given, its rate
	// D·f0/(2·E) is known there and rows count damping in full.
	DampingMWPerHz float64

	Names   []string // of the shapes
	Shapes  []limits.Shape
	Primary int       // the shape that is bought last: what is asked for is the least of it
	HeldMW  []float64 // of every shape besides; that of Primary is not looked at

	InertiaMWs []float64 // left after the loss
	LossMW     []float64
}

// Governs says what asks for the primary reserve of a cell.
type Governs uint8

const (
	Nothing  Governs = iota // the loss is survived without any
	ByRoCoF                 // the rate of change
	ByNadir                 // the lowest frequency
	ByReturn                // frequency back in the steady band
	BySteady                // the equilibrium in the steady band
	Beyond                  // no amount of primary reserve keeps a limit
)

func (g Governs) String() string {
	return [...]string{"nothing", "rocof", "nadir", "return", "steady", "beyond"}[g]
}

// Cell is what an exchange says of one kinetic energy and one loss.
type Cell struct {
	InertiaMWs, LossMW float64
	Governs            Governs
	Broken             limits.Kind // where Beyond: the limit that cannot be kept
	PrimaryMW          float64     // the least that keeps every limit; +Inf where Beyond
	// The interval after the loss on which the limit that governs is met with equality.
	FromS, ToS float64
	// InertiaPerPrimary is how many MW·s 1 MW of primary reserve replaces, to first order; 0 where inertia is of
	// no help at that instant or nothing governs.
	InertiaPerPrimary float64
	Rates             []Rate // one a shape; that of Primary is 1
}

// Rated tells whether something governs that primary reserve is good for, so that there are rates.
func (c *Cell) Rated() bool { return c.Governs != Nothing && c.Governs != Beyond }

// Rate is what 1 MW of a response replaces.
type Rate struct {
	// PrimaryMW is what the first small part of a MW replaces, a MW: the ratio of what both give
	// in the row that governs.
	PrimaryMW float64
	// PrimaryMWByStep is what one whole MW replaces, the least primary reserve being computed
	// anew. As that is convex in what is held, it is no more than PrimaryMW but for the numbers'
	// rounding.
	PrimaryMWByStep float64
	// InertiaMWs is the kinetic energy that it replaces; 0 where inertia is of no help.
	InertiaMWs float64
}

// Check reports what makes no sense in an exchange.
func (x *Exchange) Check() error {
	if x.Primary < 0 || x.Primary >= len(x.Shapes) {
		return fmt.Errorf("the primary response is shape %d of %d", x.Primary, len(x.Shapes))
	}
	for _, e := range x.InertiaMWs {
		if !(e > 0) || math.IsInf(e, 0) {
			return fmt.Errorf("the kinetic energy after the loss is %v MW·s; it must be above 0", e)
		}
	}
	for _, p := range x.LossMW {
		if !(p > 0) || math.IsInf(p, 0) {
			return fmt.Errorf("the loss is %v MW; it must be above 0", p)
		}
	}
	return nil
}

// Cells gives a cell for every kinetic energy and, within it, every loss.
//
// The least R of primary reserve that keeps every limit after a loss P that leaves E is the
// largest that any row asks for, and rows are linear in R. Limits.Scan finds the row broken
// worst; R is raised until that one holds, and so on: a cutting plane in one dimension, which
// comes from below and ends where nothing is broken. The row that ends it has
// Φ_p(t*)·R + Σ Φ_s(t*)·R_s + (2X/f0)·E = P·t* there, so that one MW of shape s stands for
// Φ_s(t*)/Φ_p(t*) MW of primary reserve: the instant t* itself moves, but at the worst instant that
// changes nothing to first order (the envelope theorem). A MW·s gives 2X/f0 there, less what it takes
// from the damping of the load, whose rate D·f0/(2·E) falls as E grows (see inertiaGives).
func (x *Exchange) Cells() []Cell {
	var out []Cell
	for _, e := range x.InertiaMWs {
		scan := limits.NewScan(x.Limits, x.Shapes, x.dampingRate(e), x.DampingMWPerHz)
		for _, p := range x.LossMW {
			out = append(out, x.cell(scan, e, p))
		}
	}
	return out
}

const stepMW = 1 // the whole MW of Rate.PrimaryMWByStep

func (x *Exchange) cell(scan *limits.Scan, e, p float64) Cell {
	held := make([]float64, len(x.Shapes))
	copy(held, x.HeldMW)
	c, row := x.least(scan, e, p, held)
	c.Rates = make([]Rate, len(x.Shapes))
	if row == nil {
		return c
	}
	primary := row.Response[x.Primary]
	held[x.Primary] = c.PrimaryMW
	inertia := x.inertiaGives(row, e, p, held)
	if inertia > 0 {
		c.InertiaPerPrimary = primary / inertia
	}
	for s := range x.Shapes {
		r := &c.Rates[s]
		r.PrimaryMW = row.Response[s] / primary
		if inertia > 0 {
			r.InertiaMWs = row.Response[s] / inertia
		}
		if s == x.Primary {
			r.PrimaryMWByStep = 1
			continue
		}
		held[s] += stepMW
		with, _ := x.least(scan, e, p, held)
		held[s] -= stepMW
		r.PrimaryMWByStep = (c.PrimaryMW - with.PrimaryMW) / stepMW
	}
	return c
}

// inertiaGives is what one MW·s more gives in a row that is met with equality, in the row's units, for
// each MW·s. The row counts damping by its rate a0 = D·f0/(2·E), so that it changes by
// 2X/f0 − a0/E · d/da0(Σ Φ_s·R_s − ∫e^(−a0·(t−τ))dτ·P); the latter is a central difference. It is
// below 0 where a heavier system is slower to come back.
func (x *Exchange) inertiaGives(row *limits.Row, e, p float64, heldMW []float64) float64 {
	a0 := x.dampingRate(e)
	if row.InertiaPerMWs == 0 || a0 == 0 || a0 == limits.MaxDampingPerS {
		return row.InertiaPerMWs
	}
	const step = 1e-4 // of the rate
	beyond := func(a0 float64) float64 {
		r := x.Limits.Row(row.At, x.Shapes, a0)
		sum := -r.LossS * p
		for s, mw := range heldMW {
			sum += r.Response[s] * mw
		}
		return sum
	}
	return row.InertiaPerMWs - (beyond(a0*(1+step))-beyond(a0*(1-step)))/(2*step*e)
}

// dampingRate is the rate at which the load damps at a kinetic energy, 1/s.
func (x *Exchange) dampingRate(e float64) float64 {
	return min(x.DampingMWPerHz*x.Limits.NominalHz/(2*e), limits.MaxDampingPerS)
}

const excessTol = 1e-9 // share of the loss; a row broken by less holds

// least gives the least primary reserve and the row that asks for it; nil where none is needed.
func (x *Exchange) least(scan *limits.Scan, e, p float64, held []float64) (Cell, *limits.Row) {
	c := Cell{InertiaMWs: e, LossMW: p}
	var worst [limits.Worsts]limits.Worst
	mw := append([]float64(nil), held...)
	mw[x.Primary] = 0
	for {
		mw[x.Primary] = c.PrimaryMW
		scan.Worst(p, e, mw, &worst)
		raised, nearest := false, 0
		for i, w := range worst {
			if w.ExcessMW >= worst[nearest].ExcessMW-excessTol*p { // on a par, the equilibrium comes last
				nearest = i
			}
			if !(w.ExcessMW > excessTol*p) {
				continue
			}
			r := scan.Row(w.At)
			share := r.Response[x.Primary]
			if !(share > 1e-12) { // it comes too late, or is gone by then
				c.Governs, c.Broken, c.PrimaryMW, c.FromS, c.ToS = Beyond, w.At.Kind, math.Inf(1), w.At.FromS, w.At.ToS
				return c, nil
			}
			if need := c.PrimaryMW + w.ExcessMW*r.LossS/share; need > next(c.PrimaryMW) && (!raised || need > mw[x.Primary]) {
				raised = true
				mw[x.Primary] = need
			}
		}
		if !raised {
			if c.PrimaryMW == 0 {
				return c, nil
			}
			// The instant that is nearest now, not the one that the last cut was made at.
			r := scan.Row(worst[nearest].At)
			c.Governs, c.FromS, c.ToS = governs(nearest), r.At.FromS, r.At.ToS
			return c, &r
		}
		c.PrimaryMW = mw[x.Primary]
	}
}

// next is a little more than a number: what rounding alone could add.
func next(mw float64) float64 { return mw * (1 + 1e-13) }

func governs(worst int) Governs {
	return [limits.Worsts]Governs{limits.WorstRoCoF: ByRoCoF, limits.WorstNadir: ByNadir, limits.WorstReturn: ByReturn, limits.WorstBalance: BySteady}[worst]
}
