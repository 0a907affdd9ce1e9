package simplex

// Column is one choice of a set: a cost and the quantities that rows see.
type Column struct {
	Cost       float64
	P, E, R, D float64
}

// Group is the columns that sets choose from. Sets of one group are alike.
type Group struct {
	Shape  int      // which of a row's R coefficients holds for R; −1: none
	Down   int      // which of them holds for D; 0: none
	HasOff bool     // column 0 is "off"
	Cols   []Column // append only
}

// Row is one coupling row: Σ (P·p + E·e + R[shape]·r + R[down]·d) − own parts ≥ RHS.
type Row struct {
	P, E        float64
	R           []float64 // one a shape
	Own         []Own
	RHS         float64
	SurplusCost float64 // of each unit above RHS, ≥ 0
	Tag         any     // the caller's
}

// Own is what a row leaves out of the columns of one group.
type Own struct {
	Group      int
	P, E, R, D float64
}

// Coef is the coefficient of a column of group g in the row.
func (r *Row) Coef(g int, group *Group, c *Column) float64 {
	p, e, x, d := r.P, r.E, 0.0, 0.0
	if group.Shape >= 0 {
		x = r.R[group.Shape]
	}
	if group.Down > 0 {
		d = r.R[group.Down]
	}
	for i := range r.Own {
		if o := &r.Own[i]; o.Group == g {
			p -= o.P
			e -= o.E
			x -= o.R
			d -= o.D
		}
	}
	return p*c.P + e*c.E + x*c.R + d*c.D
}

// Status is how a solve ended.
type Status uint8

const (
	// Optimal: primal and dual feasible.
	Optimal Status = iota
	// Cutoff: the objective's lower bound passed the cutoff.
	Cutoff
	// Infeasible: no choice satisfies the rows.
	Infeasible
	// Stalled: the pivot limit was reached or the basis became singular; the objective is still a lower bound.
	Stalled
)

// Basis is a snapshot from which a solve can go on.
type Basis struct {
	keys   []int32
	rows   []*Row
	basics []basic
}

// Rows lists the rows of the snapshot.
func (b *Basis) Rows() []*Row { return b.rows }

// WithRows is the snapshot with other rows in the place of its own, one for each; their
// coefficients must be the same, right-hand sides may differ.
func (b *Basis) WithRows(other func(*Row) *Row) *Basis {
	c := &Basis{keys: b.keys, basics: b.basics, rows: make([]*Row, len(b.rows))}
	for i, r := range b.rows {
		c.rows[i] = other(r)
	}
	return c
}

// basic is a working basic variable: a surplus (set < 0, col = row) or a column of a set.
type basic struct{ set, col int32 }
