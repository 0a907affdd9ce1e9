package size

import (
	"math"

	"evenkeel/fleet"
)

// Recovery is the capital recovery factor: what a loan of 1, paid back with interest in equal
// amounts at the end of each of so many years, costs a year: r/(1 − (1+r)⁻ⁿ), 1/n without interest.
func Recovery(discountPct, years float64) float64 {
	r := discountPct / 100
	if r == 0 {
		return 1 / years
	}
	return r / -math.Expm1(-years*math.Log1p(r))
}

// Capital is what a design costs to build.
func Capital(m fleet.Money, d fleet.Design) float64 {
	return m.CapitalPerMW*d.MW + m.CapitalPerMWh*d.EnergyMWh
}

// YearlyCost is what a design costs a year: its capital's annuity and what is fixed.
func YearlyCost(m fleet.Money, d fleet.Design) float64 {
	return Capital(m, d)*Recovery(m.DiscountPct, m.LifetimeYears) + m.FixedPerMWYear*d.MW
}

// BreakEvenPerMW is the capital cost per MW at which a design that is worth value a year just
// pays, with the energy that it has.
func BreakEvenPerMW(m fleet.Money, d fleet.Design, value float64) float64 {
	f := Recovery(m.DiscountPct, m.LifetimeYears)
	return ((value-m.FixedPerMWYear*d.MW)/f - m.CapitalPerMWh*d.EnergyMWh) / d.MW
}
