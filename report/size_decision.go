package report

import (
	"fmt"
	"math"
	"strings"

	"evenkeel/fleet"
	"evenkeel/study/size"
)

// sizeDecision says what to build: figures are those of designs that were solved, and what lies
// between them is said to be interpolated.
func sizeDecision(p *page, s, other *size.Study) {
	project := s.Plan.Project
	unit := project.Kind.SizeUnit()
	r, sys := &s.Results[s.Best[size.Owner]], &s.Results[s.Best[size.System]]
	pace := s.Pace(r)
	p.section("Decision")
	money := func(v float64) string { return wholeMoney(v) + " " + s.Plan.Case.Currency }
	if s.Pays(size.Owner) {
		p.text(fmt.Sprintf("Best of the sizes tried: %s. It nets its owner %s a year on a capital of %s, and breaks even at %s per %s (asked: %s).",
			designWords(s, r), money(r.Net[size.Owner]), money(size.Capital(project.Money, r.Design)), money(r.BreakEven[size.Owner]), unit, money(project.Money.CapitalPerMW)), "  ")
		p.text(nextWords(s, pace, size.Owner)+closer(s, pace, size.Owner)+".", "  ")
	} else {
		when := "it would pay at no capital cost"
		if b := r.BreakEven[size.Owner]; b > 0 {
			when = fmt.Sprintf("it would pay with a capital cost of %s per %s (asked: %s)", money(b), unit, money(project.Money.CapitalPerMW))
		}
		p.text(fmt.Sprintf("Do not build on these prices: no size tried pays its owner. The least bad, %s, nets %s a year; %s.", designWords(s, r), money(r.Net[size.Owner]), when), "  ")
		if first := s.Results[pace.Curve[size.Owner][0]].MW; r.MW == first && r.BreakEven[size.Owner] > 0 && project.Kind != fleet.CondenserProject {
			p.text(fmt.Sprintf("That is the smallest size tried: --mw %s:%s:8 looks closer.", plain(first/4), plain(2*first)), "  ")
		}
	}
	if s.Pays(size.System) {
		p.text(fmt.Sprintf("For the system the best tried is %s: it nets %s a year. %s.", designWords(s, sys), money(sys.Net[size.System]), nextWords(s, s.Pace(sys), size.System)), "  ")
	} else {
		p.text("For the system it does not pay at any size tried.", "  ")
	}
	o := &other.Results[other.Best[size.Owner]]
	switch {
	case !other.Pays(size.Owner):
		p.text(fmt.Sprintf("Paid at %s instead, no size tried would pay the owner.", other.Rule.Words()), "  ")
	case o.Design == r.Design:
		p.text(fmt.Sprintf("Paid at %s instead, the same design is best for the owner: it nets %s a year.", other.Rule.Words(), money(o.Net[size.Owner])), "  ")
	default:
		p.text(fmt.Sprintf("Paid at %s instead, the best tried for the owner is %s: it nets %s a year.", other.Rule.Words(), designWords(other, o), money(o.Net[size.Owner])), "  ")
	}
}

// step is what a project grows by.
func step(p *fleet.Project) string {
	if p.Kind == fleet.CondenserProject {
		return "unit"
	}
	return p.Kind.SizeUnit()
}

// unitsOf names a condenser's size.
func unitsOf(p *fleet.Project, mva float64) string {
	return plural(int(math.Round(mva/p.UnitMVA)), "unit") + " of " + plain(p.UnitMVA) + " MVA"
}

// peak is the design of a pace that nets a side most.
func peak(s *size.Study, pace *size.Pace, side size.Side) *size.Result {
	best := &s.Results[pace.Curve[side][0]]
	for _, k := range pace.Curve[side] {
		if r := &s.Results[k]; r.Net[side] > best.Net[side] {
			best = r
		}
	}
	return best
}

// beside gives the sizes tried next to one; 0: there is none.
func beside(s *size.Study, pace *size.Pace, mw float64) (below, above float64) {
	for _, k := range pace.Full {
		switch at := s.Results[k].MW; {
		case at < mw:
			below = at
		case at > mw && above == 0:
			above = at
		}
	}
	return below, above
}

// unitsThatPay are how many of a condenser's machines pay: one number where the sizes on either
// side of the best were tried, else those next to the interpolated size.
func unitsThatPay(s *size.Study, pace *size.Pace, side size.Side) (from, to int) {
	count := func(mva float64) int { return int(math.Round(mva / s.Plan.Project.UnitMVA)) }
	r := peak(s, pace, side)
	below, above := beside(s, pace, r.MW)
	at := pace.Stop[side].MW / s.Plan.Project.UnitMVA
	const rounding = 1e-9
	from, to = max(1, int(math.Floor(at+rounding))), max(1, int(math.Ceil(at-rounding)))
	n := count(r.MW)
	if count(below) == n-1 {
		from, to = max(from, n), max(to, n)
	}
	if count(above) == n+1 {
		from, to = min(from, n), min(to, n)
	}
	return from, to
}

// stopSize is the size at which the next step stops paying: whole machines, or interpolated.
func stopSize(s *size.Study, pace *size.Pace, side size.Side) string {
	p := s.Plan.Project
	if p.Kind != fleet.CondenserProject {
		return "about " + strings.TrimSuffix(round(pace.Stop[side].MW), ".0") + " " + p.Kind.SizeUnit()
	}
	from, to := unitsThatPay(s, pace, side)
	if from == to {
		return unitsOf(p, float64(to)*p.UnitMVA)
	}
	return fmt.Sprintf("%d or %s", from, unitsOf(p, float64(to)*p.UnitMVA))
}

func stopWords(s *size.Study, pace *size.Pace, side size.Side) string {
	switch stop := pace.Stop[side]; {
	case stop.Beyond && s.Plan.Project.Kind == fleet.CondenserProject:
		return "beyond the " + unitsOf(s.Plan.Project, stop.MW) + " tried"
	case stop.Beyond:
		return "beyond the " + plain(stop.MW) + " " + s.Plan.Project.Kind.SizeUnit() + " tried"
	case stop.MW == 0:
		return "none pays"
	}
	return stopSize(s, pace, side)
}

// nextWords say whether more or less than the best size tried could be better.
func nextWords(s *size.Study, pace *size.Pace, side size.Side) string {
	r := peak(s, pace, side)
	below, above := beside(s, pace, r.MW)
	switch {
	case below == 0 && above == 0:
		return "It is the only size tried"
	case pace.Stop[side].Beyond:
		return "It is the largest size tried, and up to it more has paid"
	case s.Plan.Project.Kind != fleet.CondenserProject:
		return fmt.Sprintf("Between the sizes tried the next MW stops paying at %s (interpolated)", stopSize(s, pace, side))
	case around(s.Plan.Project, r.MW, below, above):
		less := 0.0
		for _, k := range pace.Curve[side] {
			if q := &s.Results[k]; q.MW == above {
				less = r.Net[side] - q.Net[side]
			}
		}
		return fmt.Sprintf("One unit more nets %s %s a year less", wholeMoney(less), s.Plan.Case.Currency)
	}
	if words := stopSize(s, pace, side); words == unitsOf(s.Plan.Project, r.MW) {
		return "Not all sizes next to it were tried"
	}
	return fmt.Sprintf("By interpolation between the sizes tried the best is %s", stopSize(s, pace, side))
}

// around tells whether one machine less (or none) and one more were tried.
func around(p *fleet.Project, mva, below, above float64) bool {
	return math.Round((mva-below)/p.UnitMVA) == 1 && math.Round((above-mva)/p.UnitMVA) == 1
}

// closer says which sizes to try next; nothing where those tried lie close enough.
func closer(s *size.Study, pace *size.Pace, side size.Side) string {
	const (
		near  = 0.25 // of the size itself: closer than most costs are known
		steps = 6
	)
	p, r := s.Plan.Project, peak(s, pace, side)
	below, above := beside(s, pace, r.MW)
	sweep := func(a, b float64, n int) string { return fmt.Sprintf("--mw %.9g:%.9g:%d", a, b, n) }
	units := func(mva float64) float64 { return p.UnitMVA * math.Max(1, math.Ceil(mva/p.UnitMVA-1e-9)) }
	condenser := p.Kind == fleet.CondenserProject
	switch {
	case pace.Stop[side].Beyond && condenser:
		return ": " + sweep(r.MW, r.MW+steps*units(r.MW/steps), steps+1) + " looks further"
	case pace.Stop[side].Beyond && p.Kind.Stores():
		return ": " + sweep(r.MW, 2*r.MW, steps+1) + " looks further"
	case pace.Stop[side].Beyond:
		return "" // a wind farm gives no more than a share of its output
	case condenser && around(p, r.MW, below, above):
		return ""
	case condenser:
		every := units((above - below) / (steps + 2))
		from := math.Max(below, every)
		n := math.Ceil((above-from)/every - 1e-9)
		return ": " + sweep(from, from+n*every, int(n)+1) + " looks closer"
	case above-below <= near*r.MW:
		return ""
	case below == 0:
		return ": " + sweep(r.MW/4, above, steps+2) + " looks closer"
	}
	return ": " + sweep(below, above, steps+1) + " looks closer"
}

// markAt is where a figure shows that the next step stops paying: a condenser's machines are whole.
func markAt(s *size.Study, pace *size.Pace, side size.Side) float64 {
	if p := s.Plan.Project; p.Kind == fleet.CondenserProject {
		from, to := unitsThatPay(s, pace, side)
		return p.UnitMVA * float64(from+to) / 2
	}
	return pace.Stop[side].MW
}
