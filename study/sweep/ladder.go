// Package sweep solves the hours of a case whose resources grow from rung to rung, reusing on
// each rung what its neighbours have proven.
package sweep

import (
	"context"
	"math"
	"slices"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// Ladder is a case on growing rungs.
type Ladder struct {
	rungs   []*fleet.Case
	swept   []int
	opt     solve.Options
	solvers []*solve.Solver
}

// NewLadder prepares a ladder. All rungs have the same resources, shapes and losses; they differ
// only in how much the resources listed in swept may do, which grows from rung to rung. Only the first
// and the last rung are settled, if opt asks for that.
func NewLadder(rungs []*fleet.Case, swept []int, opt solve.Options) *Ladder {
	return newLadder(rungs, swept, opt, false)
}

// NewSettledLadder prepares a ladder of which every rung is settled. A rung that takes over a mix takes
// over what that earns on its own rung.
func NewSettledLadder(rungs []*fleet.Case, swept []int, opt solve.Options) *Ladder {
	opt.Settle = true
	return newLadder(rungs, swept, opt, true)
}

func newLadder(rungs []*fleet.Case, swept []int, opt solve.Options, between bool) *Ladder {
	l := &Ladder{rungs: rungs, swept: swept, opt: opt}
	for k, c := range rungs {
		o := opt
		o.Settle = opt.Settle && (between || k == 0 || k == len(rungs)-1)
		l.solvers = append(l.solvers, solve.New(c, o))
	}
	return l
}

// climb is one hour on all rungs.
type climb struct {
	*Ladder
	ctx   context.Context
	hours []*fleet.Hour
	out   []solve.Hour
	trail []*solve.Trail
	done  []bool
	// sure tells whether a rung's bound holds for every mix: what bounds rows that were rebuilt for one
	// mix, as closed loop asked for it, says nothing of others.
	sure []bool
}

// Hour solves an hour of the case on every rung. The first and the last rung are solved on their
// own, so that they are what a single run of these two finds; a rung between takes the mix
//
//   - of a rung above, where it fits: what is best with more on offer and does not use it, is best;
//   - of the rung below, where that costs no more than the bound proven above, within the gap (both
//     only where nothing was mended above);
//   - or its own, where that is cheaper than the mix of the rung below; its search starts from what
//     the rungs on either side have found, and losses that are calm on both are not simulated again
//     (solve.Solver.HourNear).
//
// A mix is a proven one wherever it comes from. No rung but the last costs more than the one below
// it, if what that one holds can be held on it too and acts alike in closed loop. It is safe for
// concurrent use.
func (l *Ladder) Hour(ctx context.Context, index int) ([]solve.Hour, error) {
	n := len(l.rungs)
	c := &climb{Ladder: l, ctx: ctx, hours: make([]*fleet.Hour, n), out: make([]solve.Hour, n), trail: make([]*solve.Trail, n), done: make([]bool, n), sure: make([]bool, n)}
	for k := range c.hours {
		c.hours[k] = l.rungs[k].Hour(index, fleet.HourOptions{StartSpreadH: l.opt.StartSpreadH})
	}
	if err := c.solve(0, -1, -1); err != nil {
		return nil, err
	}
	if n > 1 {
		if err := c.solve(n-1, 0, -1); err != nil {
			return nil, err
		}
		if err := c.between(0, n-1); err != nil {
			return nil, err
		}
		// What was found on the way to a rung may be dearer than what a rung below it found later.
		for k := 1; k < n-1; k++ {
			if better(&c.out[k-1], &c.out[k]) && c.fits(k-1, k) {
				c.out[k] = c.taken(k-1, k, c.out[k].Bound)
			}
		}
	}
	return c.out, nil
}

// solve finds a rung's own mix, and keeps that of the rung below if it is cheaper. Between two
// rungs it starts from what those have found.
func (c *climb) solve(k, below, above int) error {
	var near []*solve.Trail
	if above >= 0 {
		near = []*solve.Trail{c.trail[below], c.trail[above]}
	}
	h, t, err := c.solvers[k].HourNear(c.ctx, c.hours[k], near)
	if err != nil {
		return err
	}
	c.sure[k] = h.Closed.Mended == 0
	if below >= 0 && better(&c.out[below], &h) && c.fits(below, k) {
		h, t = c.taken(below, k, h.Bound), c.trail[below]
	}
	c.out[k], c.trail[k], c.done[k] = h, t, true
	return nil
}

// better tells whether a is to be preferred to b: secure first, then the cheaper one.
func better(a, b *solve.Hour) bool {
	if a.Status != b.Status {
		return a.Status == solve.Secure
	}
	return a.Cost < b.Cost
}

// taken is the mix of rung from as rung k takes it, with the bound proven for that one. What is
// curtailed counts from what rung k has on offer.
func (c *climb) taken(from, k int, bound float64) solve.Hour {
	h := c.out[from]
	h.Bound = min(bound, h.Cost)
	if h.Cost != 0 {
		h.Gap = (h.Cost - h.Bound) / math.Abs(h.Cost)
	}
	h.Dispatch = slices.Clone(h.Dispatch)
	for _, i := range c.swept {
		u, was, d := &c.hours[k].Units[i], &c.hours[from].Units[i], &h.Dispatch[i]
		if !u.Renewable || u.MaxMW == was.MaxMW && u.Count == was.Count {
			continue
		}
		h.CurtailedMW -= d.CurtailedMW
		d.CurtailedMW = max(float64(u.Count)*u.MaxMW-d.OutputMW, 0)
		h.CurtailedMW += d.CurtailedMW
	}
	return h
}

// between fills in the rungs between two that are done.
func (c *climb) between(lo, hi int) error {
	for hi-lo > 1 {
		k := hi - 1
		if c.done[k] {
			hi = k
			continue
		}
		switch {
		case c.sure[hi] && c.grows(k, hi) && c.fits(hi, k):
			c.out[k], c.trail[k], c.done[k], c.sure[k] = c.taken(hi, k, c.out[hi].Bound), c.trail[hi], true, true
		case c.sure[hi] && c.grows(k, hi) && c.fits(lo, k) && c.close(lo, hi):
			c.out[k], c.trail[k], c.done[k], c.sure[k] = c.taken(lo, k, c.out[hi].Bound), c.trail[lo], true, true
		default:
			mid := (lo + hi) / 2
			if !c.monotone(lo, hi) {
				mid = lo + 1
			}
			if err := c.solve(mid, lo, hi); err != nil {
				return err
			}
			if err := c.between(lo, mid); err != nil {
				return err
			}
			lo = mid
		}
	}
	return nil
}

// monotone tells whether every rung from lo to hi is a relaxation of the one below.
func (c *climb) monotone(lo, hi int) bool {
	for k := lo; k < hi; k++ {
		if !c.grows(k, k+1) {
			return false
		}
	}
	return true
}

// close tells whether the mix of rung lo is proven for a rung under hi, within the gap.
func (c *climb) close(lo, hi int) bool {
	a, b := &c.out[lo], &c.out[hi]
	gap := c.opt.Gap
	switch {
	case gap == 0:
		gap = solve.DefaultGap
	case gap < 0:
		gap = 1e-9
	}
	return a.Status == solve.Secure && a.Cost-b.Bound <= gap*math.Abs(a.Cost)
}

// fits tells whether the swept resources can do on rung k what they do in the mix of rung from,
// and do it there in closed loop just so.
func (c *climb) fits(from, k int) bool {
	for _, i := range c.swept {
		d := &c.out[from].Dispatch[i]
		if !fits(&c.hours[k].Units[i], &c.hours[from].Units[i], d) || !c.actsAlike(from, k, i, d) {
			return false
		}
	}
	return true
}

// actsAlike tells whether what a swept resource holds acts in closed loop on rung k as it was proven
// on rung from: droop and rate limits count on the rating, which may grow with the rungs.
func (c *climb) actsAlike(from, k, swept int, d *solve.Dispatch) bool {
	r := &c.rungs[k].Resources[swept]
	if d.ResponseMW <= roundingMW && d.DownMW <= roundingMW || r.Base() == c.rungs[from].Resources[swept].Base() {
		return true
	}
	for _, m := range c.rungs[k].Models {
		if m.Shape == r.Response.Shape || m.Shape == r.Down.Shape {
			return false
		}
	}
	return true
}

// roundingMW is what a dispatch may be off by.
const roundingMW = 1e-6

// fits tells whether a unit can do what is dispatched from another form of it.
func fits(u, was *fleet.Unit, d *solve.Dispatch) bool {
	if d.On == 0 {
		return u.Count == 0 || u.Commit && !u.MustRun
	}
	if d.On > u.Count || !u.Commit && d.On != u.Count || !alike(u, was) {
		return false
	}
	n := float64(d.On)
	output, response, down := d.OutputMW/n, d.ResponseMW/n, d.DownMW/n
	synthetic := d.InertiaMWs/n - u.InertiaMWs
	head := output + u.HeadPerMWs*synthetic
	if u.FromHead {
		head += response
	}
	const r = roundingMW
	switch {
	case output < u.MinMW-r || output > u.MaxMW+r,
		response > u.ResponseCapMW+r, down > u.DownCapMW+r, synthetic > u.SyntheticCapMWs+r,
		(response > r || synthetic > r) && head > u.HeadMW+r,
		u.ShareOfOutput > 0 && response > u.ShareOfOutput*max(output, 0)+r,
		down > r && down > output-u.FootMW+r:
		return false
	}
	return true
}

// alike tells whether two forms of a unit differ in nothing but how much they may do.
func alike(a, b *fleet.Unit) bool {
	if len(a.Steps) != len(b.Steps) || a.OnCost != b.OnCost || a.InertiaMWs != b.InertiaMWs || a.ResponsePerMW != b.ResponsePerMW ||
		a.DownPerMW != b.DownPerMW || a.SyntheticPerMWs != b.SyntheticPerMWs || a.CO2TPerMWh != b.CO2TPerMWh ||
		a.HeadPerMWs != b.HeadPerMWs || a.FromHead != b.FromHead || a.Commit != b.Commit || a.Renewable != b.Renewable {
		return false
	}
	for i := range a.Steps {
		if a.Steps[i].CostPerMWh != b.Steps[i].CostPerMWh || i < len(a.Steps)-1 && a.Steps[i].ToMW != b.Steps[i].ToMW {
			return false
		}
	}
	return true
}

// grows tells whether rung hi can do all that rung k can, and bounds damping alike.
func (c *climb) grows(k, hi int) bool {
	for _, i := range c.swept {
		a, b := &c.hours[k].Units[i], &c.hours[hi].Units[i]
		if !alike(a, b) || a.Count != b.Count || a.MustRun != b.MustRun || a.SyntheticCapMWs != b.SyntheticCapMWs ||
			b.MinMW > a.MinMW || b.MaxMW < a.MaxMW || b.HeadMW < a.HeadMW || b.ResponseCapMW < a.ResponseCapMW || b.DownCapMW < a.DownCapMW ||
			b.FootMW > a.FootMW || b.ShareOfOutput != a.ShareOfOutput {
			return false
		}
	}
	return true
}
