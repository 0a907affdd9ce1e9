package invent

import (
	"fmt"
	"math"
	"strings"
)

func (p *plan) addConverters(machines int) {
	p.addWind(machines)
	p.addSolar()
	p.addBatteries(machines)
	p.addDemandResponse()
	p.addLinks(machines)
}

func (p *plan) placed(suffix string) string {
	return strings.ToLower(p.names.place()) + "_" + suffix
}

// addWind shares 40 to 70 % of the peak demand out among a few farms. A farm large
// enough to matter hangs on one cable and is lost as one.
func (p *plan) addWind(machines int) {
	r := p.streams.of("wind")
	n := min(2+machines/25, 12)
	sizes, sum := make([]float64, n), 0.0
	for i := range sizes {
		sizes[i] = spread(r, 0.4)
		sum += sizes[i]
	}
	total := p.peakMW * uniform(r, 0.40, 0.70)
	for i, size := range sizes {
		mw := size / sum * total
		mw = roundTo(mw, sizeStep(mw))
		oneCable := mw <= 0.10*p.peakMW && i%2 == 1
		site, suffix := uniform(r, 0.94, 1.05), "wind"
		if oneCable {
			site, suffix = uniform(r, 1.05, 1.12), "offshore"
		}
		name := p.placed(suffix)
		share := windShares(p.streams.of("wind/"+name), p.weather, site)
		scale(share, mw)
		c := converter{
			name: name, kind: "wind", powerMW: mw,
			hasAvailable: true,
			availableMW:  p.book.add("wind.csv", name, decimalsFor(mw), share),
			costPerMWh:   roundTo(uniform(r, 0, 2), 0.1),
			lostAsOne:    oneCable,
		}
		if i%3 == 0 {
			// Out of the rotors' own energy, paid back at once.
			c.response = response{shape: "wind_rotor", cap: amount{fixed: roundTo(0.08*mw, 0.1)},
				pricePerMW: roundTo(uniform(r, 3, 6), 0.1), shareOfOutput: 0.08}
		} else {
			c.response = response{shape: "wind_headroom", cap: amount{fixed: roundTo(0.25*mw, 0.1)},
				pricePerMW: roundTo(uniform(r, 0.5, 1.5), 0.1)}
		}
		p.converters = append(p.converters, c)
	}
}

func (p *plan) addSolar() {
	r := p.streams.of("solar")
	mw := p.peakMW * uniform(r, 0.10, 0.25)
	mw = roundTo(mw, sizeStep(mw))
	share := solarShares(p.streams.of("solar/cloud"), p.weather)
	scale(share, mw)
	name := p.placed("solar")
	p.converters = append(p.converters, converter{
		name: name, kind: "solar", powerMW: mw,
		hasAvailable: true,
		availableMW:  p.book.add("solar.csv", name, decimalsFor(mw), share),
	})
}

// addBatteries adds fast response: 4 to 8 % of the peak demand in large systems, up to
// three times that in the smallest, whose largest loss weighs more.
func (p *plan) addBatteries(machines int) {
	r := p.streams.of("batteries")
	n := min(1+machines/50, 5)
	total := p.peakMW * uniform(r, 0.04, 0.08) * (1 + 10/float64(machines))
	for i := range n {
		mw := total / float64(n) * spread(r, 0.2)
		mw = roundTo(mw, sizeStep(mw))
		c := converter{
			name: p.placed("battery"), kind: "battery", powerMW: mw,
			energyMWh: roundTo(mw*uniform(r, 0.5, 2), 0.5),
			response: response{shape: "battery", cap: amount{fixed: mw},
				pricePerMW: roundTo(uniform(r, 2, 6), 0.1)},
		}
		if i%2 == 0 {
			// Grid-forming: holds the headroom for its own inertia as well.
			c.syntheticMWs = roundTo(mw*uniform(r, 4, 8), 1)
			c.syntheticPerMWs = roundTo(uniform(r, 0.15, 0.4), 0.01)
		}
		p.converters = append(p.converters, c)
	}
}

// addDemandResponse is a pool of loads that grows with demand.
func (p *plan) addDemandResponse() {
	r := p.streams.of("demand/response")
	share, price := uniform(r, 0.02, 0.04), roundTo(uniform(r, 6, 14), 0.1)
	pool := make([]float64, p.horizon)
	for i, d := range p.demandMW {
		pool[i] = share * d
	}
	p.book.add("load.csv", "demand_mw", 1, p.demandMW)
	p.converters = append(p.converters, converter{
		name: "demand_response", kind: "demand", powerMW: roundTo(share*p.peakMW*1.1, 0.1),
		response: response{shape: "demand_trip", pricePerMW: price,
			cap: p.book.add("load.csv", "demand_response_mw", 2, pool)},
	})
}

// addLinks adds an import link of 10 to 13 % of the mean demand, and a smaller second
// one in large systems.
func (p *plan) addLinks(machines int) {
	mean := 0.0
	for _, d := range p.demandMW[:yearH] {
		mean += d / yearH
	}
	sizes := []float64{0.10, 0.13}
	for i := range 1 + min(machines/80, 1) {
		name := fmt.Sprintf("link_%s", strings.ToLower(p.names.place()))
		r := p.streams.of("link/" + name)
		mw := mean * uniform(r, sizes[0], sizes[1]) * (1 - 0.3*float64(i))
		mw = roundTo(mw, sizeStep(mw))
		could := make([]float64, p.horizon)
		out, trip := 120+r.IntN(140), 0.0
		for h, t := range p.weather.times {
			could[h] = mw
			if d := t.YearDay(); d >= out && d < out+8 {
				could[h] = 0
			}
			if trip > 0 {
				trip--
				could[h] = 0
			} else if r.Float64() < 1.0/1800 {
				trip = math.Ceil(20 * r.ExpFloat64())
			}
		}
		p.converters = append(p.converters, converter{
			name: name, kind: "link", powerMW: mw, buy: true,
			maxMW: p.book.add("link.csv", name+"_max_mw", decimalsFor(mw), could),
			pricePerMWh: p.book.add("link.csv", name+"_per_mwh", 2,
				importPrices(p.streams.of("price/"+name), p.weather, uniform(r, 50, 58))),
			lostAsOne: true,
		})
	}
}

// decimalsFor is how finely the MW of a plant of this size are stated.
func decimalsFor(mw float64) int {
	if mw < 100 {
		return 2
	}
	return 1
}
