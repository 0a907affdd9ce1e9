package floor

import (
	"math"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/limits/dynamic"
	"evenkeel/solve"
)

// plant is who answers with a shape, as the simulation sees it.
type plant struct {
	capMW float64        // of all units together
	units []dynamic.Unit // with all they can hold; none: the shape is a promise
}

// plants lists who answers with each shape: where it is a model, the resources that have it, with
// their mean caps over the hours.
func plants(c *fleet.Case, hours []int) []plant {
	out := make([]plant, len(c.Shapes))
	models := c.ModelOf()
	for i := range c.Resources {
		r := &c.Resources[i]
		if r.Response.Shape < 0 {
			continue
		}
		sum := 0.0
		for _, h := range hours {
			sum += max(r.Response.CapMW.At(h), 0)
		}
		mw := sum / float64(len(hours))
		if !(mw > 0) {
			continue
		}
		p := &out[r.Response.Shape]
		p.capMW += float64(r.Count) * mw
		if m := models[r.Response.Shape]; m != nil {
			p.units = append(p.units, dynamic.Unit{Name: r.Name, Model: m, N: float64(r.Count), RatingMW: r.Base(), UpMW: mw})
		}
	}
	return out
}

// closed finds floors by bisection of closed-loop simulations. It is not for concurrent use.
type closed struct {
	c      *fleet.Case
	plants []plant
	opt    dynamic.Options
	sim    dynamic.Simulator
	sys    dynamic.System
	loss   [1]dynamic.Loss
}

// online puts so much response on the system: of a model by units that hold all they can, as many
// of each resource as its part in all there are; of any other shape as promised.
func (x *closed) online(heldMW []float64, loadMW float64) {
	x.sys = dynamic.System{NominalHz: x.c.Limits.NominalHz, LoadMW: loadMW, DampingPctPerHz: x.c.Load.DampingPctPerHz,
		Units: x.sys.Units[:0], Promises: x.sys.Promises[:0]}
	for s, mw := range heldMW {
		if mw <= 0 {
			continue
		}
		p := &x.plants[s]
		if p.units == nil {
			x.sys.Promises = append(x.sys.Promises, dynamic.Promise{Name: x.c.Shapes[s].Name, Shape: x.c.Shapes[s].Shape, MW: mw})
			continue
		}
		for _, u := range p.units {
			u.N *= mw / p.capMW
			x.sys.Units = append(x.sys.Units, u)
		}
	}
}

// verdict is what one simulation says.
type verdict struct {
	holds bool
	by    limits.Kind // nearest to its limit, or beyond it by most
	atS   float64     // when it is nearest; RoCoF and the steady band: from when on
}

// try simulates the loss with so much kinetic energy left.
func (x *closed) try(lossMW, mws float64) verdict {
	x.sys.InertiaMWs = mws
	x.loss[0] = dynamic.Loss{MW: lossMW}
	o := x.sim.Run(&x.sys, x.loss[:], x.opt)
	l := x.c.Limits
	v := verdict{holds: true}
	most := math.Inf(-1)
	for k, is := range [limits.Kinds]struct{ value, limit, atS float64 }{
		{o.RoCoFHzPerS, l.MaxHzPerS, max(o.RoCoFS, 0)}, {o.NadirHz, l.NadirHz, o.NadirS}, {o.SteadyHz, l.SteadyHz, l.SteadyByS},
	} {
		if !(is.value <= is.limit+solve.ClosedTolHz) {
			v.holds = false
		}
		if part := is.value / is.limit; part > most {
			most, v.by, v.atS = part, limits.Kind(k), is.atS
		}
	}
	return v
}

const (
	closedWithin = 1e-3 // of the floor
	closedMost   = 20   // times what RoCoF alone asks for: with more, nothing happens within the time looked at
	closedLeast  = 0.02 // times the same: no less is tried, as it means next to nothing and takes long
)

// least bisects for the least kinetic energy with which the simulation keeps every limit, starting
// from a guess (+Inf: none). It gives the limit that fails with less.
func (x *closed) least(lossMW, guessMWs float64) (mws float64, v verdict) {
	l := x.c.Limits
	alone := lossMW * l.NominalHz / (2 * l.MaxHzPerS)
	most := closedMost * max(alone, 1)
	high := alone
	if !math.IsInf(guessMWs, 1) {
		high = guessMWs
		most = max(most, 2*high)
	}
	high = max(high, closedLeast*alone)
	at := x.try(lossMW, high)
	low, failed := high, at
	if at.holds {
		for step := 1.02; at.holds; step *= step {
			if low /= step; low < closedLeast*alone {
				return high, at
			}
			if failed = x.try(lossMW, low); !failed.holds {
				break
			}
			high, at = low, failed
		}
	} else {
		if at.by == limits.Steady { // does any kinetic energy do?
			if end := x.try(lossMW, most); !end.holds {
				return math.Inf(1), end
			}
		}
		for step := 1.02; ; step *= step {
			high = min(high*step, most)
			if at = x.try(lossMW, high); at.holds {
				break
			}
			if high >= most {
				return math.Inf(1), at
			}
			low, failed = high, at
		}
	}
	for high > low*(1+closedWithin) {
		mid := math.Sqrt(low * high)
		if v := x.try(lossMW, mid); v.holds {
			high, at = mid, v
		} else {
			low, failed = mid, v
		}
	}
	at.by = failed.by // at the floor itself several can be near
	return high, at
}
