package limits

import "math"

// Floor is the least kinetic energy that must be left after a loss, MW·s: with it, or with any more
// of it, every limit holds, the response left being as it is. +Inf: no kinetic energy is enough.
type Floor struct {
	MWs float64
	By  Kind           // the limit that asks for most
	At  Instant        // where that limit is met with nothing to spare
	Of  [Kinds]float64 // what each limit asks for by itself
}

// Floors finds floors. It is prepared once for a corridor and a set of shapes and asked often; it
// is not for concurrent use.
type Floors struct {
	scan *Scan
}

// NewFloors prepares floors of a corridor for responses of the given shapes.
func NewFloors(l Limits, shapes []Shape) *Floors {
	return &Floors{NewScan(l, shapes, 0, 0)}
}

// floorTolMW is by how much response and damping may miss the loss in the steady band: rounding of
// a dispatch that holds exactly what it needs.
const floorTolMW = 1e-5

// Least gives the floor for a loss of lossMW that leaves responseMW of each shape and
// dampingMWPerHz of the load's damping.
//
// At a given damping rate a0 the worst instants do not depend on the kinetic energy E, so one scan
// gives what each limit asks for. The rate itself is D·f0/(2·E). Asked for with the rate of some E,
// a limit asks for more the larger E is; so from a0 = 0 on, which asks for too much, each round's
// answer gives the next round's rate, and the answers fall to the largest E that asks for just
// itself. Above it every E asks for less than itself: that is what makes it a floor, though some
// smaller E may do as well, where a slower fall would come back too late.
func (f *Floors) Least(lossMW float64, responseMW []float64, dampingMWPerHz float64) Floor {
	if !(lossMW > 0) {
		return Floor{}
	}
	s := f.scan
	s.dampingMWPerHz = dampingMWPerHz
	s.damp(0)
	var w [Worsts]Worst
	s.Worst(lossMW, 0, responseMW, &w)
	short := w[WorstBalance].ExcessMW > floorTolMW+1e-9*lossMW
	if short { // then each limit is on its own
		s.WorstAlone(lossMW, 0, responseMW, &w)
	}
	var out Floor
	var at [Kinds]Instant
	out.Of[RoCoF], at[RoCoF] = s.asks(w[WorstRoCoF]), w[WorstRoCoF].At
	out.Of[Nadir], at[Nadir] = s.settle(w[WorstNadir], short)
	if short {
		out.Of[Steady], at[Steady] = math.Inf(1), w[WorstBalance].At
	} else {
		out.Of[Steady], at[Steady] = s.settle(w[WorstReturn], short)
	}
	for k, mws := range out.Of {
		if k == 0 || mws > out.MWs {
			out.MWs, out.By, out.At = mws, Kind(k), at[k]
		}
	}
	return out
}

// Most gives a bound that Least cannot pass, without its rounds: the floor without damping.
func (f *Floors) Most(lossMW float64, responseMW []float64, dampingMWPerHz float64) float64 {
	if !(lossMW > 0) {
		return 0
	}
	s := f.scan
	s.dampingMWPerHz = dampingMWPerHz
	s.damp(0)
	var w [Worsts]Worst
	s.Worst(lossMW, 0, responseMW, &w)
	if w[WorstBalance].ExcessMW > floorTolMW+1e-9*lossMW {
		return math.Inf(1)
	}
	return max(s.asks(w[WorstRoCoF]), s.asks(w[WorstNadir]), s.asks(w[WorstReturn]))
}

// asks gives the kinetic energy that an instant found without any asks for.
func (s *Scan) asks(w Worst) float64 {
	perMWs, lossS := 2*s.limits.MaxHzPerS/s.limits.NominalHz, 1.0
	if w.At.Kind != RoCoF || w.At.ToS > w.At.FromS {
		a0 := s.a0
		if w.At.Kind == RoCoF {
			a0 = 0
		}
		perMWs, lossS = 2*s.limits.dropHz(w.At.Kind)/s.limits.NominalHz, decayedS(w.At.ToS-w.At.FromS, a0)
	}
	return max(w.ExcessMW*lossS/perMWs, 0)
}

const (
	floorRounds = 5000 // few are needed save where a limit is nearly touched over a range of kinetic energies
	floorWithin = 1e-9 // of the answer
)

// settle lets the damping rate and what a limit asks for agree. It starts from the worst instant
// without damping, the net imbalance of which the scan still holds. Every round errs on the safe
// side.
func (s *Scan) settle(w Worst, alone bool) (mws float64, at Instant) {
	s.damp(0)
	mws, at = s.asks(w), w.At
	if s.dampingMWPerHz <= 0 {
		return mws, at
	}
	for range floorRounds {
		if mws <= 0 {
			break
		}
		s.damp(s.dampingMWPerHz * s.limits.NominalHz / (2 * mws))
		nadir, back := s.sweep(alone || s.by == 0)
		next := s.worst(Nadir, nadir, 0)
		if at.Kind == Steady {
			next = s.worst(Steady, back, 0)
		}
		before := mws
		mws, at = min(s.asks(next), mws), next.At
		if before-mws <= floorWithin*before {
			break
		}
	}
	return mws, at
}
