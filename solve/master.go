package solve

import (
	"math"

	"evenkeel/formulate"
	"evenkeel/limits"
	"evenkeel/solve/simplex"
)

// master is the hour's columns and sets, shared by all its linear programs.
type master struct {
	p      *formulate.Problem
	groups []*simplex.Group // one a class, then unserved load, then a shortfall for each limit
	sets   []int            // group of each set
	first  []int            // first set of each class; its units follow
	most   []float64        // most that one unit of each class can put out

	recovers []bool // shapes that draw power at some time

	unserved int
	short    [limits.Kinds]int
	shortMW  float64           // most that a limit can be short
	over     [limits.Kinds]int // shortfalls above nominal, where there are limits there
	lack     int               // of the least inertia, where that is asked for

	base [][]int32             // columns without a cap, one list a group
	caps map[float64][][]int32 // columns under a cap
}

func newMaster(p *formulate.Problem) *master {
	m := &master{p: p, caps: map[float64][][]int32{}}
	shapes := len(p.Shapes)
	for c := range p.Classes {
		cl := &p.Classes[c]
		u := &p.Hour.Units[cl.Unit]
		points := formulate.Points(u, math.Inf(1))
		g := &simplex.Group{Shape: cl.Shape}
		if cl.Down >= 0 && p.Above != nil {
			g.Down = m.downAt(cl.Down)
		}
		if cl.Commit || len(points) == 0 {
			g.HasOff = true
			g.Cols = append(g.Cols, simplex.Column{})
		}
		for _, pt := range points {
			g.Cols = append(g.Cols, column(pt))
		}
		m.first = append(m.first, len(m.sets))
		for range cl.Count {
			m.sets = append(m.sets, len(m.groups))
		}
		m.groups = append(m.groups, g)
		m.most = append(m.most, u.MaxMW)
	}
	for _, s := range p.Shapes {
		m.recovers = append(m.recovers, s.Recovery())
	}
	m.shortMW = 1
	for k := range p.Losses {
		m.shortMW = max(m.shortMW, m.possible(k))
	}
	// Load not served also takes its damping along: the shape after the real ones.
	m.unserved = len(m.sets)
	most := p.MostUnservedMW()
	m.sets = append(m.sets, len(m.groups))
	m.groups = append(m.groups, &simplex.Group{Shape: shapes, HasOff: true, Cols: []simplex.Column{
		{}, {Cost: most * p.UnservedPerMWh, P: most, R: most}}})
	for k := range m.short {
		m.short[k] = len(m.sets)
		m.sets = append(m.sets, len(m.groups))
		m.groups = append(m.groups, &simplex.Group{Shape: shapes + 1 + k, HasOff: true, Cols: []simplex.Column{
			{}, {Cost: 2 * m.shortMW * p.ShortPerMW, R: 2 * m.shortMW}}})
	}
	if p.Above != nil {
		for k := range p.OverLosses {
			m.shortMW = max(m.shortMW, m.possibleOver(k))
		}
		for k := range m.over {
			m.over[k] = len(m.sets)
			m.sets = append(m.sets, len(m.groups))
			m.groups = append(m.groups, &simplex.Group{Shape: m.downAt(shapes) + k, HasOff: true, Cols: []simplex.Column{
				{}, {Cost: 2 * m.shortMW * p.ShortPerMW, R: 2 * m.shortMW}}})
		}
	}
	if m.floored() {
		m.addLack()
	}
	for _, g := range m.groups {
		list := make([]int32, len(g.Cols))
		for j := range list {
			list[j] = int32(j)
		}
		m.base = append(m.base, list)
	}
	return m
}

func column(pt formulate.Point) simplex.Column {
	return simplex.Column{Cost: pt.Cost, P: pt.OutputMW, E: pt.InertiaMWs, R: pt.ResponseMW, D: pt.DownMW}
}

// downAt is where a row keeps the coefficient of a response downwards: after those upwards, of
// unserved load and of shortfalls.
func (m *master) downAt(shape int) int { return len(m.p.Shapes) + 1 + limits.Kinds + shape }

// possibleOver is the most that a loss of load or export can be.
func (m *master) possibleOver(k int) float64 {
	l := &m.p.OverLosses[k]
	mw := l.FixedMW
	for _, c := range l.Classes {
		most := max(-m.p.Hour.Units[m.p.Classes[c].Unit].MinMW, 0)
		if !l.Single {
			most *= float64(m.p.Classes[c].Count)
		}
		mw += most
	}
	return mw
}

// rowShapes is the length of a row's R: the shapes, unserved load, shortfalls, the same of the
// other side of nominal, and what is lacking of the least inertia.
func (m *master) rowShapes() int {
	n := len(m.p.Shapes) + 1 + limits.Kinds
	if m.p.Above != nil {
		n += len(m.p.Shapes) + limits.Kinds
	}
	if m.floored() {
		n++
	}
	return n
}

// possible is the most that a loss can be.
func (m *master) possible(k int) float64 {
	l := &m.p.Losses[k]
	mw := l.FixedMW
	for _, c := range l.Classes {
		most := max(m.most[c], 0)
		if !l.Single {
			most *= float64(m.p.Classes[c].Count)
		}
		mw += most
	}
	return mw
}

// use bars the columns above capMW of classes whose loss hangs on a commitment.
func (m *master) use(lp *simplex.LP, capMW float64) {
	lists, ok := m.caps[capMW]
	if !ok {
		lists = make([][]int32, len(m.groups))
		capped := make([]bool, len(m.groups))
		for k := range m.p.Losses {
			if l := &m.p.Losses[k]; l.Single && l.Commits(m.p) {
				capped[l.Classes[0]] = true
			}
		}
		for g := range m.groups {
			lists[g] = m.base[g]
			if capped[g] && m.most[g] > capMW {
				lists[g] = m.under(g, capMW)
			}
		}
		m.caps[capMW] = lists
	}
	for g := range m.groups {
		if list := lists[g]; len(list) == len(m.groups[g].Cols) {
			lp.Use(g, nil) // all of them: faster than by list
		} else {
			lp.Use(g, list)
		}
	}
}

// under lists the columns of a class under a cap, adding those at the cap itself.
func (m *master) under(g int, capMW float64) []int32 {
	group := m.groups[g]
	list := []int32{0}
	for _, pt := range formulate.Points(&m.p.Hour.Units[m.p.Classes[g].Unit], capMW) {
		c := column(pt)
		at := int32(-1)
		for j := 1; j < len(group.Cols); j++ {
			if group.Cols[j] == c {
				at = int32(j)
				break
			}
		}
		if at < 0 {
			at = int32(len(group.Cols))
			group.Cols = append(group.Cols, c)
		}
		list = append(list, at)
	}
	return list
}

// balance is the row of the power balance: load not served counts as output, output
// above the load costs as much as load not served.
func (m *master) balance() *simplex.Row {
	return &simplex.Row{P: 1, R: make([]float64, m.rowShapes()), RHS: m.p.Hour.DemandMW, SurplusCost: m.p.UnservedPerMWh}
}

// rowTag is what a simplex row remembers of its origin.
type rowTag struct {
	row     formulate.Row
	average int  // units that a single loss is averaged over
	cap     bool // not a limit: the cap of a loss on several resources
	floor   bool // not a limit: the least inertia
}

// roundingShare of the largest possible loss is added to every frequency row, so that
// what the rows hold by rounding is still inside the corridor.
const roundingShare = 1e-8

// row makes the simplex row of a frequency row. A class that loses one of several
// identical units loses the average of the most units that may be on: n units on at
// their average point are as good as any n, and the average over more units is less.
func (m *master) row(r formulate.Row, average int, inertiaAtLeast float64) *simplex.Row {
	if r.Over {
		return m.overRow(r, average)
	}
	p := m.p
	shapes := len(p.Shapes)
	row := &simplex.Row{E: r.InertiaPerMWs, R: make([]float64, m.rowShapes()), Tag: &rowTag{row: r, average: average}}
	copy(row.R, r.Response)
	row.R[shapes] = -r.DampingShare
	row.R[shapes+1+int(r.At.Kind)] = 1
	row.RHS = r.MW + roundingShare*m.shortMW - r.InertiaPerMWs*p.Hour.LoadInertiaMWs - r.DampingMW
	if r.Loss == formulate.AnyLoss {
		row.RHS += r.InertiaPerMWs * inertiaAtLeast
		return row
	}
	l := &p.Losses[r.Loss]
	row.RHS += l.FixedMW
	for _, c := range l.Classes {
		share := 1.0
		if l.Single {
			share = 1 / float64(average)
		}
		own := simplex.Own{Group: c, P: share, E: share * r.InertiaPerMWs}
		if s := p.Classes[c].Shape; s >= 0 {
			own.R = share * r.Response[s]
		}
		row.Own = append(row.Own, own)
	}
	return row
}

// overRow is row for the other side of nominal: what is lost is load, or output below zero.
func (m *master) overRow(r formulate.Row, average int) *simplex.Row {
	p := m.p
	row := &simplex.Row{E: r.InertiaPerMWs, R: make([]float64, m.rowShapes()), Tag: &rowTag{row: r, average: average}}
	for s, v := range r.Response {
		row.R[m.downAt(s)] = v
	}
	row.R[len(p.Shapes)] = -r.DampingShare
	row.R[m.downAt(len(p.Shapes))+int(r.At.Kind)] = 1
	l := &p.OverLosses[r.Loss]
	row.RHS = l.FixedMW + roundingShare*m.shortMW - r.InertiaPerMWs*p.AboveInertiaMWs - r.DampingMW
	for _, c := range l.Classes {
		share := 1.0
		if l.Single {
			share = 1 / float64(average)
		}
		own := simplex.Own{Group: c, P: -share, E: share * r.InertiaPerMWs}
		if s := p.Classes[c].Down; s >= 0 {
			own.D = share * r.Response[s]
		}
		row.Own = append(row.Own, own)
	}
	return row
}

// capRow keeps a loss on several resources under a cap.
func (m *master) capRow(k int, capMW float64) *simplex.Row {
	l := &m.p.Losses[k]
	row := &simplex.Row{R: make([]float64, m.rowShapes()), RHS: l.FixedMW - capMW, Tag: &rowTag{cap: true}}
	for _, c := range l.Classes {
		row.Own = append(row.Own, simplex.Own{Group: c, P: 1})
	}
	return row
}
