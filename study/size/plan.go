package size

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strconv"

	"evenkeel/fleet"
	"evenkeel/study/ranges"
)

// Grid is what to try: every size with every energy and every activation time.
type Grid struct {
	SizesMW     []float64 // MVA for a condenser
	Energies    []Amount  // none where the project stores nothing
	Activations []float64 // s; none: the project's own
}

// Amount is an amount of energy: so many MWh, or so many times what the response of all MW needs.
type Amount struct {
	MWh   float64
	Times float64 // 0: MWh counts
}

// Point is one design and where it stands on the ladders.
type Point struct {
	fleet.Design
	Amount        Amount
	ResponseMW    float64 // what it can hold
	Ladder, Rung  int
	NeedMWhPerMW  float64 // of energy, for each MW of response
	HoursOfEnergy float64 // EnergyMWh over MW
}

// Ladder is one activation time: the case with nothing built, then with more and more.
type Ladder struct {
	ActivationS float64
	Energy      fleet.Energy // for each MW of response
	Rungs       []*fleet.Case
	HoldMW      []float64 // most response held on each rung; a condenser's MVA
	// Within are, for each rung, those whose mixes it can take over as they are: all that can do no
	// more in anything; none where a droop counts on the rating, so that another size is another model.
	Within [][]int
	// Growing says that rungs differ in the response held alone, so that study/sweep can climb them.
	Growing bool
}

// Plan is a grid laid out on ladders.
type Plan struct {
	Case     *fleet.Case // without the project
	Project  *fleet.Project
	Points   []Point // by activation time, then size, then energy
	Ladders  []Ladder
	Resource int // index, in the rungs, of the resource that carries the project
}

// rung is a case to be solved: what the project can do in it.
type rung struct{ powerMW, responseMW float64 }

func (r rung) same(o rung) bool {
	return same(r.powerMW, o.powerMW) && same(r.responseMW, o.responseMW)
}

// NewPlan lays out a grid. It refuses sizes that the project cannot have.
func NewPlan(c *fleet.Case, p *fleet.Project, g Grid) (*Plan, error) {
	plan := &Plan{Case: c, Project: p, Resource: p.Resource(c)}
	activations := g.Activations
	if len(activations) == 0 {
		activations = []float64{p.ActivationS}
	}
	if !p.Paced() && len(g.Activations) > 0 {
		return nil, fmt.Errorf("an activation time for %s, want none: %s", p.Name, why(p))
	}
	if !p.Kind.Stores() && len(g.Energies) > 0 {
		return nil, fmt.Errorf("energy for %s, want none: a %s has none to size", p.Name, p.Kind)
	}
	for _, mva := range g.SizesMW {
		if n := mva / p.UnitMVA; p.Kind == fleet.CondenserProject && math.Abs(n-math.Round(n)) > 1e-9 {
			return nil, fmt.Errorf("a size of %g MVA, want whole machines of unit_mva (%g MVA)", mva, p.UnitMVA)
		}
	}
	for _, s := range ascending(activations) {
		if err := plan.pace(s, g); err != nil {
			return nil, err
		}
	}
	return plan, nil
}

func why(p *fleet.Project) string {
	if p.Kind == fleet.CondenserProject {
		return "a condenser acts at once"
	}
	return "its model says how fast it is"
}

// pace lays out the designs of one activation time. Where the power does nothing but carry the
// response, designs that hold the same are one case.
func (plan *Plan) pace(activationS float64, g Grid) error {
	c, p := plan.Case, plan.Project
	energy, err := p.Energy(c, activationS)
	if err != nil {
		return err
	}
	amounts := g.Energies
	if !p.Kind.Stores() {
		amounts = []Amount{{}}
	}
	var points []Point
	for _, mw := range ascending(g.SizesMW) {
		if mw <= 0 {
			continue
		}
		var here []Point
		for _, a := range amounts {
			d := fleet.Design{MW: mw, EnergyMWh: a.MWh, ActivationS: activationS}
			if a.Times > 0 {
				d.EnergyMWh = a.Times * mw * energy.TotalMWh
			}
			r, err := p.ResponseMW(c, d)
			if err != nil {
				return err
			}
			here = append(here, Point{Design: d, Amount: a, ResponseMW: r, NeedMWhPerMW: energy.TotalMWh, HoursOfEnergy: d.EnergyMWh / mw})
		}
		slices.SortStableFunc(here, func(a, b Point) int { return cmp.Compare(a.EnergyMWh, b.EnergyMWh) })
		points = append(points, slices.CompactFunc(here, func(a, b Point) bool { return same(a.EnergyMWh, b.EnergyMWh) })...)
	}
	of := func(q *Point) rung {
		if p.SyntheticMWsPerMW > 0 || p.Kind == fleet.CondenserProject {
			return rung{q.MW, q.ResponseMW}
		}
		return rung{q.ResponseMW, q.ResponseMW}
	}
	rungs := []rung{{}}
	for i := range points {
		rungs = append(rungs, of(&points[i]))
	}
	slices.SortFunc(rungs, func(a, b rung) int {
		return cmp.Or(cmp.Compare(a.powerMW, b.powerMW), cmp.Compare(a.responseMW, b.responseMW))
	})
	rungs = slices.CompactFunc(rungs, rung.same)
	rated := p.DroopPct > 0 || p.Model >= 0 && c.Models[p.Model].Model.DroopPct > 0
	l := Ladder{ActivationS: activationS, Energy: energy, Growing: !rated && p.SyntheticMWsPerMW == 0 && p.Kind != fleet.CondenserProject}
	for k, r := range rungs {
		built, err := p.In(c, r.powerMW, r.responseMW, activationS)
		if err != nil {
			return err
		}
		l.Rungs = append(l.Rungs, built)
		l.HoldMW = append(l.HoldMW, r.responseMW)
		var within []int
		for j := range k {
			if !rated && rungs[j].responseMW <= r.responseMW {
				within = append(within, j)
			}
		}
		l.Within = append(l.Within, within)
	}
	for i := range points {
		points[i].Ladder, points[i].Rung = len(plan.Ladders), slices.IndexFunc(rungs, of(&points[i]).same)
	}
	plan.Ladders = append(plan.Ladders, l)
	plan.Points = append(plan.Points, points...)
	return nil
}

// Cases counts the cases that an hour is solved in.
func (plan *Plan) Cases() int {
	n := 0
	for i := range plan.Ladders {
		n += len(plan.Ladders[i].Rungs)
	}
	return n
}

// same tells whether two amounts differ by rounding at most.
func same(a, b float64) bool { return math.Abs(a-b) <= 1e-9*max(1, math.Abs(a), math.Abs(b)) }

func ascending(v []float64) []float64 {
	out := slices.Clone(v)
	slices.Sort(out)
	return slices.CompactFunc(out, same)
}

// MostMW is a size beyond which the case can hardly use more: what covers its largest loss.
//
// For response, the loss itself; wind and sun can be turned down and count as no such loss. For
// inertia, what keeps the rate of change after that loss within its limit alone, E = f0·P/(2·RoCoF)
// (ENTSO-E, Frequency stability evaluation criteria, 2016, from memory), in whole machines. For a wind farm, what its share of output gives at most.
func MostMW(c *fleet.Case, p *fleet.Project) float64 {
	most := 0.0
	for i := range c.Resources {
		if r := &c.Resources[i]; r.LostAsOne && r.Kind != fleet.Wind && r.Kind != fleet.Solar {
			for h := range c.Times {
				mw := r.MaxMW.At(h)
				if r.Kind.Machine() {
					mw *= r.Availability.At(h)
				}
				most = max(most, mw)
			}
		}
	}
	for _, l := range c.Losses {
		for h := range c.Times {
			if !l.Over {
				most = max(most, l.MW.At(h))
			}
		}
	}
	switch p.Kind {
	case fleet.CondenserProject:
		mva := c.Limits.NominalHz * most / (2 * c.Limits.MaxHzPerS) / p.InertiaS
		return p.UnitMVA * math.Max(1, math.Ceil(mva/p.UnitMVA))
	case fleet.WindRecoveryProject:
		host := 0.0
		for h := range c.Times {
			host = max(host, c.Resources[p.Host].MaxMW.At(h))
		}
		return host * p.ShareOfOutput
	}
	return most
}

// DefaultSizes go up to MostMW, closer together where they are small, as worth bends most there. A
// step is a round number, of a condenser whole machines, so the last may lie above MostMW.
func DefaultSizes(c *fleet.Case, p *fleet.Project) []float64 {
	most := MostMW(c, p)
	times := []float64{1, 2, 3, 4, 6, 8, 10, 12, 16, 20}
	step := most / times[len(times)-1]
	if p.Kind == fleet.CondenserProject {
		step = p.UnitMVA * math.Max(1, math.Ceil(step/p.UnitMVA-1e-9))
	} else if step > 0 {
		half := math.Pow(10, math.Floor(math.Log10(step))) / 2
		step = half * math.Ceil(step/half-1e-9)
	}
	var out []float64
	for _, n := range times {
		out = append(out, tidy(step*n))
		if step*n >= most {
			break
		}
	}
	return out
}

// tidy drops what is left of rounding behind the ninth figure, so that 0.6 is 0.6.
func tidy(v float64) float64 {
	const figures = 9
	out, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', figures, 64), 64)
	if err != nil {
		return v
	}
	return out
}

// Spread gives the values of a range without what is left of rounding.
func Spread(r ranges.Range) []float64 {
	out := r.Values()
	for i := range out {
		out[i] = tidy(out[i])
	}
	return out
}
