package report

import (
	"evenkeel/solve"
)

// panels are the three stacks of one stretch of hours.
type panels struct {
	bins                      bins
	output, response, inertia []layer
	demand                    []float64
}

// hourlyPanels makes a bin of every hour.
func hourlyPanels(g groups, hours []solve.Hour) panels {
	p := newPanels(g, len(hours))
	for i := range hours {
		x := xOf(hours[i].Time)
		p.bins.from, p.bins.to = append(p.bins.from, x), append(p.bins.to, x+1./24)
		p.add(g, i, &hours[i], 1)
	}
	return p
}

// dailyPanels makes a bin of every day, with the means of its hours.
func dailyPanels(g groups, hours []solve.Hour, days []day) panels {
	p := newPanels(g, len(days))
	for i, d := range days {
		x := xOf(d.start)
		p.bins.from, p.bins.to = append(p.bins.from, x), append(p.bins.to, x+1)
		for h := d.from; h < d.to; h++ {
			p.add(g, i, &hours[h], 1/float64(d.to-d.from))
		}
	}
	return p
}

func newPanels(g groups, n int) panels {
	p := panels{demand: make([]float64, n)}
	for k := range g.names {
		p.output = append(p.output, newLayer(g.names[k], g.colors[k], n))
		p.inertia = append(p.inertia, newLayer(g.names[k], g.colors[k], n))
	}
	p.inertia = append(p.inertia, newLayer("load", rgb(0xBBBBBB), n))
	for s := range g.c.Shapes {
		p.response = append(p.response, newLayer(g.c.Shapes[s].Name, shapeColors[s%len(shapeColors)], n))
	}
	return p
}

// add adds an hour to bin i, its power in MW, its kinetic energy in GW·s.
func (p *panels) add(g groups, i int, h *solve.Hour, weight float64) {
	p.demand[i] += weight * finite(h.DemandMW)
	left := h.InertiaMWs
	for r := range h.Dispatch {
		d := &h.Dispatch[r]
		k := g.of[r]
		p.output[k].add(i, weight*d.OutputMW)
		p.inertia[k].add(i, weight*d.InertiaMWs/1000)
		left -= d.InertiaMWs
		if s := g.c.Resources[r].Response.Shape; s >= 0 && s < len(p.response) {
			p.response[s].add(i, weight*d.ResponseMW)
		}
	}
	// What no resource gives is the load's own; a rounding remainder is not.
	if left > 1e-9*h.InertiaMWs {
		p.inertia[len(p.inertia)-1].add(i, weight*left/1000)
	}
}

// scales are the y axes that all panels of a row share.
type scales struct {
	min, max [3]float64
	inGW     [3]bool
	none     [3]bool // nothing to show
}

func (p *panels) stacks() [3]stack {
	return [3]stack{{p.bins, p.output}, {p.bins, p.response}, {p.bins, p.inertia}}
}

func newScales(all []panels) scales {
	var s scales
	for _, p := range all {
		for row, st := range p.stacks() {
			lo, hi := st.extent()
			s.min[row], s.max[row] = min(s.min[row], lo), max(s.max[row], hi)
		}
		for _, d := range p.demand {
			s.max[0] = max(s.max[0], d)
		}
	}
	for row := range s.max {
		s.inGW[row] = row < 2 && s.max[row] >= 20_000
		s.none[row] = s.min[row] == 0 && s.max[row] == 0
		s.max[row] = roundUp(s.max[row])
		if s.min[row] < 0 {
			s.min[row] = -roundUp(-s.min[row])
		}
	}
	return s
}
