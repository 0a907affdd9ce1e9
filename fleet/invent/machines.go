package invent

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
)

// addMachines draws n units, most of them one of a kind, and the firm capacity.
func (p *plan) addMachines(n int) {
	r := p.streams.of("machines")
	for i, units := range apportion(n) {
		t := &technologies[i]
		for units > 0 {
			count := 1
			if t.grouped && units >= 2 && r.Float64() < 0.25 {
				count = 2 + r.IntN(min(units, 4)-1)
			}
			units -= count
			p.machines = append(p.machines, machine{
				name:  fmt.Sprintf("%s_%s", strings.ToLower(p.names.place()), t.label),
				kind:  t.kind,
				tech:  t,
				count: count,
				maxMW: t.size * spread(r, 0.35),
			})
		}
	}
	p.sizeMachines(r, n)
	for i := range p.machines {
		p.machines[i].fill(r)
	}
}

// sizeMachines turns relative sizes into MW. Larger systems have larger units: a peak
// demand of about 370 MW with 10 units, 5,500 MW with 100, 20,000 MW with 300. In small
// systems two units carry 8 to 10 % of the peak each.
func (p *plan) sizeMachines(r *rand.Rand, n int) {
	peak := 25 * math.Pow(float64(n), 1.17)
	firm := peak / 0.725
	largest := min(900, peak*max(0.075, 2/float64(n)))
	for range 4 { // capping the largest makes the others larger: settles in a few rounds
		sum := 0.0
		for _, m := range p.machines {
			if m.tech.firm {
				sum += float64(m.count) * m.maxMW
			}
		}
		for i := range p.machines {
			m := &p.machines[i]
			m.maxMW = min(m.maxMW*firm/sum, largest)
		}
	}
	if n >= 20 && n <= 60 {
		big := 0
		for i := range p.machines {
			if m := &p.machines[i]; big < 2 && (m.tech.label == "steam" || m.tech.label == "ccgt") {
				m.maxMW = peak * uniform(r, 0.08, 0.10)
				big++
			}
		}
	}
	for i := range p.machines {
		m := &p.machines[i]
		m.maxMW = roundTo(max(m.maxMW, 4), sizeStep(m.maxMW))
		if m.tech.firm {
			p.firmMW += float64(m.count) * m.maxMW
		}
	}
}

// sizeStep is how finely a size is stated.
func sizeStep(mw float64) float64 {
	switch {
	case mw < 20:
		return 0.5
	case mw < 100:
		return 1
	}
	return 5
}

func (s span) draw(r *rand.Rand) float64 { return uniform(r, s.low, s.high) }

// fill draws everything that follows from the technology and the size.
func (m *machine) fill(r *rand.Rand) {
	t, mw := m.tech, m.maxMW
	m.inertiaS = roundTo(t.inertiaS.draw(r), 0.1)
	m.minUpH, m.minDownH = t.minUpH, t.minDownH
	m.availability = amount{fixed: 1}
	m.startCost = roundTo(t.startPerMW.draw(r)*mw, 10)
	if t.kind == "condenser" {
		m.ratingMVA = mw
		m.maxMW = 0
		m.lossesMW = roundTo(mw*uniform(r, 0.010, 0.018), 0.01)
		m.onCostPerH = roundTo(mw*uniform(r, 0.05, 0.15), 1)
		return
	}
	m.ratingMVA = math.Ceil(mw / uniform(r, 0.80, 0.90))
	m.minMW = amount{fixed: roundTo(t.minShare.draw(r)*mw, 0.1)}
	m.rampMWPerH = roundTo(t.rampShare.draw(r)*mw, 1)
	m.co2TPerMWh = roundTo(t.co2.draw(r), 0.01)
	// Smaller units are dearer within their technology.
	price := t.perMWh.draw(r)
	m.onCostPerH = roundTo(t.noLoad.draw(r)*price*mw, 1)
	m.steps = costSteps(r, m.minMW.fixed, mw, price)
	if t.shape != "" {
		m.response = response{
			shape:      t.shape,
			cap:        amount{fixed: roundTo(t.response.draw(r)*mw, 0.1)},
			pricePerMW: roundTo(t.pricePerMW.draw(r), 0.05),
		}
	}
}

// costSteps are two or three rising steps between the minimum and the maximum output.
func costSteps(r *rand.Rand, minMW, maxMW, perMWh float64) []step {
	n := 2 + r.IntN(2)
	steps := make([]step, n)
	for i := range steps {
		up := float64(i+1) / float64(n)
		steps[i] = step{
			toMW:   roundTo(minMW+(maxMW-minMW)*up, 0.1),
			perMWh: roundTo(perMWh*(0.88+0.24*(float64(i)+uniform(r, 0.35, 0.65))/float64(n)), 0.01),
		}
	}
	steps[n-1].toMW = maxMW
	return steps
}
