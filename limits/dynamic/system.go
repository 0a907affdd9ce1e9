package dynamic

import "evenkeel/limits"

// System is what is online at the start.
type System struct {
	NominalHz       float64
	LoadMW          float64
	DampingPctPerHz float64 // of the load
	InertiaMWs      float64 // all of it, the load's own included

	Units    []Unit
	Promises []Promise
	Relays   []Relay
}

// Unit is N identical units that answer by a model. Numbers are those of one.
type Unit struct {
	Name     string
	Model    *Model
	N        float64
	RatingMW float64 // that droop and rate limits count on
	UpMW     float64 // the most that it adds: the response it holds, within its headroom
	DownMW   float64 // the most that it takes off
	// SyntheticMWs is the kinetic-energy equivalent of a Synthetic one; UpMW and DownMW
	// bound its power.
	SyntheticMWs float64
}

// Promise is a response that follows its shape, whatever frequency does: from the first loss
// of infeed on, or, taken off, from the first loss of load or export on.
type Promise struct {
	Name  string
	Shape limits.Shape
	MW    float64 // negative: taken off
}

// Relay acts once, when frequency has been beyond its setting for DelayS without a break.
type Relay struct {
	Name    string
	Over    bool    // LevelHz lies above nominal
	LevelHz float64 // deviation from nominal; 0: no level
	HzPerS  float64 // or a rate of change, either way, over WindowS
	WindowS float64
	DelayS  float64

	ShedShare  float64 // share of the load at the start that is switched off
	LostMW     float64 // generation that is switched off,
	InertiaMWs float64 // and its kinetic energy
}

// Loss is what is lost at an instant; negative MW are load or export lost.
type Loss struct {
	Name       string
	AtS        float64
	MW         float64
	LoadMW     float64 // of it load, which damps no more
	InertiaMWs float64
	Units      []Gone // of System.Units, by number of units
	Promises   []Gone // of System.Promises, by MW
}

// Gone is a part of the system that a loss takes with it.
type Gone struct {
	Index int
	Much  float64
}

// Options of a simulation. The zero value is usable.
type Options struct {
	WindowS   float64 // over which RoCoF is measured; 0: instantaneous
	SteadyByS float64 // steady deviation counts from here, seconds after the first loss,
	UntilS    float64 // to here; the simulation ends at the later of this and 60 s
	EndS      float64 // ends the run sooner, for a look at the beginning; 0: it doesn't
	TolHz     float64 // of a step; 0: DefaultTolHz
	MaxStepS  float64 // 0: no other bound than the tolerance
	// StillHzPerS is the rate of change below which, with nothing else to come, a run ends: what
	// moves so slowly has no say in the outcome. 0: DefaultStillHzPerS.
	StillHzPerS float64
	// SteadyHz, if given, lets a run end from SteadyByS on where, with nothing else to come, the
	// deviation would not reach it in a minute at the rate it moves at.
	SteadyHz float64
	Record   bool // keep what each resource delivers; it then runs to the end
}

// DefaultStillHzPerS lets a run end where nothing would move by a millihertz in an hour.
const DefaultStillHzPerS = 3e-7

// DefaultTolHz bounds the error of one step.
const DefaultTolHz = 5e-6

// LeastHorizonS is how long a simulation lasts at least.
const LeastHorizonS = 60

// Outcome is what a simulation measures. Deviations below nominal and above it are both
// counted positive. A result is overwritten by the next run of its Simulator.
type Outcome struct {
	RoCoFHzPerS, RoCoFS float64 // steepest fall over the window, and its start
	RiseHzPerS, RiseS   float64 // steepest rise, counted from below upwards
	InstantHzPerS       float64 // steepest change at any instant, either way

	NadirHz, NadirS float64 // deepest below nominal
	PeakHz, PeakS   float64 // highest above nominal

	SteadyHz     float64 // largest deviation below nominal from SteadyByS to UntilS
	SteadyOverHz float64 // above nominal
	EndHz        float64 // deviation below nominal at the end, negative above

	Points     []Point     // deviation below nominal
	Happenings []Happening // what was lost, set off, shed or tripped, in order
	Steps      int

	// With Options.Record:
	Times      []float64   // s
	Deviation  []float64   // Hz below nominal
	MW         [][]float64 // one a source (Units, then Promises), one an instant
	EnergyMWs  []float64   // delivered by each source
	LostMWs    float64     // ∫ of what was lost
	DampedMWs  float64     // ∫ D·x
	KineticMWs float64     // 2·Σ E/f0·Δx: what the stored energy gave, as the swing equation counts it
}

// Point is a corner of the trajectory.
type Point struct{ S, Hz, HzPerS float64 }

// Happening is one discrete thing.
type Happening struct {
	AtS  float64
	Name string
	What string // lost, set off, shed, tripped, ready
	MW   float64
}

// Lump joins units with equal parameters and equal room.
func Lump(units []Unit) []Unit {
	var out []Unit
	for _, u := range units {
		found := false
		for i := range out {
			o := &out[i]
			if o.Model == u.Model && o.RatingMW == u.RatingMW && o.UpMW == u.UpMW && o.DownMW == u.DownMW && o.SyntheticMWs == u.SyntheticMWs {
				o.N += u.N
				found = true
				break
			}
		}
		if !found && u.N > 0 {
			out = append(out, u)
		}
	}
	return out
}
