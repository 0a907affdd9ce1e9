package report

import (
	"cmp"
	"slices"
	"time"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// measure says how hard each hour is: the larger, the harder.
type measure struct {
	of   []float64 // one an hour
	what string    // completes "hardest by …"
	head string    // column head; empty: the values are not worth listing
	adds bool      // a day's measure is the sum of its hours, not their mean
}

// measureHours ranks hours by what frequency costs in them, as directly as the inputs
// allow: the cost above the run without limits; failing that, what the inertia and
// response held are worth at the hour's own prices; failing that (no price anywhere),
// how little inertia the worst loss leaves.
func measureHours(c *fleet.Case, hours []solve.Hour, partner []*solve.Hour) measure {
	m := measure{of: make([]float64, len(hours))}
	if !slices.Contains(partner, nil) {
		m.what, m.head, m.adds = "cost above the same hour without limits", "extra cost", true
		for i := range hours {
			m.of[i] = finite(hours[i].Cost - partner[i].Cost)
		}
		return m
	}
	priced := false
	for i := range hours {
		m.of[i] = finite(serviceValue(c, &hours[i]))
		priced = priced || m.of[i] != 0
	}
	if priced {
		m.what, m.head, m.adds = "value of the inertia and response held, at the hour's prices", "value", true
		return m
	}
	m.what = "least inertia left after the worst loss"
	for i := range hours {
		m.of[i] = -finite(hours[i].InertiaLeftMWs)
	}
	return m
}

// serviceValue is price times quantity of the inertia and of every response held.
func serviceValue(c *fleet.Case, h *solve.Hour) float64 {
	v := h.Prices.InertiaPerMWs * h.InertiaMWs
	for r := range h.Dispatch {
		v += responsePrice(h, c.Resources[r].Response.Shape) * h.Dispatch[r].ResponseMW
	}
	return v
}

// top gives the positions of the n hardest hours, hardest first; hours on a par stay in
// order.
func (m measure) top(n int) []int {
	order := make([]int, len(m.of))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(m.of[b], m.of[a]) })
	return order[:min(n, len(order))]
}

// day is the hours of one day, UTC, as positions from (inclusive) to to (exclusive).
type day struct {
	start    time.Time
	from, to int
	measure  float64
}

// splitDays cuts hours, which are in the order of time, at midnight UTC.
func splitDays(hours []solve.Hour, m measure) []day {
	var days []day
	for i := range hours {
		start := midnight(hours[i].Time)
		if len(days) == 0 || !days[len(days)-1].start.Equal(start) {
			days = append(days, day{start: start, from: i})
		}
		d := &days[len(days)-1]
		d.to = i + 1
		d.measure += m.of[i]
	}
	for i := range days {
		if !m.adds {
			days[i].measure /= float64(days[i].to - days[i].from)
		}
	}
	return days
}

func midnight(t time.Time) time.Time {
	return t.UTC().Truncate(24 * time.Hour)
}

// hardestDays gives the n days with the highest measure, hardest first.
func hardestDays(days []day, n int) []day {
	sorted := slices.Clone(days)
	slices.SortStableFunc(sorted, func(a, b day) int { return cmp.Compare(b.measure, a.measure) })
	return sorted[:min(n, len(sorted))]
}
