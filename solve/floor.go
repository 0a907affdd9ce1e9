package solve

import "evenkeel/solve/simplex"

// floored tells whether a least inertia is asked for besides the limits.
func (m *master) floored() bool { return m.p.Hour.LeastInertiaMWs > 0 && !m.p.WithoutLimits }

// always is how many rows every program has: the balance, and the least inertia.
func (m *master) always() int {
	if m.floored() {
		return 2
	}
	return 1
}

// addLack adds what may be lacking of the least inertia.
func (m *master) addLack() {
	m.lack = len(m.sets)
	mws := m.p.Hour.LeastInertiaMWs
	m.sets = append(m.sets, len(m.groups))
	m.groups = append(m.groups, &simplex.Group{Shape: m.rowShapes() - 1, HasOff: true, Cols: []simplex.Column{{}, {Cost: mws * m.p.LackPerMWs(), R: mws}}})
}

// floorRow asks for the least inertia.
func (m *master) floorRow() *simplex.Row {
	row := &simplex.Row{E: 1, R: make([]float64, m.rowShapes()), Tag: &rowTag{floor: true}}
	row.R[m.rowShapes()-1] = 1
	row.RHS = m.p.Hour.LeastInertiaMWs - m.p.Hour.LoadInertiaMWs
	return row
}
