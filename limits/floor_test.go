package limits_test

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/limits"
	"evenkeel/limits/replay"
)

func floorOf(l limits.Limits, shapes []limits.Shape, lossMW, dampingMWPerHz float64, responseMW ...float64) limits.Floor {
	return limits.NewFloors(l, shapes).Least(lossMW, responseMW, dampingMWPerHz)
}

// R1 as a floor. RoCoF = f0·ΔP/(2·E): 1,000 MW lost at 50 Hz with 0.125 Hz/s allowed needs
// 200,000 MW·s. ENTSO-E, Frequency stability evaluation criteria for the synchronous zone of
// Continental Europe, 2016 (from memory; the number is computed).
func TestFloorOfRoCoF(t *testing.T) {
	for _, windowS := range []float64{0, 0.5} {
		l := base()
		l.MaxHzPerS, l.WindowS = 0.125, windowS
		f := floorOf(l, []limits.Shape{ramp(t, 1, 5)}, 1000, 40, 1200)
		near(t, "kinetic energy", f.MWs, 200_000, 1e-3)
		if f.By != limits.RoCoF {
			t.Errorf("set by %v", f.By)
		}
	}
}

// R5 as a floor. Nadir f0·ΔP²·T/(4·E·R) with one ramp of R in T seconds, f0·ΔP·d/(2E) more with a
// delay d; solved for E. Chávez, Baldick, Sharma, IEEE Trans. Power Systems 29(3), 2014 (form from
// memory; computed).
func TestFloorOfOneRamp(t *testing.T) {
	l := base()
	l.MaxHzPerS, l.SteadyHz = 100, l.NadirHz
	for _, k := range []struct{ lossMW, rMW, rampS, delayS float64 }{{1000, 1000, 10, 0}, {1200, 1800, 30, 0}, {900, 950, 8, 0.5}, {50, 400, 12, 2}} {
		want := 50*k.lossMW*k.lossMW*k.rampS/(4*k.rMW*0.8) + 50*k.lossMW*k.delayS/(2*0.8)
		f := floorOf(l, []limits.Shape{ramp(t, k.delayS, k.rampS)}, k.lossMW, 0, k.rMW)
		near(t, "kinetic energy", f.MWs, want, 1e-6*want)
		near(t, "instant", f.At.ToS, k.delayS+k.rampS*k.lossMW/k.rMW, 1e-6)
		if f.By != limits.Nadir {
			t.Errorf("set by %v", f.By)
		}
	}
}

// R6 as a floor. Two speeds: ΔP = 1,200 MW, R = 1,500 in 10 s, F = 300 in 1 s reach 1.1875 Hz with
// E = 60,000 MW·s at 50 Hz. Badesa, Teng, Strbac, IEEE Trans. Power Systems 34(5), 2019 (form from
// memory; rederived, computed): so the floor at a limit of 1.1875 Hz is 60,000 MW·s.
func TestFloorOfTwoSpeeds(t *testing.T) {
	l := base()
	l.NadirHz, l.MaxHzPerS = 1.1875, 100
	f := floorOf(l, []limits.Shape{ramp(t, 0, 1), ramp(t, 0, 10)}, 1200, 0, 300, 1500)
	near(t, "kinetic energy", f.MWs, 60_000, 1e-3)
	near(t, "instant", f.At.ToS, 6, 1e-6)
}

// S1 and S2 as floors: full activation of containment reserve within 30 s (Continental Europe), 10 s
// (Great Britain), 15 s (Ireland and Northern Ireland), 30 s (Nordic), Regulation (EU) 2017/1485,
// Annex V (read); largest instantaneous deviation 800, 800, 1,000 and 1,000 mHz, Annex III (from
// memory). With a straight ramp that just covers the loss, R5 makes the floor f0·ΔP·T/(4·X) (computed),
// and a steady state that the reserve alone covers sets no more.
func TestFloorOfContainmentReserve(t *testing.T) {
	for _, k := range []struct {
		area          string
		byS, nadirHz  float64
		lossMW, wants float64
	}{
		{"Continental Europe", 30, 0.8, 3000, 1_406_250},
		{"Great Britain", 10, 0.8, 1800, 281_250},
		{"Ireland and Northern Ireland", 15, 1.0, 500, 93_750},
		{"Nordic", 30, 1.0, 1450, 543_750},
	} {
		l := limits.Limits{NominalHz: 50, MaxHzPerS: 2, WindowS: 0.5, NadirHz: k.nadirHz, SteadyHz: k.nadirHz, SteadyByS: k.byS, SteadyUntilS: 900}
		f := floorOf(l, []limits.Shape{ramp(t, 0, k.byS)}, k.lossMW, 0, k.lossMW)
		near(t, k.area, f.MWs, k.wants, 1e-3)
		// A megawatt less, and no inertia is enough.
		f = floorOf(l, []limits.Shape{ramp(t, 0, k.byS)}, k.lossMW, 0, k.lossMW-1)
		if !math.IsInf(f.MWs, 1) || f.By != limits.Steady || math.IsInf(f.Of[limits.Nadir], 1) {
			t.Errorf("%s with less reserve: %+v", k.area, f)
		}
	}
}

// A response that jumps at once takes its share off the floor that RoCoF sets: (ΔP − R)·f0/(2ρ)
// (computed). It comes in whole after any loss, so none is needed once it covers the loss.
func TestFloorOfAJump(t *testing.T) {
	jump, err := limits.NewShape([]limits.Knot{{S: 0, Share: 1}})
	if err != nil {
		t.Fatal(err)
	}
	for _, windowS := range []float64{0, 0.5} {
		l := base()
		l.WindowS = windowS
		f := floorOf(l, []limits.Shape{jump, ramp(t, 1, 1)}, 100, 0, 40, 60)
		near(t, "kinetic energy", f.Of[limits.RoCoF], 60*50/2.0, 1e-6)
		if f = floorOf(l, []limits.Shape{jump}, 100, 0, 100); f.MWs != 0 {
			t.Errorf("nothing is left of the loss, yet %g MW·s are asked for", f.MWs)
		}
	}
}

// drawFloor draws corridors, shapes and losses in which each of the limits may set the floor.
func drawFloor(t *rapid.T) (l limits.Limits, shapes []limits.Shape, lossMW float64, heldMW []float64, damping float64) {
	in := func(name string, lo, hi float64) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
	l = limits.Limits{NominalHz: 50, MaxHzPerS: in("rocof", 0.2, 3), WindowS: rapid.SampledFrom([]float64{0, 0.1, 0.5, 1}).Draw(t, "window"),
		NadirHz: in("nadir", 0.5, 1.5), SteadyByS: in("by", 5, 40)}
	l.SteadyHz, l.SteadyUntilS = in("steady", 0.2, 1)*l.NadirHz, l.SteadyByS+in("until", 0, 600)
	for range rapid.IntRange(1, 3).Draw(t, "shapes") {
		timing := limits.Timing{DelayS: in("delay", 0, 1), RampS: in("ramp", 0.05, 20)}
		if rapid.Bool().Draw(t, "withdraws") {
			timing.HoldS, timing.WithdrawS = in("hold", 1, 30), in("withdraw", 0.1, 10)
		}
		s, err := timing.Shape()
		if err != nil {
			t.Fatal(err)
		}
		shapes = append(shapes, s)
		heldMW = append(heldMW, in("held", 0, 120))
	}
	return l, shapes, in("loss", 1, 150), heldMW, rapid.SampledFrom([]float64{0, 2, 10, 60}).Draw(t, "damping")
}

// At the floor, and at any more, the time-domain replay keeps every limit, and so do the rows with
// the damping of that kinetic energy; just below it a limit is passed, or as
// good as reached where damping and response carry the loss to a hair.
func TestFloorAgainstReplay(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l, shapes, lossMW, heldMW, damping := drawFloor(t)
		f := floorOf(l, shapes, lossMW, damping, heldMW...)
		if most := limits.NewFloors(l, shapes).Most(lossMW, heldMW, damping); f.MWs > most*(1+1e-9) {
			t.Fatalf("%g MW·s, more than the bound of %g", f.MWs, most)
		}
		if math.IsInf(f.MWs, 1) || f.MWs < 1 {
			return
		}
		var knots [][]replay.Knot
		for _, s := range shapes {
			var ks []replay.Knot
			for _, k := range s.Knots() {
				ks = append(ks, replay.Knot{S: k.S, Share: k.Share})
			}
			knots = append(knots, ks)
		}
		sys := replay.NewSystem(replay.Limits{NominalHz: l.NominalHz, WindowS: l.WindowS, SteadyByS: l.SteadyByS, SteadyUntilS: l.SteadyUntilS}, knots)
		over := func(mws float64) float64 { // by how much the worst limit is passed, as a share of it
			o := sys.Run(replay.Event{LossMW: lossMW, InertiaMWs: mws, DampingMWPerHz: damping, ResponseMW: heldMW})
			return max(o.RoCoFHzPerS/l.MaxHzPerS, o.NadirHz/l.NadirHz, o.SteadyHz/l.SteadyHz) - 1
		}
		more := rapid.Float64Range(1, 20).Draw(t, "more")
		if v := over(f.MWs); v > 1e-6 {
			t.Fatalf("at the floor of %g MW·s set by %v a limit is passed by %g of it", f.MWs, f.By, v)
		}
		if v := over(f.MWs * more); v > 1e-6 {
			t.Fatalf("at %g times the floor of %g MW·s set by %v a limit is passed by %g of it", more, f.MWs, f.By, v)
		}
		if v := over(f.MWs * 0.99); v < -1e-3 && !(f.By == limits.RoCoF && damping > 0) { // the floor's RoCoF leaves damping out
			t.Fatalf("1 %% below the floor of %g MW·s set by %v no limit is near (%g)", f.MWs, f.By, v)
		}
		var w [limits.Worsts]limits.Worst
		limits.NewScan(l, shapes, damping*l.NominalHz/(2*f.MWs), damping).Worst(lossMW, f.MWs, heldMW, &w)
		for i := range w {
			if w[i].ExcessMW > 2e-5+1e-6*lossMW {
				t.Fatalf("at the floor row %d lacks %g MW", i, w[i].ExcessMW)
			}
		}
	})
}

// A floor never falls as the loss grows, nor rises with more response where no shape withdraws.
func TestFloorIsMonotone(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l, shapes, lossMW, heldMW, damping := drawFloor(t)
		floors := limits.NewFloors(l, shapes)
		before := floors.Least(lossMW, heldMW, damping)
		after := floors.Least(lossMW*rapid.Float64Range(1, 1.5).Draw(t, "grown"), heldMW, damping)
		if after.MWs < before.MWs*(1-1e-6) {
			t.Fatalf("a larger loss asks for %g after %g MW·s", after.MWs, before.MWs)
		}
		for _, s := range shapes {
			if s.Withdraws() {
				return
			}
		}
		heldMW[0] += rapid.Float64Range(0, 50).Draw(t, "further")
		after = floors.Least(lossMW, heldMW, damping)
		if after.MWs > before.MWs*(1+1e-6)+1e-9 {
			t.Fatalf("more response asks for %g after %g MW·s", after.MWs, before.MWs)
		}
	})
}

func BenchmarkFloor(b *testing.B) {
	l := base()
	shapes := []limits.Shape{ramp(b, 0.3, 1), ramp(b, 1, 6), ramp(b, 2, 20)}
	f := limits.NewFloors(l, shapes)
	held := []float64{10, 20, 25}
	for b.Loop() {
		f.Least(50, held, 3)
	}
}
