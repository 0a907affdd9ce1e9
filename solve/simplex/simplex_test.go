package simplex

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	gonumlp "gonum.org/v1/gonum/optimize/convex/lp"
)

// randomProgram makes groups and rows like those of an hour: a balance whose surplus is
// dear, and covering rows with parts left out of single groups. A last group with a dear
// column that alone satisfies every row keeps it feasible.
func randomProgram(rng *rand.Rand, groups, rows int) ([]*Group, []int, []*Row) {
	const shapes = 5
	var gs []*Group
	var sets []int
	for g := 0; g < groups; g++ {
		group := &Group{Shape: rng.IntN(shapes) - 1, HasOff: rng.IntN(3) > 0}
		if rng.IntN(2) == 0 {
			group.Down = 1 + rng.IntN(shapes-1)
		}
		if group.HasOff {
			group.Cols = append(group.Cols, Column{})
		}
		on := 100 * rng.Float64()
		e := 5 * rng.Float64()
		for j := 0; j < 1+rng.IntN(6); j++ {
			p := 10 * rng.Float64()
			group.Cols = append(group.Cols, Column{Cost: on + p*(1+rng.Float64()), P: p, E: e, R: 3 * rng.Float64(), D: 2 * rng.Float64()})
		}
		for n := 1 + rng.IntN(3); n > 0; n-- {
			sets = append(sets, g)
		}
		gs = append(gs, group)
	}
	var rs []*Row
	for i := 0; i < rows; i++ {
		r := &Row{R: make([]float64, shapes)}
		if i == 0 {
			r.P, r.SurplusCost, r.RHS = 1, 50, 4*float64(len(sets))
		} else {
			r.E = rng.Float64()
			for s := range r.R {
				if rng.IntN(2) == 0 {
					r.R[s] = rng.Float64()
				}
			}
			r.RHS = 2 * rng.Float64() * float64(len(sets))
			for k := rng.IntN(3); k > 0; k-- {
				o := Own{Group: rng.IntN(groups), P: rng.Float64(), E: r.E}
				if s := gs[o.Group].Shape; s >= 0 {
					o.R = r.R[s]
				}
				if s := gs[o.Group].Down; s > 0 {
					o.D = r.R[s]
				}
				r.Own = append(r.Own, o)
			}
		}
		r.R[shapes-1] += 1
		rs = append(rs, r)
	}
	gs = append(gs, &Group{Shape: shapes - 1, HasOff: true, Cols: []Column{{}, {Cost: 1e5, P: 1e4, R: 1e4}}})
	return gs, append(sets, groups), rs
}

// peer solves the same program with gonum's lp, an independent simplex.
func peer(t *testing.T, gs []*Group, sets []int, rows []*Row) float64 {
	t.Helper()
	var c []float64
	type col struct{ set, j int }
	var cols []col
	for i, g := range sets {
		for j := range gs[g].Cols {
			c = append(c, gs[g].Cols[j].Cost)
			cols = append(cols, col{i, j})
		}
	}
	n := len(c) + len(rows)
	a := mat.NewDense(len(rows)+len(sets), n, nil)
	b := make([]float64, len(rows)+len(sets))
	for i, r := range rows {
		b[i] = r.RHS
		for k, v := range cols {
			g := gs[sets[v.set]]
			a.Set(i, k, r.Coef(sets[v.set], g, &g.Cols[v.j]))
		}
		a.Set(i, len(cols)+i, -1)
		c = append(c, r.SurplusCost)
	}
	for k, v := range cols {
		a.Set(len(rows)+v.set, k, 1)
	}
	for i := range sets {
		b[len(rows)+i] = 1
	}
	obj, _, err := gonumlp.Simplex(c, a, b, 1e-10, nil)
	if err != nil {
		t.Skipf("the peer gave up: %v", err)
	}
	return obj
}

// Against an independent solver: gonum.org/v1/gonum/optimize/convex/lp.
func TestAgainstGonum(t *testing.T) {
	solved := 0
	for seed := uint64(0); seed < 200; seed++ {
		t.Run("", func(t *testing.T) {
			rng := rand.New(rand.NewPCG(seed, 1))
			gs, sets, rows := randomProgram(rng, 2+rng.IntN(12), 1+rng.IntN(7))
			lp := New(gs, sets, 5)
			for _, r := range rows {
				lp.AddRow(r)
			}
			if st := lp.Solve(math.Inf(1)); st != Optimal {
				t.Fatalf("seed %d: status %v", seed, st)
			}
			want := peer(t, gs, sets, rows)
			solved++
			if got := lp.Objective(); math.Abs(got-want) > 1e-6*(1+math.Abs(want)) {
				t.Errorf("seed %d: objective %.9g, gonum %.9g", seed, got, want)
			}
			checkBasis(t, lp)
		})
	}
	if solved < 150 {
		t.Errorf("only %d programs compared", solved)
	}
}

// checkBasis checks feasibility, and strong duality from first principles.
func checkBasis(t *testing.T, lp *LP) {
	t.Helper()
	dual := 0.0
	for i, r := range lp.Rows() {
		lhs := 0.0
		for s := range lp.sets {
			g := lp.groups[lp.sets[s].group]
			lp.Each(s, func(j int32, x float64) { lhs += x * r.Coef(int(lp.sets[s].group), g, &g.Cols[j]) })
		}
		if lhs < r.RHS-1e-5*(1+math.Abs(r.RHS)) {
			t.Errorf("row %d: %g below %g", i, lhs, r.RHS)
		}
		if y := lp.Duals()[i]; y < -r.SurplusCost-1e-7 {
			t.Errorf("row %d: dual %g", i, y)
		}
		dual += lp.Duals()[i] * r.RHS
	}
	for s := range lp.sets {
		st := &lp.sets[s]
		g := lp.groups[st.group]
		best := math.Inf(1)
		for j := range g.Cols {
			if !lp.allowed(st, int32(j)) {
				continue
			}
			v := g.Cols[j].Cost
			for i, r := range lp.Rows() {
				v -= lp.Duals()[i] * r.Coef(int(st.group), g, &g.Cols[j])
			}
			best = min(best, v)
		}
		dual += best
	}
	if math.Abs(dual-lp.Objective()) > 1e-6*(1+math.Abs(dual)) {
		t.Errorf("dual objective %.9g, primal %.9g", dual, lp.Objective())
	}
}

// Warm starts must reach what cold starts reach: rows added, sets and columns barred,
// snapshots taken and gone back to.
func TestWarmEqualsCold(t *testing.T) {
	for seed := uint64(0); seed < 500; seed++ {
		rng := rand.New(rand.NewPCG(seed, 2))
		gs, sets, rows := randomProgram(rng, 2+rng.IntN(20), 2+rng.IntN(8))
		warm := New(gs, sets, 5)
		warm.AddRow(rows[0])
		warm.Solve(math.Inf(1))
		saved := warm.Save()
		for _, r := range rows[1:] {
			warm.AddRow(r)
			warm.Solve(math.Inf(1))
		}
		if rng.IntN(2) == 0 {
			warm.Load(saved)
			for _, r := range rows[1:] {
				warm.AddRow(r)
			}
			warm.Solve(math.Inf(1))
		}
		saved = warm.Save()
		type bar struct {
			set     int
			off, on bool
		}
		var bars []bar
		for s, g := range sets[:len(sets)-1] {
			if gs[g].HasOff && rng.IntN(4) == 0 {
				off := rng.IntN(2) == 0
				bars = append(bars, bar{s, off, !off})
			}
		}
		uses := map[int][]int32{}
		for gi, g := range gs[:len(gs)-1] {
			if len(g.Cols) > 3 && rng.IntN(3) == 0 {
				use := []int32{0, 1}
				for j := 2; j < len(g.Cols); j++ {
					if rng.IntN(2) == 0 {
						use = append(use, int32(j))
					}
				}
				warm.Use(gi, use)
				uses[gi] = use
			}
		}
		for _, b := range bars {
			warm.Allow(b.set, b.off, b.on)
		}
		warm.Load(saved)
		ws := warm.Solve(math.Inf(1))
		cold := New(gs, sets, 5)
		for g, use := range uses {
			cold.Use(g, use)
		}
		for _, b := range bars {
			cold.Allow(b.set, b.off, b.on)
		}
		cold.Reset()
		for _, r := range rows {
			cold.AddRow(r)
		}
		cs := cold.Solve(math.Inf(1))
		if ws != cs {
			t.Errorf("seed %d: warm %v, cold %v", seed, ws, cs)
		} else if math.Abs(warm.Objective()-cold.Objective()) > 1e-6*(1+math.Abs(cold.Objective())) {
			t.Errorf("seed %d: warm %.9g, cold %.9g", seed, warm.Objective(), cold.Objective())
		}
		if cs == Optimal {
			checkBasis(t, warm)
			checkBasis(t, cold)
		}
	}
}
