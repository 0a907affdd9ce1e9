package invent

// technology is a kind of synchronised machine: how common it is, how large, and the
// ranges that its numbers are drawn from. Costs are of an invented year with a carbon
// price of about 30 a tonne.
type technology struct {
	label, kind string
	share       float64 // of all units
	size        float64 // of one, relative to the others
	firm        bool    // counts towards the firm capacity
	grouped     bool    // comes in sets of identical units

	inertiaS   span // on own rating
	minShare   span // of the maximum output
	perMWh     span // marginal cost halfway up
	noLoad     span // cost of being on, as a share of the fuel bill at full output
	co2        span // t/MWh
	startPerMW span
	rampShare  span // of the maximum output, per hour
	minUpH     float64
	minDownH   float64

	shape      string
	response   span // share of the maximum output
	pricePerMW span

	planned  span    // weeks out of service, between spring and autumn
	failureH float64 // mean hours between forced outages; 0: none
	repairH  float64 // mean length of one
}

type span struct{ low, high float64 }

// technologies in merit order, cheap to run first; condensers last. Inertia constants
// lie within Kundur 1994, table 3.2 (from memory).
var technologies = []technology{
	{
		label: "river", kind: "hydro", share: 0.07, size: 0.35,
		inertiaS: span{2, 3}, minShare: span{0.10, 0.14}, perMWh: span{2, 5}, noLoad: span{0, 0},
		startPerMW: span{1, 2}, rampShare: span{2, 2}, minUpH: 1, minDownH: 1,
	},
	{
		label: "chp", kind: "thermal", share: 0.08, size: 0.6, firm: true,
		inertiaS: span{3, 5}, minShare: span{0.40, 0.50}, perMWh: span{30, 48}, noLoad: span{0.08, 0.14}, co2: span{0.05, 0.32},
		startPerMW: span{40, 70}, rampShare: span{0.6, 1}, minUpH: 6, minDownH: 4,
		shape: "steam_governor", response: span{0.05, 0.08}, pricePerMW: span{2.5, 4},
		failureH: 2000, repairH: 40,
	},
	{
		label: "steam", kind: "thermal", share: 0.13, size: 1.7, firm: true,
		inertiaS: span{4, 6}, minShare: span{0.38, 0.55}, perMWh: span{46, 60}, noLoad: span{0.08, 0.13}, co2: span{0.82, 0.96},
		startPerMW: span{60, 100}, rampShare: span{0.5, 0.9}, minUpH: 10, minDownH: 8,
		shape: "steam_governor", response: span{0.06, 0.12}, pricePerMW: span{2, 4},
		planned: span{3, 5}, failureH: 1300, repairH: 50,
	},
	{
		label: "ccgt", kind: "thermal", share: 0.19, size: 1.5, firm: true,
		inertiaS: span{3.5, 6}, minShare: span{0.38, 0.50}, perMWh: span{54, 76}, noLoad: span{0.10, 0.16}, co2: span{0.34, 0.41},
		startPerMW: span{35, 65}, rampShare: span{1, 2}, minUpH: 4, minDownH: 3,
		shape: "gas_governor", response: span{0.10, 0.18}, pricePerMW: span{1.5, 3.5},
		planned: span{2, 4}, failureH: 1600, repairH: 36,
	},
	{
		label: "hydro", kind: "hydro", share: 0.20, size: 0.8, firm: true, grouped: true,
		inertiaS: span{2.5, 4}, minShare: span{0.20, 0.35}, perMWh: span{52, 90}, noLoad: span{0.01, 0.03},
		startPerMW: span{1.5, 4}, rampShare: span{4, 6}, minUpH: 1, minDownH: 1,
		shape: "hydro_governor", response: span{0.20, 0.35}, pricePerMW: span{0.8, 2},
		planned: span{1, 3}, failureH: 3000, repairH: 30,
	},
	{
		label: "gt", kind: "thermal", share: 0.19, size: 0.6, firm: true, grouped: true,
		inertiaS: span{3, 5}, minShare: span{0.30, 0.42}, perMWh: span{95, 135}, noLoad: span{0.16, 0.24}, co2: span{0.52, 0.62},
		startPerMW: span{15, 30}, rampShare: span{4, 6}, minUpH: 1, minDownH: 1,
		shape: "gas_governor", response: span{0.15, 0.25}, pricePerMW: span{1.5, 3},
		planned: span{1, 2}, failureH: 2200, repairH: 24,
	},
	{
		label: "oil", kind: "thermal", share: 0.09, size: 0.4, firm: true, grouped: true,
		inertiaS: span{2.6, 4}, minShare: span{0.30, 0.40}, perMWh: span{170, 250}, noLoad: span{0.10, 0.18}, co2: span{0.66, 0.80},
		startPerMW: span{12, 25}, rampShare: span{4, 6}, minUpH: 1, minDownH: 1,
		shape: "gas_governor", response: span{0.12, 0.20}, pricePerMW: span{1.5, 3},
		planned: span{1, 2}, failureH: 1500, repairH: 24,
	},
	{
		label: "condenser", kind: "condenser", share: 0.05, size: 0.9,
		inertiaS: span{2.2, 5}, noLoad: span{0, 0}, startPerMW: span{1, 2}, minUpH: 1, minDownH: 1,
		planned: span{1, 2}, failureH: 4000, repairH: 60,
	},
}

// apportion shares out n units by the largest remainders, and sees to it that no
// technology is left out while there are units enough.
func apportion(n int) []int {
	counts := make([]int, len(technologies))
	rest := make([]float64, len(technologies))
	left := n
	for i, t := range technologies {
		want := t.share * float64(n)
		counts[i] = int(want)
		rest[i] = want - float64(counts[i])
		if counts[i] == 0 && n >= len(technologies)+2 {
			counts[i], rest[i] = 1, 0
		}
		left -= counts[i]
	}
	for ; left > 0; left-- {
		best := 0
		for i := range rest {
			if rest[i] > rest[best] {
				best = i
			}
		}
		counts[best]++
		rest[best]--
	}
	for ; left < 0; left++ {
		most := 0
		for i := range counts {
			if counts[i] > counts[most] {
				most = i
			}
		}
		counts[most]--
	}
	return counts
}
