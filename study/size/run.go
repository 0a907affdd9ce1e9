package size

import (
	"context"
	"math"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/solve"
	"evenkeel/study/sweep"
)

// Rung is what one hour on one rung comes to: currency per hour, MW and MW·s.
type Rung struct {
	Cost, Bound                float64
	Short                      bool
	HeldMW, DownMW, InertiaMWs float64
	OnMVA                      float64 // of a condenser
	Paid                       [Rules]Income
	// Taker is what the same project earns, its own cost paid, by its best answer to the prices of
	// the rung with nothing built.
	Taker [Rules]float64
}

// Income is what the project is paid in an hour or a year, by service, and its own cost of it.
type Income struct {
	Response, Down, Inertia float64
	Energy                  float64 // of a condenser's losses, below 0
	Own                     float64
}

// Net is what is left of the income.
func (i Income) Net() float64 { return i.Response + i.Down + i.Inertia + i.Energy - i.Own }

func (i *Income) add(o Income, times float64) {
	i.Response += times * o.Response
	i.Down += times * o.Down
	i.Inertia += times * o.Inertia
	i.Energy += times * o.Energy
	i.Own += times * o.Own
}

// Rule is a rule by which prices come about.
type Rule int

// The rules, see solve.Settlement.
const (
	Marginal Rule = iota // duals of the dispatch, its commitment held
	Hull                 // of all prices those that leave the least uplift
	Rules    = 2
)

func (r Rule) String() string { return [...]string{"marginal", "hull"}[r] }

// Other is the other rule.
func (r Rule) Other() Rule { return Hull - r }

// Words name the rule in text.
func (r Rule) Words() string {
	return [...]string{"marginal prices, the commitment held", "convex hull prices"}[r]
}

// prices are what an hour pays by one rule.
type prices struct {
	energy, inertia float64
	response, down  float64
}

// pricesOf are what the project is paid: less what a host's loss would take along.
func (plan *Plan) pricesOf(h *solve.Hour) [Rules]prices {
	shape := plan.Project.Shape(plan.Case)
	of := func(s *solve.Settled) prices {
		gone := &s.Unpaid[plan.Resource]
		return prices{energy: s.Prices.EnergyPerMWh, inertia: s.Prices.InertiaPerMWs - gone.InertiaPerMWs,
			response: at(s.Prices.ResponsePerMW, shape) - gone.ResponsePerMW, down: at(s.DownPerMW, shape) - gone.DownPerMW}
	}
	return [Rules]prices{of(&h.Settlement.Marginal), of(&h.Settlement.Hull)}
}

// at is a price of a list that may be empty.
func at(list []float64, i int) float64 {
	if i < 0 || i >= len(list) {
		return 0
	}
	return list[i]
}

// Climber solves hours of a plan. It is safe for concurrent use.
type Climber struct {
	plan    *Plan
	opt     solve.Options
	ladders []func(ctx context.Context, hour int) ([]solve.Hour, error)
}

// Climber prepares the hours of a plan.
func (plan *Plan) Climber(opt solve.Options) *Climber {
	opt.Settle = true
	c := &Climber{plan: plan, opt: opt}
	for i := range plan.Ladders {
		l := &plan.Ladders[i]
		if l.Growing {
			c.ladders = append(c.ladders, sweep.NewSettledLadder(l.Rungs, []int{plan.Resource}, opt).Hour)
			continue
		}
		var solvers []*solve.Solver
		for _, r := range l.Rungs {
			solvers = append(solvers, solve.New(r, opt))
		}
		c.ladders = append(c.ladders, func(ctx context.Context, hour int) ([]solve.Hour, error) {
			out := make([]solve.Hour, len(solvers))
			var err error
			for k, s := range solvers {
				if out[k], err = s.Hour(ctx, l.Rungs[k].Hour(hour, fleet.HourOptions{StartSpreadH: opt.StartSpreadH})); err != nil {
					return nil, err
				}
			}
			return out, nil
		})
	}
	return c
}

// Hour solves one hour on all rungs of all ladders.
func (c *Climber) Hour(ctx context.Context, hour int) ([][]Rung, error) {
	out := make([][]Rung, len(c.ladders))
	for i, climb := range c.ladders {
		solved, err := climb(ctx, hour)
		if err != nil {
			return nil, err
		}
		l := &c.plan.Ladders[i]
		base := c.plan.pricesOf(&solved[0])
		bare := l.Rungs[0].Hour(hour, fleet.HourOptions{StartSpreadH: c.opt.StartSpreadH})
		for k := range solved {
			h := l.Rungs[k].Hour(hour, fleet.HourOptions{StartSpreadH: c.opt.StartSpreadH})
			r := c.plan.record(&solved[k], h)
			// A cheaper mix of a smaller design is a mix of this one too: one that had to be mended in
			// closed loop can cost more than that.
			for _, j := range l.Within[k] {
				if o := &out[i][j]; o.Short == r.Short && o.Cost < r.Cost || r.Short && !o.Short {
					bound := min(r.Bound, o.Cost)
					r = *o
					r.Bound = bound
				}
			}
			for rule := range base {
				r.Taker[rule] = c.plan.answer(h, &base[rule]) - c.plan.answer(bare, &base[rule])
			}
			out[i] = append(out[i], r)
		}
	}
	return out, nil
}

// record keeps of an hour what the study needs.
func (plan *Plan) record(h *solve.Hour, in *fleet.Hour) Rung {
	d, u := &h.Dispatch[plan.Resource], &in.Units[plan.Resource]
	r := Rung{Cost: h.Cost, Bound: h.Bound, Short: h.Status == solve.Short, HeldMW: d.ResponseMW, DownMW: d.DownMW, InertiaMWs: d.InertiaMWs}
	condenser := plan.Project.Kind == fleet.CondenserProject
	if condenser {
		r.OnMVA = float64(d.On) * plan.Project.UnitMVA
	}
	for rule, p := range plan.pricesOf(h) {
		i := Income{Response: p.response * d.ResponseMW, Down: p.down * d.DownMW, Inertia: p.inertia * d.InertiaMWs,
			Own: u.ResponsePerMW*d.ResponseMW + u.DownPerMW*d.DownMW + u.SyntheticPerMWs*d.InertiaMWs}
		if condenser {
			i.Energy, i.Own = p.energy*d.OutputMW, float64(d.On)*u.OnCost
		}
		r.Paid[rule] = i
	}
	return r
}

// answer is the most that the resource which carries the project can earn at given prices, its own
// cost paid.
func (plan *Plan) answer(h *fleet.Hour, p *prices) float64 {
	u := &h.Units[plan.Resource]
	if u.Count == 0 {
		return 0
	}
	best := math.Inf(-1)
	if u.Commit && !u.MustRun {
		best = 0
	}
	for _, q := range formulate.Points(u, math.Inf(1)) {
		pay := p.energy*q.OutputMW + p.response*q.ResponseMW + p.down*q.DownMW + p.inertia*q.InertiaMWs
		best = max(best, pay-q.Cost)
	}
	return float64(u.Count) * best
}
