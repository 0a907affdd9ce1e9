package dynamic

import (
	"fmt"
	"math"

	"evenkeel/limits"
)

// Kind says which published model a resource follows.
type Kind uint8

const (
	// Steam is a steam turbine with its governor: droop, governor lag, steam chest, and
	// reheat where HighPressureShare is below 1. Kundur, Power System Stability and
	// Control, 1994, section 11.1.2 (form from memory).
	Steam Kind = iota
	// Gas is a gas turbine: droop, governor, fuel and turbine lags in series (common
	// practice).
	Gas
	// Hydro is a hydraulic turbine: permanent and transient droop, dashpot, servomotor and
	// the water column (1 − TW·s)/(1 + TW/2·s), whose first move is the wrong way. Kundur
	// 1994, section 9.1 (form from memory).
	Hydro
	// Droop is a converter that follows frequency: measuring delay, deadband, slope, lag,
	// ramp.
	Droop
	// Step is a response set off at a level: nothing until then, after it a course in time;
	// ready again RestS after its end. A wind turbine's rotor that must recover is one too.
	Step
	// Synthetic is synthetic inertia: power in proportion to the filtered rate of change.
	Synthetic
	kinds
)

func (k Kind) String() string {
	return [...]string{"steam", "gas", "hydro", "droop", "step", "synthetic"}[k]
}

// Kinds lists all kinds.
func Kinds() []Kind {
	list := make([]Kind, kinds)
	for i := range list {
		list[i] = Kind(i)
	}
	return list
}

// Model is how one kind of resource answers frequency. Times are in seconds; a lag of 0
// is none. Percentages of droop and rate count on the unit's rating.
type Model struct {
	Name string
	Kind Kind

	// Governors and Droop: the whole rating for DroopPct percent of nominal frequency
	// beyond the deadband, times Gain (0: 1).
	DroopPct    float64
	Gain        float64
	DeadbandHz  float64 // response counts from its edge
	RatePctPerS float64 // of the valve, gate or converter; 0: not limited

	GovernorS float64 // governor lag; Hydro: of the pilot valve and servomotor

	ChestS            float64 // Steam
	ReheatS           float64
	HighPressureShare float64 // of the output before the reheater, 0 to 1

	FuelS    float64 // Gas
	TurbineS float64

	TransientDroopPct float64 // Hydro
	DashpotS          float64
	WaterS            float64 // water starting time

	DelayS float64 // Droop: measuring delay
	LagS   float64 // Droop

	LevelHz float64       // Step: deviation from nominal that sets it off
	Course  limits.Timing // Step: from then on; all of the response within DelayS + RampS
	RestS   float64       // Step: from the end of the course until it is ready again

	FilterS float64 // Synthetic: of the rate of change
}

// Defaults gives a kind's usual parameters.
//
//   - Steam: droop 5 %, governor lag 0.2 s, chest 0.3 s, reheat 7 s, high-pressure share
//     0.3 (Kundur 1994, section 11.1 and examples, from memory).
//   - Gas: droop 4 %, lags 0.4, 0.1 and 0.2 s (common practice).
//   - Hydro: water starting time 2 s, droop 5 %, and for it, on a machine of mechanical
//     starting time 8 s, transient droop (2.3 − (TW − 1)·0.15)·TW/TM = 54 % and dashpot
//     (5 − (TW − 1)·0.5)·TW = 9 s (Kundur 1994, section 9.1, from memory), servo 0.5 s.
//   - Droop: 0.1 s of measuring delay, lag 0.1 s, whole rating for 2 % (common practice).
//   - Step: at 0.3 Hz, out within 1.3 s, held for 30 s, ready again after 15 min: the
//     slowest variant of the Nordic fast frequency reserve (ENTSO-E, technical
//     requirements, read).
//   - Synthetic: filter of 0.1 s (common practice).
//   - Deadband of governors 10 mHz: Regulation (EU) 2017/1485, annex V (read: insensitivity
//     and deadband together in Continental Europe and the Nordic area).
func Defaults(k Kind) Model {
	m := Model{Kind: k, Gain: 1}
	switch k {
	case Steam:
		m.DroopPct, m.DeadbandHz, m.GovernorS, m.ChestS, m.ReheatS, m.HighPressureShare = 5, 0.01, 0.2, 0.3, 7, 0.3
	case Gas:
		m.DroopPct, m.DeadbandHz, m.GovernorS, m.FuelS, m.TurbineS = 4, 0.01, 0.4, 0.1, 0.2
	case Hydro:
		m.DroopPct, m.DeadbandHz, m.GovernorS, m.TransientDroopPct, m.DashpotS, m.WaterS = 5, 0.01, 0.5, 54, 9, 2
	case Droop:
		m.DroopPct, m.DeadbandHz, m.DelayS, m.LagS = 2, 0.01, 0.1, 0.1
	case Step:
		m.LevelHz, m.Course, m.RestS = 0.3, limits.Timing{DelayS: 0.3, RampS: 1, HoldS: 30}, 900
	case Synthetic:
		m.FilterS = 0.1
	}
	return m
}

// leastLagS is the shortest lag that is simulated: shorter ones only cost steps.
const leastLagS = 0.005

// Check reports what makes a model meaningless.
func (m *Model) Check() error {
	for _, v := range []struct {
		name string
		x    float64
	}{
		{"gain", m.Gain}, {"deadband", m.DeadbandHz}, {"rate limit", m.RatePctPerS}, {"governor lag", m.GovernorS}, {"steam chest lag", m.ChestS}, {"reheat time", m.ReheatS},
		{"high-pressure share", m.HighPressureShare}, {"fuel lag", m.FuelS}, {"turbine lag", m.TurbineS}, {"transient droop", m.TransientDroopPct}, {"dashpot time", m.DashpotS},
		{"water starting time", m.WaterS}, {"measuring delay", m.DelayS}, {"lag", m.LagS}, {"rest", m.RestS}, {"filter", m.FilterS},
	} {
		if !(v.x >= 0) || math.IsInf(v.x, 0) {
			return fmt.Errorf("the %s is %v; it must be 0 or more", v.name, v.x)
		}
		if v.x > 0 && v.x < leastLagS {
			switch v.name {
			case "governor lag", "steam chest lag", "reheat time", "fuel lag", "turbine lag", "measuring delay", "lag", "filter", "dashpot time", "water starting time":
				return fmt.Errorf("the %s is %v s; it must be 0 or at least %g s", v.name, v.x, leastLagS)
			}
		}
	}
	switch m.Kind {
	case Steam, Gas, Hydro, Droop:
		if !(m.DroopPct > 0) {
			return fmt.Errorf("the droop is %v %%; it must be above 0", m.DroopPct)
		}
	}
	switch m.Kind {
	case Steam:
		if m.HighPressureShare > 1 {
			return fmt.Errorf("the high-pressure share is %v; it must be at most 1", m.HighPressureShare)
		}
	case Hydro:
		switch {
		case m.TransientDroopPct > 0 && m.TransientDroopPct < m.DroopPct:
			return fmt.Errorf("the transient droop is %v %%, below the permanent one of %v %%; it must be at least that, or 0", m.TransientDroopPct, m.DroopPct)
		case m.TransientDroopPct > 0 && m.DashpotS == 0:
			return fmt.Errorf("the transient droop has no dashpot time")
		case m.GovernorS < 0.02:
			return fmt.Errorf("the governor lag of a hydro model is %v s; it must be at least 0.02 s", m.GovernorS)
		}
	case Step:
		if !(m.LevelHz > 0) {
			return fmt.Errorf("the level is %v Hz from nominal; it must be above 0", m.LevelHz)
		}
		if _, err := m.Course.Shape(); err != nil {
			return err
		}
	case Synthetic:
		if m.FilterS < 0.01 {
			return fmt.Errorf("the filter is %v s; a rate of change needs at least 0.01 s", m.FilterS)
		}
	}
	if m.RatePctPerS > 0 && m.Kind != Step && m.Kind != Synthetic {
		lag := m.GovernorS
		if m.Kind == Droop {
			lag = m.LagS
		}
		if lag == 0 {
			return fmt.Errorf("a rate limit needs a lag to act on (governor lag, or lag of a converter)")
		}
	}
	return nil
}
