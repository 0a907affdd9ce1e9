package simplex

import "math"

// LP is one linear program and its current basis. It is not safe for concurrent use.
type LP struct {
	Pivots int // made so far, over all solves

	groups  []*Group
	shapes  int
	sets    []set
	members [][]int // sets of each group

	active [][]int32 // columns of each group that may be used; nil: all
	barred [][]bool  // the others

	rows []*Row
	binv []float64 // m×m: inverse of the working basis
	base []basic   // one a position
	x    []float64 // value of the working basic variables
	rhs  []float64 // RHS less the key columns
	pi   []float64 // dual values of the rows
	obj  float64

	orphan bool // some set may rest on a barred key alone

	// Scratch.
	price  pricing // of pi
	alpha  pricing // of a row of the inverse
	rho    []float64
	column []float64
	work   []float64
}

type set struct {
	group   int32
	key     int32
	extra   int32 // working basic columns of this set
	off, on bool  // which of its columns are allowed
}

// New makes a program without rows. Set i chooses from groups[setGroup[i]]; shapes is
// the length of every row's R.
func New(groups []*Group, setGroup []int, shapes int) *LP {
	lp := &LP{groups: groups, shapes: shapes, sets: make([]set, len(setGroup)), members: make([][]int, len(groups)),
		active: make([][]int32, len(groups)), barred: make([][]bool, len(groups))}
	for i, g := range setGroup {
		lp.sets[i] = set{group: int32(g), off: true, on: true}
		lp.members[g] = append(lp.members[g], i)
	}
	lp.price.init(groups, shapes)
	lp.alpha.init(groups, shapes)
	lp.Reset()
	return lp
}

// Allow bars or frees the "off" column and the other columns of a set. Call Reset or
// Load before the next Solve.
func (lp *LP) Allow(set int, off, on bool) {
	lp.sets[set].off, lp.sets[set].on = off, on
}

// Use bars every column of a group but those listed, column 0 among them where it is
// "off"; nil frees all. Call Reset or Load before the next Solve.
func (lp *LP) Use(group int, columns []int32) {
	lp.active[group] = columns
	if columns == nil {
		return
	}
	n := len(lp.groups[group].Cols)
	b := lp.barred[group]
	if cap(b) < n {
		b = make([]bool, n, 2*n)
	}
	b = b[:n]
	for j := range b {
		b[j] = true
	}
	for _, j := range columns {
		b[j] = false
	}
	lp.barred[group] = b
}

// Rows lists the rows in the order of Duals.
func (lp *LP) Rows() []*Row { return lp.rows }

// Duals are the values of the rows: how much the objective rises with each RHS.
func (lp *LP) Duals() []float64 { return lp.pi }

// Objective is the value of the current basis: a lower bound of the optimum, and the
// optimum where Solve returned Optimal.
func (lp *LP) Objective() float64 { return lp.obj }

// Reset drops all rows and puts every set on its cheapest allowed column.
func (lp *LP) Reset() {
	lp.rows = lp.rows[:0]
	lp.base = lp.base[:0]
	lp.binv = lp.binv[:0]
	lp.x = lp.x[:0]
	lp.rhs = lp.rhs[:0]
	lp.pi = lp.pi[:0]
	lp.obj = 0
	for i := range lp.sets {
		lp.sets[i].extra = 0
	}
	lp.reprice()
	for i := range lp.sets {
		s := &lp.sets[i]
		if k := lp.cheapest(s); k >= 0 {
			s.key = k
		}
	}
}

// Restart drops the basis but keeps the rows.
func (lp *LP) Restart() {
	rows := append([]*Row(nil), lp.rows...)
	lp.Reset()
	for _, r := range rows {
		lp.AddRow(r)
	}
}

// AddRow adds a row with its surplus basic, which keeps the basis dual feasible. Rows
// whose surplus costs something must come before the first Solve.
func (lp *LP) AddRow(r *Row) {
	m := len(lp.rows)
	// New row of the working matrix: coefficients of the basic columns, then −1.
	v := lp.grow(&lp.column, m)
	for i, b := range lp.base {
		v[i] = lp.relative(r, b)
	}
	binv := make([]float64, (m+1)*(m+1), (m+8)*(m+8))
	if cap(lp.work) >= (m+1)*(m+1) {
		binv = lp.work[:(m+1)*(m+1)]
		clear(binv)
	}
	for i := 0; i < m; i++ {
		copy(binv[i*(m+1):], lp.binv[i*m:(i+1)*m])
	}
	for k := 0; k < m; k++ {
		sum := 0.0
		for i := 0; i < m; i++ {
			sum += v[i] * lp.binv[i*m+k]
		}
		binv[m*(m+1)+k] = sum
	}
	binv[m*(m+1)+m] = -1
	lp.work, lp.binv = lp.binv, binv
	lp.rows = append(lp.rows, r)
	lp.base = append(lp.base, basic{-1, int32(m)})
	lp.x = append(lp.x, 0)
	lp.rhs = append(lp.rhs, 0)
	lp.pi = append(lp.pi, 0)
}

// DropSlack removes rows whose surplus is basic and above the threshold, except the
// first keep rows.
func (lp *LP) DropSlack(keep int, above float64) {
	for pos := len(lp.base) - 1; pos >= 0; pos-- {
		b := lp.base[pos]
		if b.set < 0 && int(b.col) >= keep && lp.x[pos] > above {
			lp.removeRow(pos)
		}
	}
}

func (lp *LP) removeRow(pos int) {
	m := len(lp.rows)
	row := int(lp.base[pos].col)
	binv := lp.binv
	w := 0
	for i := 0; i < m; i++ {
		if i == pos {
			continue
		}
		for k := 0; k < m; k++ {
			if k != row {
				binv[w] = lp.binv[i*m+k]
				w++
			}
		}
	}
	lp.binv = binv[:w]
	lp.rows = append(lp.rows[:row], lp.rows[row+1:]...)
	lp.base = append(lp.base[:pos], lp.base[pos+1:]...)
	lp.x = append(lp.x[:pos], lp.x[pos+1:]...)
	lp.rhs = lp.rhs[:m-1]
	lp.pi = append(lp.pi[:row], lp.pi[row+1:]...)
	for i := range lp.base {
		if b := &lp.base[i]; b.set < 0 && int(b.col) > row {
			b.col--
		}
	}
}

// Save takes a snapshot of the basis.
func (lp *LP) Save() *Basis {
	b := &Basis{
		keys:   make([]int32, len(lp.sets)),
		rows:   append([]*Row(nil), lp.rows...),
		basics: append([]basic(nil), lp.base...),
	}
	for i := range lp.sets {
		b.keys[i] = lp.sets[i].key
	}
	return b
}

// Load goes back to a snapshot, under whatever columns are allowed now.
func (lp *LP) Load(b *Basis) {
	lp.rows = append(lp.rows[:0], b.rows...)
	lp.base = append(lp.base[:0], b.basics...)
	for i := range lp.sets {
		lp.sets[i].key = b.keys[i]
		lp.sets[i].extra = 0
	}
	for _, c := range lp.base {
		if c.set >= 0 {
			lp.sets[c.set].extra++
		}
	}
	m := len(lp.rows)
	lp.grow(&lp.binv, m*m)
	lp.grow(&lp.x, m)
	lp.grow(&lp.rhs, m)
	lp.grow(&lp.pi, m)
	if !lp.invert() {
		lp.Restart()
	}
}

func (lp *LP) grow(v *[]float64, n int) []float64 {
	if cap(*v) < n {
		*v = make([]float64, n, n+n/2+8)
	}
	*v = (*v)[:n]
	return *v
}

func (lp *LP) allowed(s *set, j int32) bool {
	g := lp.groups[s.group]
	if g.HasOff && j == 0 {
		return s.off
	}
	if !s.on {
		return false
	}
	return lp.active[s.group] == nil || int(j) < len(lp.barred[s.group]) && !lp.barred[s.group][j]
}

// relative is the coefficient in row r of a basic variable, its set's key taken off.
func (lp *LP) relative(r *Row, b basic) float64 {
	if b.set < 0 {
		if lp.rows != nil && int(b.col) < len(lp.rows) && lp.rows[b.col] == r {
			return -1
		}
		return 0
	}
	s := &lp.sets[b.set]
	g := lp.groups[s.group]
	return r.Coef(int(s.group), g, &g.Cols[b.col]) - r.Coef(int(s.group), g, &g.Cols[s.key])
}

// invert builds the inverse of the working basis by Gauss-Jordan elimination with
// partial pivoting. It reports false where the basis is singular.
func (lp *LP) invert() bool {
	m := len(lp.rows)
	a := lp.grow(&lp.work, m*m)
	for i, r := range lp.rows {
		for k, b := range lp.base {
			if b.set < 0 {
				a[i*m+k] = 0
				if int(b.col) == i {
					a[i*m+k] = -1
				}
			} else {
				a[i*m+k] = lp.relative(r, b)
			}
		}
	}
	inv := lp.binv[:m*m]
	clear(inv)
	for i := 0; i < m; i++ {
		inv[i*m+i] = 1
	}
	for c := 0; c < m; c++ {
		best, at := 0.0, -1
		for i := c; i < m; i++ {
			if v := math.Abs(a[i*m+c]); v > best {
				best, at = v, i
			}
		}
		if best < 1e-11 {
			return false
		}
		if at != c {
			swap(a[at*m:at*m+m], a[c*m:c*m+m])
			swap(inv[at*m:at*m+m], inv[c*m:c*m+m])
		}
		scale := 1 / a[c*m+c]
		for k := 0; k < m; k++ {
			a[c*m+k] *= scale
			inv[c*m+k] *= scale
		}
		for i := 0; i < m; i++ {
			f := a[i*m+c]
			if i == c || f == 0 {
				continue
			}
			for k := 0; k < m; k++ {
				a[i*m+k] -= f * a[c*m+k]
				inv[i*m+k] -= f * inv[c*m+k]
			}
		}
	}
	return true
}

func swap(a, b []float64) {
	for i := range a {
		a[i], b[i] = b[i], a[i]
	}
}

// Share is the weight of column j in a set.
func (lp *LP) Share(set int, j int32) float64 {
	share := 0.0
	lp.Each(set, func(k int32, x float64) {
		if k == j {
			share += x
		}
	})
	return share
}

// Each visits the columns of a set that have weight.
func (lp *LP) Each(set int, visit func(j int32, share float64)) {
	s := &lp.sets[set]
	rest := 1.0
	if s.extra > 0 {
		for i, b := range lp.base {
			if int(b.set) != set {
				continue
			}
			x := min(max(lp.x[i], 0), 1)
			rest -= x
			if x > 0 {
				visit(b.col, x)
			}
		}
	}
	if rest > 0 {
		visit(s.key, rest)
	}
}

// Mixed tells whether a set rests on more than one column of the basis.
func (lp *LP) Mixed(set int) bool { return lp.sets[set].extra > 0 }

// Slack is how much dearer the best allowed column of a set is than its key when the
// set is switched off (to "off") or on: by how much the objective must rise, at least,
// before a set that rests on one column alone is switched over.
func (lp *LP) Slack(set int) (off, on float64) {
	s := &lp.sets[set]
	val := lp.price.val[s.group]
	off, on = math.Inf(1), math.Inf(1)
	g := lp.groups[s.group]
	lp.each(s, func(j int32) {
		d := val[j] - val[s.key]
		if g.HasOff && j == 0 {
			off = min(off, d)
		} else {
			on = min(on, d)
		}
	})
	return off, on
}
