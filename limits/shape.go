package limits

import (
	"errors"
	"fmt"
	"math"
)

// MaxKnotS is the latest instant a knot of a shape may have, in seconds. It only keeps
// integrals far from overflow.
const MaxKnotS = 1e9

// Knot is one corner of a response shape.
type Knot struct {
	S     float64 // seconds after the loss
	Share float64 // share of the response delivered, 1 = all of it
}

// Shape is φ(t), the share of a response delivered t seconds after a loss: linear
// between its knots, 0 before the first and the last knot's share for ever after the
// last. Two knots at one instant are a jump. The zero Shape never delivers.
type Shape struct {
	points []point
}

// point is one instant of a shape with its value on either side.
type point struct {
	s, left, right float64
}

// NewShape makes a shape out of knots in order of time. It refuses shares outside
// [−1, 1], instants outside [0, MaxKnotS] or out of order, more than two knots at
// one instant and a shape that never delivers.
func NewShape(knots []Knot) (Shape, error) {
	var points []point
	atOne := 0 // knots at the instant of the last point
	for i, k := range knots {
		if !(k.S >= 0 && k.S <= MaxKnotS) {
			return Shape{}, fmt.Errorf("knot %d lies at %v s; it must lie between 0 and %g s after the loss", i+1, k.S, MaxKnotS)
		}
		if !(k.Share >= -1 && k.Share <= 1) {
			return Shape{}, fmt.Errorf("knot %d has the share %v; it must be between -1 and 1", i+1, k.Share)
		}
		n := len(points)
		switch {
		case n == 0:
			points = append(points, point{k.S, 0, k.Share})
			atOne = 1
		case k.S < points[n-1].s:
			return Shape{}, fmt.Errorf("knot %d lies at %v s, before knot %d at %v s; knots must be in order of time", i+1, k.S, i, points[n-1].s)
		case k.S > points[n-1].s:
			points = append(points, point{k.S, k.Share, k.Share})
			atOne = 1
		case atOne == 2:
			return Shape{}, fmt.Errorf("knot %d is the third at %v s; a jump needs two", i+1, k.S)
		default:
			points[n-1].right = k.Share
			atOne = 2
		}
	}
	s := Shape{points}
	if len(points) == 0 {
		return Shape{}, errors.New("the shape has no knots; it needs at least one")
	}
	if s.most() <= 0 {
		return Shape{}, errors.New("the shape never delivers; at least one share must be above 0")
	}
	return s, nil
}

// Knots lists the corners of the shape, a jump as two knots at one instant. NewShape
// makes the same shape of them.
func (s Shape) Knots() []Knot {
	knots := make([]Knot, 0, 2*len(s.points))
	for _, p := range s.points {
		if p.left != p.right {
			knots = append(knots, Knot{p.s, p.left})
		}
		knots = append(knots, Knot{p.s, p.right})
	}
	return knots
}

// At gives φ(t); at a jump, the value after it.
func (s Shape) At(t float64) float64 {
	ps := s.points
	for i := len(ps) - 1; i >= 0; i-- {
		if t >= ps[i].s {
			if t == ps[i].s || i == len(ps)-1 {
				return ps[i].right
			}
			return between(&ps[i], &ps[i+1], t)
		}
	}
	return 0
}

// Before gives φ(t−); at a jump, the value before it.
func (s Shape) Before(t float64) float64 {
	ps := s.points
	for i := len(ps) - 1; i >= 0; i-- {
		if t == ps[i].s {
			return ps[i].left
		}
		if t > ps[i].s {
			if i == len(ps)-1 {
				return ps[i].right
			}
			return between(&ps[i], &ps[i+1], t)
		}
	}
	return 0
}

// between interpolates between two neighbouring points of a shape.
func between(p, q *point, t float64) float64 {
	return p.right + (q.left-p.right)*((t-p.s)/(q.s-p.s))
}

// Withdraws tells whether φ falls anywhere.
func (s Shape) Withdraws() bool {
	last := 0.0
	for _, p := range s.points {
		if p.left < last || p.right < p.left {
			return true
		}
		last = p.right
	}
	return false
}

// Recovery tells whether φ goes below zero anywhere: whether the resource takes back
// some of what it gave.
func (s Shape) Recovery() bool {
	for _, p := range s.points {
		if p.left < 0 || p.right < 0 {
			return true
		}
	}
	return false
}

// most is the largest share delivered at any time.
func (s Shape) most() float64 {
	most := 0.0
	for _, p := range s.points {
		most = math.Max(most, math.Max(p.left, p.right))
	}
	return most
}

// LeastAfter gives the smallest φ between two instants, in seconds. A jump between
// them counts with both sides, one at either end with its inner side.
func (s Shape) LeastAfter(from, until float64) float64 {
	least := s.At(from)
	if until > from {
		least = math.Min(least, s.Before(until))
	}
	for _, p := range s.points {
		if p.s > from && p.s < until {
			least = math.Min(least, math.Min(p.left, p.right))
		}
	}
	return least
}

// FullActivationS gives the first instant, in seconds, at which the shape delivers the
// most it ever does.
func (s Shape) FullActivationS() float64 {
	most := s.most()
	for _, p := range s.points {
		if p.left == most || p.right == most {
			return p.s
		}
	}
	return 0
}

// HoldEnergyS gives the energy that 1 MW of the response delivers, in MW·s: the
// integral of φ where φ is above zero. It is +Inf for a shape held for ever.
func (s Shape) HoldEnergyS() float64 {
	ps := s.points
	if len(ps) == 0 {
		return 0
	}
	if ps[len(ps)-1].right > 0 {
		return math.Inf(1)
	}
	sum := 0.0
	for i := 0; i+1 < len(ps); i++ {
		h, a, b := ps[i+1].s-ps[i].s, ps[i].right, ps[i+1].left
		switch {
		case a >= 0 && b >= 0:
			sum += h * (a + b) / 2
		case a > 0:
			sum += h * a * (a / (a - b)) / 2
		case b > 0:
			sum += h * b * (b / (b - a)) / 2
		}
	}
	return sum
}

// Equal tells whether both shapes deliver the same share at every instant, however
// their knots are placed.
func (s Shape) Equal(o Shape) bool {
	for _, ps := range [2][]point{s.points, o.points} {
		for _, p := range ps {
			if s.At(p.s) != o.At(p.s) || s.Before(p.s) != o.Before(p.s) {
				return false
			}
		}
	}
	return true
}
