package solve

import (
	"time"

	"evenkeel/limits"
)

// Status of an hour.
type Status uint8

const (
	// Secure: every limit holds in the replay of every loss, all load is served.
	Secure Status = iota
	// Short: some limit cannot be met or some load cannot be served; the shortfall says how much.
	Short
)

func (s Status) String() string { return [...]string{"secure", "short"}[s] }

// Hour is the verified mix of one hour.
type Hour struct {
	Index  int
	Time   time.Time
	Status Status
	Why    string // for a short hour: what is short, in words; else empty

	Cost  float64 // currency per hour, shortfall prices included
	Bound float64 // proven lower bound of the cost
	Gap   float64 // (Cost − Bound)/|Cost|

	DemandMW    float64
	UnservedMW  float64
	ExcessMW    float64 // generation that cannot be turned down
	CurtailedMW float64
	CO2T        float64

	InertiaMWs float64 // online, synthetic and the load's own included
	// Where fleet.Hour.LeastInertiaMWs asks for a floor: what is lacking of it, and its price.
	FloorShortMWs, FloorPricePerMWs float64
	WorstLoss                       string // the loss with the deepest replayed nadir
	WorstLossMW                     float64
	InertiaLeftMWs                  float64 // after the worst loss
	PrimaryMW                       float64 // response held with shapes slower than FastS
	FastMW                          float64 // response held with shapes fully out within FastS

	// Replayed values, each the worst over all losses.
	RoCoFHzPerS float64
	NadirHz     float64 // deviation below nominal, ≥ 0
	NadirS      float64 // seconds after the loss
	SteadyHz    float64

	// Limits are indexed by limits.RoCoF, limits.Nadir, limits.Steady.
	Limits [limits.Kinds]LimitResult
	Prices Prices

	Above *Above // the other side of nominal; nil: the case has no limits there

	Closed Closed

	Settlement *Settlement // with Options.Settle

	Dispatch []Dispatch // one a resource, same order as Case.Resources
	Effort   Effort
}

// FastS is the full activation time up to which a response counts as fast (common practice).
const FastS = 2.0

// LimitResult says how an hour stands with one limit.
type LimitResult struct {
	Margin  float64 // limit less the replayed value, Hz or Hz/s; below 0 where short
	Loss    string  // the loss nearest to the limit
	Binds   bool    // relaxing the limit lowers the cost
	Price   float64 // currency per hour for 1 Hz (RoCoF: 1 Hz/s) of relaxation
	ShortMW float64 // MW of the loss that the limit does not cover
}

// Above is how an hour stands with losses of load and export, which raise frequency. All values
// are counted upwards.
type Above struct {
	DownMW      float64 // response held downwards
	WorstLoss   string  // the loss with the highest replayed peak
	WorstLossMW float64
	RoCoFHzPerS float64
	PeakHz      float64
	PeakS       float64
	SteadyHz    float64
	Limits      [limits.Kinds]LimitResult // Nadir stands for the peak

	DownPerMW []float64 // price of 1 MW downwards, one a shape
	LossPerMW float64   // what 1 MW less of the binding losses saves

	// In closed loop, where simulated.
	ClosedRoCoFHzPerS, ClosedPeakHz, ClosedSteadyHz float64
}

// Closed is what the closed-loop simulation of an hour's worst losses shows, and what it took
// to hold there. All values are the worst over the losses simulated.
type Closed struct {
	Simulated   int // losses; 0: the case has no dynamic models, or the hour was short before
	RoCoFHzPerS float64
	NadirHz     float64
	NadirS      float64
	SteadyHz    float64
	Loss        string  // the loss with the deepest nadir
	MarginHz    float64 // the least of the margins to the nadir and to the steady limit
	Mended      int     // times that the rows were rebuilt from what was delivered
	MendedCost  float64 // what the mending added to the cost
}

// Prices of one hour: the duals of its rows in the dispatch of its mix, commitment held.
type Prices struct {
	EnergyPerMWh  float64
	InertiaPerMWs float64
	ResponsePerMW []float64 // one a shape, same order as Case.Shapes
	LossPerMW     float64   // what 1 MW less of the binding losses saves
}

// Dispatch is what one resource does in one hour, all its units together.
type Dispatch struct {
	On          int // units on
	OutputMW    float64
	ResponseMW  float64
	DownMW      float64 // response downwards
	InertiaMWs  float64 // synthetic included
	Cost        float64
	CurtailedMW float64
	CO2T        float64
}

// Effort is what the hour took; it is the same in every run.
type Effort struct {
	Nodes  int // relaxations solved
	Pivots int
	Rows   int // frequency rows found
}

// Met tells whether the mix of an hour covers every limit and the whole load, as its rows see it.
func (h *Hour) Met() bool {
	if h.UnservedMW > 0 || h.ExcessMW > 0 || h.FloorShortMWs > 0 {
		return false
	}
	for k := range h.Limits {
		if h.Limits[k].ShortMW > 0 || h.Above != nil && h.Above.Limits[k].ShortMW > 0 {
			return false
		}
	}
	return true
}
