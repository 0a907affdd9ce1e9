package formulate

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
	"pgregory.net/rapid"

	"evenkeel/fleet"
)

func drawUnit(t *rapid.T) *fleet.Unit {
	f := func(name string, lo, hi float64) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
	sometimes := func(name string, lo, hi float64) float64 {
		if rapid.Bool().Draw(t, name+"?") {
			return f(name, lo, hi)
		}
		return 0
	}
	u := &fleet.Unit{Count: 1, Commit: true, OnCost: f("on", -50, 500), MinMW: sometimes("min", -40, 60), InertiaMWs: f("inertia", 0, 800), Shape: 0}
	u.MaxMW = u.MinMW + sometimes("range", 1, 200)
	u.HeadMW = u.MaxMW + sometimes("above", 1, 50)
	u.FromHead = rapid.Bool().Draw(t, "from head")
	u.ResponseCapMW = sometimes("cap", 1, 120)
	u.ResponsePerMW = f("per MW", 0, 20)
	if u.MinMW >= 0 {
		u.ShareOfOutput = sometimes("share", 0.02, 0.9)
	}
	u.SyntheticCapMWs = sometimes("synthetic", 1, 400)
	u.SyntheticPerMWs = f("per MWs", 0, 2)
	u.HeadPerMWs = sometimes("head per MWs", 0.01, 0.3)
	u.DownCapMW = sometimes("down cap", 1, 120)
	u.DownPerMW = f("down per MW", 0, 20)
	u.FootMW = u.MinMW - sometimes("below", 1, 50)
	price, to := f("price", -20, 80), 0.0
	for range rapid.IntRange(1, 4).Draw(t, "steps") {
		to += f("step", 5, 90)
		u.Steps = append(u.Steps, fleet.Step{ToMW: to, CostPerMWh: price})
		price += f("rise", 0, 20)
	}
	return u
}

// dearest solves what Points is for with gonum's lp: the least of cost − λ·output −
// μ·inertia − ρ·response over all that a unit can do when on. Variables: output above the
// minimum, response, synthetic inertia, the cost of output above its least, response downwards.
func dearest(t *rapid.T, u *fleet.Unit, lambda, mu, rho, delta float64) float64 {
	var rows [][]float64
	var rhs []float64
	row := func(b float64, a ...float64) { rows, rhs = append(rows, a), append(rhs, b) }
	row(u.MaxMW-u.MinMW, 1, 0, 0, 0, 0)
	row(u.ResponseCapMW, 0, 1, 0, 0, 0)
	row(u.SyntheticCapMWs, 0, 0, 1, 0, 0)
	row(u.DownCapMW, 0, 0, 0, 0, 1)
	row(u.MinMW-u.FootMW, -1, 0, 0, 0, 1)
	head := 0.0
	if u.FromHead {
		head = 1
	}
	row(u.HeadMW-u.MinMW, 1, head, u.HeadPerMWs, 0, 0)
	if u.ShareOfOutput > 0 {
		row(u.ShareOfOutput*u.MinMW, -u.ShareOfOutput, 1, 0, 0, 0)
	}
	// cost ≥ each line of the convex cost, from its least value.
	lines := [][2]float64{} // cost = a + b·output
	from, cost := 0.0, 0.0
	for _, s := range u.Steps {
		lines = append(lines, [2]float64{cost - s.CostPerMWh*from, s.CostPerMWh})
		cost += (s.ToMW - from) * s.CostPerMWh
		from = s.ToMW
	}
	least := math.Inf(1)
	for _, p := range []float64{u.MinMW, u.MaxMW, 0, u.Steps[0].ToMW, u.Steps[len(u.Steps)-1].ToMW} {
		least = min(least, OutputCost(u.Steps, p)-1000)
	}
	least = min(least, -30*math.Abs(u.MinMW)-1000-30*math.Abs(u.MaxMW))
	for _, l := range lines {
		row(least-l[0]-l[1]*u.MinMW, l[1], 0, 0, -1, 0)
	}
	n, m := 5, len(rows)
	c := make([]float64, n+m)
	c[0], c[1], c[2], c[3], c[4] = -lambda, u.ResponsePerMW-rho, u.SyntheticPerMWs-mu, 1, u.DownPerMW-delta
	a := mat.NewDense(m, n+m, nil)
	for i, r := range rows {
		sign := 1.0
		if rhs[i] < 0 { // gonum wants a feasible start to be found; signs do not matter to it
			sign = -1
		}
		for j, v := range r {
			a.Set(i, j, sign*v)
		}
		a.Set(i, n+i, sign)
		rhs[i] *= sign
	}
	best, _, err := lp.Simplex(c, a, rhs, 1e-10, nil)
	if err != nil {
		t.Skip("gonum's lp: ", err)
	}
	return best + u.OnCost + least - lambda*u.MinMW - mu*u.InertiaMWs
}

// The cheapest of the points is the cheapest thing that a unit can do, at any prices.
// Reference: gonum's lp on the unit's own constraints.
func TestPointsAgainstGonum(t *testing.T) {
	compared := 0
	rapid.Check(t, func(t *rapid.T) {
		u := drawUnit(t)
		points := Points(u, math.Inf(1))
		for range 5 {
			lambda := rapid.Float64Range(-50, 200).Draw(t, "λ")
			mu := rapid.Float64Range(0, 3).Draw(t, "μ")
			rho := rapid.Float64Range(-10, 60).Draw(t, "ρ")
			delta := rapid.Float64Range(-10, 60).Draw(t, "δ")
			got := math.Inf(1)
			for _, p := range points {
				got = min(got, p.Cost-lambda*p.OutputMW-mu*p.InertiaMWs-rho*p.ResponseMW-delta*p.DownMW)
			}
			want := dearest(t, u, lambda, mu, rho, delta)
			if math.Abs(got-want) > 1e-6*(1+math.Abs(want)) {
				t.Errorf("points give %.9g, gonum %.9g, unit %+v", got, want, *u)
			}
			compared++
		}
	})
	if compared < 200 {
		t.Errorf("only %d comparisons", compared)
	}
}

// Every point is something that the unit can do, within a cap on its output.
func TestPointsAreFeasible(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		u := drawUnit(t)
		capMW := rapid.Float64Range(u.MinMW-5, u.MaxMW+5).Draw(t, "cap")
		const eps = 1e-7
		points := Points(u, capMW)
		if len(points) == 0 && capMW > u.MinMW+eps {
			t.Fatal("no point under a cap above the minimum")
		}
		for _, p := range points {
			synthetic := p.InertiaMWs - u.InertiaMWs
			used := p.OutputMW + u.HeadPerMWs*synthetic
			if u.FromHead {
				used += p.ResponseMW
			}
			switch {
			case p.OutputMW < u.MinMW-eps, p.OutputMW > min(u.MaxMW, max(capMW, u.MinMW))+eps, p.ResponseMW < -eps, p.ResponseMW > u.ResponseCapMW+eps,
				p.DownMW < -eps, p.DownMW > u.DownCapMW+eps, p.DownMW > max(p.OutputMW-u.FootMW, 0)+eps,
				synthetic < -eps, synthetic > u.SyntheticCapMWs+eps, used > u.HeadMW+eps, u.ShareOfOutput > 0 && p.ResponseMW > u.ShareOfOutput*p.OutputMW+eps:
				t.Errorf("%+v of %+v", p, *u)
			}
			if want := u.OnCost + OutputCost(u.Steps, p.OutputMW) + u.ResponsePerMW*p.ResponseMW + u.SyntheticPerMWs*synthetic + u.DownPerMW*p.DownMW; math.Abs(p.Cost-want) > 1e-6*(1+math.Abs(want)) {
				t.Errorf("%+v costs %g", p, want)
			}
		}
	})
}

// The cost of output against the plain sum over its steps.
func TestOutputCost(t *testing.T) {
	steps := []fleet.Step{{ToMW: 60, CostPerMWh: 40}, {ToMW: 100, CostPerMWh: 45}}
	for p, want := range map[float64]float64{0: 0, 30: 1200, 60: 2400, 80: 3300, 100: 4200, 120: 5100, -10: -400} {
		if got := OutputCost(steps, p); got != want {
			t.Errorf("cost of %g MW: %g, want %g", p, got, want)
		}
	}
}

// The bound of inertia online holds for every commitment whose minimum output fits.
func TestMostInertia(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := &fleet.Hour{DemandMW: rapid.Float64Range(10, 400).Draw(t, "demand"), LoadInertiaMWs: 20}
		n := rapid.IntRange(1, 8).Draw(t, "units")
		for range n {
			h.Units = append(h.Units, fleet.Unit{Count: 1, Commit: rapid.IntRange(0, 5).Draw(t, "commit") > 0, MustRun: rapid.IntRange(0, 5).Draw(t, "must") == 0,
				MinMW:      rapid.SampledFrom([]float64{0, -3, 10, 40, 90}).Draw(t, "min"),
				InertiaMWs: rapid.Float64Range(0, 600).Draw(t, "inertia"), SyntheticCapMWs: rapid.SampledFrom([]float64{0, 50}).Draw(t, "synthetic")})
		}
		bound := mostInertia(h)
		for mask := range 1 << n {
			e, least, ok := h.LoadInertiaMWs, 0.0, true
			for i := range h.Units {
				u := &h.Units[i]
				on := mask>>i&1 == 1
				if !on && (!u.Commit || u.MustRun) {
					ok = false
				}
				if on {
					e += u.InertiaMWs
					least += u.MinMW
				}
				e += u.SyntheticCapMWs
			}
			if ok && least <= h.DemandMW && e > bound*(1+1e-9)+1e-9 {
				t.Fatalf("%g MW·s fit under the load, bound %g: %+v", e, bound, h.Units)
			}
		}
	})
}
