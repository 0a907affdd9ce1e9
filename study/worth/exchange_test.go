package worth_test

import (
	"fmt"
	"math"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/limits"
	"evenkeel/limits/replay"
	"evenkeel/study/worth"
)

func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s is %.12g, want %.12g", what, got, want)
	}
}

func shape(t testing.TB, c limits.Timing) limits.Shape {
	s, err := c.Shape()
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// corridor leaves RoCoF and the steady state far away: the nadir governs.
func corridor(nadirHz float64) limits.Limits {
	return limits.Limits{NominalHz: 50, MaxHzPerS: 10, NadirHz: nadirHz, SteadyHz: nadirHz, SteadyByS: 60, SteadyUntilS: 60}
}

// R5. Nadir f0·ΔP²·T/(4·E·R) with one linear ramp, reached at T·ΔP/R. Chávez, Baldick, Sharma,
// IEEE Trans. Power Systems 29(3), 2014 (form from memory; computed). So R = f0·ΔP²·T/(4·X·E), and
// dR/dE = −R/E: 1 MW of it replaces E/R MW·s.
func TestReferenceOneRamp(t *testing.T) {
	const e, p, ramp, x = 60_000.0, 1000.0, 10.0, 0.8
	want := 50 * p * p * ramp / (4 * x * e)
	q := worth.Exchange{
		Limits: corridor(x), Names: []string{"slow"}, Shapes: []limits.Shape{shape(t, limits.Timing{RampS: ramp})}, HeldMW: []float64{0},
		InertiaMWs: []float64{e}, LossMW: []float64{p},
	}
	c := q.Cells()[0]
	near(t, "least primary reserve", c.PrimaryMW, want, 1e-6)
	near(t, "instant", c.ToS, ramp*p/want, 1e-6)
	near(t, "MW·s for 1 MW", c.InertiaPerPrimary, e/want, 1e-6*e/want)
	if c.Governs != worth.ByNadir {
		t.Errorf("governed by %v", c.Governs)
	}
}

// R6. Two speeds, fast F fully out by T1 before the nadir, slow R by T2: (E/f0 − F·T1/(4X))·R/T2 =
// (ΔP−F)²/(4X) at the limit. Badesa, Teng, Strbac, IEEE Trans. Power Systems 34(5), 2019 (form from
// memory; rederived). Solved for R and differentiated by F and by E (computed).
func TestReferenceTwoRamps(t *testing.T) {
	const t1, t2, p = 1.0, 10.0, 1200.0
	for _, at := range []struct{ e, f, x float64 }{
		{60_000, 300, 1.1875}, // the worked numbers: R = 1,500 at 6 s
		{60_000, 0, 1.1875}, {80_000, 100, 0.8}, {45_000, 500, 1},
	} {
		four := 4 * at.x
		a := at.e/50 - at.f*t1/four
		r := t2 * (p - at.f) * (p - at.f) / (four * a)
		byF := t2 / four * (-2*(p-at.f)/a + (p-at.f)*(p-at.f)*t1/four/(a*a))
		byE := -r / a / 50
		q := worth.Exchange{
			Limits: corridor(at.x), Names: []string{"slow", "fast"},
			Shapes: []limits.Shape{shape(t, limits.Timing{RampS: t2}), shape(t, limits.Timing{RampS: t1})},
			HeldMW: []float64{0, at.f}, InertiaMWs: []float64{at.e}, LossMW: []float64{p},
		}
		c := q.Cells()[0]
		what := fmt.Sprintf(" at %+v", at)
		near(t, "least primary reserve"+what, c.PrimaryMW, r, 1e-6*r)
		near(t, "MW of slow for 1 MW of fast"+what, c.Rates[1].PrimaryMW, -byF, 1e-6)
		near(t, "the same by a whole MW"+what, c.Rates[1].PrimaryMWByStep, -byF, 0.02)
		near(t, "MW of slow for 1 MW·s"+what, 1/c.InertiaPerPrimary, -byE, 1e-6)
		near(t, "MW·s for 1 MW of fast"+what, c.Rates[1].InertiaMWs, byF/byE, 1e-3)
		if at.f == 300 {
			near(t, "the worked R", c.PrimaryMW, 1500, 1e-5)
			near(t, "the worked instant", c.ToS, 6, 1e-6)
			near(t, "the worked rate", c.Rates[1].PrimaryMW, 5.5/1.8, 1e-6) // Φ(6): 6 − T1/2 over 36/(2·T2)
		}
	}
}

// R1. RoCoF = f0·ΔP/(2·E): ENTSO-E, Frequency stability evaluation criteria for the synchronous zone
// of Continental Europe, 2016 (from memory). An instantaneous limit knows no response that needs time:
// below f0·ΔP/(2·ρ) no reserve will do.
func TestReferenceRoCoFNeedsInertia(t *testing.T) {
	l := corridor(5)
	l.MaxHzPerS = 0.125
	q := worth.Exchange{
		Limits: l, Names: []string{"slow"}, Shapes: []limits.Shape{shape(t, limits.Timing{RampS: 10})}, HeldMW: []float64{0},
		InertiaMWs: []float64{199_999, 200_001}, LossMW: []float64{1000},
	}
	c := q.Cells()
	if c[0].Governs != worth.Beyond || c[0].Broken != limits.RoCoF || !math.IsInf(c[0].PrimaryMW, 1) {
		t.Errorf("below 200,000 MW·s: %+v", c[0])
	}
	if c[1].Governs == worth.Beyond {
		t.Errorf("above 200,000 MW·s: %+v", c[1])
	}
}

// R4. UCTE Operation Handbook, Appendix 1 (from memory): in the steady state response and
// self-regulation carry the loss: R = 3,000 − 1,500·X (computed). A response that is gone by then
// replaces nothing, one that stays replaces MW for MW, and inertia is of no help.
func TestReferenceSteadyState(t *testing.T) {
	l := limits.Limits{NominalHz: 50, MaxHzPerS: 10, NadirHz: 3, SteadyHz: 0.18, SteadyByS: 300, SteadyUntilS: 900}
	q := worth.Exchange{
		Limits: l, DampingMWPerHz: 1500, Names: []string{"slow", "short", "lasting"},
		Shapes: []limits.Shape{shape(t, limits.Timing{RampS: 30}), shape(t, limits.Timing{RampS: 1, HoldS: 20}), shape(t, limits.Timing{RampS: 1})},
		HeldMW: make([]float64, 3), InertiaMWs: []float64{400_000}, LossMW: []float64{3000},
	}
	c := q.Cells()[0]
	if c.Governs != worth.BySteady {
		t.Fatalf("governed by %v", c.Governs)
	}
	near(t, "least primary reserve", c.PrimaryMW, 3000-1500*0.18, 1e-6)
	near(t, "a short response", c.Rates[1].PrimaryMW, 0, 0)
	near(t, "a short response, by step", c.Rates[1].PrimaryMWByStep, 0, 1e-6)
	near(t, "a lasting response", c.Rates[2].PrimaryMW, 1, 1e-12)
	near(t, "a lasting response, by step", c.Rates[2].PrimaryMWByStep, 1, 1e-6)
	near(t, "MW·s", c.Rates[2].InertiaMWs, 0, 0)
}

// Whatever the corridor: with the least reserve the replay, which shares no code with the rows,
// holds it; rates fall as more is held; and a whole MW replaces no more than the first part of it says.
func TestExchangeHolds(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		f := func(lo, hi float64, name string) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
		l := limits.Limits{NominalHz: 50, MaxHzPerS: f(0.3, 2, "rocof"), WindowS: f(0.1, 0.6, "window"), NadirHz: f(0.5, 1.2, "nadir"), SteadyByS: 30, SteadyUntilS: 60}
		l.SteadyHz = f(0.3, l.NadirHz, "steady")
		timing := func(lo, hi float64, name string) limits.Shape {
			s, err := limits.Timing{DelayS: f(0, 0.5, name+" delay"), RampS: f(lo, hi, name)}.Shape()
			if err != nil {
				t.Fatal(err)
			}
			return s
		}
		short, err := limits.Timing{RampS: f(0.1, 1, "short"), HoldS: f(3, 40, "hold"), WithdrawS: f(0, 5, "withdraw")}.Shape()
		if err != nil {
			t.Fatal(err)
		}
		q := worth.Exchange{
			Limits: l, DampingMWPerHz: f(0, 30, "damping"), Names: []string{"slow", "fast", "short"},
			Shapes:     []limits.Shape{timing(4, 20, "slow"), timing(0.1, 2, "fast"), short},
			HeldMW:     []float64{0, f(0, 30, "held fast"), f(0, 30, "held short")},
			InertiaMWs: []float64{f(1000, 20_000, "inertia")}, LossMW: []float64{f(20, 150, "loss")},
		}
		c := q.Cells()[0]
		if c.Governs == worth.Beyond || c.PrimaryMW > 1e5 {
			return
		}
		var knots [][]replay.Knot
		for _, s := range q.Shapes {
			var k []replay.Knot
			for _, n := range s.Knots() {
				k = append(k, replay.Knot{S: n.S, Share: n.Share})
			}
			knots = append(knots, k)
		}
		sys := replay.NewSystem(replay.Limits{NominalHz: l.NominalHz, WindowS: l.WindowS, SteadyByS: l.SteadyByS, SteadyUntilS: l.SteadyUntilS}, knots)
		o := sys.Run(replay.Event{LossMW: c.LossMW, InertiaMWs: c.InertiaMWs, DampingMWPerHz: q.DampingMWPerHz,
			ResponseMW: []float64{c.PrimaryMW, q.HeldMW[1], q.HeldMW[2]}})
		if o.RoCoFHzPerS > l.MaxHzPerS+1e-5 || o.NadirHz > l.NadirHz+1e-5 || o.SteadyHz > l.SteadyHz+1e-5 {
			t.Errorf("%+v leaves the corridor with the least reserve: %+v", c, o)
		}
		for s := 1; s < 3; s++ {
			r := c.Rates[s]
			if r.PrimaryMWByStep > r.PrimaryMW+1e-5*(1+math.Abs(r.PrimaryMW)) {
				t.Errorf("shape %d: a whole MW replaces %v MW, its first part %v a MW", s, r.PrimaryMWByStep, r.PrimaryMW)
			}
			more := q
			more.HeldMW = append([]float64(nil), q.HeldMW...)
			more.HeldMW[s] += 5
			if d := more.Cells()[0]; d.Governs == c.Governs && d.Rates[s].PrimaryMW > r.PrimaryMW+1e-5*(1+r.PrimaryMW) {
				t.Errorf("shape %d: 5 MW more raise its rate from %v to %v", s, r.PrimaryMW, d.Rates[s].PrimaryMW)
			}
		}
	})
}

// What a MW·s replaces is the slope of the least reserve, damping of the load and its falling rate
// counted in (central differences of the least reserve), whether the nadir or the return governs.
func TestInertiaReplacesWithDamping(t *testing.T) {
	back := corridor(0.8)
	back.NadirHz, back.SteadyHz, back.SteadyByS = 1.2, 0.3, 20
	for _, at := range []struct {
		limits  limits.Limits
		e       float64
		governs worth.Governs
	}{
		{corridor(0.8), 1800, worth.ByNadir}, {corridor(0.8), 3000, worth.ByNadir}, {back, 6000, worth.ByReturn},
	} {
		const step = 0.1
		q := worth.Exchange{
			Limits: at.limits, DampingMWPerHz: 4, Names: []string{"slow", "fast"},
			Shapes: []limits.Shape{shape(t, limits.Timing{RampS: 15}), shape(t, limits.Timing{DelayS: 0.2, RampS: 0.5})},
			HeldMW: []float64{0, 5}, InertiaMWs: []float64{at.e - step, at.e, at.e + step}, LossMW: []float64{55},
		}
		c := q.Cells()
		if c[1].Governs != at.governs {
			t.Fatalf("at %v MW·s %v governs, want %v", at.e, c[1].Governs, at.governs)
		}
		want := (c[0].PrimaryMW - c[2].PrimaryMW) / (2 * step)
		near(t, fmt.Sprintf("MW of slow for 1 MW·s at %v", at.e), 1/c[1].InertiaPerPrimary, want, 1e-3*want)
		near(t, fmt.Sprintf("MW·s for 1 MW of fast at %v", at.e), c[1].Rates[1].InertiaMWs, c[1].Rates[1].PrimaryMW/want, 2e-3*c[1].Rates[1].PrimaryMW/want)
	}
}
