package formulate

import (
	"fmt"
	"math"
	"slices"

	"evenkeel/fleet"
	"evenkeel/limits"
)

// Model is one hour in a standard form that any MILP solver reads: minimise the cost of
// the columns, rows between bounds, some columns whole numbers. It describes units by
// their own limits, not by operating points, so that solving it checks those too.
type Model struct {
	Columns []ModelColumn
	Rows    []ModelRow
}

// ModelColumn is one column. Entries name rows by index.
type ModelColumn struct {
	Name    string
	Cost    float64
	Lo, Hi  float64
	Whole   bool
	Entries []Entry
}

// Entry is one coefficient.
type Entry struct {
	Row   int
	Value float64
}

// ModelRow is a row of value Sense RHS, with Sense one of "=", ">=", "<=".
type ModelRow struct {
	Name  string
	Sense string
	RHS   float64
}

// unitColumns are the columns of one unit.
type unitColumns struct {
	on       int
	segments []int
	response int // −1: none
	down     int // downwards; −1: none
	inertia  int // synthetic; −1: none
}

// Model writes out the hour with the frequency rows of every loss at the given instants.
// Rows of losses that a constant loss always covers are left out. Those above nominal come at
// the instants over and at the same grid.
func (p *Problem) Model(instants, over []limits.Instant) *Model {
	m := &Model{}
	balance := m.row("balance", "=", p.Hour.DemandMW)
	units := make([][]unitColumns, len(p.Classes))
	for c := range p.Classes {
		for i := range p.Classes[c].Count {
			u := m.unit(p, c, i, balance)
			if i > 0 { // identical units go on in order
				r := m.row(fmt.Sprintf("order_%d_%d", c, i), ">=", 0)
				m.add(units[c][i-1].on, r, 1)
				m.add(u.on, r, -1)
			}
			units[c] = append(units[c], u)
		}
	}
	inf := math.Inf(1)
	unserved := m.column("unserved", p.UnservedPerMWh, 0, p.MostUnservedMW(), false)
	m.add(unserved, balance, 1)
	excess := m.column("excess", p.UnservedPerMWh, 0, inf, false)
	m.add(excess, balance, -1)
	if p.WithoutLimits {
		return m
	}
	var short [limits.Kinds]int
	for k := range short {
		short[k] = m.column("short_"+limits.Kind(k).String(), p.ShortPerMW, 0, inf, false)
	}
	for t, at := range dedupe(instants) {
		// The cover: MW of loss that everything online carries at this instant.
		row := p.Row(AnyLoss, p.Limits.Row(at, p.Shapes, p.DampingA0))
		cover := m.column(fmt.Sprintf("cover_%d", t), 0, -inf, inf, false)
		def := m.row(fmt.Sprintf("cover_%d_%s", t, at.Kind), "=", row.InertiaPerMWs*p.Hour.LoadInertiaMWs+row.DampingMW)
		m.add(cover, def, 1)
		m.add(unserved, def, row.DampingShare)
		m.add(short[at.Kind], def, -1)
		for c := range units {
			for i := range units[c] {
				m.carried(p, c, &units[c][i], def, &row, -1)
			}
		}
		least := 0.0 // the largest loss that is there whatever is on
		for k := range p.Losses {
			if len(p.Losses[k].Classes) == 0 {
				least = max(least, p.Losses[k].FixedMW)
			}
		}
		floor := false
		for k := range p.Losses {
			l := &p.Losses[k]
			if len(l.Classes) == 0 {
				if l.FixedMW < least || floor {
					continue
				}
				floor = true
			} else if p.mostWeight(l, &row) <= least {
				continue
			}
			n := 1
			if l.Single {
				n = p.Classes[l.Classes[0]].Count
			}
			for i := range n {
				r := m.row(fmt.Sprintf("loss_%d_%d_%d", t, k, i), ">=", l.FixedMW)
				m.add(cover, r, 1)
				for _, c := range l.Classes {
					list := units[c]
					if l.Single {
						list = list[i : i+1]
					}
					for j := range list {
						m.output(p, c, &list[j], r, -1)
						m.carried(p, c, &list[j], r, &row, -1)
					}
				}
			}
		}
	}
	if least := p.Hour.LeastInertiaMWs; least > 0 {
		r := m.row("least_inertia", ">=", least-p.Hour.LoadInertiaMWs)
		m.add(m.column("lack", p.LackPerMWs(), 0, inf, false), r, 1)
		one := Row{InertiaPerMWs: 1, Response: make([]float64, len(p.Shapes))}
		for c := range units {
			for i := range units[c] {
				m.carried(p, c, &units[c][i], r, &one, 1)
			}
		}
	}
	if p.Above != nil {
		m.above(p, units, unserved, append(over, p.Grid()...))
	}
	return m
}

// above adds the rows of every loss of load and export.
func (m *Model) above(p *Problem, units [][]unitColumns, unserved int, instants []limits.Instant) {
	var short [limits.Kinds]int
	for k := range short {
		short[k] = m.column("short_over_"+limits.Kind(k).String(), p.ShortPerMW, 0, math.Inf(1), false)
	}
	for t, at := range dedupe(instants) {
		for k := range p.OverLosses {
			l := &p.OverLosses[k]
			row := p.OverRow(k, p.Above.Row(at, p.Shapes, p.AboveA0))
			n := 1
			if l.Single {
				n = p.Classes[l.Classes[0]].Count
			}
			for i := range n {
				r := m.row(fmt.Sprintf("over_%d_%d_%d", t, k, i), ">=", l.FixedMW-row.InertiaPerMWs*p.AboveInertiaMWs-row.DampingMW)
				m.add(unserved, r, -row.DampingShare)
				m.add(short[at.Kind], r, 1)
				lost := func(c, j int) bool {
					for _, x := range l.Classes {
						if x == c && (!l.Single || j == i) {
							return true
						}
					}
					return false
				}
				for c := range units {
					for j := range units[c] {
						u := &units[c][j]
						if lost(c, j) {
							m.output(p, c, u, r, 1) // what it draws is the loss
							continue
						}
						m.add(u.on, r, row.InertiaPerMWs*p.Hour.Units[p.Classes[c].Unit].InertiaMWs)
						m.add(u.inertia, r, row.InertiaPerMWs)
						if sh := p.Classes[c].Down; sh >= 0 {
							m.add(u.down, r, row.Response[sh])
						}
					}
				}
			}
		}
	}
}

// mostWeight bounds what a loss can ask for in a row, in MW.
func (p *Problem) mostWeight(l *Loss, row *Row) float64 {
	mw := l.FixedMW
	for _, c := range l.Classes {
		cl := &p.Classes[c]
		u := &p.Hour.Units[cl.Unit]
		one := max(u.MaxMW, 0) + row.InertiaPerMWs*(u.InertiaMWs+u.SyntheticCapMWs)
		if cl.Shape >= 0 {
			one += max(row.Response[cl.Shape], 0) * u.ResponseCapMW
		}
		if !l.Single {
			one *= float64(cl.Count)
		}
		mw += one
	}
	return mw
}

func (m *Model) row(name, sense string, rhs float64) int {
	m.Rows = append(m.Rows, ModelRow{name, sense, rhs})
	return len(m.Rows) - 1
}

func (m *Model) column(name string, cost, lo, hi float64, whole bool) int {
	m.Columns = append(m.Columns, ModelColumn{Name: name, Cost: cost, Lo: lo, Hi: hi, Whole: whole})
	return len(m.Columns) - 1
}

func (m *Model) add(column, row int, value float64) {
	if column < 0 || value == 0 {
		return
	}
	c := &m.Columns[column]
	for i := range c.Entries {
		if c.Entries[i].Row == row {
			c.Entries[i].Value += value
			return
		}
	}
	c.Entries = append(c.Entries, Entry{row, value})
}

// unit adds the columns and rows of unit i of class c: on or off, output in segments of
// rising cost above its minimum, response and synthetic inertia within its headroom.
func (m *Model) unit(p *Problem, c, i, balance int) unitColumns {
	cl := &p.Classes[c]
	u := &p.Hour.Units[cl.Unit]
	tag := fmt.Sprintf("%d_%d", c, i)
	lo, hi := 0.0, 1.0
	if !cl.Commit || cl.MustRun {
		lo = 1
	}
	top := min(u.MaxMW, u.HeadMW)
	if top < u.MinMW { // it can't run
		lo, hi = 0, 0
		top = u.MinMW
	}
	out := unitColumns{response: -1, down: -1, inertia: -1}
	out.on = m.column("on_"+tag, u.OnCost+OutputCost(u.Steps, u.MinMW), lo, hi, cl.Commit)
	ends := []float64{u.MinMW, top}
	for _, s := range append([]fleet.Step{{ToMW: 0}}, u.Steps...) {
		if s.ToMW > u.MinMW && s.ToMW < top {
			ends = append(ends, s.ToMW)
		}
	}
	slices.Sort(ends)
	ends = slices.Compact(ends)
	for s := 1; s < len(ends); s++ {
		width := ends[s] - ends[s-1]
		slope := (OutputCost(u.Steps, ends[s]) - OutputCost(u.Steps, ends[s-1])) / width
		seg := m.column(fmt.Sprintf("mw_%s_%d", tag, s), slope, 0, width, false)
		m.under(seg, out.on, width, fmt.Sprintf("width_%s_%d", tag, s))
		out.segments = append(out.segments, seg)
	}
	if cl.Shape >= 0 && u.ResponseCapMW > 0 {
		out.response = m.column("response_"+tag, u.ResponsePerMW, 0, u.ResponseCapMW, false)
		m.under(out.response, out.on, u.ResponseCapMW, "cap_"+tag)
		if u.ShareOfOutput > 0 {
			r := m.row("share_"+tag, "<=", 0)
			m.add(out.response, r, 1)
			m.output(p, c, &out, r, -u.ShareOfOutput)
		}
	}
	if cl.Down >= 0 {
		out.down = m.column("down_"+tag, u.DownPerMW, 0, u.DownCapMW, false)
		m.under(out.down, out.on, u.DownCapMW, "downcap_"+tag)
		r := m.row("foot_"+tag, "<=", 0)
		m.add(out.down, r, 1)
		m.output(p, c, &out, r, -1)
		m.add(out.on, r, u.FootMW)
	}
	if u.SyntheticCapMWs > 0 {
		out.inertia = m.column("synthetic_"+tag, u.SyntheticPerMWs, 0, u.SyntheticCapMWs, false)
		m.under(out.inertia, out.on, u.SyntheticCapMWs, "most_"+tag)
	}
	if head := u.FromHead && out.response >= 0 || u.HeadPerMWs > 0 && out.inertia >= 0; head {
		r := m.row("head_"+tag, "<=", 0)
		m.output(p, c, &out, r, 1)
		m.add(out.on, r, -u.HeadMW)
		if u.FromHead {
			m.add(out.response, r, 1)
		}
		m.add(out.inertia, r, u.HeadPerMWs)
	}
	m.output(p, c, &out, balance, 1)
	return out
}

// under keeps a column at or below a multiple of another.
func (m *Model) under(column, on int, width float64, name string) {
	r := m.row(name, "<=", 0)
	m.add(column, r, 1)
	m.add(on, r, -width)
}

// output adds a unit's output to a row.
func (m *Model) output(p *Problem, c int, u *unitColumns, row int, factor float64) {
	m.add(u.on, row, factor*p.Hour.Units[p.Classes[c].Unit].MinMW)
	for _, s := range u.segments {
		m.add(s, row, factor)
	}
}

// carried adds what a unit's inertia and response carry of a loss to a row.
func (m *Model) carried(p *Problem, c int, u *unitColumns, row int, f *Row, factor float64) {
	cl := &p.Classes[c]
	m.add(u.on, row, factor*f.InertiaPerMWs*p.Hour.Units[cl.Unit].InertiaMWs)
	m.add(u.inertia, row, factor*f.InertiaPerMWs)
	if cl.Shape >= 0 {
		m.add(u.response, row, factor*f.Response[cl.Shape])
	}
}

// dedupe drops instants that are there already.
func dedupe(list []limits.Instant) []limits.Instant {
	var out []limits.Instant
	seen := map[limits.Instant]bool{}
	for _, at := range list {
		if !seen[at] {
			seen[at] = true
			out = append(out, at)
		}
	}
	return out
}

// Grid is a coarse grid of instants: each limit at about twenty instants and at the
// knots of the shapes, and from each instant at which a shape begins to fall.
func (p *Problem) Grid() []limits.Instant {
	l := p.Limits
	var out []limits.Instant
	out = append(out, limits.Instant{Kind: limits.RoCoF, ToS: l.WindowS})
	at := []float64{0.5, 1, 1.5, 2, 3, 4, 5, 6, 7, 8, 10, 12, 15, 20, 25}
	starts := []float64{0}
	for _, s := range p.Shapes {
		knots := s.Knots()
		for i, k := range knots {
			at = append(at, k.S)
			if i+1 < len(knots) && knots[i+1].Share < k.Share {
				starts = append(starts, k.S)
			}
		}
	}
	at = append(at, l.SteadyByS, l.SteadyUntilS)
	slices.Sort(at)
	at = slices.Compact(at)
	slices.Sort(starts)
	starts = slices.Compact(starts)
	for _, s := range starts {
		for _, t := range at {
			if t <= s || t > l.SteadyUntilS {
				continue
			}
			if s > 0 && l.WindowS > 0 && s+l.WindowS <= l.SteadyUntilS {
				out = append(out, limits.Instant{Kind: limits.RoCoF, FromS: s, ToS: s + l.WindowS})
			}
			// What suffices together, see limits.Scan.Worst.
			if t <= l.SteadyByS {
				out = append(out, limits.Instant{Kind: limits.Nadir, FromS: s, ToS: t})
			}
			if t == l.SteadyByS {
				out = append(out, limits.Instant{Kind: limits.Steady, FromS: s, ToS: t})
			}
		}
	}
	for _, t := range at {
		if t >= l.SteadyByS && t <= l.SteadyUntilS {
			out = append(out, limits.Instant{Kind: limits.Steady, Balance: true, FromS: t, ToS: t})
		}
	}
	return out
}
