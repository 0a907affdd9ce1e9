package report

import (
	"math"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// state says in one word how an hour stands with the limits.
type state uint8

const (
	free state = iota // no limit binds
	byRoCoF
	byNadir
	bySteady
	bySeveral
	isShort
	states
)

func (s state) String() string {
	return [...]string{"none", "rocof", "nadir", "steady", "several", "short"}[s]
}

// stateOf judges an hour; a short hour is short whatever else binds.
func stateOf(h *solve.Hour) state {
	if h.Status == solve.Short {
		return isShort
	}
	s := free
	for k, l := range h.Limits {
		if !l.Binds {
			continue
		}
		if s != free {
			return bySeveral
		}
		s = byRoCoF + state(k)
	}
	return s
}

// spread is the least, the mean and the number of some values.
type spread struct {
	n         int
	sum, min  float64
	minAtHour int
}

func (s *spread) add(v float64, hour int) {
	if s.n == 0 || v < s.min {
		s.min, s.minAtHour = v, hour
	}
	s.n++
	s.sum += v
}

func (s *spread) mean() float64 {
	if s.n == 0 {
		return 0
	}
	return s.sum / float64(s.n)
}

// pricing is a price over the hours in which it is not zero.
type pricing struct {
	hours    int
	sum, max float64
}

func (p *pricing) add(v float64) {
	if printsZero(v, decInertia) {
		return
	}
	if p.hours == 0 || v > p.max {
		p.max = v
	}
	p.hours++
	p.sum += v
}

func (p *pricing) mean() float64 {
	if p.hours == 0 {
		return 0
	}
	return p.sum / float64(p.hours)
}

type limitTally struct {
	binding, short int // hours
	price          pricing
	margin         spread
	byHour         [24]int // binding hours by hour of day, UTC
	byMonth        [12]int
}

// tally holds the totals of a run.
type tally struct {
	cost, bound, outputMWh             float64
	demandMWh, unservedMWh, excessMWh  float64
	curtailedMWh, co2T                 float64
	binding                            [limits.Kinds]limitTally
	states                             [states]int
	short                              []*solve.Hour
	gap                                float64 // the largest
	gapAtHour, overGap                 int
	inertia, left                      spread
	energyPrice, inertiaPrice, lossMW  pricing
	response                           []pricing // one a shape
	nodes, pivots, rows                int
	rocofHzPerS, nadirHz, steadyHz     float64 // the largest replayed
	rocofAtHour, nadirAtHour, steadyAt int
}

func tallyHours(c *fleet.Case, hours []solve.Hour, askedGap float64) *tally {
	t := &tally{response: make([]pricing, len(c.Shapes)), gap: math.Inf(-1)}
	rocof, nadir, steady := math.Inf(-1), math.Inf(-1), math.Inf(-1)
	for i := range hours {
		h := &hours[i]
		t.cost += h.Cost
		t.bound += h.Bound
		t.demandMWh += h.DemandMW
		t.unservedMWh += h.UnservedMW
		t.excessMWh += h.ExcessMW
		t.curtailedMWh += h.CurtailedMW
		t.co2T += h.CO2T
		for r := range h.Dispatch {
			t.outputMWh += h.Dispatch[r].OutputMW
		}
		t.states[stateOf(h)]++
		if h.Status == solve.Short {
			t.short = append(t.short, h)
		}
		if h.Gap > t.gap {
			t.gap, t.gapAtHour = h.Gap, h.Index
		}
		// A gap that prints like the one asked for has reached it.
		if askedGap > 0 && h.Gap > askedGap+0.5e-6 {
			t.overGap++
		}
		t.inertia.add(h.InertiaMWs, h.Index)
		t.left.add(h.InertiaLeftMWs, h.Index)
		t.addLimits(h)
		t.energyPrice.add(h.Prices.EnergyPerMWh)
		t.inertiaPrice.add(h.Prices.InertiaPerMWs)
		t.lossMW.add(h.Prices.LossPerMW)
		for s := range t.response {
			t.response[s].add(responsePrice(h, s))
		}
		t.nodes += h.Effort.Nodes
		t.pivots += h.Effort.Pivots
		t.rows += h.Effort.Rows
		if h.RoCoFHzPerS > rocof {
			rocof, t.rocofAtHour = h.RoCoFHzPerS, h.Index
		}
		if h.NadirHz > nadir {
			nadir, t.nadirAtHour = h.NadirHz, h.Index
		}
		if h.SteadyHz > steady {
			steady, t.steadyAt = h.SteadyHz, h.Index
		}
	}
	if math.IsInf(t.gap, -1) { // undefined in every hour: hours that cost nothing
		t.gap, t.gapAtHour = 0, hours[0].Index
	}
	t.rocofHzPerS, t.nadirHz, t.steadyHz = rocof, nadir, steady
	return t
}

func (t *tally) addLimits(h *solve.Hour) {
	for k := range h.Limits {
		addLimit(&t.binding[k], &h.Limits[k], h)
	}
}

func addLimit(into *limitTally, l *solve.LimitResult, h *solve.Hour) {
	at := h.Time.UTC()
	into.margin.add(l.Margin, h.Index)
	if !printsZero(l.ShortMW, decMW) {
		into.short++
	}
	if !l.Binds {
		return
	}
	into.binding++
	into.price.sum += l.Price
	if into.price.hours == 0 || l.Price > into.price.max {
		into.price.max = l.Price
	}
	into.price.hours++
	into.byHour[at.Hour()]++
	into.byMonth[at.Month()-1]++
}

// pair gives, for each hour, the same hour of the run without limits, or nil.
func pair(hours, without []solve.Hour) []*solve.Hour {
	byIndex := make(map[int]*solve.Hour, len(without))
	for i := range without {
		byIndex[without[i].Index] = &without[i]
	}
	p := make([]*solve.Hour, len(hours))
	for i := range hours {
		p[i] = byIndex[hours[i].Index]
	}
	return p
}

// security is what the limits cost: the hours with limits less the same hours without.
type security struct {
	hours         int // compared
	with, without float64
	demandMWh     float64
	// The true difference lies between least and most: bound less cost, cost less bound.
	least, most float64
	// The part of the hours that are secure, and of those that are short, with limits.
	secureHours       int
	inSecure, inShort float64
	inertia           spread // online without limits
	// Emissions and curtailment that the limits add.
	co2T, curtailedMWh float64
}

func (s *security) cost() float64    { return s.with - s.without }
func (s *security) percent() float64 { return 100 * s.cost() / math.Abs(s.without) }
func (s *security) perMWh() float64  { return s.cost() / s.demandMWh }

// compare is nil when no hour has a partner.
func compare(hours []solve.Hour, partner []*solve.Hour) *security {
	s := &security{}
	for i := range hours {
		h, o := &hours[i], partner[i]
		if o == nil {
			continue
		}
		s.hours++
		s.with += h.Cost
		s.without += o.Cost
		s.least += h.Bound - o.Cost
		s.most += h.Cost - o.Bound
		s.demandMWh += h.DemandMW
		s.co2T += h.CO2T - o.CO2T
		s.curtailedMWh += h.CurtailedMW - o.CurtailedMW
		s.inertia.add(o.InertiaMWs, o.Index)
		if h.Status == solve.Short {
			s.inShort += h.Cost - o.Cost
		} else {
			s.secureHours++
			s.inSecure += h.Cost - o.Cost
		}
	}
	if s.hours == 0 {
		return nil
	}
	return s
}
