package replay

import (
	"math"
	"testing"
)

// ENTSO-E, Frequency stability evaluation criteria for the synchronous zone of
// Continental Europe, 2016 (from memory): RoCoF = f0·ΔP/(2·E). 1,000 MW lost at 50 Hz
// with 200,000 MW·s left: 0.125 Hz/s (computed).
func TestRoCoFOfTheContinent(t *testing.T) {
	for _, windowS := range []float64{0, 0.5, 2} {
		l := Limits{NominalHz: 50, WindowS: windowS, SteadyByS: 30, SteadyUntilS: 60}
		s := NewSystem(l, [][]Knot{ramp(2, 8)})
		got := s.Run(Event{LossMW: 1000, InertiaMWs: 200_000, ResponseMW: []float64{1000}})
		near(t, "RoCoF", got.RoCoFHzPerS, 0.125, 1e-12)
		near(t, "instant", got.RoCoFS, 0, 0)
	}
}

// UCTE Operation Handbook, Appendix 1 (from memory): 3,000 MW lost, load 150 GW with
// 1 %/Hz of self-regulation, 15,000 MW/Hz of primary control: steady deviation
// 3,000/16,500 = 0.182 Hz (computed). Primary control is proportional there; here it
// is held as the MW that it delivers at that deviation, by 30 s (the handbook's own
// deployment time, from memory).
func TestSteadyDeviationOfTheReferenceIncident(t *testing.T) {
	const want = 3000. / 16_500
	e := Event{
		LossMW:         3000,
		InertiaMWs:     900_000,
		DampingMWPerHz: 0.01 * 150_000,
		ResponseMW:     []float64{15_000 * want},
	}
	shapes := [][]Knot{ramp(0, 30)}
	// With a time constant of 24 s it has settled by 600 s.
	got := NewSystem(Limits{NominalHz: 50, SteadyByS: 600, SteadyUntilS: 900}, shapes).Run(e)
	near(t, "steady", got.SteadyHz, want, 1e-9)
	near(t, "steady, rounded as published", got.SteadyHz, 0.182, 5e-4)
	// Earlier on it is still on its way, and no less is claimed than where it settles.
	got = NewSystem(Limits{NominalHz: 50, SteadyByS: 30, SteadyUntilS: 31}, shapes).Run(e)
	if got.SteadyHz < want-1e-9 {
		t.Errorf("steady %v Hz from 30 s on lies below the settled %v Hz", got.SteadyHz, want)
	}
}

// Chávez, Baldick, Sharma, "Governor rate-constrained OPF for primary frequency control
// adequacy", IEEE Trans. Power Systems 29(3), 2014 (form from memory; computed): one
// ramp to R in T seconds, R ≥ ΔP, no damping: nadir f0·ΔP²·T/(4·E·R) at T·ΔP/R; a delay
// d adds f0·ΔP·d/(2E), and d to the time.
func TestNadirOfOneRamp(t *testing.T) {
	for _, c := range []struct{ f0, p, e, r, rampS, delayS float64 }{
		{50, 1000, 100_000, 1000, 10, 0},
		{50, 1000, 100_000, 1500, 10, 0},
		{50, 1000, 100_000, 1500, 10, 0.5},
		{60, 2750, 250_000, 4000, 12, 0.3},
		{50, 400, 20_000, 500, 5, 1},
		{50, 30, 500, 31, 1, 0.1},
	} {
		s := NewSystem(Limits{NominalHz: c.f0, SteadyByS: 30, SteadyUntilS: 60}, [][]Knot{ramp(c.delayS, c.rampS)})
		got := s.Run(Event{LossMW: c.p, InertiaMWs: c.e, ResponseMW: []float64{c.r}})
		want := c.f0*c.p*c.p*c.rampS/(4*c.e*c.r) + c.f0*c.p*c.delayS/(2*c.e)
		near(t, "nadir", got.NadirHz, want, 1e-9*want) // asked for: 0.1 %
		near(t, "its time", got.NadirS, c.delayS+c.rampS*c.p/c.r, 1e-6)
	}
}

// Badesa, Teng, Strbac, "Simultaneous scheduling of multiple frequency services in
// stochastic unit commitment", IEEE Trans. Power Systems 34(5), 2019 (form from memory;
// rederived): E = 60,000 MW·s, f0 = 50 Hz, ΔP = 1,200, R = 1,500 in 10 s, F = 300 in
// 1 s: 1.1875 Hz at 6 s (computed).
func TestNadirOfTwoSpeeds(t *testing.T) {
	s := NewSystem(Limits{NominalHz: 50, SteadyByS: 30, SteadyUntilS: 60}, [][]Knot{ramp(0, 10), ramp(0, 1)})
	got := s.Run(Event{LossMW: 1200, InertiaMWs: 60_000, ResponseMW: []float64{1500, 300}})
	near(t, "nadir", got.NadirHz, 1.1875, 1e-9)
	near(t, "its time", got.NadirS, 6, 1e-6)
}

// Commission Regulation (EU) 2017/1485, Annex V: full activation of containment reserve
// within 30 s (Continental Europe), 10 s (Great Britain), 15 s (Ireland and Northern
// Ireland), 30 s (Nordic). A reserve just as large as the loss, running straight up to
// the full activation time T, turns frequency at T, by the formula of TestNadirOfOneRamp
// at f0·ΔP·T/(4·E); read a second before T, it is 1/T of the loss short.
func TestFullActivationTimes(t *testing.T) {
	for _, c := range []struct {
		area          string
		lossMW, e, by float64
	}{
		{"Continental Europe", 3000, 900_000, 30},
		{"Great Britain", 1320, 150_000, 10},
		{"Ireland and Northern Ireland", 500, 23_000, 15},
		{"Nordic", 1450, 150_000, 30},
	} {
		t.Run(c.area, func(t *testing.T) {
			shapes := [][]Knot{ramp(0, c.by)}
			e := Event{LossMW: c.lossMW, InertiaMWs: c.e, ResponseMW: []float64{c.lossMW}}
			want := 50 * c.lossMW * c.by / (4 * c.e)
			full := NewSystem(Limits{NominalHz: 50, SteadyByS: c.by, SteadyUntilS: 60}, shapes)
			got := full.Run(e)
			near(t, "nadir", got.NadirHz, want, 1e-9)
			near(t, "its time", got.NadirS, c.by, 1e-3)
			near(t, "steady", got.SteadyHz, want, 1e-9) // undamped, it stays where it turned

			early := NewSystem(Limits{NominalHz: 50, SteadyByS: c.by - 1, SteadyUntilS: 60}, shapes)
			if got := early.Run(e).SteadyHz; !math.IsInf(got, 1) {
				t.Errorf("a reserve 1/%g short and no damping: steady %v Hz, want +Inf", c.by, got)
			}
			e.DampingMWPerHz = c.lossMW / 10
			got = early.Run(e)
			if least := 10 / c.by; got.SteadyHz < least-1e-9 {
				t.Errorf("steady %v Hz, but what is missing at %g s alone leaves %v Hz", got.SteadyHz, c.by-1, least)
			}
		})
	}
}

// Kundur, Power System Stability and Control, 1994, example 11.1 (from memory): four
// machines of 500 MVA with H = 5 s, 60 Hz; 20 MW changed, a load of 1,000 MW left that
// changes 1.5 % for 1 % of frequency, no governors: time constant 13.33 s, steady
// deviation 0.8 Hz. The book loses load and frequency rises; the equation is linear, so
// losing 20 MW of generation mirrors it.
func TestStepWithLoadDamping(t *testing.T) {
	const tau = 2 * 10_000 / (60 * 25.0) // 2E/(f0·D) = 13.33 s, D = 1.5 %·1,000 MW/0.6 Hz = 25 MW/Hz
	near(t, "time constant", tau, 13.33, 0.005)
	s := NewSystem(Limits{NominalHz: 60, SteadyByS: 300, SteadyUntilS: 600}, nil)
	e := Event{LossMW: 20, InertiaMWs: 4 * 500 * 5, DampingMWPerHz: 0.015 * 1000 / 0.6}
	at, dev := s.Trajectory(e, 0.037)
	for i := range at {
		near(t, "deviation", dev[i], 0.8*(1-math.Exp(-at[i]/tau)), 1e-9)
	}
	got := s.Run(e)
	near(t, "steady", got.SteadyHz, 0.8, 1e-9)
	near(t, "RoCoF", got.RoCoFHzPerS, 0.8/tau, 1e-12)
}
