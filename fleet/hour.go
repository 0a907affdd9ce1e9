package fleet

import "time"

// Hour is one hour of a case in plain numbers: nothing in it refers to a series.
type Hour struct {
	Index int
	Time  time.Time

	DemandMW       float64
	DampingMWPerHz float64 // at full demand
	LoadInertiaMWs float64
	// LeastInertiaMWs must be online, the load's own included, whatever the limits need; 0: none.
	LeastInertiaMWs float64
	// MostInertiaMWs is what bounds of damping suppose to be online at least, so that hours that
	// differ in their units can have the same rows; 0: as the units have it.
	MostInertiaMWs float64

	Units  []Unit     // one a resource, same index as Case.Resources
	Losses []HourLoss // every loss the hour must survive
}

// Unit is one resource in one hour; numbers are those of a single one of Count.
type Unit struct {
	Count   int  // units in service; 0: out
	Commit  bool // on or off is a decision; false: always there
	MustRun bool

	OnCost float64 // currency per hour when on, start cost spread included

	MinMW, MaxMW float64 // output when on
	// HeadMW bounds output + response (if FromHead) + HeadPerMWs × synthetic inertia.
	HeadMW     float64
	HeadPerMWs float64
	FromHead   bool

	Steps []Step // convex marginal cost, counted from 0 MW; the last step also holds beyond its ToMW

	InertiaMWs float64 // when on

	ResponseCapMW float64
	ResponsePerMW float64
	Shape         int     // −1: none
	ShareOfOutput float64 // 0: none

	// Response downwards: at most DownCapMW, and no more than the output lies above FootMW.
	DownCapMW float64
	DownPerMW float64
	DownShape int // where DownCapMW > 0
	FootMW    float64

	SyntheticCapMWs float64
	SyntheticPerMWs float64

	CO2TPerMWh float64
	Renewable  bool // unused MaxMW counts as curtailed
}

// HourLoss is one loss. The MW lost are FixedMW plus the output of the members; the
// members' inertia and response are gone too.
type HourLoss struct {
	Name    string
	FixedMW float64
	Members []int // indices into Units
	Single  bool  // one unit of Members[0] is lost; otherwise all units of every member
	// Over: frequency rises. FixedMW are load lost, members count with what they draw.
	Over bool
}

// HourOptions change how a case is resolved into hours.
type HourOptions struct {
	// StartSpreadH, if above 0, adds StartCost/StartSpreadH to the hourly cost of being on.
	StartSpreadH float64
}
