package simplex

import "math"

const (
	tolShare   = 1e-9  // of a column's weight below zero
	tolSurplus = 1e-9  // of a row's surplus below zero, relative to the row's scale
	tolDual    = 1e-7  // of a reduced cost below zero, relative to the costs it comes from
	tolPivot   = 1e-9  // smallest pivot, relative to the row of the tableau
	refresh    = 60    // pivots between inversions
	pivotLimit = 20000 // of one solve
)

// Solve runs the dual simplex from the current basis until it is optimal or its bound
// passes cutoff.
func (lp *LP) Solve(cutoff float64) Status {
	lp.values()
	lp.reprice()
	if !lp.settle() {
		return Infeasible
	}
	sincePivot, restarted := 0, false
	for n := 0; ; n++ {
		if n >= pivotLimit {
			return Stalled
		}
		pos, up := lp.leaving()
		done := pos < 0 || lp.obj >= cutoff
		if sincePivot >= refresh || done && sincePivot > 0 {
			// Only a fresh inverse may say that the end is reached.
			sincePivot = 0
			if !lp.invert() && !lp.again() {
				return Infeasible
			}
			lp.values()
			lp.reprice()
			continue
		}
		if done && !restarted && !lp.dualFeasible() {
			restarted = true
			if !lp.again() {
				return Infeasible
			}
			continue
		}
		if lp.obj >= cutoff {
			return Cutoff
		}
		if pos < 0 {
			return Optimal
		}
		switch lp.pivot(pos, up, n > pivotLimit/2) {
		case Infeasible:
			if sincePivot > 0 { // only a fresh inverse may say so
				sincePivot = refresh
				continue
			}
			return Infeasible
		case Stalled:
			if sincePivot > 0 {
				sincePivot = refresh
				continue
			}
			// The basis is too near to singular to go on from.
			if restarted {
				return Stalled
			}
			restarted = true
			if !lp.again() {
				return Infeasible
			}
			continue
		}
		lp.Pivots++
		sincePivot++
		lp.values()
		lp.reprice()
		// A barred key that rested at zero is alone in its set once the others have left.
		if lp.orphan {
			lp.orphan = false
			if !lp.settle() {
				return Infeasible
			}
		}
	}
}

// again starts over from the surplus basis; false: some set has no column left.
func (lp *LP) again() bool {
	lp.Restart()
	lp.values()
	lp.reprice()
	return lp.settle()
}

// dualFeasible tells whether no column is worth more than the key of its set.
func (lp *LP) dualFeasible() bool {
	for i, r := range lp.rows {
		if r.SurplusCost+lp.pi[i] < -tolDual*(1+math.Abs(r.SurplusCost)+math.Abs(lp.pi[i])) {
			return false
		}
	}
	for i := range lp.sets {
		s := &lp.sets[i]
		val := lp.price.val[s.group]
		g := lp.groups[s.group]
		if k := lp.cheapest(s); k >= 0 && val[k]-val[s.key] < -tolDual*(1+math.Abs(g.Cols[k].Cost)+math.Abs(val[k])) {
			return false
		}
	}
	return true
}

// values computes the working basic variables from the inverse.
func (lp *LP) values() {
	m := len(lp.rows)
	for i, r := range lp.rows {
		lp.rhs[i] = r.RHS
	}
	lp.lessKeys(lp.rhs)
	for i := 0; i < m; i++ {
		sum := 0.0
		row := lp.binv[i*m : i*m+m]
		for k, b := range lp.rhs {
			sum += row[k] * b
		}
		lp.x[i] = sum
	}
}

// lessKeys takes every set's key column off the right-hand sides.
func (lp *LP) lessKeys(rhs []float64) {
	// Quantities are summed by shape first: rows price the sums. Own parts follow.
	var p, e float64
	r := lp.alpha.r // free between uses
	clear(r)
	for i := range lp.sets {
		s := &lp.sets[i]
		g := lp.groups[s.group]
		c := &g.Cols[s.key]
		p += c.P
		e += c.E
		if g.Shape >= 0 {
			r[g.Shape] += c.R
		}
		if g.Down > 0 {
			r[g.Down] += c.D
		}
	}
	for i, row := range lp.rows {
		sum := row.P*p + row.E*e
		for s, c := range row.R {
			sum += c * r[s]
		}
		rhs[i] -= sum
		for k := range row.Own {
			o := &row.Own[k]
			for _, j := range lp.members[o.Group] {
				c := &lp.groups[o.Group].Cols[lp.sets[j].key]
				rhs[i] += o.P*c.P + o.E*c.E + o.R*c.R + o.D*c.D
			}
		}
	}
}

// cost of a basic variable, its set's key taken off.
func (lp *LP) cost(b basic) float64 {
	if b.set < 0 {
		return lp.rows[b.col].SurplusCost
	}
	s := &lp.sets[b.set]
	g := lp.groups[s.group]
	return g.Cols[b.col].Cost - g.Cols[s.key].Cost
}

// reprice computes the duals, the value of every column and the objective.
func (lp *LP) reprice() {
	m := len(lp.rows)
	clear(lp.pi)
	for i, b := range lp.base {
		c := lp.cost(b)
		if c == 0 {
			continue
		}
		row := lp.binv[i*m : i*m+m]
		for k := range row {
			lp.pi[k] += c * row[k]
		}
	}
	lp.price.run(lp, lp.pi, 1)
	obj := 0.0
	for i, b := range lp.base {
		obj += lp.cost(b) * lp.x[i]
	}
	for i := range lp.sets {
		s := &lp.sets[i]
		obj += lp.groups[s.group].Cols[s.key].Cost
	}
	lp.obj = obj
}

// settle puts sets that rest on one column alone onto their best allowed one. Besides
// barred columns it mends what a row with a surplus cost, added since, has changed.
func (lp *LP) settle() bool {
	changed := false
	for i := range lp.sets {
		s := &lp.sets[i]
		if s.extra > 0 {
			continue
		}
		k := lp.cheapest(s)
		if k < 0 {
			return false
		}
		val := lp.price.val[s.group]
		if k == s.key || lp.allowed(s, s.key) && val[s.key] <= val[k]+1e-9*(1+math.Abs(val[k])) {
			continue
		}
		s.key = k
		changed = true
	}
	if changed {
		lp.values()
		lp.reprice()
	}
	return true
}

// cheapest is the allowed column of a set with the least value; −1 if none is allowed.
func (lp *LP) cheapest(s *set) int32 {
	best, at := math.Inf(1), int32(-1)
	val := lp.price.val[s.group]
	lp.each(s, func(j int32) {
		if val[j] < best {
			best, at = val[j], j
		}
	})
	return at
}

func (lp *LP) each(s *set, visit func(j int32)) {
	g := lp.groups[s.group]
	from := int32(0)
	if g.HasOff {
		from = 1
		if s.off {
			visit(0)
		}
	}
	if !s.on {
		return
	}
	active := lp.active[s.group]
	if active == nil {
		for j := from; j < int32(len(g.Cols)); j++ {
			visit(j)
		}
		return
	}
	for _, j := range active {
		if j >= from {
			visit(j)
		}
	}
}

// leaving picks the basic variable that breaks its bounds worst, measured along its
// dual edge; up tells that it must come down to an upper bound of zero. −1: none.
func (lp *LP) leaving() (pos int, up bool) {
	m := len(lp.rows)
	best := 0.0
	pos = -1
	for i, b := range lp.base {
		x := lp.x[i]
		var break_ float64
		high := false
		if b.set < 0 {
			if x < -tolSurplus*(1+math.Abs(lp.rows[b.col].RHS)) {
				break_ = -x
			}
		} else if x < -tolShare {
			break_ = -x
		} else if x > tolShare && !lp.allowed(&lp.sets[b.set], b.col) {
			break_, high = x, true
		}
		if break_ == 0 {
			continue
		}
		norm := 0.0
		for _, v := range lp.binv[i*m : i*m+m] {
			norm += v * v
		}
		if w := break_ * break_ / norm; w > best {
			best, pos, up = w, i, high
		}
	}
	// Keys: only sets with further basic columns can break a bound.
	for i, b := range lp.base {
		if b.set < 0 {
			continue
		}
		s := &lp.sets[b.set]
		first := true
		x := 1.0
		rho := lp.grow(&lp.rho, m)
		clear(rho)
		for k, c := range lp.base {
			if c.set != b.set {
				continue
			}
			if k < i {
				first = false
				break
			}
			x -= lp.x[k]
			for q, v := range lp.binv[k*m : k*m+m] {
				rho[q] -= v
			}
		}
		if !first {
			continue
		}
		var break_ float64
		high := false
		if x < -tolShare {
			break_ = -x
		} else if x > tolShare && !lp.allowed(s, s.key) {
			break_, high = x, true
		}
		if break_ == 0 {
			continue
		}
		norm := 0.0
		for _, v := range rho {
			norm += v * v
		}
		if w := break_ * break_ / norm; w > best {
			best, up = w, high
			pos = m + i // remember: the key of the set at position i
		}
	}
	if pos >= m {
		pos = lp.swapKey(pos - m)
	}
	return pos, up
}

// swapKey makes the set's largest working column its key and puts the old key in that
// position, which it returns. at is the position of any of the set's working columns.
func (lp *LP) swapKey(at int) int {
	m := len(lp.rows)
	id := lp.base[at].set
	for k, c := range lp.base {
		if c.set == id && lp.x[k] > lp.x[at] {
			at = k
		}
	}
	// With T the change of columns, T⁻¹ = T: only row at of the inverse changes.
	s := &lp.sets[id]
	keyX := 1.0
	row := lp.binv[at*m : at*m+m]
	for k, c := range lp.base {
		if c.set != id {
			continue
		}
		keyX -= lp.x[k]
		if k == at {
			continue
		}
		for q, v := range lp.binv[k*m : k*m+m] {
			row[q] += v
		}
	}
	for q := range row {
		row[q] = -row[q]
	}
	lp.base[at].col, s.key = s.key, lp.base[at].col
	lp.x[at] = keyX
	return at
}

// pivot takes the basic variable at pos out of the basis.
func (lp *LP) pivot(pos int, up, careful bool) Status {
	m := len(lp.rows)
	rho := lp.grow(&lp.rho, m)
	copy(rho, lp.binv[pos*m:pos*m+m])
	sign := 1.0
	if up {
		sign = -1
	}
	// alpha.val = −rho·a, so that along the row −(rho·(a_j − a_key)) = val_j − val_key.
	lp.alpha.run(lp, rho, 0)
	scale := 0.0
	for _, v := range rho {
		scale = max(scale, math.Abs(v))
	}
	var (
		bestRatio = math.Inf(1)
		bestAlpha float64
		enter     = basic{-1, -1}
	)
	consider := func(d, a float64, b basic) {
		// a > 0 is what the entering variable needs.
		if d < 0 {
			d = 0
		}
		if d > bestRatio*a+1e-9 && d > bestRatio*a*(1+1e-9) {
			return
		}
		ratio := d / a
		if ratio < bestRatio-1e-9*(1+math.Abs(bestRatio)) || (a > bestAlpha && !careful) {
			if ratio < bestRatio {
				bestRatio = ratio
			}
			bestAlpha, enter = a, b
		}
	}
	for i := range lp.rows {
		// Surplus of row i: column −e_i, reduced cost SurplusCost + pi, row entry −rho_i.
		a := sign * rho[i]
		if a > tolPivot*scale {
			consider(lp.rows[i].SurplusCost+lp.pi[i], a, basic{-1, int32(i)})
		}
	}
	tol := 1e-9
	for i := range lp.sets {
		s := &lp.sets[i]
		g := lp.groups[s.group]
		val, alpha := lp.price.val[s.group], lp.alpha.val[s.group]
		vk, ak := val[s.key], alpha[s.key]
		from := 0
		if g.HasOff {
			from = 1
			if s.off {
				if a := sign * (alpha[0] - ak); a > tol {
					if d := val[0] - vk; d <= bestRatio*a+1e-9 {
						consider(d, a, basic{int32(i), 0})
					}
				}
			}
		}
		if !s.on {
			continue
		}
		active := lp.active[s.group]
		if active == nil {
			for j := from; j < len(g.Cols); j++ {
				if a := sign * (alpha[j] - ak); a > tol {
					if d := val[j] - vk; d <= bestRatio*a+1e-9 {
						consider(d, a, basic{int32(i), int32(j)})
					}
				}
			}
			continue
		}
		for _, j := range active {
			if int(j) < from {
				continue
			}
			if a := sign * (alpha[j] - ak); a > tol {
				if d := val[j] - vk; d <= bestRatio*a+1e-9 {
					consider(d, a, basic{int32(i), j})
				}
			}
		}
	}
	if enter.col < 0 {
		return Infeasible
	}
	// Column of the entering variable.
	col := lp.grow(&lp.column, m)
	if enter.set < 0 {
		for i := 0; i < m; i++ {
			col[i] = -lp.binv[i*m+int(enter.col)]
		}
	} else {
		a := lp.grow(&lp.work, m)
		for i, r := range lp.rows {
			a[i] = lp.relative(r, enter)
		}
		for i := 0; i < m; i++ {
			sum := 0.0
			for k, v := range lp.binv[i*m : i*m+m] {
				sum += v * a[k]
			}
			col[i] = sum
		}
	}
	p := col[pos]
	if math.Abs(p) < 1e-11 || math.Abs(p+sign*bestAlpha) > 1e-5*(1+math.Abs(p)) {
		return Stalled
	}
	prow := lp.binv[pos*m : pos*m+m]
	inv := 1 / p
	for k := range prow {
		prow[k] *= inv
	}
	for i := 0; i < m; i++ {
		f := col[i]
		if i == pos || f == 0 {
			continue
		}
		row := lp.binv[i*m : i*m+m]
		for k := range row {
			row[k] -= f * prow[k]
		}
	}
	old := lp.base[pos]
	lp.base[pos] = enter
	if enter.set >= 0 {
		lp.sets[enter.set].extra++
	}
	if old.set >= 0 {
		s := &lp.sets[old.set]
		s.extra--
		lp.orphan = lp.orphan || s.extra == 0 && !lp.allowed(s, s.key)
	}
	return Optimal
}
