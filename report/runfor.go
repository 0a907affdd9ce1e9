package report

import (
	"cmp"
	"slices"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// frequencyRun is how much one machine runs only because of the limits.
type frequencyRun struct {
	resource  int
	unitHours int     // units on beyond the same hour without limits, added up
	hours     int     // in which that is above 0
	unitMWs   float64 // kinetic energy one unit brings
	outputMWh float64 // output in those hours above that of the run without limits
}

// frequencyRuns lists the machines that have more units on with limits than without in
// some hour, most unit-hours first, then in the order of the case.
func frequencyRuns(c *fleet.Case, hours []solve.Hour, partner []*solve.Hour) []frequencyRun {
	runs := make([]frequencyRun, len(c.Resources))
	for i := range hours {
		if partner[i] == nil {
			continue
		}
		with, without := hours[i].Dispatch, partner[i].Dispatch
		for r := range c.Resources {
			if extra := with[r].On - without[r].On; extra > 0 {
				runs[r].unitHours += extra
				runs[r].hours++
				runs[r].outputMWh += with[r].OutputMW - without[r].OutputMW
			}
		}
	}
	var list []frequencyRun
	for r, run := range runs {
		if res := &c.Resources[r]; res.Kind.Machine() && run.unitHours > 0 {
			run.resource, run.unitMWs = r, res.InertiaS*res.RatingMVA
			list = append(list, run)
		}
	}
	slices.SortStableFunc(list, func(a, b frequencyRun) int { return cmp.Compare(b.unitHours, a.unitHours) })
	return list
}
