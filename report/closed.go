package report

import (
	"fmt"
	"slices"
	"strings"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// closedTally sums up what the closed-loop proof of a run has shown and cost.
type closedTally struct {
	proven  int // hours simulated that hold
	mended  int
	rounds  int
	most    int // rounds of one hour
	cost    float64
	margins []float64 // Hz, sorted: least margin of hours in which the nadir or the steady state binds
	rocof   float64   // the largest simulated
	nadir   float64
	steady  float64
	over    [limits.Kinds]float64 // the largest simulated above nominal
}

func tallyClosed(hours []solve.Hour) *closedTally {
	t := &closedTally{}
	for i := range hours {
		h := &hours[i]
		c := &h.Closed
		if c.Mended > 0 {
			t.mended++
			t.rounds += c.Mended
			t.most = max(t.most, c.Mended)
			t.cost += c.MendedCost
		}
		if c.Simulated == 0 {
			continue
		}
		if h.Status == solve.Secure {
			t.proven++
		}
		t.rocof, t.nadir, t.steady = max(t.rocof, c.RoCoFHzPerS), max(t.nadir, c.NadirHz), max(t.steady, c.SteadyHz)
		if a := h.Above; a != nil {
			t.over[0], t.over[1], t.over[2] = max(t.over[0], a.ClosedRoCoFHzPerS), max(t.over[1], a.ClosedPeakHz), max(t.over[2], a.ClosedSteadyHz)
		}
		if h.Limits[limits.Nadir].Binds || h.Limits[limits.Steady].Binds {
			t.margins = append(t.margins, c.MarginHz)
		}
	}
	slices.Sort(t.margins)
	return t
}

// quantile is the value below which a share of the margins lies.
func (t *closedTally) quantile(share float64) float64 {
	if len(t.margins) == 0 {
		return 0
	}
	return t.margins[min(len(t.margins)-1, int(share*float64(len(t.margins))))]
}

// hasModels tells whether anything in a case is proven in closed loop.
func hasModels(c *fleet.Case) bool {
	return len(c.Models) > 0 || slices.ContainsFunc(c.Resources, func(r fleet.Resource) bool { return r.SyntheticS > 0 })
}

type closedJSON struct {
	HoursProven int            `json:"hours_proven"`
	HoursMended int            `json:"hours_mended"`
	Rounds      int            `json:"rounds_of_mending"`
	MostRounds  int            `json:"most_rounds_of_one_hour"`
	Cost        number         `json:"cost_of_mending"`
	RoCoF       number         `json:"largest_rocof_hz_per_s"`
	Nadir       number         `json:"largest_nadir_hz"`
	Steady      number         `json:"largest_steady_hz"`
	Margin      *closedMargins `json:"margin_hz_where_nadir_or_steady_bind"`
}

type closedMargins struct {
	Hours  int    `json:"hours"`
	Least  number `json:"least"`
	P5     number `json:"p5"`
	Median number `json:"median"`
	P95    number `json:"p95"`
}

// closedOf is nil where the case has no dynamic models.
func closedOf(c *fleet.Case, hours []solve.Hour) *closedJSON {
	if !hasModels(c) {
		return nil
	}
	t := tallyClosed(hours)
	j := &closedJSON{HoursProven: t.proven, HoursMended: t.mended, Rounds: t.rounds, MostRounds: t.most, Cost: money(t.cost),
		RoCoF: hz(t.rocof), Nadir: hz(t.nadir), Steady: hz(t.steady)}
	if n := len(t.margins); n > 0 {
		j.Margin = &closedMargins{n, hz(t.margins[0]), hz(t.quantile(0.05)), hz(t.quantile(0.5)), hz(t.quantile(0.95))}
	}
	return j
}

// closedHeader lists the closed-loop columns of hours.csv; they are empty where nothing was
// simulated.
var closedHeader = []string{"closed_rocof_hz_per_s", "closed_nadir_hz", "closed_nadir_s", "closed_steady_hz", "closed_margin_hz", "closed_loss", "mended", "mended_cost"}

func closedRow(row []string, h *solve.Hour) []string {
	c := &h.Closed
	if c.Simulated == 0 {
		for range closedHeader {
			row = append(row, "")
		}
		return row
	}
	return append(row, fixed(c.RoCoFHzPerS, decHz), fixed(c.NadirHz, decHz), fixed(c.NadirS, decS), fixed(c.SteadyHz, decHz), fixed(c.MarginHz, decHz),
		c.Loss, fmt.Sprint(c.Mended), fixed(c.MendedCost, decMoney))
}

func (p *page) closedLoop() {
	if !hasModels(p.c) || p.o.WithoutLimits {
		return
	}
	t := tallyClosed(p.hours)
	p.section("In closed loop (governors and converters acting on the frequency they measure)")
	p.fact("  proven", fmt.Sprintf("%s; the worst losses reach %s Hz/s, %s Hz below nominal, %s Hz in the steady band (limits are kept to 1 mHz)", hoursOf(t.proven), fixed(t.rocof, 3), fixed(t.nadir, 3), fixed(t.steady, 3)))
	if p.c.Above != nil {
		p.fact("", fmt.Sprintf("losses of load %s Hz/s, %s Hz above nominal, %s Hz in the band", fixed(t.over[0], 3), fixed(t.over[1], 3), fixed(t.over[2], 3)))
	}
	if t.mended > 0 {
		p.fact("  mended", fmt.Sprintf("%s in %s, at most %d in one; it cost %s", hoursOf(t.mended), strings.Replace(count(t.rounds)+" rounds", "1 rounds", "1 round", 1), t.most, p.money(t.cost)))
	} else {
		p.fact("  mended", "no hour: every first mix held")
	}
	if n := len(t.margins); n > 0 {
		p.fact("  margin left", fmt.Sprintf("%s to %s Hz in 9 of 10 hours in which the nadir or the steady state binds, median %s Hz", fixed(t.quantile(0.05), 3), fixed(t.quantile(0.95), 3), fixed(t.quantile(0.5), 3)))
	}
}
