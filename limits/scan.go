package limits

import (
	"math"
	"slices"
)

// LeastHorizonS is how long after a loss the scan looks for the nadir at least, in
// seconds (common practice: primary response has acted and restoration not begun).
const LeastHorizonS = 60

// MaxDampingPerS caps the damping rate a0 that a scan uses, in 1/s. Any lower rate is
// safe; the cap only keeps the arithmetic sound where next to no inertia is on offer.
const MaxDampingPerS = 1e3

// Scan finds the instants at which a state of the system comes nearest to breaking its
// limits after a loss, exactly and in continuous time: net imbalance is linear between
// the merged knots of all shapes, so that deviation has a closed form there. It is
// prepared once for an hour and asked often; it is not for concurrent use.
//
// RoCoF is watched up to SteadyUntilS, at least for one window; the nadir at least for
// LeastHorizonS; the steady band from SteadyByS to SteadyUntilS. Jumps at either end of
// those times count with their inner side.
type Scan struct {
	limits         Limits
	shapes         []Shape
	a0             float64
	dampingMWPerHz float64

	// Nodes are the merged knots up to the horizon; where a shape jumps, two nodes share
	// one instant. Piece j runs from node j to node j+1.
	atS    []float64
	left   []bool    // whether a node stands for the side before a jump
	shares []float64 // shape by shape, one share a node
	pieces []piece
	by     int // first node at SteadyByS
	until  int // first node at SteadyUntilS
	steep  int // first node at the end of the time in which RoCoF is watched

	withdraws bool
	windows   []window // starts of RoCoF windows between which all is smooth
	instants  instants // for RoCoF without a window
	balance   instants // for the balance in the steady band

	net    []float64 // scratch: net imbalance at each node, MW
	cum    []float64 // scratch: its undamped integral from the loss on, MW·s
	starts []onset   // scratch
}

// piece is one linear piece of the net imbalance with what its closed form needs.
type piece struct {
	h     float64 // length, s; 0 at a jump
	decay float64 // e^(−a0·h)
	c1    float64 // ∫ e^(−a0(h−x)) dx
	c2    float64 // ∫ e^(−a0(h−x))·x/h dx
}

// Worst is the instant at which a limit is nearest to being broken, or is broken worst.
type Worst struct {
	At       Instant
	ExcessMW float64 // MW of the loss not covered there, see Row.ExcessMW
}

// Indices into what Scan.Worst fills in.
const (
	WorstRoCoF   = iota
	WorstNadir   // the lowest frequency
	WorstReturn  // the lowest frequency from SteadyByS on
	WorstBalance // the equilibrium from SteadyByS on
	Worsts       = 4
)

// NewScan prepares the scan of one hour. a0 (1/s) is a lower bound of D·f0/(2·E) for
// every state that will be asked about; 0 leaves damping out. dampingMWPerHz is D.
func NewScan(l Limits, shapes []Shape, a0, dampingMWPerHz float64) *Scan {
	s := &Scan{limits: l, shapes: shapes, dampingMWPerHz: dampingMWPerHz}
	byS := math.Max(l.SteadyByS, 0)
	untilS := math.Max(l.SteadyUntilS, byS)
	steepS := math.Max(untilS, l.WindowS)
	horizonS := math.Max(steepS, LeastHorizonS)

	s.merge(horizonS, 0, byS, untilS, steepS, math.Max(l.WindowS, 0))
	s.pieces = make([]piece, len(s.atS)-1)
	for j := range s.pieces {
		s.pieces[j].h = s.atS[j+1] - s.atS[j]
	}
	s.damp(a0)
	s.by = slices.Index(s.atS, byS)
	s.until = slices.Index(s.atS, untilS)
	s.steep = slices.Index(s.atS, steepS)

	s.withdraws = slices.ContainsFunc(shapes, Shape.Withdraws)
	switch {
	case !(l.WindowS > 0):
		s.instants = s.sidesBetween(0, s.until)
	case s.withdraws:
		s.windows = s.windowStarts(l.WindowS)
	}
	s.balance = s.sidesBetween(s.by, s.until)

	s.net = make([]float64, len(s.atS))
	s.cum = make([]float64, len(s.atS))
	s.starts = make([]onset, 0, len(s.atS)+1)
	return s
}

// damp sets the damping rate a0, 1/s.
func (s *Scan) damp(a0 float64) {
	if !(a0 > 0) {
		a0 = 0
	}
	s.a0 = math.Min(a0, MaxDampingPerS)
	for j := range s.pieces {
		p := &s.pieces[j]
		p1, p2 := pieceWeights(s.a0 * p.h)
		p.decay, p.c1, p.c2 = math.Exp(-s.a0*p.h), p.h*p1, p.h*p2
	}
}

// merge lays out the nodes: the knots of all shapes and further instants, up to and with
// the horizon.
func (s *Scan) merge(horizonS float64, further ...float64) {
	times := append(further, horizonS)
	for _, sh := range s.shapes {
		for _, p := range sh.points {
			if p.s < horizonS {
				times = append(times, p.s)
			}
		}
	}
	slices.Sort(times)
	times = slices.Compact(times)
	for _, t := range times {
		jump := t > 0 && slices.ContainsFunc(s.shapes, func(sh Shape) bool { return sh.Before(t) != sh.At(t) })
		if jump {
			s.atS, s.left = append(s.atS, t), append(s.left, true)
		}
		if !jump || t < horizonS {
			s.atS, s.left = append(s.atS, t), append(s.left, false)
		}
	}
	for _, sh := range s.shapes {
		for j, t := range s.atS {
			if s.left[j] {
				s.shares = append(s.shares, sh.Before(t))
			} else {
				s.shares = append(s.shares, sh.At(t))
			}
		}
	}
}

// Row gives the row that keeps a limit at an instant, with the damping of the scan.
func (s *Scan) Row(at Instant) Row { return s.limits.Row(at, s.shapes, s.a0) }

// Worst fills out with the worst instants after the loss of lossMW that leaves inertiaMWs of
// kinetic energy and responseMW of each shape. Together they suffice: where none has an
// excess, every limit holds. Every instant reported is one whose Row has the excess
// reported. It does not allocate.
//
// A deviation within the steady band at SteadyByS stays there for as long as response and
// damping at the edge of the band carry the loss: beyond it the imbalance would drive it
// back. So the return is looked at at SteadyByS alone, the balance up to SteadyUntilS, and
// the nadir outside of those times.
func (s *Scan) Worst(lossMW, inertiaMWs float64, responseMW []float64, out *[Worsts]Worst) {
	s.worstOf(lossMW, inertiaMWs, responseMW, out, s.by == 0)
}

// WorstAlone is Worst with each limit on its own: the nadir and the return to the steady
// band are looked at at all times, for use where the steady band is not kept.
func (s *Scan) WorstAlone(lossMW, inertiaMWs float64, responseMW []float64, out *[Worsts]Worst) {
	s.worstOf(lossMW, inertiaMWs, responseMW, out, true)
}

func (s *Scan) worstOf(lossMW, inertiaMWs float64, responseMW []float64, out *[Worsts]Worst, alone bool) {
	net := s.net
	for j := range net {
		net[j] = lossMW
	}
	for i, r := range responseMW[:len(s.shapes)] {
		if r == 0 {
			continue
		}
		shares := s.shares[i*len(net):][:len(net)]
		for j := range net {
			net[j] -= r * shares[j]
		}
	}

	switch {
	case !(s.limits.WindowS > 0):
		at, mw := s.instants.least(responseMW)
		out[WorstRoCoF] = Worst{
			Instant{Kind: RoCoF, Before: at.before, FromS: at.s, ToS: at.s},
			lossMW - mw - 2*s.limits.MaxHzPerS/s.limits.NominalHz*inertiaMWs,
		}
	case s.withdraws:
		out[WorstRoCoF] = s.worst(RoCoF, s.steepest(), inertiaMWs)
	default:
		out[WorstRoCoF] = s.worst(RoCoF, s.steepestFirst(), inertiaMWs)
	}

	nadir, back := s.sweep(alone)
	out[WorstNadir] = s.worst(Nadir, nadir, inertiaMWs)
	out[WorstReturn] = s.worst(Steady, back, inertiaMWs)

	at, mw := s.balance.least(responseMW)
	out[WorstBalance] = Worst{
		Instant{Kind: Steady, Balance: true, Before: at.before, FromS: at.s, ToS: at.s},
		lossMW - mw - s.limits.SteadyHz*s.dampingMWPerHz,
	}
}

// span is an interval and the weighted integral of net imbalance over it, MW·s.
type span struct {
	mws, fromS, toS float64
}

// worst turns a span into the excess of its row.
func (s *Scan) worst(k Kind, sp span, inertiaMWs float64) Worst {
	a0 := s.a0
	if k == RoCoF {
		a0 = 0
	}
	free := 2 * s.limits.dropHz(k) / s.limits.NominalHz * inertiaMWs
	w := Worst{Instant{Kind: k, FromS: sp.fromS, ToS: sp.toS}, math.Inf(-1)}
	// An interval below the clock's rounding holds no loss to speak of.
	if sp.toS > sp.fromS {
		w.ExcessMW = (sp.mws - free) / decayedS(sp.toS-sp.fromS, a0)
	}
	return w
}
