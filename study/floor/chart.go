package floor

import (
	"math"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
	"evenkeel/study/ranges"
)

// Cell is one field of a chart: a loss, and the response held of the chart's shape, both as they
// stand after the loss.
type Cell struct {
	LossMW, HeldMW float64

	FloorMWs float64 // the larger of the two below; +Inf: no kinetic energy is enough
	By       limits.Kind
	AtS      float64 // when that limit is reached, seconds after the loss

	Rows   limits.Floor
	Closed float64 // by simulation
	// ClosedBy is the limit that fails first with less, ClosedAtS when it is reached.
	ClosedBy  limits.Kind
	ClosedAtS float64
}

// Chart is what all cells of one axis share.
type Chart struct {
	Shape  int
	Loss   ranges.Range
	Held   ranges.Range
	Others []float64 // MW held of each shape; that of Shape is not used
	LoadMW float64
	Cells  []Cell // loss by loss, each with every response
}

// charter fills charts. It is not for concurrent use.
type charter struct {
	floors *limits.Floors
	closed closed
	held   []float64
}

func newCharter(c *fleet.Case, s *solve.Solver, p []plant) *charter {
	var shapes []limits.Shape
	for i := range c.Shapes {
		shapes = append(shapes, c.Shapes[i].Shape)
	}
	return &charter{floors: limits.NewFloors(c.Limits, shapes), closed: closed{c: c, plants: p, opt: s.ClosedOptions()}}
}

// row fills the cells of one loss.
func (x *charter) row(k *Chart, loss int) []Cell {
	out := make([]Cell, k.Held.N)
	damping := x.closed.c.Load.DampingPctPerHz / 100 * k.LoadMW
	ratio := 1.0 // of what closed loop and the rows ask for in the cell before
	for i := range out {
		c := &out[i]
		c.LossMW, c.HeldMW = k.Loss.At(loss), k.Held.At(i)
		x.held = append(x.held[:0], k.Others...)
		x.held[k.Shape] = c.HeldMW
		c.Rows = x.floors.Least(c.LossMW, x.held, damping)
		x.closed.online(x.held, k.LoadMW)
		var v verdict
		c.Closed, v = x.closed.least(c.LossMW, ratio*c.Rows.MWs)
		if ratio = c.Closed / c.Rows.MWs; !(ratio > 0.1 && ratio < 10) {
			ratio = 1
		}
		c.ClosedBy, c.ClosedAtS = v.by, v.atS
		c.FloorMWs, c.By, c.AtS = c.Rows.MWs, c.Rows.By, c.Rows.At.ToS
		if c.Closed > c.FloorMWs || math.IsInf(c.Closed, 1) && !math.IsInf(c.FloorMWs, 1) {
			c.FloorMWs, c.By, c.AtS = c.Closed, c.ClosedBy, c.ClosedAtS
		}
	}
	return out
}
