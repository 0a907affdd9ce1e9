package invent

import (
	"fmt"
	"math/rand/v2"
	"time"
)

// plan is a whole case before it is written.
type plan struct {
	name   string
	peakMW float64 // highest demand of the first year
	firmMW float64 // of thermal and reservoir hydro machines together

	rocofHzPerS, nadirHz float64

	horizon int // hours worked out, at least a year
	hours   int // hours written

	streams streams
	weather *weather
	names   *namer
	book    *book

	machines    []machine
	converters  []converter
	connections []group
	losses      []loss

	demandMW []float64
}

// amount is a number, or, where ref is set, FILE:COLUMN of a series.
type amount struct {
	fixed float64
	ref   string
}

type step struct{ toMW, perMWh float64 }

type response struct {
	shape         string // "": none
	cap           amount
	pricePerMW    float64
	shareOfOutput float64
}

type machine struct {
	name, kind string
	tech       *technology
	count      int

	ratingMVA, inertiaS float64
	minMW               amount
	maxMW               float64
	onCostPerH          float64
	startCost           float64
	minUpH, minDownH    float64
	rampMWPerH          float64
	steps               []step
	co2TPerMWh          float64
	availability        amount
	mustRun             bool
	lossesMW            float64
	response            response
}

type converter struct {
	name, kind        string
	powerMW           float64
	energyMWh         float64
	availableMW       amount // wind, solar
	maxMW             amount // link
	pricePerMWh       amount // link
	costPerMWh        float64
	response          response
	syntheticMWs      float64
	syntheticPerMWs   float64
	lostAsOne         bool
	hasAvailable, buy bool
}

type group struct {
	name    string
	members []string
}

type loss struct {
	name string
	mw   amount
}

// yearH is the number of hours that sizes are set by, however many are written.
const yearH = 8760

// makePlan works the whole case out.
func makePlan(o Options) *plan {
	p := &plan{
		name:    o.Name,
		hours:   o.Hours,
		horizon: max(o.Hours, yearH),
		streams: streams(o.Seed),
	}
	times := make([]time.Time, p.horizon)
	for i := range times {
		times[i] = o.Start.Add(time.Duration(i) * time.Hour)
	}
	p.weather = makeWeather(p.streams, times)
	p.names = newNamer(p.streams.of("names"))
	p.book = newBook(times[:o.Hours])
	if p.name == "" {
		p.name = fmt.Sprintf("Invented island %s, %d machines, seed %d", p.names.place(), o.Machines, o.Seed)
	}

	p.addMachines(o.Machines)
	p.addDemand()
	p.addOutages()
	p.addConverters(o.Machines)
	p.addConnections(o.Machines)
	p.addLosses()

	p.setLimits(o.Machines)
	return p
}

// setLimits draws the limits: the smaller the system, the larger its largest loss
// against its inertia, and the wider the corridor that it has learnt to live with.
func (p *plan) setLimits(machines int) {
	r := p.streams.of("limits")
	switch {
	case machines < 10:
		p.rocofHzPerS, p.nadirHz = among(r, 1.5, 2), 1
	case machines < 20:
		p.rocofHzPerS, p.nadirHz = among(r, 1, 1.25, 1.5), 1
	default:
		p.rocofHzPerS, p.nadirHz = among(r, 0.5, 0.6, 0.75, 1), 0.8
	}
}

// addDemand scales demand to the firm capacity: the peak is 70 to 75 % of it.
func (p *plan) addDemand() {
	p.peakMW = p.firmMW * uniform(p.streams.of("demand/peak"), 0.70, 0.75)
	p.demandMW = demandShares(p.streams, p.weather, yearH)
	scale(p.demandMW, p.peakMW)
}

func scale(x []float64, by float64) {
	for i := range x {
		x[i] *= by
	}
}

// among draws one of the items.
func among[T any](r *rand.Rand, items ...T) T { return items[r.IntN(len(items))] }
