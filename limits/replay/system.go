package replay

import (
	"fmt"
	"math"
	"slices"
	"sync"
)

// Knot is one corner of a response shape: Share of the MW held is delivered S seconds
// after the loss. A shape delivers nothing before its first knot, runs straight between
// knots, jumps where two knots have the same S, and keeps its last share for ever.
type Knot struct{ S, Share float64 }

// Limits is what has to be known of a corridor to measure a trajectory against it.
type Limits struct {
	NominalHz    float64 // f0
	WindowS      float64 // over which the rate of change is measured; 0 = instantaneous
	SteadyByS    float64 // by when the steady deviation must be reached
	SteadyUntilS float64 // how long it must be held; taken as SteadyByS if earlier
}

// leastHorizonS is how long a replay lasts at least.
const leastHorizonS = 60

// stepTolHz bounds what the cubic between two steps may be off by.
const stepTolHz = 1e-9

// System is a corridor and a set of response shapes, prepared once for any number of
// replays. It is safe for concurrent use.
type System struct {
	lim      Limits
	horizonS float64
	tolHz    float64

	// times bound the segments: segment i runs from times[i] to times[i+1].
	times []float64
	// shares[s][2i] and shares[s][2i+1] are what shape s delivers just after the
	// start and just before the end of segment i.
	shares [][]float64
	// steadyFrom and steadyTo are the segments that start at SteadyByS and at SteadyUntilS.
	steadyFrom, steadyTo int

	pool sync.Pool // of *scratch
}

// NewSystem prepares shapes, one list of knots each, for replays measured by l. The
// replay lasts until the latest of 60 s, l.SteadyUntilS and l.WindowS; later knots
// are out of sight.
//
// It panics if a nominal frequency is not above 0, a time is negative, a number is not
// finite, or the knots of a shape are not in order of time: a case is vetted before.
func NewSystem(l Limits, shapes [][]Knot) *System {
	mustBeSound(l, shapes)
	l.SteadyUntilS = max(l.SteadyUntilS, l.SteadyByS)
	s := &System{
		lim:      l,
		horizonS: max(leastHorizonS, max(l.SteadyUntilS, l.WindowS)),
		tolHz:    stepTolHz,
	}
	s.times = []float64{0, l.SteadyByS, l.SteadyUntilS, s.horizonS}
	for _, knots := range shapes {
		for _, k := range knots {
			if k.S < s.horizonS {
				s.times = append(s.times, k.S)
			}
		}
	}
	slices.Sort(s.times)
	s.times = slices.Compact(s.times)
	s.steadyFrom, _ = slices.BinarySearch(s.times, l.SteadyByS)
	s.steadyTo, _ = slices.BinarySearch(s.times, l.SteadyUntilS)

	segments := len(s.times) - 1
	s.shares = make([][]float64, len(shapes))
	for i, knots := range shapes {
		row := make([]float64, 2*segments)
		for j := range segments {
			_, row[2*j] = around(knots, s.times[j])
			row[2*j+1], _ = around(knots, s.times[j+1])
		}
		s.shares[i] = row
	}
	s.pool.New = func() any { return new(scratch) }
	return s
}

// around gives the share just before and just after t.
func around(knots []Knot, t float64) (before, after float64) {
	// Knots [0, lo) lie before t, [lo, hi) at t, [hi, n) after it.
	lo := 0
	for lo < len(knots) && knots[lo].S < t {
		lo++
	}
	hi := lo
	for hi < len(knots) && knots[hi].S == t {
		hi++
	}
	if lo == hi { // no corner here: one value for both, so that no false jump arises
		switch {
		case lo == 0:
			return 0, 0
		case lo == len(knots):
			last := knots[lo-1].Share
			return last, last
		}
		a, b := knots[lo-1], knots[lo]
		v := a.Share + (b.Share-a.Share)*(t-a.S)/(b.S-a.S)
		return v, v
	}
	if lo > 0 {
		before = knots[lo].Share
	}
	return before, knots[hi-1].Share
}

func mustBeSound(l Limits, shapes [][]Knot) {
	// The comparisons are written so that NaN fails them.
	ok := func(v float64) bool { return v >= 0 && v <= math.MaxFloat64 }
	if !ok(l.NominalHz) || l.NominalHz == 0 {
		panic(fmt.Sprintf("replay: nominal frequency %v Hz", l.NominalHz))
	}
	for _, v := range []float64{l.WindowS, l.SteadyByS, l.SteadyUntilS} {
		if !ok(v) {
			panic(fmt.Sprintf("replay: time %v s in the limits", v))
		}
	}
	for i, knots := range shapes {
		from := 0.0
		for _, k := range knots {
			if !ok(k.S) || k.S < from {
				panic(fmt.Sprintf("replay: shape %d has a knot at %v s after one at %v s", i, k.S, from))
			}
			if !ok(math.Abs(k.Share)) {
				panic(fmt.Sprintf("replay: shape %d has a share of %v", i, k.Share))
			}
			from = k.S
		}
	}
}
