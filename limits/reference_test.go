package limits_test

import (
	"fmt"
	"math"
	"testing"

	"evenkeel/limits"
)

// base is a corridor in which only the limit under test is meant to matter.
func base() limits.Limits {
	return limits.Limits{NominalHz: 50, MaxHzPerS: 1, WindowS: 0.5, NadirHz: 0.8, SteadyHz: 0.5, SteadyByS: 60, SteadyUntilS: 900}
}

// least bisects for the least x in [lo, hi] for which ok holds.
func least(lo, hi float64, ok func(x float64) bool) float64 {
	for range 100 {
		if mid := lo + (hi-lo)/2; ok(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	return hi
}

// excess gives one of a scan's worst instants.
func excess(l limits.Limits, shapes []limits.Shape, which int, lossMW, inertiaMWs, dampingMWPerHz float64, responseMW ...float64) limits.Worst {
	var out [limits.Worsts]limits.Worst
	limits.NewScan(l, shapes, 0, dampingMWPerHz).Worst(lossMW, inertiaMWs, responseMW, &out)
	return out[which]
}

// leastNadirHz gives the smallest nadir limit that no instant of the scan breaks.
func leastNadirHz(l limits.Limits, shapes []limits.Shape, lossMW, inertiaMWs float64, responseMW ...float64) float64 {
	return least(0, 50, func(x float64) bool {
		l.NadirHz = x
		return excess(l, shapes, limits.WorstNadir, lossMW, inertiaMWs, 0, responseMW...).ExcessMW <= 0
	})
}

func ramp(t testing.TB, delayS, rampS float64) limits.Shape {
	s, err := limits.Timing{DelayS: delayS, RampS: rampS}.Shape()
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// R1. RoCoF = f0·ΔP/(2·E): 1,000 MW lost at 50 Hz with 0.125 Hz/s allowed needs
// 200,000 MW·s. ENTSO-E, Frequency stability evaluation criteria for the synchronous zone
// of Continental Europe, 2016 (from memory; the number is computed).
func TestReferenceRoCoF(t *testing.T) {
	for _, windowS := range []float64{0, 0.1, 0.5} {
		l := base()
		l.MaxHzPerS, l.WindowS = 0.125, windowS
		row := l.Row(limits.Instant{Kind: limits.RoCoF, ToS: windowS}, nil, 0.3)
		near(t, "kinetic energy by the row", row.LossS*1000/row.InertiaPerMWs, 200_000, 1e-6)
		got := least(0, 1e6, func(e float64) bool { return excess(l, nil, limits.WorstRoCoF, 1000, e, 0).ExcessMW <= 0 })
		near(t, "kinetic energy by the scan", got, 200_000, 1e-3)
	}
}

// R4. UCTE Operation Handbook, Appendix 1 (from memory): 3,000 MW lost, load of 150 GW with
// self-regulation of 1 %/Hz, 15,000 MW/Hz of primary control: 0.182 Hz (computed).
func TestReferenceSteadyState(t *testing.T) {
	shapes := []limits.Shape{ramp(t, 0, 30)}
	damping := 0.01 * 150_000
	got := least(0, 10, func(x float64) bool {
		l := base()
		l.SteadyHz = x
		return excess(l, shapes, limits.WorstBalance, 3000, 100_000, damping, 15_000*x).ExcessMW <= 0
	})
	near(t, "steady deviation", got, 0.182, 0.0005)
	near(t, "steady deviation", got, 3000.0/16_500, 1e-9)
}

// R5. Nadir f0·ΔP²·T/(4·E·R) at T·ΔP/R with one linear ramp; a delay d adds f0·ΔP·d/(2E).
// Chávez, Baldick, Sharma, IEEE Trans. Power Systems 29(3), 2014 (form from memory;
// computed).
func TestReferenceNadirOfOneRamp(t *testing.T) {
	const loss, f0 = 1000.0, 50.0
	for _, c := range []struct{ inertia, response, ramp, delay float64 }{
		{100_000, 1000, 10, 0}, {100_000, 1500, 10, 0}, {60_000, 1200, 30, 0}, {60_000, 1200, 8, 2}, {40_000, 3000, 5, 0.3},
	} {
		shapes := []limits.Shape{ramp(t, c.delay, c.ramp)}
		want := f0*loss*loss*c.ramp/(4*c.inertia*c.response) + f0*loss*c.delay/(2*c.inertia)
		got := leastNadirHz(base(), shapes, loss, c.inertia, c.response)
		near(t, fmt.Sprintf("nadir of %+v", c), got, want, 1e-3*want) // 0.1 %, as asked
		near(t, fmt.Sprintf("nadir of %+v", c), got, want, 1e-9*want) // the rows are exact here
		at := excess(base(), shapes, limits.WorstNadir, loss, c.inertia, 0, c.response).At
		near(t, "start of the interval", at.FromS, 0, 0)
		near(t, "time of the nadir", at.ToS, c.delay+c.ramp*loss/c.response, 1e-9)
	}
}

// R6. Two speeds: E = 60,000 MW·s, f0 = 50 Hz, ΔP = 1,200, R = 1,500 in 10 s, F = 300 in 1 s:
// 1.1875 Hz at 6 s. Badesa, Teng, Strbac, IEEE Trans. Power Systems 34(5), 2019 (form from
// memory; computed).
func TestReferenceNadirOfTwoRamps(t *testing.T) {
	shapes := []limits.Shape{ramp(t, 0, 10), ramp(t, 0, 1)}
	got := leastNadirHz(base(), shapes, 1200, 60_000, 1500, 300)
	near(t, "nadir", got, 1.1875, 1e-9)
	near(t, "time of the nadir", excess(base(), shapes, limits.WorstNadir, 1200, 60_000, 0, 1500, 300).At.ToS, 6, 1e-9)
	// The closed form itself: (E/f0 − F·T1/(4X))·R/T2 ≥ (ΔP−F)²/(4X) holds with equality.
	near(t, "closed form", (60_000.0/50-300*1/(4*got))*1500/10-900*900/(4*got), 0, 1e-6)
}

// S1. Full activation times of containment reserve: Commission Regulation (EU) 2017/1485,
// Annex V (read). Largest deviations: Annex III, table 1 (from memory). A reserve that ramps
// straight to full within that time needs E = f0·ΔP²·T/(4·X·R) (R5).
func TestReferenceActivationTimes(t *testing.T) {
	for _, area := range []struct {
		name    string
		fullS   float64
		nadirHz float64
	}{
		{"Continental Europe", 30, 0.8}, {"Great Britain", 10, 0.8}, {"Ireland and Northern Ireland", 15, 1.0}, {"Nordic", 30, 1.0},
	} {
		l := base()
		l.NadirHz = area.nadirHz
		shapes := []limits.Shape{ramp(t, 0, area.fullS)}
		near(t, area.name+": full activation", shapes[0].FullActivationS(), area.fullS, 0)
		for _, response := range []float64{1400, 1400 * 1.25, 1400 * 3} {
			want := 50 * 1400 * 1400 * area.fullS / (4 * area.nadirHz * response)
			got := least(0, 1e7, func(e float64) bool {
				return excess(l, shapes, limits.WorstNadir, 1400, e, 0, response).ExcessMW <= 0
			})
			near(t, fmt.Sprintf("%s: kinetic energy with %g MW", area.name, response), got, want, 1e-9*want)
		}
	}
}

// Without response and with damping D·f0/(2E) = a, deviation is ΔP/D·(1−e^(−at)) (computed):
// the weighted row must give just that at the horizon.
func TestDampedStep(t *testing.T) {
	const loss, inertia, damping, f0 = 500.0, 100_000.0, 800.0, 50.0
	a := damping * f0 / (2 * inertia)
	l := base()
	l.SteadyUntilS = 5 // the horizon is then limits.LeastHorizonS
	want := loss / damping * (1 - math.Exp(-a*limits.LeastHorizonS))
	got := least(0, 50, func(x float64) bool {
		l.NadirHz = x
		var out [limits.Worsts]limits.Worst
		limits.NewScan(l, nil, a, damping).Worst(loss, inertia, nil, &out)
		return out[limits.WorstNadir].ExcessMW <= 0
	})
	near(t, "nadir", got, want, 1e-9)
}
