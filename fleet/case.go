package fleet

import (
	"time"

	"evenkeel/limits"
)

// Value is a number that holds for all hours, or an hourly series.
type Value struct {
	Const  float64
	Series []float64 // nil: Const holds in every hour
}

// At gives the value in hour h (0 = the first hour of the case).
func (v Value) At(h int) float64 {
	if v.Series == nil {
		return v.Const
	}
	return v.Series[h]
}

// Case is a whole system over all its hours, vetted.
type Case struct {
	Path     string // of the YAML file, as given
	Name     string
	Note     string
	Currency string // label only
	Hash     string // sha256 over the YAML file and every series file, hex

	Files []string // the series files, in the order in which the case names them

	Limits limits.Limits
	// Above are the limits above nominal, its window and times those of Limits; nil: none.
	Above *limits.Limits

	UnservedPerMWh float64 // price of load not served
	ShortPerMW     float64 // price, per hour, of each MW of a loss that a limit does not cover

	Times  []time.Time // start of each hour, UTC
	Load   Load
	Shapes []NamedShape // response shapes in the order of the file, then those of the models
	Models []NamedModel

	// Resources lists machines, then converters, in the order of the file.
	Resources []Resource
	// Connections are groups of resources lost together, besides each alone.
	Connections []Connection
	// Relays act on frequency: load shedding, generation that trips.
	Relays []Relay
	// Losses are losses that are not (only) a resource of the case.
	Losses []Loss
}

// Hours is the number of hours in the case.
func (c *Case) Hours() int { return len(c.Times) }

// Load is the demand to be served.
type Load struct {
	DemandMW        Value
	DampingPctPerHz float64 // percent of demand for each Hz of deviation
	InertiaMWsPerMW float64 // kinetic energy of the load's own motors
}

// NamedShape is a response shape (a response speed, a product) that resources refer to.
type NamedShape struct {
	Name  string
	Shape limits.Shape
	Model bool // made from a dynamic model
}

// Kind says what a resource is.
type Kind uint8

// Machines are synchronised, everything from Battery on stands behind a converter.
const (
	Thermal Kind = iota
	Hydro
	Condenser
	Battery
	Wind
	Solar
	Demand
	Link
)

func (k Kind) String() string {
	return [...]string{"thermal", "hydro", "condenser", "battery", "wind", "solar", "demand", "link"}[k]
}

// Machine tells whether the kind is synchronised (and is committed on or off).
func (k Kind) Machine() bool { return k <= Condenser }

// Step is one step of a convex marginal cost: up to ToMW, each MWh costs CostPerMWh.
type Step struct {
	ToMW       float64
	CostPerMWh float64
}

// Response is what a resource can add after a loss.
type Response struct {
	CapMW         Value
	PricePerMW    float64 // for holding 1 MW for an hour
	Shape         int     // index into Case.Shapes; −1: no response
	ShareOfOutput float64 // response held is at most this share of output; 0: no such limit
}

// Resource is one machine or converter, or Count identical ones.
type Resource struct {
	Name  string
	Kind  Kind
	Count int
	Line  int // in the YAML file

	// Machines.
	RatingMVA    float64
	InertiaS     float64 // H on own rating
	OnCostPerH   float64 // cost of being on, before the first MWh
	StartCost    float64
	MinUpH       float64
	MinDownH     float64
	RampMWPerH   float64 // 0: not limited
	Availability Value   // share of MaxMW there to be used; 0: out of service
	MustRun      bool
	LossesMW     float64 // a condenser's own consumption when on

	// Output of one unit. A battery's or demand's is fixed: MinMW = MaxMW = its schedule.
	MinMW Value
	MaxMW Value // wind and solar: the MW available
	Steps []Step
	// PricePerMWh, where set, replaces Steps by one hourly price (a link's import price).
	PricePerMWh Value
	CO2TPerMWh  float64

	Response Response
	Down     Response // downwards, for losses of load

	// Converters.
	PowerMW         float64 // of the converter: output, response and synthetic inertia share it
	EnergyMWh       float64 // a battery's, usable for the hold
	SyntheticMWs    Value   // kinetic-energy equivalent on offer
	SyntheticPerMWs float64 // price for holding 1 MW·s for an hour
	SyntheticS      float64 // filter of its rate of change; 0: as if it were inertia
	LostAsOne       bool    // the loss of one unit is a loss the system must survive
}

// Connection is a group of resources lost together, all units of each.
type Connection struct {
	Name      string
	Resources []int
}

// Relay switches load or generation off where frequency stays beyond its setting.
type Relay struct {
	Name      string
	Over      bool    // the level lies above nominal
	LevelHz   float64 // from nominal; 0: none
	HzPerS    float64 // rate of change, either way; 0: none
	WindowS   float64
	DelayS    float64
	ShedShare float64 // of the load
	LostMW    Value   // of generation
	LostMWs   Value   // and its kinetic energy
}

// Loss is a loss of a given size, possibly taking resources with it.
type Loss struct {
	Name      string
	MW        Value
	Resources []int
	Over      bool // load is lost: frequency rises
}
