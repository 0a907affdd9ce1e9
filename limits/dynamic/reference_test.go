package dynamic

import (
	"math"
	"testing"
)

func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.9g, want %.9g within %.2g", what, got, want, tol)
	}
}

// R2. Kundur, Power System Stability and Control, 1994, example 11.1 (from memory): four
// 500 MVA machines, H = 5 s; load of 1,020 MW that changes 1.5 % for 1 % of frequency; 20 MW
// of load lost, no governors, 60 Hz: time constant 13.33 s, steady deviation +0.8 Hz.
func TestReferenceLoadAlone(t *testing.T) {
	// D = 1.5·1,000/60 MW/Hz is counted on the 1,000 MW that remain, as in the example's 0.75 p.u.
	sys := &System{NominalHz: 60, LoadMW: 1000, DampingPctPerHz: 1.5 * 100 / 60, InertiaMWs: 4 * 500 * 5}
	var s Simulator
	o := s.Run(sys, []Loss{{Name: "load", MW: -20}}, Options{SteadyByS: 100, UntilS: 200})
	near(t, "steady deviation", -o.EndHz, 0.8, 5e-4) // three digits
	near(t, "highest", o.PeakHz, 0.8, 5e-4)
	const tau = 40.0 / 3
	for _, at := range []float64{1, tau, 30} {
		near(t, "course", -deviationAt(o, at), 0.8*(1-math.Exp(-at/tau)), 5e-4)
	}
}

func deviationAt(o *Outcome, t float64) float64 {
	for i := 1; i < len(o.Points); i++ {
		a, b := o.Points[i-1], o.Points[i]
		if a.S <= t && t <= b.S && b.S > a.S {
			h, x := b.S-a.S, (t-a.S)/(b.S-a.S)
			m0, m1, rise := h*a.HzPerS, h*b.HzPerS, b.Hz-a.Hz
			return a.Hz + x*(m0+x*((3*rise-2*m0-m1)+x*(m0+m1-2*rise)))
		}
	}
	return o.Points[len(o.Points)-1].Hz
}

// R3. Glover, Sarma, Overbye, Power System Analysis and Design, chapter on power system
// controls (from memory): machines of 1,000, 750 and 500 MVA, droop 0.05 on own base, 200 MW
// more load, no load damping, 60 Hz: −0.2667 Hz; shares 88.89, 66.67, 44.44 MW.
func TestReferenceDroopShares(t *testing.T) {
	m := &Model{Kind: Steam, DroopPct: 5, GovernorS: 0.2, ChestS: 0.3, HighPressureShare: 1}
	sys := &System{NominalHz: 60, LoadMW: 2000, InertiaMWs: 9000}
	for _, mva := range []float64{1000, 750, 500} {
		sys.Units = append(sys.Units, Unit{Model: m, N: 1, RatingMW: mva, UpMW: mva, DownMW: mva})
	}
	var s Simulator
	o := s.Run(sys, []Loss{{MW: 200}}, Options{SteadyByS: 100, UntilS: 150, Record: true, TolHz: 1e-7})
	near(t, "deviation", o.EndHz, 0.2667, 5e-5)
	for i, want := range []float64{88.89, 66.67, 44.44} {
		near(t, "share", o.MW[i][len(o.MW[i])-1], want, 0.005)
	}
}

// R4 in closed loop. UCTE Operation Handbook, appendix 1 (from memory): 3,000 MW lost, load
// of 150 GW with 1 %/Hz, 15,000 MW/Hz of primary control: 0.182 Hz (computed). 5 % of droop
// on 37,500 MW of machines are 15,000 MW/Hz.
func TestReferenceUCTEIncident(t *testing.T) {
	m := &Model{Kind: Steam, DroopPct: 5, GovernorS: 0.2, ChestS: 0.3, ReheatS: 7, HighPressureShare: 0.3}
	sys := &System{NominalHz: 50, LoadMW: 150_000, DampingPctPerHz: 1, InertiaMWs: 900_000,
		Units: []Unit{{Model: m, N: 75, RatingMW: 500, UpMW: 100, DownMW: 100}}}
	var s Simulator
	o := s.Run(sys, []Loss{{MW: 3000}}, Options{SteadyByS: 200, UntilS: 300})
	near(t, "steady deviation", o.SteadyHz, 3000.0/16_500, 1e-5)
	near(t, "rounded as published", o.SteadyHz, 0.182, 5e-4)
	if o.NadirHz <= o.SteadyHz {
		t.Errorf("nadir %g above the steady deviation", o.NadirHz)
	}
}

// anderson is R7: Anderson, Mirheydar, "A low-order system frequency response model", IEEE
// Trans. Power Systems 5(3), 1990 (form and typical values from memory).
func anderson(t float64) float64 {
	const r, h, km, fh, tr, d, p = 0.05, 4.0, 0.95, 0.3, 8.0, 1.0, -0.2
	wn := math.Sqrt((d*r + km) / (2 * h * r * tr))
	z := wn * (2*h*r + (d*r+km*fh)*tr) / (2 * (d*r + km))
	root := math.Sqrt(1 - z*z)
	wr := wn * root
	alpha := math.Sqrt((1 - 2*tr*z*wn + tr*tr*wn*wn) / (1 - z*z))
	phi := math.Atan2(wr*tr, 1-z*wn*tr) - math.Atan2(root, -z)
	return r * p / (d*r + km) * (1 + alpha*math.Exp(-z*wn*t)*math.Sin(wr*t+phi))
}

// R7: nadir −0.021664 p.u. at 2.3688 s, steady −0.0100; the whole curve to 1e-4 p.u.
func TestReferenceReheatResponse(t *testing.T) {
	m := &Model{Kind: Steam, DroopPct: 5, Gain: 0.95, ReheatS: 8, HighPressureShare: 0.3}
	const base = 1000.0
	// D = 1 p.u. of the base for 1 p.u. of frequency.
	sys := &System{NominalHz: 60, LoadMW: base, DampingPctPerHz: 100.0 / 60, InertiaMWs: 4 * base,
		Units: []Unit{{Model: m, N: 1, RatingMW: base, UpMW: base, DownMW: base}}}
	var s Simulator
	o := s.Run(sys, []Loss{{MW: 0.2 * base}}, Options{SteadyByS: 60, UntilS: 80})
	near(t, "nadir", o.NadirHz/60, 0.021664, 1e-4)
	near(t, "nadir", o.NadirHz, 1.2998, 5e-4)
	near(t, "instant of the nadir", o.NadirS, 2.3688, 0.005)
	near(t, "steady", o.EndHz/60, 0.0100, 1e-4)
	for at := 0.0; at <= 60; at += 0.05 {
		near(t, "curve", -deviationAt(o, at)/60, anderson(at), 1e-4)
	}
}

// S3. Technical requirements for fast frequency reserve provision in the Nordic synchronous
// area (ENTSO-E, read): full activation within 1.3 s at 49.7 Hz, 1.0 s at 49.6 Hz, 0.7 s at
// 49.5 Hz; support for at least 5 s if withdrawn at no more than 20 % of the capacity a second,
// else 30 s; ready again within 15 min. A ramp of frequency through the level is the test.
func TestReferenceFastReserveQualifies(t *testing.T) {
	for _, v := range []struct {
		level, full, hold, withdraw float64
		want                        bool
	}{
		{0.3, 1.3, 30, 0, true}, {0.4, 1.0, 30, 0, true}, {0.5, 0.7, 5, 5, true},
		{0.3, 1.4, 30, 0, false}, // slower
		{0.5, 0.7, 5, 4, false},  // withdrawn at 25 % a second after 5 s
		{0.5, 0.7, 29, 0, false}, // at once after less than 30 s
	} {
		m := Defaults(Step)
		m.LevelHz = v.level
		m.Course.DelayS, m.Course.RampS = 0.2, v.full-0.2
		m.Course.HoldS, m.Course.WithdrawS = v.hold, v.withdraw
		if got := qualifies(&m); got != v.want {
			t.Errorf("%+v qualifies: %v", v, got)
		}
	}
}

// qualifies measures the delivered share while frequency falls through the level at
// 0.24 Hz/s and stays 0.6 Hz below nominal, against the limits above.
func qualifies(m *Model) bool {
	var s Simulator
	const every = 0.01
	share := course(&s, m, Test{HzPerS: 0.24, ToHz: 0.6}, 120, every)
	trigger := m.LevelHz / 0.24
	full := map[float64]float64{0.3: 1.3, 0.4: 1.0, 0.5: 0.7}[m.LevelHz]
	first, last := -1.0, -1.0
	steepest := 0.0
	for i, v := range share {
		at := float64(i)*every - trigger
		if v >= 1-1e-6 {
			if first < 0 {
				first = at
			}
			last = at
		}
		if i > 0 && last > 0 {
			steepest = max(steepest, (share[i-1]-v)/every)
		}
	}
	if first < 0 || first > full+every {
		return false
	}
	least := 30.0
	if steepest <= 0.2*(1+1e-6) {
		least = 5
	}
	return last-full >= least-2*every && m.RestS <= 900
}

// course gives what one unit that holds all it can delivers in a test, as a share of what
// it holds, every so many seconds from 0 on. A droop holds what it asks for at ToHz, a step
// and synthetic inertia 1 MW, the latter for the kinetic energy that asks for it at HzPerS.
func course(s *Simulator, m *Model, q Test, untilS, everyS float64) []float64 {
	const f0 = 50
	u := Unit{Model: m, N: 1, RatingMW: 1, UpMW: 1}
	if m.DroopPct > 0 {
		gain := m.Gain
		if gain == 0 {
			gain = 1
		}
		u.RatingMW = m.DroopPct / 100 * f0 / (gain * max(q.ToHz-m.DeadbandHz, 1e-9))
	}
	if m.Kind == Synthetic {
		u.SyntheticMWs = f0 / (2 * max(q.HzPerS, 1e-9))
	}
	return s.Deliver(&u, f0, q.At, untilS, everyS)
}
