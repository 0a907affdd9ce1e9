package size

import (
	"cmp"
	"math"
	"slices"

	"evenkeel/fleet"
)

// Swing is what a change of one input by ±SwingShare does to the net value a year of one design.
type Swing struct {
	Input     string
	Unit      string
	At        float64 // the input as it is
	Low, High float64 // the input as it is changed
	// Net value with the input low and high; what the service is worth is a different number to each side.
	NetLow, NetHigh [Sides]float64
}

// Span is how far the net value of a side moves.
func (w *Swing) Span(side Side) float64 { return math.Abs(w.NetHigh[side] - w.NetLow[side]) }

// SwingShare is the change of each input, as a share of it.
const SwingShare = 0.2

// Sensitivity changes one input after the other for a result, its size and what it holds kept, and
// gives the largest swings of the owner's net value first. What the service is worth is an input too.
// With another hold, another efficiency or other events it has the energy that these need, times
// what it has of it now.
func (s *Study) Sensitivity(r *Result) []Swing {
	p := s.Plan.Project
	var out []Swing
	net := func(m fleet.Money, d fleet.Design, times float64) (n [Sides]float64) {
		for side := range n {
			n[side] = times*r.Value[side] - YearlyCost(m, d)
		}
		return n
	}
	add := func(input, unit string, value float64, with func(v float64) [Sides]float64) {
		if value == 0 {
			return
		}
		w := Swing{Input: input, Unit: unit, At: value, Low: value * (1 - SwingShare), High: value * (1 + SwingShare)}
		w.NetLow, w.NetHigh = with(w.Low), with(w.High)
		out = append(out, w)
	}
	money := func(set func(m *fleet.Money, v float64)) func(float64) [Sides]float64 {
		return func(v float64) [Sides]float64 {
			m := p.Money
			set(&m, v)
			return net(m, r.Design, 1)
		}
	}
	unit, coin := p.Kind.SizeUnit(), s.Plan.Case.Currency
	add("capital per "+unit, coin, p.Money.CapitalPerMW, money(func(m *fleet.Money, v float64) { m.CapitalPerMW = v }))
	if p.Kind.Stores() {
		add("capital per MWh", coin, p.Money.CapitalPerMWh, money(func(m *fleet.Money, v float64) { m.CapitalPerMWh = v }))
	}
	add("fixed cost per "+unit, coin+" a year", p.Money.FixedPerMWYear, money(func(m *fleet.Money, v float64) { m.FixedPerMWYear = v }))
	add("lifetime", "years", p.Money.LifetimeYears, money(func(m *fleet.Money, v float64) { m.LifetimeYears = v }))
	add("discount rate", "%", p.Money.DiscountPct, money(func(m *fleet.Money, v float64) { m.DiscountPct = v }))
	add("what the service is worth", coin+" a year", r.Value[Owner], func(v float64) [Sides]float64 { return net(p.Money, r.Design, v/r.Value[Owner]) })
	own := r.Year.Paid[s.Rule].Own
	add("own cost of holding", coin+" a year", own, func(v float64) [Sides]float64 {
		n := net(p.Money, r.Design, 1)
		for side := range n {
			n[side] -= v - own
		}
		return n
	})
	needs := func(set func(q *fleet.Project, v float64)) func(float64) [Sides]float64 {
		return func(v float64) [Sides]float64 {
			q := *p
			set(&q, v)
			e, err := q.Energy(s.Plan.Case, r.ActivationS)
			d := r.Design
			if err == nil && r.NeedMWhPerMW > 0 {
				d.EnergyMWh *= e.TotalMWh / r.NeedMWhPerMW
			}
			return net(p.Money, d, 1)
		}
	}
	if p.Kind.Stores() {
		add("hold", "s", p.HoldS, needs(func(q *fleet.Project, v float64) { q.HoldS = v }))
		add("ready again", "s", p.ReadyAgainS, needs(func(q *fleet.Project, v float64) { q.ReadyAgainS = v }))
		add("recharging power", "%", 100*p.RechargeShare, needs(func(q *fleet.Project, v float64) { q.RechargeShare = min(v/100, 1) }))
	}
	slices.SortStableFunc(out, func(a, b Swing) int { return cmp.Compare(b.Span(Owner), a.Span(Owner)) })
	return out
}
