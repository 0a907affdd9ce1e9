package size

import (
	"cmp"
	"math"
	"slices"

	"evenkeel/fleet"
)

// Side is whose money counts.
type Side int

// The sides.
const (
	Owner  Side = iota // what it is paid, prices being those with itself in the market
	System             // what the system saves
	Sides
)

func (s Side) String() string { return [...]string{"owner", "system"}[s] }

// Study is what a plan comes to in a year.
type Study struct {
	Plan  *Plan
	Rule  Rule     // by which the owner is paid
	Hours []int    // looked at
	Years [][]Year // of each rung of each ladder

	Results []Result // one a point of the plan
	// Best is the result that is worth most to each side, at a loss where nothing pays.
	Best  [Sides]int
	Paces []Pace // one an activation time
	Cells []Cell // when the owner's best design is needed
}

// Result is one design in a year.
type Result struct {
	Point
	Year        *Year
	Cost        float64 // annuity and fixed cost
	Value       [Sides]float64
	Net         [Sides]float64
	BreakEven   [Sides]float64 // capital cost per MW
	TakerNet    float64        // the owner's, were prices those without the project
	Utilisation float64        // mean MW held over MW
}

// Pace is an activation time: for each size the best energy, and where the next MW stops paying.
type Pace struct {
	ActivationS float64
	Energy      fleet.Energy
	Curve       [Sides][]int // a result a size, the best for each side
	Full        []int        // and the one with just the energy that its MW can use
	Stop        [Sides]Stop
}

// Stop is the size after which the next MW no longer pays.
type Stop struct {
	MW     float64
	Beyond bool // it still pays at the largest size tried
}

// New sums the hours of a plan up. hours are the hours looked at, of holds what Climber.Hour gave
// for each.
func New(plan *Plan, rule Rule, hours []int, of [][][]Rung) *Study {
	s := &Study{Plan: plan, Rule: rule, Hours: hours, Years: plan.Years(of)}
	m := plan.Project.Money
	for _, p := range plan.Points {
		y := &s.Years[p.Ladder][p.Rung]
		r := Result{Point: p, Year: y, Cost: YearlyCost(m, p.Design), Value: [Sides]float64{y.Paid[rule].Net(), y.Saving}, Utilisation: y.MeanMW / p.MW}
		for side := range r.Value {
			r.Net[side] = r.Value[side] - r.Cost
			r.BreakEven[side] = BreakEvenPerMW(m, p.Design, r.Value[side])
		}
		r.TakerNet = y.Taker[rule] - r.Cost
		s.Results = append(s.Results, r)
	}
	for side := range Sides {
		for i := range s.Results {
			if s.Results[i].Net[side] > s.Results[s.Best[side]].Net[side] {
				s.Best[side] = i
			}
		}
	}
	s.paces()
	s.Cells = s.calendar(&s.Results[s.Best[Owner]], of)
	return s
}

func (s *Study) paces() {
	for i := range s.Results {
		r := &s.Results[i]
		if n := len(s.Paces); n == 0 || s.Paces[n-1].ActivationS != r.ActivationS {
			s.Paces = append(s.Paces, Pace{ActivationS: r.ActivationS, Energy: s.Plan.Ladders[r.Ladder].Energy})
		}
		p := &s.Paces[len(s.Paces)-1]
		switch n := len(p.Full); {
		case n == 0 || s.Results[p.Full[n-1]].MW != r.MW:
			p.Full = append(p.Full, i)
		case r.ResponseMW > s.Results[p.Full[n-1]].ResponseMW: // energies rise
			p.Full[n-1] = i
		}
		for side := range Sides {
			c := p.Curve[side]
			switch n := len(c); {
			case n == 0 || s.Results[c[n-1]].MW != r.MW:
				p.Curve[side] = append(c, i)
			case r.Net[side] > s.Results[c[n-1]].Net[side]:
				c[n-1] = i
			}
		}
	}
	for i := range s.Paces {
		for side := range Sides {
			mw, net := []float64{0}, []float64{0}
			for _, k := range s.Paces[i].Curve[side] {
				mw, net = append(mw, s.Results[k].MW), append(net, s.Results[k].Net[side])
			}
			s.Paces[i].Stop[side] = stop(mw, net)
		}
	}
}

// stop is where the slope of net over mw passes zero next to its peak. Slopes are those of the
// pieces between points, each at its middle, and straight lines between them.
func stop(mw, net []float64) Stop {
	best := 0
	for i := range net {
		if net[i] > net[best] {
			best = i
		}
	}
	last := len(mw) - 1
	slope := func(i int) (middle, per float64) { // of the piece that ends at i
		return (mw[i] + mw[i-1]) / 2, (net[i] - net[i-1]) / (mw[i] - mw[i-1])
	}
	switch best {
	case 0:
		return Stop{}
	case last:
		return Stop{MW: mw[last], Beyond: true}
	}
	a, up := slope(best)
	b, down := slope(best + 1)
	if up == down {
		return Stop{MW: mw[best]}
	}
	return Stop{MW: a + (b-a)*up/(up-down)}
}

// Pays tells whether the best design is worth its cost to a side.
func (s *Study) Pays(side Side) bool { return s.Results[s.Best[side]].Net[side] > 0 }

// Pace is the pace of a result.
func (s *Study) Pace(r *Result) *Pace {
	for i := range s.Paces {
		if s.Paces[i].ActivationS == r.ActivationS {
			return &s.Paces[i]
		}
	}
	return nil
}

// EnergyPoint is one amount of energy at the best size.
type EnergyPoint struct {
	MWh    float64
	Solved bool // the response that it lets be held was solved, for a design of this or another size
	Net    [Sides]float64
}

// EnergyCurve is what more or less energy is worth at the size and pace of a result: its value
// lies between those of the rungs on either side of the response that the energy lets it hold. It
// is nil where the value hangs on more than that response.
func (s *Study) EnergyCurve(r *Result) []EnergyPoint {
	p := s.Plan.Project
	if !p.Kind.Stores() || p.SyntheticMWsPerMW > 0 {
		return nil
	}
	years := s.Years[r.Ladder]
	most := r.MW * r.NeedMWhPerMW
	var out []EnergyPoint
	for i := range s.Results {
		if o := &s.Results[i]; o.MW == r.MW && o.ActivationS == r.ActivationS {
			most = max(most, o.EnergyMWh)
			out = append(out, EnergyPoint{MWh: o.EnergyMWh, Solved: true})
		}
	}
	for k := range years {
		if hold := years[k].HoldMW; hold > 0 && hold <= r.MW {
			out = append(out, EnergyPoint{MWh: hold * r.NeedMWhPerMW, Solved: true})
		}
	}
	const steps = 200
	for i := range steps + 1 {
		out = append(out, EnergyPoint{MWh: most * float64(i) / steps})
	}
	slices.SortStableFunc(out, func(a, b EnergyPoint) int { return cmp.Compare(a.MWh, b.MWh) }) // what was solved first
	out = slices.CompactFunc(out, func(a, b EnergyPoint) bool { return a.MWh == b.MWh })
	for i := range out {
		e := &out[i]
		d := r.Design
		d.EnergyMWh = e.MWh
		hold := min(d.MW, d.EnergyMWh/r.NeedMWhPerMW)
		for side, v := range s.valueAt(years, hold) {
			e.Net[side] = v - YearlyCost(p.Money, d)
		}
	}
	return out
}

func (s *Study) valueAt(years []Year, holdMW float64) [Sides]float64 {
	of := func(y *Year) [Sides]float64 { return [Sides]float64{y.Paid[s.Rule].Net(), y.Saving} }
	for k := 1; k < len(years); k++ {
		if lo, hi := &years[k-1], &years[k]; holdMW <= hi.HoldMW || k == len(years)-1 {
			part := math.Min(1, (holdMW-lo.HoldMW)/(hi.HoldMW-lo.HoldMW))
			a, b := of(lo), of(hi)
			for side := range a {
				a[side] += part * (b[side] - a[side])
			}
			return a
		}
	}
	return [Sides]float64{}
}
