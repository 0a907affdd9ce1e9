package worth

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"time"

	"evenkeel/fleet"
	"evenkeel/solve"
	"evenkeel/study/sweep"
)

// Plan is what a study looks at.
type Plan struct {
	Case    *fleet.Case
	Product *fleet.Product // nil: none
	// VolumesMW are how much of the product there may be, rising from 0. Not looked at without a
	// product.
	VolumesMW []float64
	// ActivationsS are other activation times of the product, each looked at with the last volume.
	ActivationsS []float64
	Options      solve.Options
	Hours        []int // of the case
}

// Record is what the study keeps of one hour.
type Record struct {
	Index          int
	Time           time.Time
	DemandMW       float64
	InertiaLeftMWs float64 // without the product, after the worst loss
	WorstLossMW    float64

	Points  []Point // one a volume, then one an activation time
	Without Mix     // without the product
	With    Mix     // with the last volume of it; empty without a product
}

// Point is the hour with so much of the product.
type Point struct {
	Cost, Bound float64 // currency per hour, what the product is paid included
	HeldMW      float64 // of the product
	Paid        float64 // to it, at its own price
	CO2T        float64
	Short       bool
	Mended      bool
}

// Mix is one mix of the hour, priced both ways.
type Mix struct {
	Marginal, Hull Way
	Does           []Doing // one a resource
}

// Way is the prices of an hour and who earns what at them.
type Way struct {
	Prices             solve.Prices
	DownPerMW          []float64 // one a shape; nil without limits above nominal
	OverPerMW          float64   // what 1 MW less of the binding losses of load saves
	Uplift, SlackValue float64
	Takes              []Take // one a resource
}

// Take is what one resource is paid, pays and misses in an hour. There are very many of them:
// single precision does.
type Take struct {
	Energy, Inertia, Response, Down, Loss, Cost float32
	MakeWhole, Lost                             float32
}

// Doing is what one resource does in an hour, all its units together.
type Doing struct{ On, OutputMW, ResponseMW float32 }

// Study is a plan made ready.
type Study struct {
	Plan
	Rungs  []*fleet.Case // one a volume; the case itself without a product
	Others []*fleet.Case // one an activation time
	Swept  []int         // the resources that hold the product

	ladder *sweep.Ladder
	others []*solve.Solver
}

// Prepare makes a plan ready.
func (p Plan) Prepare() (*Study, error) {
	s := &Study{Plan: p}
	if len(p.Hours) == 0 {
		return nil, errors.New("there are no hours to look at")
	}
	if p.Product == nil {
		s.Rungs = []*fleet.Case{p.Case}
		s.begin()
		return s, nil
	}
	if len(p.VolumesMW) < 2 || p.VolumesMW[0] != 0 {
		return nil, fmt.Errorf("the volumes are %v MW; they must be two or more, the first 0", p.VolumesMW)
	}
	most := p.Product.MostMW()
	for i, v := range p.VolumesMW {
		if i > 0 && !(v > p.VolumesMW[i-1]) || !(v <= most) {
			return nil, fmt.Errorf("the volume %g MW stands after %g MW; volumes must rise, up to what there is of the product (%g MW)", v, p.VolumesMW[max(i-1, 0)], most)
		}
		c, err := p.Product.In(p.Case, v, 0)
		if err != nil {
			return nil, err
		}
		s.Rungs = append(s.Rungs, c)
	}
	s.ActivationsS = nil
	for _, a := range p.ActivationsS { // each once
		if !slices.Contains(s.ActivationsS, a) {
			s.ActivationsS = append(s.ActivationsS, a)
		}
	}
	for _, a := range s.ActivationsS {
		if !(a > 0) || math.IsInf(a, 0) {
			return nil, fmt.Errorf("the activation time is %g s; it must be above 0", a)
		}
		c, err := p.Product.In(p.Case, p.VolumesMW[len(p.VolumesMW)-1], a)
		if err != nil {
			return nil, err
		}
		s.Others = append(s.Others, c)
	}
	s.Swept = p.Product.Holders(p.Case)
	s.begin()
	return s, nil
}

func (s *Study) begin() {
	opt := s.Options
	opt.Settle = true
	s.ladder = sweep.NewLadder(s.Rungs, s.Swept, opt)
	opt.Settle = false
	for _, c := range s.Others {
		s.others = append(s.others, solve.New(c, opt))
	}
}

// Full is the case with all of the product, or the case itself without one.
func (s *Study) Full() *fleet.Case { return s.Rungs[len(s.Rungs)-1] }

// Hour does the i-th of the plan's hours. It is safe for concurrent use.
func (s *Study) Hour(ctx context.Context, i int) (Record, error) {
	index := s.Hours[i]
	hours, err := s.ladder.Hour(ctx, index)
	if err != nil {
		return Record{}, err
	}
	first, last := &hours[0], &hours[len(hours)-1]
	r := Record{
		Index: index, Time: first.Time, DemandMW: first.DemandMW, InertiaLeftMWs: first.InertiaLeftMWs, WorstLossMW: first.WorstLossMW,
		Without: mixOf(first),
	}
	if s.Product != nil {
		r.With = mixOf(last)
	}
	for k := range hours {
		p := s.point(&hours[k])
		for _, less := range r.Points { // what fewer MW cost can be had with more: the rows of an hour that was mended bound its own mix alone
			p.Bound = min(p.Bound, less.Cost)
		}
		r.Points = append(r.Points, p)
	}
	for k, c := range s.Others {
		h, err := s.others[k].Hour(ctx, c.Hour(index, fleet.HourOptions{StartSpreadH: s.Options.StartSpreadH}))
		if err != nil {
			return Record{}, err
		}
		// Nobody must hold the product: the mix without it will do as well, but proves nothing of those with it.
		if first.Status == h.Status && first.Cost < h.Cost || first.Status == solve.Secure && h.Status != solve.Secure {
			bound := min(h.Bound, first.Bound)
			h = *first
			h.Bound = bound
		}
		r.Points = append(r.Points, s.point(&h))
	}
	return r, nil
}

func (s *Study) point(h *solve.Hour) Point {
	p := Point{Cost: h.Cost, Bound: h.Bound, CO2T: h.CO2T, Short: h.Status == solve.Short, Mended: h.Closed.Mended > 0}
	for _, r := range s.Swept {
		p.HeldMW += h.Dispatch[r].ResponseMW
		p.Paid += h.Dispatch[r].Cost
	}
	return p
}

func mixOf(h *solve.Hour) Mix {
	st := h.Settlement
	m := Mix{Marginal: wayOf(&st.Marginal), Hull: wayOf(&st.Hull), Does: make([]Doing, len(h.Dispatch))}
	for i, d := range h.Dispatch {
		m.Does[i] = Doing{float32(d.On), float32(d.OutputMW), float32(d.ResponseMW)}
	}
	return m
}

func wayOf(s *solve.Settled) Way {
	w := Way{Prices: s.Prices, DownPerMW: s.DownPerMW, OverPerMW: s.OverPerMW, Uplift: s.Uplift, SlackValue: s.SlackValue, Takes: make([]Take, len(s.Resources))}
	w.Prices.ResponsePerMW = slices.Clone(s.Prices.ResponsePerMW)
	for i, e := range s.Resources {
		w.Takes[i] = Take{
			float32(e.Energy), float32(e.Inertia), float32(e.Response), float32(e.Down), float32(e.LossCharge), float32(e.Cost),
			float32(e.MakeWhole), float32(e.LostOpportunity),
		}
	}
	return w
}
