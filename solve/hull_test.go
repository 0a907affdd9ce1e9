package solve

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"evenkeel/formulate"
	"evenkeel/solve/simplex"
)

// Source of the reference: coinor-cbc, a general-purpose solver, on the master written out unit by
// unit: every unit picks a mean of its own operating points, and each of several identical units
// has loss rows of its own, where ours share one of their mean.
func TestHullAgainstCBC(t *testing.T) {
	cbc := cbcPath(t)
	dir := t.TempDir()
	for seed := range uint64(30) {
		c, h := randomHour(rand.New(rand.NewPCG(seed, 77)), 4+int(seed))
		q, _ := settledHour(t, c, h, Options{})
		path := filepath.Join(dir, "master.mps")
		f, err := os.Create(path)
		if err != nil {
			t.Fatal(err)
		}
		if err := masterByUnit(q).WriteMPS(f, "master", nil); err != nil {
			t.Fatal(err)
		}
		f.Close()
		want := runCBC(t, cbc, path, 0).cost
		if got := q.lp.Objective(); math.Abs(got-want) > 1e-6*(1+math.Abs(want)) {
			t.Errorf("seed %d: the hull costs %.9g, cbc %.9g", seed, got, want)
		}
	}
}

// masterByUnit is the master with the rows of q's hull.
func masterByUnit(q *search) *formulate.Model {
	m := q.m
	type column struct {
		set, group int
		col        *simplex.Column
	}
	var cols []column
	must := q.root()
	for set, g := range m.sets {
		group := m.groups[g]
		for j := range group.Cols {
			off := group.HasOff && j == 0
			if g < len(m.p.Classes) && (off && must.lo[g] > 0 || !off && must.hi[g] == 0) {
				continue
			}
			cols = append(cols, column{set, g, &group.Cols[j]})
		}
	}
	// Rows: the balance, the others once for each unit that a single loss can take, and one a set.
	type row struct {
		r    *simplex.Row
		unit int // set whose own part counts; −1: every member's
	}
	var rows []row
	for _, r := range q.lp.Rows() {
		if !m.single(r) {
			rows = append(rows, row{r, -1})
			continue
		}
		g := r.Own[0].Group
		for i := range m.p.Classes[g].Count {
			rows = append(rows, row{r, m.first[g] + i})
		}
	}
	out := &formulate.Model{}
	for i, r := range rows {
		out.Rows = append(out.Rows, formulate.ModelRow{Name: fmt.Sprint("row_", i), Sense: "=", RHS: r.r.RHS})
		out.Columns = append(out.Columns, formulate.ModelColumn{Name: fmt.Sprint("surplus_", i), Cost: r.r.SurplusCost, Hi: math.Inf(1), Entries: []formulate.Entry{{Row: i, Value: -1}}})
	}
	for s := range m.sets {
		out.Rows = append(out.Rows, formulate.ModelRow{Name: fmt.Sprint("set_", s), Sense: "=", RHS: 1})
	}
	for k, c := range cols {
		x := formulate.ModelColumn{Name: fmt.Sprint("point_", k), Cost: c.col.Cost, Hi: math.Inf(1), Entries: []formulate.Entry{{Row: len(rows) + c.set, Value: 1}}}
		for i, r := range rows {
			bare := *r.r
			bare.Own = nil
			v := bare.Coef(c.group, m.groups[c.group], c.col)
			for _, o := range r.r.Own {
				if o.Group != c.group || r.unit >= 0 && r.unit != c.set {
					continue
				}
				units := 1.0
				if r.unit >= 0 { // ours hold the mean over all of them
					units = float64(m.p.Classes[o.Group].Count)
				}
				v -= units * (o.P*c.col.P + o.E*c.col.E + o.R*c.col.R + o.D*c.col.D)
			}
			if v != 0 {
				x.Entries = append(x.Entries, formulate.Entry{Row: i, Value: v})
			}
		}
		out.Columns = append(out.Columns, x)
	}
	return out
}
