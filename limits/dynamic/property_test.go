package dynamic

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"evenkeel/limits"
)

// drawModel draws a model of some kind; smooth ones have no deadband, rate limit or trigger.
func drawModel(t *rapid.T, smooth bool) *Model {
	kindsToDraw := []Kind{Steam, Gas, Hydro, Droop, Synthetic}
	if !smooth {
		kindsToDraw = append(kindsToDraw, Step)
	}
	m := Defaults(rapid.SampledFrom(kindsToDraw).Draw(t, "kind"))
	f := func(name string, lo, hi float64) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
	if m.DroopPct > 0 {
		m.DroopPct = f("droop", 3, 8)
	}
	switch m.Kind {
	case Steam:
		m.ReheatS, m.HighPressureShare, m.GovernorS = f("reheat", 4, 12), f("share", 0.2, 1), f("governor", 0.1, 0.4)
	case Gas:
		m.GovernorS, m.TurbineS = f("governor", 0.1, 0.6), f("turbine", 0.1, 0.6)
	case Hydro:
		m.WaterS, m.DashpotS, m.TransientDroopPct = f("water", 0.5, 2.5), f("dashpot", 4, 12), f("transient", 35, 70)
	case Step:
		m.LevelHz = f("level", 0.1, 0.6)
		m.Course.HoldS = rapid.SampledFrom([]float64{0, 5, 20}).Draw(t, "hold")
		if m.Course.HoldS > 0 {
			m.Course.WithdrawS = f("withdraw", 1, 6)
		}
		m.RestS = rapid.SampledFrom([]float64{5, 900}).Draw(t, "rest")
	}
	if smooth {
		m.DeadbandHz, m.DelayS = 0, 0
	} else if m.Kind <= Hydro && rapid.Bool().Draw(t, "rate limited") {
		m.RatePctPerS = f("rate", 1, 20)
	}
	if err := m.Check(); err != nil {
		t.Fatal(err)
	}
	return &m
}

func drawSystem(t *rapid.T, smooth bool) (*System, float64) {
	f := func(name string, lo, hi float64) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
	load := f("load", 300, 3000)
	sys := &System{NominalHz: rapid.SampledFrom([]float64{50, 60}).Draw(t, "f0"), LoadMW: load, DampingPctPerHz: f("damping", 0, 2), InertiaMWs: load * f("inertia", 1.5, 8)}
	loss := load * f("loss", 0.02, 0.1)
	for i := range rapid.IntRange(1, 5).Draw(t, "units") {
		u := Unit{Name: fmt.Sprint("u", i), Model: drawModel(t, smooth), N: float64(rapid.IntRange(1, 4).Draw(t, "count")), RatingMW: load * f("rating", 0.03, 0.2)}
		u.UpMW = u.RatingMW * f("room", 0.05, 0.4)
		u.DownMW = u.UpMW
		if smooth {
			u.UpMW, u.DownMW = 1e6, 1e6
		}
		if u.Model.Kind == Synthetic {
			u.SyntheticMWs = load * f("synthetic", 0.1, 1)
		}
		sys.Units = append(sys.Units, u)
	}
	if !smooth && rapid.Bool().Draw(t, "promise") {
		s, err := limits.Timing{DelayS: 0.3, RampS: 2, HoldS: 15, WithdrawS: 3}.Shape()
		if err != nil {
			t.Fatal(err)
		}
		sys.Promises = append(sys.Promises, Promise{"p", s, loss * f("promised", 0, 0.6)})
	}
	return sys, loss
}

// Along the trajectory: what was lost is what stored energy, damping and resources gave, to 1e-6.
func TestEnergyBalance(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		sys, loss := drawSystem(t, false)
		var s Simulator
		o := s.Run(sys, []Loss{{MW: loss}}, Options{WindowS: 0.5, SteadyByS: 30, UntilS: 120, Record: true})
		given := o.KineticMWs + o.DampedMWs
		for _, e := range o.EnergyMWs {
			given += e
		}
		if math.Abs(given-o.LostMWs) > 1e-6*o.LostMWs {
			t.Errorf("lost %.9g MW·s, given %.9g", o.LostMWs, given)
		}
	})
}

// Units that are alike can be joined.
func TestLumpedEqualsUnlumped(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		sys, loss := drawSystem(t, false)
		apart := *sys
		apart.Units = nil
		for _, u := range sys.Units {
			for range int(u.N) {
				one := u
				one.N = 1
				apart.Units = append(apart.Units, one)
			}
		}
		joined := *sys
		joined.Units = Lump(apart.Units)
		if len(joined.Units) > len(sys.Units) {
			t.Fatalf("%d lumps of %d kinds", len(joined.Units), len(sys.Units))
		}
		var a, b Simulator
		// Tight: a system that swings on and on carries every difference along.
		opt := Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60, TolHz: 1e-7}
		x, y := a.Run(&apart, []Loss{{MW: loss}}, opt), b.Run(&joined, []Loss{{MW: loss}}, opt)
		// The error of a step is measured the same, so the steps are, to rounding.
		if math.Abs(x.NadirHz-y.NadirHz) > 1e-4 || math.Abs(x.EndHz-y.EndHz) > 1e-4 || math.Abs(x.RoCoFHzPerS-y.RoCoFHzPerS) > 1e-4 {
			t.Errorf("apart %v %v %v, joined %v %v %v, %d and %d steps\n%v\n%v", x.NadirHz, x.EndHz, x.RoCoFHzPerS, y.NadirHz, y.EndHz, y.RoCoFHzPerS, x.Steps, y.Steps, x.Happenings, y.Happenings)
		}
	})
}

// Both directions mirror each other where models do.
func TestDirectionsMirror(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		sys, loss := drawSystem(t, false)
		mirrored := *sys
		mirrored.Promises = nil
		for _, p := range sys.Promises {
			p.MW = -p.MW
			mirrored.Promises = append(mirrored.Promises, p)
		}
		var a, b Simulator
		opt := Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60}
		x, y := a.Run(sys, []Loss{{MW: loss}}, opt), b.Run(&mirrored, []Loss{{MW: -loss}}, opt)
		for _, p := range [][2]float64{{x.NadirHz, y.PeakHz}, {x.PeakHz, y.NadirHz}, {x.RoCoFHzPerS, y.RiseHzPerS}, {x.SteadyHz, y.SteadyOverHz}, {x.EndHz, -y.EndHz}, {x.NadirS, y.PeakS}} {
			if p[0] != p[1] {
				t.Errorf("not mirrored: %v and %v", p[0], p[1])
			}
		}
	})
}

// More inertia never makes the first fall steeper.
func TestMoreInertiaSlowsTheFirstFall(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		sys, loss := drawSystem(t, false)
		var a, b Simulator
		x := a.Run(sys, []Loss{{MW: loss}}, Options{SteadyByS: 30, UntilS: 60})
		more := *sys
		more.InertiaMWs *= rapid.Float64Range(1.01, 4).Draw(t, "more")
		y := b.Run(&more, []Loss{{MW: loss}}, Options{SteadyByS: 30, UntilS: 60})
		if y.Points[0].HzPerS > x.Points[0].HzPerS*(1+1e-9) {
			t.Errorf("first RoCoF %g, with more inertia %g", x.Points[0].HzPerS, y.Points[0].HzPerS)
		}
	})
}

// Halving the steps moves the nadir by less than 1 mHz and its instant by less than a step.
func TestHalvedSteps(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		sys, loss := drawSystem(t, false)
		var a, b Simulator
		x := a.Run(sys, []Loss{{MW: loss}}, Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60})
		// The error of a step grows with its third power.
		y := b.Run(sys, []Loss{{MW: loss}}, Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60, TolHz: DefaultTolHz / 8})
		if x.NadirHz > 3 { // collapsed
			return
		}
		if math.Abs(x.NadirHz-y.NadirHz) > 1e-3 {
			t.Fatalf("nadir %.6f Hz, with half the steps %.6f", x.NadirHz, y.NadirHz)
		}
		step := 0.0
		for i := 1; i < len(x.Points); i++ {
			if x.Points[i-1].S <= x.NadirS && x.NadirS <= x.Points[i].S {
				step = max(step, x.Points[i].S-x.Points[i-1].S)
			}
		}
		// On a plateau the instant is a matter of rounding.
		if d := math.Abs(x.NadirS - y.NadirS); d > step+0.01 && math.Abs(deviationAt(x, y.NadirS)-x.NadirHz) > 2e-4 {
			t.Errorf("nadir at %.3f s, with half the steps at %.3f s, step %.3f s", x.NadirS, y.NadirS, step)
		}
	})
}

// A linear system against the matrix exponential (gonum/mat), to 1e-6 Hz.
func TestAgainstMatrixExponential(t *testing.T) {
	const f0, load, inertia, loss, damping = 50.0, 2000.0, 9000.0, 120.0, 20.0
	steam := &Model{Kind: Steam, DroopPct: 5, GovernorS: 0.2, ChestS: 0.3, ReheatS: 7, HighPressureShare: 0.3}
	hydro := &Model{Kind: Hydro, DroopPct: 5, TransientDroopPct: 50, DashpotS: 8, GovernorS: 0.5, WaterS: 1.5}
	sys := &System{NominalHz: f0, LoadMW: load, DampingPctPerHz: 100 * damping / load, InertiaMWs: inertia, Units: []Unit{
		{Model: steam, N: 2, RatingMW: 500, UpMW: 1e6, DownMW: 1e6}, {Model: hydro, N: 1, RatingMW: 600, UpMW: 1e6, DownMW: 1e6}}}
	var s Simulator
	o := s.Run(sys, []Loss{{MW: loss}}, Options{SteadyByS: 30, UntilS: 60, TolHz: 1e-9})
	// States: x, valve, chest, reheater, gate, dashpot, water, and a constant 1.
	a := mat.NewDense(8, 8, nil)
	acc := f0 / (2 * inertia)
	ks, kh := 500*20/f0, 600*20/f0
	set := func(i int, v ...float64) { a.SetRow(i, v) }
	set(0, -acc*damping, 0, -acc*2*0.3, -acc*2*0.7, acc*2, 0, -acc*3, acc*loss)
	set(1, ks/0.2, -1/0.2, 0, 0, 0, 0, 0, 0)
	set(2, 0, 1/0.3, -1/0.3, 0, 0, 0, 0, 0)
	set(3, 0, 0, 1/7.0, -1/7.0, 0, 0, 0, 0)
	set(4, kh*0.1/0.5, 0, 0, 0, -1/0.5, 0.9/0.5, 0, 0) // gate follows w + 0.1·(u − w)
	set(5, kh/80, 0, 0, 0, 0, -1/80.0, 0, 0)           // dashpot 8 s · 50/5
	set(6, 0, 0, 0, 0, 1/0.75, 0, -1/0.75, 0)
	for _, at := range []float64{0.1, 0.5, 1, 2, 5, 10, 20, 40, 60} {
		var scaled, e mat.Dense
		scaled.Scale(at, a)
		e.Exp(&scaled)
		near(t, fmt.Sprint("deviation at ", at), deviationAt(o, at), e.At(0, 7), 1e-6)
	}
}
