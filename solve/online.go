package solve

import (
	"math"

	"evenkeel/fleet"
	"evenkeel/limits/dynamic"
)

// Online is a mix as the closed-loop simulation sees it: who is on, with what room, and what
// each loss takes with it.
type Online struct {
	Sys dynamic.System

	c *fleet.Case
	d []Dispatch

	loadInertia float64
	// Places in Sys of each resource's response and synthetic inertia and of each shape's
	// promise; −1: none.
	unit, down, synth, promise, promiseDown []int
}

// LoseLoad adds the loss of load to l: what it drew, its share of the load's damping and of the
// load's own kinetic energy.
func (o *Online) LoseLoad(l *dynamic.Loss, mw float64) {
	l.MW -= mw
	if o.Sys.LoadMW > 0 {
		gone := min(mw, o.Sys.LoadMW)
		l.LoadMW += gone
		l.InertiaMWs += gone / o.Sys.LoadMW * o.loadInertia
	}
}

// NewOnline describes the mix d of an hour. Response that a resource holds with a model acts by
// it, within what it holds; any other follows its shape. Synthetic inertia with a filter acts
// on the filtered rate of change within the power it has; any other is inertia.
func NewOnline(c *fleet.Case, h *fleet.Hour, d []Dispatch, unservedMW float64) *Online {
	o := &Online{c: c, d: d, loadInertia: h.LoadInertiaMWs, Sys: dynamic.System{NominalHz: c.Limits.NominalHz, LoadMW: max(h.DemandMW-unservedMW, 0), InertiaMWs: h.LoadInertiaMWs}}
	sys := &o.Sys
	if h.DemandMW > 0 {
		sys.DampingPctPerHz = 100 * h.DampingMWPerHz / h.DemandMW
	}
	models := c.ModelOf()
	o.promise, o.promiseDown = make([]int, len(c.Shapes)), make([]int, len(c.Shapes))
	for i := range o.promise {
		o.promise[i], o.promiseDown[i] = -1, -1
	}
	o.unit, o.down, o.synth = make([]int, len(c.Resources)), make([]int, len(c.Resources)), make([]int, len(c.Resources))
	const leastMW = 1e-6
	for i := range c.Resources {
		res, part := &c.Resources[i], &d[i]
		o.unit[i], o.down[i], o.synth[i] = -1, -1, -1
		n := float64(part.On)
		if n == 0 {
			continue
		}
		sys.InertiaMWs += part.InertiaMWs
		if down := res.Down.Shape; part.DownMW > leastMW && down >= 0 {
			if models[down] != nil {
				o.down[i] = len(sys.Units)
				sys.Units = append(sys.Units, dynamic.Unit{Name: res.Name + " (downwards)", Model: models[down], N: n, RatingMW: res.Base(), DownMW: part.DownMW / n})
			} else {
				o.promised(o.promiseDown, down, -part.DownMW, " (downwards)")
			}
		}
		if shape := h.Units[i].Shape; part.ResponseMW > leastMW && shape >= 0 {
			if m := models[shape]; m != nil {
				if d := o.down[i]; d >= 0 && models[res.Down.Shape] == m { // one governor for both directions
					sys.Units[d].Name, sys.Units[d].UpMW = res.Name, part.ResponseMW/n
				} else {
					o.unit[i] = len(sys.Units)
					sys.Units = append(sys.Units, dynamic.Unit{Name: res.Name, Model: m, N: n, RatingMW: res.Base(), UpMW: part.ResponseMW / n})
				}
			} else {
				o.promised(o.promise, shape, part.ResponseMW, "")
			}
		}
		if res.SyntheticS > 0 && part.InertiaMWs > leastMW {
			power := math.Inf(1)
			if k := h.Units[i].HeadPerMWs; k > 0 {
				power = k * part.InertiaMWs / n
			}
			o.synth[i] = len(sys.Units)
			sys.Units = append(sys.Units, dynamic.Unit{Name: res.Name + " (synthetic inertia)", Model: &dynamic.Model{Kind: dynamic.Synthetic, FilterS: res.SyntheticS},
				N: n, RatingMW: res.Base(), UpMW: power, DownMW: power, SyntheticMWs: part.InertiaMWs / n})
			sys.InertiaMWs -= part.InertiaMWs
		}
	}
	for i := range c.Relays {
		r := &c.Relays[i]
		sys.Relays = append(sys.Relays, dynamic.Relay{Name: r.Name, Over: r.Over, LevelHz: r.LevelHz, HzPerS: r.HzPerS, WindowS: r.WindowS, DelayS: r.DelayS,
			ShedShare: r.ShedShare, LostMW: r.LostMW.At(h.Index), InertiaMWs: r.LostMWs.At(h.Index)})
	}
	return o
}

// promised adds to what is promised with a shape.
func (o *Online) promised(place []int, shape int, mw float64, what string) {
	sys := &o.Sys
	if place[shape] < 0 {
		place[shape] = len(sys.Promises)
		sys.Promises = append(sys.Promises, dynamic.Promise{Name: o.c.Shapes[shape].Name + what, Shape: o.c.Shapes[shape].Shape})
	}
	sys.Promises[place[shape]].MW += mw
}

// Lose is the loss of so many units of a resource: their output, their inertia and their
// response. It adds to what l holds already.
func (o *Online) Lose(l *dynamic.Loss, resource int, units float64) {
	part := &o.d[resource]
	if part.On == 0 {
		return
	}
	units = min(units, float64(part.On))
	share := units / float64(part.On)
	l.MW += share * part.OutputMW
	if o.synth[resource] >= 0 {
		l.Units = append(l.Units, dynamic.Gone{Index: o.synth[resource], Much: units})
	} else {
		l.InertiaMWs += share * part.InertiaMWs
	}
	if u := o.down[resource]; u >= 0 {
		l.Units = append(l.Units, dynamic.Gone{Index: u, Much: units})
	} else if shape := o.c.Resources[resource].Down.Shape; part.DownMW > 0 && shape >= 0 && o.promiseDown[shape] >= 0 {
		l.Promises = append(l.Promises, dynamic.Gone{Index: o.promiseDown[shape], Much: share * part.DownMW})
	}
	if u := o.unit[resource]; u >= 0 {
		l.Units = append(l.Units, dynamic.Gone{Index: u, Much: units})
	} else if d := o.down[resource]; part.ResponseMW > 0 && !(d >= 0 && o.Sys.Units[d].UpMW > 0) {
		if shape := o.c.Resources[resource].Response.Shape; shape >= 0 && o.promise[shape] >= 0 {
			l.Promises = append(l.Promises, dynamic.Gone{Index: o.promise[shape], Much: share * part.ResponseMW})
		}
	}
}
