package limits_test

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/limits"
	"evenkeel/limits/replay"
)

// state is a corridor and a system after a loss, drawn at random.
type state struct {
	l       limits.Limits
	shapes  []limits.Shape
	loss    float64
	inertia float64
	damping float64
	held    []float64
}

// drawState draws one. rising: no shape ever withdraws.
func drawState(t *rapid.T, damped, rising bool) state {
	s := state{
		l: limits.Limits{NominalHz: rapid.SampledFrom([]float64{50, 60}).Draw(t, "f0"), MaxHzPerS: 1, NadirHz: 0.8, SteadyHz: 0.5,
			WindowS:   rapid.SampledFrom([]float64{0, 0.1, 0.5, 1}).Draw(t, "window"),
			SteadyByS: rapid.SampledFrom([]float64{10, 15, 30}).Draw(t, "by")},
		loss:    rapid.Float64Range(10, 2000).Draw(t, "loss"),
		inertia: math.Exp(rapid.Float64Range(math.Log(300), math.Log(300_000)).Draw(t, "ln inertia")),
	}
	s.l.SteadyUntilS = s.l.SteadyByS + rapid.SampledFrom([]float64{1, 30, 300}).Draw(t, "for")
	if damped {
		s.damping = rapid.Float64Range(0, 800).Draw(t, "damping")
	}
	for range rapid.IntRange(1, 4).Draw(t, "shapes") {
		var knots []limits.Knot
		at, share := 0, 0.0
		n := rapid.IntRange(1, 5).Draw(t, "knots")
		for i := range n {
			gaps := []int{0, 10, 50, 100, 400, 1500}
			if i >= 2 && knots[i-1].S == knots[i-2].S { // no third knot at one instant
				gaps = gaps[1:]
			}
			at += rapid.SampledFrom(gaps).Draw(t, "gap")
			from := -0.5
			if rising {
				from = share
			}
			share = rapid.Float64Range(from, 1).Draw(t, "share")
			if i == n-1 && share <= 0 {
				share = 0.1
			}
			knots = append(knots, limits.Knot{S: float64(at) / 100, Share: share})
		}
		shape, err := limits.NewShape(knots)
		if err != nil {
			t.Fatal(err)
		}
		s.shapes = append(s.shapes, shape)
		s.held = append(s.held, rapid.Float64Range(0, 1.2*s.loss).Draw(t, "held"))
	}
	return s
}

// rate is the true D·f0/(2·E).
func (s state) rate() float64 { return s.damping * s.l.NominalHz / (2 * s.inertia) }

func (s state) worst(l limits.Limits, a0 float64) [limits.Worsts]limits.Worst {
	var out [limits.Worsts]limits.Worst
	limits.NewScan(l, s.shapes, a0, s.damping).WorstAlone(s.loss, s.inertia, s.held, &out)
	return out
}

// together gives the worst instants that suffice together.
func (s state) together(l limits.Limits, a0 float64) [limits.Worsts]limits.Worst {
	var out [limits.Worsts]limits.Worst
	limits.NewScan(l, s.shapes, a0, s.damping).Worst(s.loss, s.inertia, s.held, &out)
	return out
}

// least gives the tightest value of one limit that the rows hold; +Inf if none does.
func (s state) least(k limits.Kind, a0 float64) float64 {
	holds := func(x float64) bool {
		l := s.l
		switch k {
		case limits.RoCoF:
			l.MaxHzPerS = x
			return s.worst(l, a0)[limits.WorstRoCoF].ExcessMW <= 0
		case limits.Nadir:
			l.NadirHz = x
			return s.worst(l, a0)[limits.WorstNadir].ExcessMW <= 0
		}
		l.SteadyHz = x
		w := s.worst(l, a0)
		return w[limits.WorstReturn].ExcessMW <= 0 && w[limits.WorstBalance].ExcessMW <= 0
	}
	if !holds(1e7) {
		return math.Inf(1)
	}
	lo, hi := 0.0, 1e7
	for range 90 {
		if mid := lo + (hi-lo)/2; holds(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	return hi
}

func (s state) replay() replay.Outcome {
	var knots [][]replay.Knot
	for _, sh := range s.shapes {
		var list []replay.Knot
		for _, k := range sh.Knots() {
			list = append(list, replay.Knot{S: k.S, Share: k.Share})
		}
		knots = append(knots, list)
	}
	l := replay.Limits{NominalHz: s.l.NominalHz, WindowS: s.l.WindowS, SteadyByS: s.l.SteadyByS, SteadyUntilS: s.l.SteadyUntilS}
	return replay.NewSystem(l, knots).Run(replay.Event{LossMW: s.loss, InertiaMWs: s.inertia, DampingMWPerHz: s.damping, ResponseMW: s.held})
}

func values(o replay.Outcome) [limits.Kinds]float64 {
	return [limits.Kinds]float64{o.RoCoFHzPerS, o.NadirHz, o.SteadyHz}
}

// A state whose rows hold never leaves its corridor in the replay, whatever its shapes and
// its damping, so long as a0 is no more than the true rate.
func TestRowsThatHoldReplaySafely(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawState(t, true, false)
		a0 := rapid.SampledFrom([]float64{0, 0.3, 0.9, 1}).Draw(t, "share of the rate") * s.rate()
		got := values(s.replay())
		for k, v := range got {
			if limit := s.least(limits.Kind(k), a0); !(v <= limit*(1+1e-7)+1e-7) {
				t.Errorf("%s: rows hold at %.9g, the replay reaches %.9g", limits.Kind(k), limit, v)
			}
		}
	})
}

// The instants of Worst suffice together: where none has an excess the replay keeps every
// limit, though the nadir and the return are looked at less than each on its own.
func TestRowsSufficeTogether(t *testing.T) {
	held, fewer := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		s := drawState(t, true, false)
		a0 := rapid.SampledFrom([]float64{0, 0.3, 0.9, 1}).Draw(t, "share of the rate") * s.rate()
		// Limits near to what the state needs, so that they hold about half of the time.
		for k, x := range []*float64{&s.l.MaxHzPerS, &s.l.NadirHz, &s.l.SteadyHz} {
			if v := values(s.replay())[k]; v > 0 && !math.IsInf(v, 1) {
				*x = v * rapid.Float64Range(0.95, 4).Draw(t, "of the replay")
			}
		}
		s.l.SteadyHz = math.Min(s.l.SteadyHz, s.l.NadirHz)
		for _, w := range s.together(s.l, a0) {
			if w.ExcessMW > 0 {
				return
			}
		}
		held++
		for _, w := range s.worst(s.l, a0) {
			if w.ExcessMW > 0 {
				fewer++
				break
			}
		}
		got := values(s.replay())
		for k, limit := range [limits.Kinds]float64{s.l.MaxHzPerS, s.l.NadirHz, s.l.SteadyHz} {
			if got[k] > limit*(1+1e-7)+1e-7 {
				t.Errorf("%s: rows hold at %.9g, the replay reaches %.9g", limits.Kind(k), limit, got[k])
			}
		}
	})
	t.Logf("%d states held, %d of them not limit by limit", held, fewer)
}

// The other way round: rows forbid no state that the replay finds safe by the slack of
// the damping bound. Where no shape withdraws, the row that ends at t overstates the drop
// by the damping it leaves out, at most (a − a0)·t times the largest deviation, a being
// the true rate. RoCoF rows leave damping out, which adds at most a·window.
func TestSafeStatesAreNotForbidden(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawState(t, true, true)
		part := rapid.SampledFrom([]float64{0, 0.5, 0.95, 1}).Draw(t, "share of the rate")
		a := s.rate()
		got := s.replay()
		nadir := s.least(limits.Nadir, part*a)
		if !math.IsInf(got.NadirHz, 1) && got.NadirHz > 0 {
			l := s.l
			l.NadirHz = nadir * (1 - 1e-9)
			to := s.worst(l, part*a)[limits.WorstNadir].At.ToS
			if slack := (1 - part) * a * to * got.NadirHz; nadir > got.NadirHz*(1+1e-6)+slack+1e-7 {
				t.Errorf("nadir: rows need %.9g Hz, replay %.9g, slack %.3g", nadir, got.NadirHz, slack)
			}
		}
		if rocof := s.least(limits.RoCoF, part*a); got.RoCoFHzPerS > 0 && !math.IsInf(got.RoCoFHzPerS, 1) {
			drop := math.Max(rocof*s.l.WindowS, 0)
			if slack := a * drop; rocof > got.RoCoFHzPerS*(1+1e-6)+slack+1e-7 {
				t.Errorf("RoCoF: rows need %.9g Hz/s, replay %.9g, slack %.3g", rocof, got.RoCoFHzPerS, slack)
			}
		}
	})
}

// Without damping nothing is bounded: rows and replay agree on every limit.
func TestRowsAreExactWithoutDamping(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawState(t, false, true)
		for k, v := range values(s.replay()) {
			limit := s.least(limits.Kind(k), 0)
			if math.IsInf(v, 1) && math.IsInf(limit, 1) {
				continue
			}
			if math.Abs(v-limit) > 1e-6*(1+limit) {
				t.Errorf("%s: rows %.9g, replay %.9g", limits.Kind(k), limit, v)
			}
		}
	})
}

// The scan finds the worst instant: no row on a fine grid of intervals is broken worse,
// and the row of each instant reported has the excess reported.
func TestScanAgainstGrid(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawState(t, true, false)
		a0 := rapid.Float64Range(0, 1).Draw(t, "share of the rate") * s.rate()
		got := s.worst(s.l, a0)
		excess := func(at limits.Instant) float64 {
			return s.l.Row(at, s.shapes, a0).ExcessMW(s.loss, s.inertia, s.held, s.damping)
		}
		tol := 1e-6 * (s.loss + s.inertia)
		for k, w := range got {
			if w.At.ToS > w.At.FromS || w.At.Balance || w.At.Kind == limits.RoCoF {
				if x := excess(w.At); !math.IsInf(w.ExcessMW, -1) && math.Abs(x-w.ExcessMW) > tol {
					t.Errorf("instant %d %+v: excess %.9g, its row has %.9g", k, w.At, w.ExcessMW, x)
				}
			}
		}
		broken := func(at limits.Instant, which int) {
			// Rows are compared by whether they are broken: excess in MW is per second of loss,
			// and the deepest drop is not the one with the most MW.
			if x := excess(at); x > tol && got[which].ExcessMW <= 0 {
				t.Errorf("%+v is broken by %.9g MW, the scan says %.9g", at, x, got[which].ExcessMW)
			}
		}
		const steps = 40
		for i := range steps {
			from := s.l.SteadyUntilS * float64(i) / steps
			if i%2 == 0 && i > 0 {
				from /= 8 // more of them early
			}
			for j := 1; j <= steps; j++ {
				to := from + (s.l.SteadyUntilS-from)*math.Pow(float64(j)/steps, 3)
				broken(limits.Instant{Kind: limits.Nadir, FromS: from, ToS: to}, limits.WorstNadir)
				if to >= s.l.SteadyByS {
					broken(limits.Instant{Kind: limits.Steady, FromS: from, ToS: to}, limits.WorstReturn)
				}
			}
			if w := s.l.WindowS; w == 0 {
				broken(limits.Instant{Kind: limits.RoCoF, FromS: from, ToS: from}, limits.WorstRoCoF)
			} else if from+w <= s.l.SteadyUntilS {
				broken(limits.Instant{Kind: limits.RoCoF, FromS: from, ToS: from + w}, limits.WorstRoCoF)
			}
			if from >= s.l.SteadyByS {
				broken(limits.Instant{Kind: limits.Steady, Balance: true, FromS: from, ToS: from}, limits.WorstBalance)
			}
		}
	})
}
