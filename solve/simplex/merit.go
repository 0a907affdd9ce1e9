package simplex

import "math"

// Merit starts a program of one row from merit order: it finds the price at which the
// sets, each on its cheapest allowed column, meet the row, and puts the column that they
// meet it with into the basis. Hundreds of pivots of the dual simplex come to the same
// end. Without such a price the basis is left alone. Call it right after the first AddRow.
func (lp *LP) Merit() {
	if len(lp.rows) != 1 || lp.base[0].set >= 0 {
		return
	}
	row := lp.rows[0]
	lo := -row.SurplusCost
	if lp.supply(lo) >= row.RHS {
		return
	}
	hi := math.Abs(lo) + 1
	for lp.supply(hi) < row.RHS {
		lo = hi
		hi *= 4
		if hi > 1e12 {
			return
		}
	}
	for range 60 {
		mid := lo + (hi-lo)/2
		if hi-lo <= 1e-4*(1+math.Abs(lo)) || mid <= lo || mid >= hi {
			break
		}
		if lp.supply(mid) < row.RHS {
			lo = mid
		} else {
			hi = mid
		}
	}
	lp.supply(lo)
	for i := range lp.sets {
		if k := lp.cheapest(&lp.sets[i]); k >= 0 {
			lp.sets[i].key = k
		}
	}
	// The first column to become as cheap as its set's key as the price rises on.
	enter, best, step := basic{-1, -1}, math.Inf(1), 0.0
	for i := range lp.sets {
		s := &lp.sets[i]
		g := lp.groups[s.group]
		val := lp.price.val[s.group]
		key := row.Coef(int(s.group), g, &g.Cols[s.key])
		lp.each(s, func(j int32) {
			a := row.Coef(int(s.group), g, &g.Cols[j]) - key
			if a <= 1e-9 {
				return
			}
			if ratio := (val[j] - val[s.key]) / a; ratio < best || ratio == best && a > step {
				best, step, enter = ratio, a, basic{int32(i), j}
			}
		})
	}
	if enter.set >= 0 {
		lp.base[0] = enter
		lp.sets[enter.set].extra++
		lp.binv[0] = 1 / step
	}
}

// supply is what all sets put into the only row at a price, each on its cheapest column.
func (lp *LP) supply(price float64) float64 {
	lp.pi[0] = price
	lp.price.run(lp, lp.pi, 1)
	sum := 0.0
	row := lp.rows[0]
	for i := range lp.sets {
		s := &lp.sets[i]
		if k := lp.cheapest(s); k >= 0 {
			g := lp.groups[s.group]
			sum += row.Coef(int(s.group), g, &g.Cols[k])
		}
	}
	return sum
}
