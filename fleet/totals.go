package fleet

import (
	"fmt"
	"math"
)

// Totals sums the case up in a few lines, in which a slip of unit or decimal point shows.
func (c *Case) Totals() []string {
	peak, energy, wind := 0.0, 0.0, 0.0
	infeed, infeedOf := 0.0, "none"
	machines, mw, inertia := 0, 0.0, 0.0
	for i := range c.Resources {
		r := &c.Resources[i]
		if r.Kind.Machine() {
			machines += r.Count
			mw += float64(r.Count) * max(r.MaxMW.most(), 0)
			inertia += float64(r.Count) * r.InertiaS * r.RatingMVA
		}
	}
	for h := range c.Times {
		demand := c.Load.DemandMW.At(h)
		energy += demand
		peak = math.Max(peak, demand)
		for i := range c.Resources {
			r := &c.Resources[i]
			if r.Kind == Wind || r.Kind == Solar {
				wind += float64(r.Count) * r.MaxMW.At(h)
			}
			if most := r.MaxMW.At(h) * r.share(h); r.LostAsOne && most > infeed {
				infeed, infeedOf = most, r.Name
			}
		}
	}
	last := c.Times[len(c.Times)-1]
	return []string{
		fmt.Sprintf("%s to %s UTC", show(c.Times[0]), show(last.Add(hour))),
		fmt.Sprintf("load: %.1f MW at most, %.1f GWh", peak, energy/1000),
		fmt.Sprintf("machines: %d with %.1f MW and %.2f GW·s", machines, mw, inertia/1000),
		fmt.Sprintf("wind and solar: %.1f GWh available", wind/1000),
		fmt.Sprintf("largest single infeed there can be: %.1f MW (%s)", infeed, infeedOf),
	}
}

// share is how much of its maximum a resource has in an hour.
func (r *Resource) share(h int) float64 {
	if r.Kind.Machine() {
		return r.Availability.At(h)
	}
	return 1
}

// MeanDemandMW is the mean of the load over all hours.
func (c *Case) MeanDemandMW() float64 {
	sum := 0.0
	for h := range c.Times {
		sum += c.Load.DemandMW.At(h)
	}
	return sum / float64(len(c.Times))
}
