package invent

import (
	"fmt"
	"math"
	"testing"
)

var sizes = []int{10, 30, 100, 300}

// plans works a few systems of each size out.
func plans(t *testing.T, check func(t *testing.T, p *plan, machines int)) {
	for _, machines := range sizes {
		for seed := uint64(1); seed <= 3; seed++ {
			t.Run(fmt.Sprintf("machines=%d/seed=%d", machines, seed), func(t *testing.T) {
				o, err := Options{Machines: machines, Seed: seed}.withDefaults()
				if err != nil {
					t.Fatal(err)
				}
				check(t, makePlan(o), machines)
			})
		}
	}
}

// within fails unless low ≤ x ≤ high.
func within(t *testing.T, what string, x, low, high float64) {
	t.Helper()
	if !(x >= low && x <= high) {
		t.Errorf("%s is %.4g, want %g to %g", what, x, low, high)
	}
}

func mean(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v
	}
	return sum / float64(len(x))
}

func extremes(x []float64) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, v := range x {
		low, high = min(low, v), max(high, v)
	}
	return low, high
}

// series finds the values that a reference stands for.
func (p *plan) series(t *testing.T, a amount) []float64 {
	t.Helper()
	for _, table := range p.book.tables {
		for _, c := range table.columns {
			if table.file+":"+c.name == a.ref {
				return c.values
			}
		}
	}
	t.Fatalf("no series %q", a.ref)
	return nil
}

func TestFleetMakeup(t *testing.T) {
	plans(t, func(t *testing.T, p *plan, machines int) {
		units, alone := 0, 0
		seen := map[string]int{}
		for _, m := range p.machines {
			units += m.count
			seen[m.tech.label] += m.count
			if m.count == 1 {
				alone++
			}
			if m.count < 1 || m.count > 4 {
				t.Errorf("%s: count %d", m.name, m.count)
			}
			within(t, m.name+": inertia constant", m.inertiaS, m.tech.inertiaS.low-0.05, m.tech.inertiaS.high+0.05)
			if m.kind == "condenser" {
				continue
			}
			within(t, m.name+": share of the peak", m.maxMW/p.peakMW, 0, max(0.11, 2.2/float64(machines)))
			last := 0.0
			for i, s := range m.steps {
				if s.toMW <= m.minMW.fixed || i > 0 && (s.perMWh <= last || s.toMW <= m.steps[i-1].toMW) {
					t.Errorf("%s: cost steps %v do not rise", m.name, m.steps)
				}
				last = s.perMWh
			}
			if m.minMW.ref == "" && m.kind == "thermal" {
				within(t, m.name+": minimum output", m.minMW.fixed/m.maxMW, 0.28, 0.57)
			}
		}
		if units != machines {
			t.Errorf("%d units, want %d", units, machines)
		}
		if len(seen) != len(technologies) {
			t.Errorf("technologies %v, want all %d", seen, len(technologies))
		}
		within(t, "share of units that are one of a kind", float64(alone)/float64(units), 0.6, 1)
		within(t, "peak demand over firm capacity", p.peakMW/p.firmMW, 0.70, 0.75)
		if machines == 30 {
			big := 0
			for _, m := range p.machines {
				if m.maxMW > 0.078*p.peakMW {
					big++
				}
			}
			within(t, "large units", float64(big), 2, 4)
		}
	})
}

func TestSeriesStatistics(t *testing.T) {
	plans(t, func(t *testing.T, p *plan, machines int) {
		low, high := extremes(p.demandMW)
		within(t, "highest demand over the peak", high/p.peakMW, 0.9999, 1.0001)
		within(t, "lowest demand over the peak", low/p.peakMW, 0.30, 0.45)
		within(t, "load factor", mean(p.demandMW)/p.peakMW, 0.60, 0.70)

		wind, windMW := make([]float64, p.horizon), 0.0
		links := 0.0
		for _, c := range p.converters {
			switch c.kind {
			case "wind":
				x := p.series(t, c.availableMW)
				within(t, c.name+": capacity factor", mean(x)/c.powerMW, 0.22, 0.52)
				for i := range x {
					wind[i] += x[i]
				}
				windMW += c.powerMW
				lag, season := persistence(x), winterOverSummer(p, x)
				within(t, c.name+": correlation with the hour before", lag, 0.9, 0.999)
				within(t, c.name+": winter over summer", season, 1.02, 3)
			case "solar":
				x := p.series(t, c.availableMW)
				within(t, c.name+": capacity factor", mean(x)/c.powerMW, 0.08, 0.15)
				within(t, c.name+": winter over summer", winterOverSummer(p, x), 0.05, 0.5)
				if night := x[0]; night != 0 {
					t.Errorf("%s makes %v MW at midnight", c.name, night)
				}
			case "link":
				links += c.powerMW
				price := p.series(t, c.pricePerMWh)
				day, night := 0.0, 0.0
				for i := 0; i < yearH; i += 24 {
					day, night = day+price[i+18], night+price[i+3]
				}
				within(t, c.name+": price in the evening over at night", day/night, 1.2, 2)
			}
		}
		within(t, "wind capacity over the peak", windMW/p.peakMW, 0.38, 0.72)
		within(t, "link over mean demand", links/mean(p.demandMW), 0.09, 0.24)
		calm, gale := extremes(wind)
		within(t, "least wind", calm/windMW, 0, 0.05)
		within(t, "most wind", gale/windMW, 0.85, 1)
	})
}

// persistence is the correlation of a series with itself an hour later.
func persistence(x []float64) float64 {
	m, num, den := mean(x), 0.0, 0.0
	for i := 1; i < len(x); i++ {
		num += (x[i] - m) * (x[i-1] - m)
		den += (x[i] - m) * (x[i] - m)
	}
	return num / den
}

// winterOverSummer compares the half years around January and July.
func winterOverSummer(p *plan, x []float64) float64 {
	var sum [2]float64
	for i, v := range x[:yearH] {
		if winter(p.weather.times[i]) > 0 {
			sum[0] += v
		} else {
			sum[1] += v
		}
	}
	return sum[0] / sum[1]
}

// Outages happen, and leave enough to serve the load.
func TestOutages(t *testing.T) {
	plans(t, func(t *testing.T, p *plan, machines int) {
		firm, lost := make([]float64, p.horizon), 0.0
		for _, m := range p.machines {
			if !m.tech.firm {
				continue
			}
			var series []float64
			if m.availability.ref != "" {
				series = p.series(t, m.availability)
			}
			for i := range firm {
				up := m.availability.fixed
				if series != nil {
					up = series[i]
				}
				firm[i] += float64(m.count) * m.maxMW * up
				lost += float64(m.count) * m.maxMW * (1 - up)
			}
		}
		for i := range firm {
			if firm[i] < p.demandMW[i]*(1+spareShare)-1e-6 {
				t.Fatalf("hour %d: %.0f MW firm for %.0f MW of demand", i, firm[i], p.demandMW[i])
			}
		}
		within(t, "firm capacity out of service or out of season", lost/p.firmMW/float64(p.horizon), 0.02, 0.16)
	})
}
