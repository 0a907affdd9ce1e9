package solve

import "evenkeel/limits/dynamic"

// ClosedTolHz is by how much a closed-loop simulation may pass a limit, in Hz or Hz/s: its own
// error.
const ClosedTolHz = closedTolHz

// ClosedOptions are those with which mixes are proven in closed loop.
func (s *Solver) ClosedOptions() dynamic.Options { return s.closedOptions() }

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
