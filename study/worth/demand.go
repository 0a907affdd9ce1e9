package worth

import (
	"cmp"
	"math"
	"slices"
)

// Demand is a step of the demand curve: at a price a MW and year from FromPrice to below ToPrice, Point is
// the volume to buy. ToPrice is +Inf where nothing is to be bought.
type Demand struct {
	Point              int
	FromPrice, ToPrice float64
}

// PricesOf gives the prices a MW and year, 0 or more, at which a volume is the best of those looked at. There are
// none where from is not below to: at every price another volume does as well or better.
func (r *Result) PricesOf(k int) (from, to float64) {
	to = math.Inf(1)
	for j := range r.VolumesMW {
		if j == k {
			continue
		}
		slope := (r.Points[j].Net - r.Points[k].Net) / (r.VolumesMW[j] - r.VolumesMW[k])
		if j > k {
			from = max(from, slope)
		} else {
			to = min(to, slope)
		}
	}
	return from, to
}

// Demand gives the volume worth buying at every price, the highest price first.
func (r *Result) Demand() []Demand {
	var out []Demand
	for k := range r.VolumesMW {
		if from, to := r.PricesOf(k); from < to {
			out = append(out, Demand{k, from, to})
		}
	}
	return out
}

// Speeds gives the points of the last volume by activation time, the fastest first, the product's own among them.
func (r *Result) Speeds() []YearPoint {
	list := slices.Clone(r.Points[len(r.VolumesMW)-1:])
	slices.SortStableFunc(list, func(a, b YearPoint) int { return cmp.Compare(a.ActivationS, b.ActivationS) })
	return list
}
