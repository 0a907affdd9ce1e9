package floor

import (
	"math"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/study/ranges"
	"evenkeel/study/work"
)

// Result is what a study has found.
type Result struct {
	Case   *fleet.Case
	Ask    *Ask
	Charts []Chart
	Year   *Year // nil: charts alone
}

// Year is what the hours show. Sums are over the hours looked at.
type Year struct {
	Hours []*Hour
	Scale float64 // a year's hours for each one looked at; 1 where all of the case's were

	Short     int // hours that cannot be made secure; they count nowhere else
	Lacking   int // hours in which the bare dispatch has too little online
	NoInertia int // hours in which no kinetic energy would be enough for it
	LackBy    [limits.Kinds]int
	LackOver  int // of Lacking, for a loss of load or export

	MeanGapMWs, MostGapMWs float64 // over Lacking
	MostGapAt              int     // into Hours
	When                   [12][24]When

	// Of the hours lacking. Mix is the secure mix, the cheapest of all ways together, its proof in
	// closed loop left out, as the ways are not proven so; MendCost is what that adds.
	Ways     [Ways]WayCost
	Mix      WayCost
	MendCost float64

	Rules []RuleCost
}

// When is what the hours of one month and hour of the day (UTC) show.
type When struct {
	Hours, Lacking int
	Known          int     // of Lacking, those that some kinetic energy would help
	GapMWs         float64 // their sum
	MostGapMWs     float64
}

// WayCost is what closing the gaps in one way costs above the bare dispatch.
type WayCost struct {
	Hours   int     // closed
	Cost    float64 // in them
	MixCost float64 // what the mix costs in the same hours
	Within  float64 // by which Cost may be off, as hours are solved to a gap
}

// RuleCost is what the hours cost under a rule, above the secure mixes.
type RuleCost struct {
	Rule      Rule
	Covers    int // hours whose floor, in the secure mix, its number reaches without the limits
	Kept      int // hours
	Same      int // of them, those whose mix had it online as it was
	NotKept   int
	LackMWs   float64 // the most that lacks where it cannot be kept
	Cost      float64 // in the hours kept
	AtLeast   float64 // the true difference lies between
	AtMost    float64
	OnlineMWs float64 // mean in the hours kept
	MixMWs    float64 // mean of the mixes in the same hours
}

// Result sums up a finished run.
func (s *Study) Result(items *work.Items[Item]) *Result {
	out := &Result{Case: s.c, Ask: s.ask, Charts: s.charts}
	n := len(s.hours)
	for i := range out.Charts {
		k := &out.Charts[i]
		k.Cells = nil
		for l := range k.Loss.N {
			k.Cells = append(k.Cells, items.Out[n+i*k.Loss.N+l].Cells...)
		}
	}
	if n == 0 {
		return out
	}
	kept := make([][]Kept, n)
	for i := range kept {
		kept[i] = items.Out[n+len(out.Charts)*s.losses()+i].Kept
	}
	out.Year = s.year(kept)
	return out
}

func (s *Study) year(kept [][]Kept) *Year {
	y := &Year{Hours: s.hours, Scale: 1, MostGapAt: -1}
	if len(s.hours) < s.c.Hours() {
		y.Scale = ranges.HoursAYear / float64(len(s.hours))
	}
	for i, h := range s.hours {
		if h.Short {
			y.Short++
			continue
		}
		at := &y.When[h.Time.UTC().Month()-1][h.Time.UTC().Hour()]
		at.Hours++
		if !h.Gap() {
			continue
		}
		at.Lacking++
		y.Lacking++
		y.ways(h)
		if gap := h.Bare.GapMWs(); math.IsInf(gap, 1) {
			y.NoInertia++
		} else {
			at.Known++
			at.GapMWs += gap
			at.MostGapMWs = max(at.MostGapMWs, gap)
			y.MeanGapMWs += gap
			y.LackBy[h.Bare.By]++
			if h.Bare.Over {
				y.LackOver++
			}
			if gap > y.MostGapMWs {
				y.MostGapMWs, y.MostGapAt = gap, i
			}
		}
	}
	if n := y.Lacking - y.NoInertia; n > 0 {
		y.MeanGapMWs /= float64(n)
	}
	for r := range s.rules {
		y.Rules = append(y.Rules, s.ruleCost(r, kept))
	}
	return y
}

// ways adds what closing the gap of an hour costs.
func (y *Year) ways(h *Hour) {
	if !h.BareCost.Met {
		return
	}
	spare := h.BareCost.Cost - h.BareCost.Bound
	mix := h.MixCost.Cost - h.MendCost - h.BareCost.Cost
	y.Mix.Hours++
	y.Mix.Cost += mix
	y.Mix.MixCost += mix
	y.Mix.Within += spare + h.MixCost.Cost - h.MixCost.Bound
	y.MendCost += h.MendCost
	for w := range h.Ways {
		if !h.Ways[w].Met {
			continue
		}
		c := &y.Ways[w]
		c.Hours++
		c.Cost += h.Ways[w].Cost - h.BareCost.Cost
		c.MixCost += mix
		c.Within += spare + h.Ways[w].Cost - h.Ways[w].Bound
	}
}

func (s *Study) ruleCost(r int, kept [][]Kept) RuleCost {
	c := RuleCost{Rule: s.rules[r]}
	for i, h := range s.hours {
		if h.Short {
			continue
		}
		if h.Mix.FloorMWs <= c.Rule.step(h.Mix.LargestMW).MWs {
			c.Covers++
		}
		k := &kept[i][r]
		if !k.Met {
			c.NotKept++
			c.LackMWs = max(c.LackMWs, k.LackMWs)
			continue
		}
		c.Kept++
		c.OnlineMWs += k.MWs
		c.MixMWs += h.Mix.OnlineMWs
		if k.Same {
			c.Same++
			continue
		}
		c.Cost += k.Cost.Cost - h.MixCost.Cost
		c.AtLeast += k.Cost.Bound - h.MixCost.Cost
		c.AtMost += k.Cost.Cost - h.MixCost.Bound
	}
	if c.Kept > 0 {
		c.OnlineMWs /= float64(c.Kept)
		c.MixMWs /= float64(c.Kept)
	}
	return c
}

// MeanGapMWs is the mean over the hours that lack a known amount.
func (w *When) MeanGapMWs() float64 {
	if w.Known == 0 {
		return 0
	}
	return w.GapMWs / float64(w.Known)
}
