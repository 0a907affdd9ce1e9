package floor

import (
	"math"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
	"evenkeel/solve"
)

// Need is what a dispatch needs online, and what asks for it.
type Need struct {
	OnlineMWs float64 // that is online, the load's own included
	FloorMWs  float64 // that must be; +Inf: no kinetic energy is enough
	By        limits.Kind
	Over      bool   // a loss of load or export asks for it
	Loss      string // that asks for it
	LossMW    float64
	TakesMWs  float64 // kinetic energy that goes with that loss

	LargestMW float64 // the largest loss of infeed, whether or not it asks for most
}

// GapMWs is what is lacking.
func (n *Need) GapMWs() float64 { return max(n.FloorMWs-n.OnlineMWs, 0) }

// needs finds what dispatches need. Not for concurrent use.
type needs struct {
	below, above *limits.Floors // above: nil without limits there
	response     []float64
	list         []candidate
}

// candidate is a loss as a dispatch has it.
type candidate struct {
	loss     *formulate.Loss
	over     bool
	mw       float64
	takes    float64
	response []float64
	most     float64 // bound of the floor
}

func newNeeds(c *fleet.Case) *needs {
	var shapes []limits.Shape
	for i := range c.Shapes {
		shapes = append(shapes, c.Shapes[i].Shape)
	}
	n := &needs{below: limits.NewFloors(c.Limits, shapes), response: make([]float64, len(shapes))}
	if c.Above != nil {
		n.above = limits.NewFloors(*c.Above, shapes)
	}
	return n
}

// of gives what the mix m needs in the hour of the problem p. Losses whose floor without damping
// is no more than what another one needs are not looked at again.
func (n *needs) of(p *formulate.Problem, m *solve.Hour) Need {
	served := 1.0
	if p.Hour.DemandMW > 0 {
		served = max(0, 1-m.UnservedMW/p.Hour.DemandMW)
	}
	below, above := served*p.Hour.DampingMWPerHz, served*p.AboveDampingMWPerHz
	out := Need{OnlineMWs: m.InertiaMWs}
	n.list = n.list[:0]
	for k := range p.Losses {
		c := n.candidate(p, m.Dispatch, &p.Losses[k], false)
		c.most = c.takes + n.below.Most(c.mw, c.response, below)
		out.LargestMW = max(out.LargestMW, c.mw)
	}
	for k := range p.OverLosses {
		c := n.candidate(p, m.Dispatch, &p.OverLosses[k], true)
		c.most = c.takes + n.above.Most(c.mw, c.response, above)
	}
	tried := make([]bool, len(n.list))
	for range n.list {
		best := -1
		for i := range n.list {
			if !tried[i] && (best < 0 || n.list[i].most > n.list[best].most) {
				best = i
			}
		}
		c := &n.list[best]
		tried[best] = true
		if c.most <= out.FloorMWs {
			break
		}
		floors, damping := n.below, below
		if c.over {
			floors, damping = n.above, above
		}
		if f := floors.Least(c.mw, c.response, damping); c.takes+f.MWs > out.FloorMWs {
			out.FloorMWs, out.By, out.Over, out.Loss, out.LossMW, out.TakesMWs = c.takes+f.MWs, f.By, c.over, c.loss.Name, c.mw, c.takes
		}
		if math.IsInf(out.FloorMWs, 1) {
			break
		}
	}
	return out
}

// candidate measures a loss in a dispatch and adds it to the list.
func (n *needs) candidate(p *formulate.Problem, d []solve.Dispatch, l *formulate.Loss, over bool) *candidate {
	if len(n.list) < cap(n.list) { // keep the old one's memory
		n.list = n.list[:len(n.list)+1]
	} else {
		n.list = append(n.list, candidate{})
	}
	c := &n.list[len(n.list)-1]
	c.loss, c.over, c.mw, c.takes = l, over, l.FixedMW, 0
	c.response = append(c.response[:0], make([]float64, len(p.Shapes))...)
	if over {
		c.takes = p.Hour.LoadInertiaMWs - p.AboveInertiaMWs
	}
	for i := range p.Classes {
		cl := &p.Classes[i]
		part := &d[cl.Unit]
		if !over && cl.Shape >= 0 {
			c.response[cl.Shape] += part.ResponseMW
		}
		if over && cl.Down >= 0 {
			c.response[cl.Down] += part.DownMW
		}
	}
	for _, i := range l.Classes {
		cl := &p.Classes[i]
		part := &d[cl.Unit]
		share := 1.0
		if l.Single {
			if part.On == 0 {
				continue
			}
			share = 1 / float64(part.On)
		}
		c.takes += share * part.InertiaMWs
		if over {
			c.mw -= share * part.OutputMW
			if cl.Down >= 0 {
				c.response[cl.Down] -= share * part.DownMW
			}
			continue
		}
		c.mw += share * part.OutputMW
		if cl.Shape >= 0 {
			c.response[cl.Shape] -= share * part.ResponseMW
		}
	}
	return c
}
