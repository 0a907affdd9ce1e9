package simplex

// pricing values every column under a vector over the rows.
type pricing struct {
	val     [][]float64 // val[g][j] = scale·cost − vector·column, scale 1 or 0
	r       []float64   // price of R, one a shape
	p, e, x []float64   // what a group's own rows take off
	d       []float64
	touched []int
}

func (v *pricing) init(groups []*Group, shapes int) {
	v.val = make([][]float64, len(groups))
	v.r = make([]float64, shapes)
	v.p = make([]float64, len(groups))
	v.e = make([]float64, len(groups))
	v.x = make([]float64, len(groups))
	v.d = make([]float64, len(groups))
}

// run values all usable columns: withCost·cost − vector·a.
func (v *pricing) run(lp *LP, vector []float64, withCost float64) {
	p, e := 0.0, 0.0
	r := v.r
	clear(r)
	for _, g := range v.touched {
		v.p[g], v.e[g], v.x[g], v.d[g] = 0, 0, 0, 0
	}
	v.touched = v.touched[:0]
	for i, row := range lp.rows {
		y := vector[i]
		if y == 0 {
			continue
		}
		p += y * row.P
		e += y * row.E
		for s, c := range row.R {
			r[s] += y * c
		}
		for k := range row.Own {
			o := &row.Own[k]
			v.p[o.Group] += y * o.P
			v.e[o.Group] += y * o.E
			v.x[o.Group] += y * o.R
			v.d[o.Group] += y * o.D
			v.touched = append(v.touched, o.Group)
		}
	}
	for g, group := range lp.groups {
		gp, ge, gr := p-v.p[g], e-v.e[g], -v.x[g]
		if group.Shape >= 0 {
			gr += r[group.Shape]
		}
		val := v.val[g]
		if len(val) < len(group.Cols) {
			val = make([]float64, len(group.Cols), 2*len(group.Cols))
			v.val[g] = val
		}
		if group.Down > 0 {
			v.both(lp, g, val, gp, ge, gr, r[group.Down]-v.d[g], withCost)
			continue
		}
		if lp.active[g] == nil {
			for j := range group.Cols {
				c := &group.Cols[j]
				val[j] = withCost*c.Cost - (gp*c.P + ge*c.E + gr*c.R)
			}
			continue
		}
		for _, j := range lp.active[g] {
			c := &group.Cols[j]
			val[j] = withCost*c.Cost - (gp*c.P + ge*c.E + gr*c.R)
		}
	}
	// Basic columns may have been barred since; they still need a value.
	for i := range lp.base {
		b := lp.base[i]
		if b.set < 0 {
			continue
		}
		s := &lp.sets[b.set]
		v.one(lp, int(s.group), b.col, p, e, withCost)
		v.one(lp, int(s.group), s.key, p, e, withCost)
	}
}

// both values a group whose columns have both R and D.
func (v *pricing) both(lp *LP, g int, val []float64, gp, ge, gr, gd, withCost float64) {
	cols := lp.groups[g].Cols
	if lp.active[g] == nil {
		for j := range cols {
			c := &cols[j]
			val[j] = withCost*c.Cost - (gp*c.P + ge*c.E + gr*c.R + gd*c.D)
		}
		return
	}
	for _, j := range lp.active[g] {
		c := &cols[j]
		val[j] = withCost*c.Cost - (gp*c.P + ge*c.E + gr*c.R + gd*c.D)
	}
}

func (v *pricing) one(lp *LP, g int, j int32, p, e, withCost float64) {
	group := lp.groups[g]
	if lp.active[g] == nil {
		return
	}
	gr := -v.x[g]
	if group.Shape >= 0 {
		gr += v.r[group.Shape]
	}
	gd := -v.d[g]
	if group.Down > 0 {
		gd += v.r[group.Down]
	}
	c := &group.Cols[j]
	v.val[g][j] = withCost*c.Cost - ((p-v.p[g])*c.P + (e-v.e[g])*c.E + gr*c.R + gd*c.D)
}
