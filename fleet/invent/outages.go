package invent

import (
	"math"
	"math/rand/v2"
)

// spareShare is the firm capacity that outages must leave, above demand. An outage that
// would leave less is put off (planned) or does not happen (forced).
const spareShare = 0.06

// addOutages draws availability: planned outages between spring and autumn, forced ones
// at any time, run-of-river flow, heat-led seasons. Sets of identical units are taken as
// always there: a set keeps enough spare parts and its units are overhauled in turn.
func (p *plan) addOutages() {
	left := make([]float64, p.horizon) // firm MW available less demand with its spare
	for i := range left {
		left[i] = p.firmMW - (1+spareShare)*p.demandMW[i]
	}
	up := make([][]float64, len(p.machines))
	for k := range p.machines {
		m := &p.machines[k]
		r := p.streams.of("outages/" + m.name)
		up[k] = p.inService(r, m)
		firm := 0.0
		if m.tech.firm {
			firm = m.maxMW
			for i, u := range up[k] {
				left[i] -= (1 - u) * firm
			}
		}
		if m.count == 1 {
			p.planOutage(r, m, firm, up[k], left)
		}
	}
	// Forced outages come once all planned ones are known.
	for k := range p.machines {
		m := &p.machines[k]
		r := p.streams.of("failures/" + m.name)
		if m.count == 1 && m.tech.failureH > 0 {
			p.failures(r, m, up[k], left)
		}
		p.stateAvailability(m, up[k])
	}
}

// inService is what a machine could do without outages, as a share of its maximum.
func (p *plan) inService(r *rand.Rand, m *machine) []float64 {
	if m.tech.label == "river" {
		return riverShares(r, p.weather)
	}
	up := make([]float64, p.horizon)
	for i := range up {
		if m.tech.label != "chp" || heating(p.weather.times[i]) {
			up[i] = 1
		}
	}
	return up
}

// planOutage takes a machine out for some weeks of every year, at a time of year that
// leaves capacity enough; if a dozen tries find none, the outage is left out.
func (p *plan) planOutage(r *rand.Rand, m *machine, firmMW float64, up, left []float64) {
	days := int(7 * m.tech.planned.draw(r))
	if days == 0 {
		return
	}
	for range 12 {
		first := 95 + r.IntN(290-95-days)
		out := func(i int) bool {
			return p.weather.yearDay[i] >= first && p.weather.yearDay[i] < first+days
		}
		fits := true
		for i := range left {
			if out(i) && left[i] < firmMW {
				fits = false
				break
			}
		}
		if !fits {
			continue
		}
		for i := range left {
			if out(i) {
				left[i] -= firmMW * up[i]
				up[i] = 0
			}
		}
		return
	}
}

// failures takes a machine out at random, memoryless both ways.
func (p *plan) failures(r *rand.Rand, m *machine, up, left []float64) {
	firmMW := 0.0
	if m.tech.firm {
		firmMW = m.maxMW
	}
	for at := 0.0; ; {
		at += m.tech.failureH * r.ExpFloat64()
		length := math.Ceil(2 + m.tech.repairH*r.ExpFloat64())
		if int(at) >= p.horizon {
			return
		}
		first, end := int(at), min(int(at+length), p.horizon)
		at += length
		fits := true
		for i := first; i < end; i++ {
			fits = fits && left[i] >= firmMW*up[i]
		}
		for i := first; fits && i < end; i++ {
			left[i] -= firmMW * up[i]
			up[i] = 0
		}
	}
}

// stateAvailability puts the series on file, and with it the heat-led minimum.
func (p *plan) stateAvailability(m *machine, up []float64) {
	decimals := 0
	if m.tech.label == "river" {
		decimals = 3
	}
	constant := true
	for _, u := range up {
		constant = constant && u == 1
	}
	if constant {
		return
	}
	m.availability = p.book.add("availability.csv", m.name, decimals, up)
	if m.tech.label != "chp" {
		return
	}
	m.mustRun = true
	low := m.minMW.fixed / m.maxMW
	least := heatShares(p.weather, low)
	for i := range least {
		least[i] *= m.maxMW * up[i]
	}
	m.minMW = p.book.add("heat.csv", m.name+"_min_mw", 2, least)
}
