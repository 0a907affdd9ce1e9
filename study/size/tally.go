package size

import (
	"evenkeel/fleet"
	"evenkeel/study/ranges"
)

// Year is what a rung comes to in a year.
type Year struct {
	HoldMW                      float64 // the most it can hold
	Cost                        float64
	Saving                      float64 // against nothing built, the project's own cost of holding counted as a cost
	SavingAtLeast, SavingAtMost float64 // given the gaps
	Paid                        [Rules]Income
	Taker                       [Rules]float64
	HeldH                       float64        // hours in which it holds anything,
	PaidH                       [Rules]float64 // and is paid more for it than it costs
	SureH                       float64        // hours in which it is sure to save: its cost lies below the bound without it
	ShortH                      float64
	MeanMW                      float64 // held, the greater of the two directions; of a condenser, the MVA on
}

// Years sums the hours of each rung up to a year. hours holds one result of Climber.Hour each.
func (plan *Plan) Years(hours [][][]Rung) [][]Year {
	up := ranges.HoursAYear / float64(len(hours))
	out := make([][]Year, len(plan.Ladders))
	for l := range plan.Ladders {
		out[l] = make([]Year, len(plan.Ladders[l].Rungs))
		for k := range out[l] {
			y := &out[l][k]
			y.HoldMW = plan.Ladders[l].HoldMW[k]
			for _, h := range hours {
				r, bare := &h[l][k], &h[l][0]
				y.Cost += up * r.Cost
				y.Saving += up * (bare.Cost - r.Cost)
				y.SavingAtLeast += up * (bare.Bound - r.Cost)
				y.SavingAtMost += up * (bare.Cost - r.Bound)
				held := plan.held(r)
				y.MeanMW += held / float64(len(hours))
				if held > leastMW {
					y.HeldH += up
				}
				for rule := range r.Paid {
					y.Paid[rule].add(r.Paid[rule], up)
					y.Taker[rule] += up * r.Taker[rule]
					if held > leastMW && r.Paid[rule].Net() > leastPay {
						y.PaidH[rule] += up
					}
				}
				if r.Cost < bare.Bound {
					y.SureH += up
				}
				if r.Short {
					y.ShortH += up
				}
			}
		}
	}
	return out
}

const (
	leastMW  = 1e-3 // below it nothing is held
	leastPay = 1e-2 // currency an hour: below it nothing is paid
)

// held is how much of the project is in use, MW or MVA.
func (plan *Plan) held(r *Rung) float64 {
	if plan.Project.Kind == fleet.CondenserProject {
		return r.OnMVA
	}
	head := 2 / plan.Case.Limits.NominalHz * plan.Case.Limits.MaxHzPerS // MW that 1 MW·s takes
	up := r.HeldMW
	if plan.Project.SyntheticMWsPerMW > 0 {
		up += head * r.InertiaMWs
	}
	return max(up, r.DownMW)
}
