package replay

import (
	"math"
	"sync"
	"testing"

	"pgregory.net/rapid"
)

// drawShape draws a shape with corners on whole hundredths of a second, jumps included.
// A rising one never withdraws; a giving one never takes back.
func drawShape(t *rapid.T, rising, giving bool) []Knot {
	n := rapid.IntRange(1, 6).Draw(t, "knots")
	knots := make([]Knot, n)
	at, share := 0, 0.0
	for i := range knots {
		if i < 2 || knots[i-1].S != knots[i-2].S { // no third knot at one instant
			at += rapid.SampledFrom([]int{0, 10, 50, 100, 400, 1500}).Draw(t, "gap")
		} else {
			at += rapid.IntRange(1, 1500).Draw(t, "gap")
		}
		from := -0.5
		if giving {
			from = 0
		}
		if rising {
			from = share
		}
		share = rapid.Float64Range(from, 1).Draw(t, "share")
		knots[i] = Knot{float64(at) / 100, share}
	}
	return knots
}

func drawCase(t *rapid.T, damped, rising, giving bool) (Limits, [][]Knot, Event) {
	l := Limits{
		NominalHz:    rapid.SampledFrom([]float64{50, 60}).Draw(t, "f0"),
		WindowS:      rapid.SampledFrom([]float64{0, 0.1, 0.5, 1}).Draw(t, "window"),
		SteadyByS:    rapid.SampledFrom([]float64{10, 15, 30}).Draw(t, "by"),
		SteadyUntilS: rapid.SampledFrom([]float64{30, 60, 120}).Draw(t, "until"),
	}
	e := Event{
		LossMW:     rapid.Float64Range(10, 2000).Draw(t, "loss"),
		InertiaMWs: math.Exp(rapid.Float64Range(math.Log(200), math.Log(500_000)).Draw(t, "ln inertia")),
	}
	if damped {
		e.DampingMWPerHz = rapid.Float64Range(0, 800).Draw(t, "damping")
	}
	shapes := make([][]Knot, rapid.IntRange(1, 4).Draw(t, "shapes"))
	for i := range shapes {
		shapes[i] = drawShape(t, rising, giving)
		e.ResponseMW = append(e.ResponseMW, rapid.Float64Range(0, 1.2*e.LossMW).Draw(t, "held"))
	}
	return l, shapes, e
}

// The whole against a plain simulation of another method, which clips at zero and reads
// the knots as they are.
func TestAgainstPlainSimulation(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l, shapes, e := drawCase(t, true, false, false)
		s := NewSystem(l, shapes)
		at, dev := s.Trajectory(e, 0.05)
		slowDev := slow(l, shapes, e, s.horizonS)
		accel := l.NominalHz / (2 * e.InertiaMWs)
		// Clipping is off by what 1 ms of imbalance moves, squared: a millionth of the
		// fall in a second.
		tol := 1e-7 + 4e-6*accel*e.LossMW
		for i := range at {
			if want := slowDev[50*i]; math.Abs(dev[i]-want) > tol {
				t.Fatalf("at %v s: %v Hz, plain simulation %v Hz", at[i], dev[i], want)
			}
		}
		got := s.Run(e)
		deep, steady := 0.0, 0.0
		for i, y := range slowDev {
			deep = math.Max(deep, y)
			if now := float64(i) / 1000; now >= l.SteadyByS && now <= s.lim.SteadyUntilS {
				steady = math.Max(steady, y)
			}
		}
		// Between two milliseconds the plain simulation misses the tip: by 1 ms of the
		// largest slope at a jump, at most.
		tip := tol + 2e-3*accel*(e.LossMW+sum(e.ResponseMW))
		if got.NadirHz < deep-tol || got.NadirHz > deep+tip {
			t.Fatalf("nadir %v Hz, plain simulation %v Hz", got.NadirHz, deep)
		}
		if got.SteadyHz < steady-tol {
			t.Fatalf("steady %v Hz, plain simulation %v Hz before it is settled", got.SteadyHz, steady)
		}
		if l.WindowS > 0 {
			w, rise := int(math.Round(1000*l.WindowS)), 0.0
			for i := 0; i < w; i++ { // windows from before the loss
				rise = math.Max(rise, slowDev[i])
			}
			for i := 0; i+w <= int(1000*s.lim.SteadyUntilS); i++ {
				rise = math.Max(rise, slowDev[i+w]-slowDev[i])
			}
			if fall := got.RoCoFHzPerS * l.WindowS; fall < rise-2*tol || fall > rise+2*tip {
				t.Fatalf("RoCoF %v Hz/s, plain simulation %v Hz/s", got.RoCoFHzPerS, rise/l.WindowS)
			}
		}
	})
}

func sum(v []float64) float64 {
	total := 0.0
	for _, x := range v {
		total += x
	}
	return total
}

// Steps of half the length and less change nothing that matters. The tolerance is in
// the fourth power of the step, so a sixteenth of it halves every step that is not exact
// already; a shape of 0 MW with a knot every 0.07 s halves the exact ones too.
func TestHalvedSteps(t *testing.T) {
	var worstHz, worstS float64
	rapid.Check(t, func(t *rapid.T) {
		l, shapes, e := drawCase(t, true, false, false)
		whole := NewSystem(l, shapes).Run(e)
		var comb []Knot
		for i := range 1000 {
			comb = append(comb, Knot{0.07 * float64(i), 1})
		}
		half := NewSystem(l, append(shapes, comb))
		half.tolHz /= 16
		e.ResponseMW = append(e.ResponseMW, 0)
		got := half.Run(e)
		scale := math.Max(1, whole.NadirHz)
		dHz := math.Abs(got.NadirHz-whole.NadirHz) / scale
		worstHz = math.Max(worstHz, dHz)
		if dHz > 1e-8 {
			t.Fatalf("nadir %v Hz, with half the steps %v Hz", whole.NadirHz, got.NadirHz)
		}
		if d := math.Abs(got.RoCoFHzPerS - whole.RoCoFHzPerS); d > 1e-7*math.Max(1, whole.RoCoFHzPerS) {
			t.Fatalf("RoCoF %v Hz/s, with half the steps %v Hz/s", whole.RoCoFHzPerS, got.RoCoFHzPerS)
		}
		if got.SteadyHz != whole.SteadyHz && math.Abs(got.SteadyHz-whole.SteadyHz) > 1e-8*math.Max(1, whole.SteadyHz) {
			t.Fatalf("steady %v Hz, with half the steps %v Hz", whole.SteadyHz, got.SteadyHz)
		}
		// The nadir's time means something only where frequency turns sharply enough.
		if _, y := half.Trajectory(e, 0.5); turnsAt(y, 0.5, whole.NadirS) {
			dS := math.Abs(got.NadirS - whole.NadirS)
			worstS = math.Max(worstS, dS)
			if dS > 1e-3 {
				t.Fatalf("nadir at %v s, with half the steps at %v s", whole.NadirS, got.NadirS)
			}
		}
	})
	t.Logf("largest change by halving: nadir %.2g of max(1 Hz, nadir), its time %.2g s", worstHz, worstS)
}

// turnsAt tells whether frequency is at least 1 mHz higher half a second to a second
// before and after the nadir, and nowhere else as low.
func turnsAt(y []float64, everyS, nadirS float64) bool {
	low, near := 0.0, 0.0
	for i := range y {
		if math.Abs(float64(i)*everyS-nadirS) <= everyS {
			near = math.Max(near, y[i])
		}
	}
	i := int(nadirS / everyS)
	if i < 2 || i+3 >= len(y) {
		return false
	}
	for j := range y {
		if j < i-1 || j > i+2 {
			low = math.Max(low, y[j])
		}
	}
	return low < near-1e-3 && y[i-1] < near-1e-3 && y[i+2] < near-1e-3
}

// More inertia never makes frequency fall faster: whatever the shapes where nothing
// damps (every deviation is then in proportion to 1/E), and with damping where they only
// rise.
func TestMoreInertiaNeverRaisesRoCoF(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		damped := rapid.Bool().Draw(t, "damped")
		l, shapes, e := drawCase(t, damped, damped, false)
		s := NewSystem(l, shapes)
		before := s.Run(e)
		e.InertiaMWs *= rapid.Float64Range(1, 10).Draw(t, "more")
		after := s.Run(e)
		if after.RoCoFHzPerS > before.RoCoFHzPerS*(1+1e-9)+1e-9 {
			t.Fatalf("RoCoF %v Hz/s, with more inertia %v Hz/s", before.RoCoFHzPerS, after.RoCoFHzPerS)
		}
	})
}

// More of a response that takes nothing back never deepens the nadir or the steady
// deviation, whatever the others do.
func TestMoreResponseOnlyHelps(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l, shapes, e := drawCase(t, true, false, false)
		shapes = append(shapes, drawShape(t, false, true))
		e.ResponseMW = append(e.ResponseMW, 0)
		s := NewSystem(l, shapes)
		before := s.Run(e)
		e.ResponseMW[len(shapes)-1] = rapid.Float64Range(0, e.LossMW).Draw(t, "more")
		after := s.Run(e)
		// 4e-9 Hz is what the two replays may be off by.
		if tol := 4e-9 * math.Max(1, before.NadirHz); after.NadirHz > before.NadirHz+tol || after.SteadyHz > before.SteadyHz+tol {
			t.Fatalf("%+v, with more response %+v", before, after)
		}
	})
}

// A smaller loss never deepens anything but the RoCoF of a second dip.
func TestSmallerLossOnlyHelps(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l, shapes, e := drawCase(t, true, false, false)
		s := NewSystem(l, shapes)
		before := s.Run(e)
		e.LossMW *= rapid.Float64Range(0, 1).Draw(t, "less")
		after := s.Run(e)
		if tol := 4e-9 * math.Max(1, before.NadirHz); after.NadirHz > before.NadirHz+tol || after.SteadyHz > before.SteadyHz+tol {
			t.Fatalf("%+v, with a smaller loss %+v", before, after)
		}
	})
}

// Several goroutines on one system get what one gets.
func TestConcurrentRuns(t *testing.T) {
	s, events := benchSystem(10, 120)
	want := make([]Outcome, len(events))
	for i, e := range events {
		want[i] = s.Run(e)
	}
	var wg sync.WaitGroup
	for range 4 {
		wg.Go(func() {
			for i, e := range events {
				if got := s.Run(e); got != want[i] {
					t.Errorf("event %d: %+v, alone %+v", i, got, want[i])
				}
			}
		})
	}
	wg.Wait()
}
