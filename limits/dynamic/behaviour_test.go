package dynamic

import (
	"fmt"
	"math"
	"testing"

	"evenkeel/limits"
)

func run(t testing.TB, sys *System, losses []Loss, o Options) Outcome {
	t.Helper()
	var s Simulator
	return *s.Run(sys, losses, o)
}

// A step of gate g through (1 − TW·s)/(1 + TW/2·s) delivers −2·g at first and g·(1 − 3·e^(−2t/TW))
// at t. Gates do not step: here the gate follows with a lag TG, so that the water column
// delivers g·(1 − A·e^(−t/TG) − B·e^(−2t/TW)) with A = (TG + TW)/(TG − TW/2) and
// B = −(3/2)·TW/(TG − TW/2) (partial fractions). Below zero at first: the wrong way.
func TestHydroMovesTheWrongWayFirst(t *testing.T) {
	const tg, tw, up = 0.3, 2.0, 10.0
	m := &Model{Kind: Hydro, DroopPct: 5, GovernorS: tg, WaterS: tw}
	u := &Unit{Model: m, N: 1, RatingMW: 1000, UpMW: up}
	var s Simulator
	const every = 0.02
	got := s.Deliver(u, 50, func(float64) float64 { return 1 }, 12, every) // asks for 400 MW, has 10
	a, b := (tg+tw)/(tg-tw/2), -1.5*tw/(tg-tw/2)
	least := 0.0
	for i, v := range got {
		at := float64(i) * every
		near(t, fmt.Sprint("share at ", at), v, 1-a*math.Exp(-at/tg)-b*math.Exp(-2*at/tw), 2e-4)
		least = min(least, v)
	}
	if least > -0.3 {
		t.Errorf("the least share is %g", least)
	}
}

// 4 % of droop on 500 MW ask for 250 MW/Hz: without other response and damping, 100 MW lost
// settle where 250·(x − 0.01) = 100, at 0.41 Hz. With room for 60 MW alone frequency falls on, in
// the end at f0/(2E)·40 Hz/s.
func TestSaturationAndDeadband(t *testing.T) {
	m := &Model{Kind: Gas, DroopPct: 4, DeadbandHz: 0.01, GovernorS: 0.3, TurbineS: 0.2}
	sys := &System{NominalHz: 50, InertiaMWs: 5000, Units: []Unit{{Model: m, N: 1, RatingMW: 500, UpMW: 500}}}
	o := run(t, sys, []Loss{{MW: 100}}, Options{SteadyByS: 30, UntilS: 60, TolHz: 1e-8})
	near(t, "settled", o.EndHz, 0.41, 1e-5)
	sys.Units[0].UpMW = 60
	o = run(t, sys, []Loss{{MW: 100}}, Options{SteadyByS: 30, UntilS: 60, TolHz: 1e-8})
	a, b := o.Points[len(o.Points)-2], o.Points[len(o.Points)-1]
	near(t, "fall in the end", (b.Hz-a.Hz)/(b.S-a.S), 50.0/10_000*40, 1e-6)
	// Within the deadband nothing moves: 0.5 MW on 1 %/Hz of 5,000 MW settle at 0.01 Hz.
	sys.LoadMW, sys.DampingPctPerHz = 5000, 1
	o = run(t, sys, []Loss{{MW: 0.5}}, Options{SteadyByS: 30, UntilS: 60, Record: true})
	near(t, "settled by damping", o.EndHz, 0.01*(1-math.Exp(-60*50*50/10_000.0)), 1e-6)
	if e := o.EnergyMWs[0]; e != 0 {
		t.Errorf("%g MW·s delivered within the deadband", e)
	}
}

// A valve that may open by 10 % of 200 MW a second is full, at 40 MW, 2 s after it is asked
// to by a deviation that asks for all of it at once.
func TestRateLimit(t *testing.T) {
	m := &Model{Kind: Steam, DroopPct: 4, GovernorS: 0.02, HighPressureShare: 1, RatePctPerS: 10}
	var s Simulator
	got := s.Deliver(&Unit{Model: m, N: 1, RatingMW: 200, UpMW: 40}, 50, func(float64) float64 { return 1 }, 3, 0.1)
	for i, v := range got {
		at := 0.1 * float64(i)
		near(t, fmt.Sprint("share at ", at), v, min(1, at*20/40), 0.011) // the lag of 20 ms rounds the corner
	}
}

// A converter measures late: for DelayS it does nothing.
func TestMeasuringDelay(t *testing.T) {
	m := &Model{Kind: Droop, DroopPct: 2, DelayS: 0.25, LagS: 0.05}
	sys := &System{NominalHz: 50, InertiaMWs: 1000, Units: []Unit{{Model: m, N: 1, RatingMW: 100, UpMW: 100}}}
	o := run(t, sys, []Loss{{MW: 50}}, Options{SteadyByS: 30, UntilS: 60, Record: true})
	for i, at := range o.Times {
		if at <= 0.25 && o.MW[0][i] != 0 {
			t.Fatalf("%g MW at %g s", o.MW[0][i], at)
		}
	}
	near(t, "deviation at the end of the delay", deviationAt(&o, 0.25), 50*50*0.25/2000, 1e-6)
	near(t, "settled", o.EndHz, 0.5, 1e-4) // 100 MW for 1 Hz
}

// A response of 50 MW is set off where frequency passes 0.3 Hz, t = 0.3·2E/(f0·P) = 2.4 s after
// 50 MW are lost at E = 10,000 MW·s; it is out 0.5 s later, stays for 10 s and goes over 2 s. A
// second loss then sets it off again, but only once it has rested for 20 s.
func TestTriggerWithdrawalAndRest(t *testing.T) {
	m := &Model{Kind: Step, LevelHz: 0.3, Course: limits.Timing{RampS: 0.5, HoldS: 10, WithdrawS: 2}, RestS: 20}
	sys := &System{NominalHz: 50, InertiaMWs: 10_000, Units: []Unit{{Name: "r", Model: m, N: 1, RatingMW: 50, UpMW: 50}}}
	// The first loss is made good at 12 s, so that frequency does not run away.
	o := run(t, sys, []Loss{{Name: "a", MW: 50}, {Name: "back", AtS: 12, MW: -51}, {Name: "b", AtS: 60, MW: 60}}, Options{SteadyByS: 30, UntilS: 60, Record: true})
	var set []float64
	for _, h := range o.Happenings {
		if h.What == "set off" {
			set = append(set, h.AtS)
		}
	}
	if len(set) < 1 {
		t.Fatal(o.Happenings)
	}
	near(t, "set off", set[0], 0.3*2*10_000/(50*50), 1e-4)
	mwAt := func(t float64) float64 {
		for i := len(o.Times) - 1; i > 0; i-- {
			if o.Times[i-1] <= t {
				x := (t - o.Times[i-1]) / max(o.Times[i]-o.Times[i-1], 1e-12)
				return o.MW[0][i-1] + x*(o.MW[0][i]-o.MW[0][i-1])
			}
		}
		return 0
	}
	for _, v := range [][2]float64{{2.3, 0}, {2.65, 25}, {2.95, 50}, {12.8, 50}, {13.9, 25}, {15.2, 0}, {30, 0}} {
		near(t, fmt.Sprintf("MW at %g s", v[0]), mwAt(v[0]), v[1], 0.6)
	}
	if len(set) < 2 {
		t.Fatalf("set off at %v: %v", set, o.Happenings)
	}
	// Before the second loss frequency drifts up by 1 MW from where it was; the level is passed again
	// after 60 s, long after the rest.
	if set[1] < 60 || set[1] < set[0]+12.5+20 {
		t.Errorf("set off at %v", set)
	}
}

// Still below the level when the rest is over, it is set off again at once.
func TestSetOffAgainAfterTheRest(t *testing.T) {
	m := &Model{Kind: Step, LevelHz: 0.3, Course: limits.Timing{RampS: 0.5, HoldS: 5, WithdrawS: 1}, RestS: 4}
	sys := &System{NominalHz: 50, InertiaMWs: 10_000, LoadMW: 5000, DampingPctPerHz: 2, Units: []Unit{{Name: "r", Model: m, N: 1, RatingMW: 20, UpMW: 20}}}
	o := run(t, sys, []Loss{{MW: 60}}, Options{SteadyByS: 30, UntilS: 60})
	var set []float64
	for _, h := range o.Happenings {
		if h.What == "set off" {
			set = append(set, h.AtS)
		}
	}
	if len(set) < 3 {
		t.Fatal(o.Happenings)
	}
	for i := 1; i < len(set); i++ {
		near(t, "from one to the next", set[i]-set[i-1], 0.5+5+1+4, 1e-6)
	}
}

// Synthetic inertia of 500 MW·s behind a filter of no weight acts like 500 MW·s more: the fall
// after the filter has settled is f0·P/(2·(E + 500)); its power limit caps what it gives.
func TestSyntheticInertia(t *testing.T) {
	m := &Model{Kind: Synthetic, FilterS: 0.05}
	sys := &System{NominalHz: 50, InertiaMWs: 1500, Units: []Unit{{Model: m, N: 1, RatingMW: 100, SyntheticMWs: 500, UpMW: 100}}}
	o := run(t, sys, []Loss{{MW: 40}}, Options{SteadyByS: 30, UntilS: 60, TolHz: 1e-9})
	near(t, "first fall", o.Points[0].HzPerS, 50*40/3000.0, 1e-9)
	near(t, "fall", o.Points[len(o.Points)-1].HzPerS, 50*40/4000.0, 1e-6)
	sys.Units[0].UpMW = 4
	o = run(t, sys, []Loss{{MW: 40}}, Options{SteadyByS: 30, UntilS: 60})
	near(t, "fall at its limit", o.Points[len(o.Points)-1].HzPerS, 50*36/3000.0, 1e-6)
}

// Stages of load shedding: 5 % of 1,000 MW at 1.0 Hz after 0.2 s, once; 10 % at 1.4 Hz after 0.1 s.
// Without response frequency falls at f0·P/(2E) = 1 Hz/s, so the first acts at 1.2 s.
func TestSheddingInStages(t *testing.T) {
	sys := &System{NominalHz: 50, InertiaMWs: 2500, LoadMW: 1000, Relays: []Relay{
		{Name: "first", LevelHz: 1.0, DelayS: 0.2, ShedShare: 0.05}, {Name: "second", LevelHz: 1.4, DelayS: 0.1, ShedShare: 0.1}}}
	o := run(t, sys, []Loss{{MW: 100}}, Options{SteadyByS: 30, UntilS: 60})
	var got []Happening
	for _, h := range o.Happenings {
		if h.What == "shed" {
			got = append(got, h)
		}
	}
	if len(got) != 2 {
		t.Fatal(o.Happenings)
	}
	near(t, "first", got[0].AtS, 1.2, 1e-4)
	near(t, "MW", got[0].MW, 50, 1e-9)
	// 50 MW missing from 1.2 s on: 1.4 Hz at 1.2 + 0.2/0.5 s, 0.1 s later 100 MW go and 50 are too many.
	near(t, "second", got[1].AtS, 1.7, 1e-4)
	near(t, "lowest", o.NadirHz, 1.45, 1e-4)
	// A relay that frequency leaves before its delay is over resets.
	sys.Relays = []Relay{{Name: "slow", LevelHz: 1.0, DelayS: 2, ShedShare: 0.05}}
	o = run(t, sys, []Loss{{MW: 100}, {AtS: 1.5, MW: -200}}, Options{SteadyByS: 30, UntilS: 60})
	for _, h := range o.Happenings {
		if h.What == "shed" {
			t.Error(o.Happenings)
		}
	}
}

// Embedded generation of 20 MW trips where frequency falls by 0.5 Hz/s or more over 0.5 s for
// 0.2 s: at 1 Hz/s the window shows 0.5 Hz/s after 0.25 s, so it trips at 0.45 s. At 0.4 Hz/s it stays.
func TestEmbeddedGenerationTrips(t *testing.T) {
	sys := &System{NominalHz: 50, InertiaMWs: 2500, LoadMW: 1000, Relays: []Relay{{Name: "embedded", HzPerS: 0.5, WindowS: 0.5, DelayS: 0.2, LostMW: 20}}}
	o := run(t, sys, []Loss{{MW: 100}}, Options{SteadyByS: 30, UntilS: 60, MaxStepS: 0.01})
	found := false
	for _, h := range o.Happenings {
		if h.What == "tripped" {
			found = true
			near(t, "instant", h.AtS, 0.45, 0.011)
			near(t, "MW", h.MW, 20, 0)
		}
	}
	if !found {
		t.Fatal(o.Happenings)
	}
	if o := run(t, sys, []Loss{{MW: 40}}, Options{SteadyByS: 30, UntilS: 60}); len(o.Happenings) != 1 {
		t.Error(o.Happenings)
	}
}

// Above nominal: 80 MW of load lost, 40 MW of foot-room on a droop of 200 MW/Hz beyond 10 mHz.
// Damping of 1 % of 2,000 MW per Hz carries the other 40 MW at 2 Hz.
func TestFootRoomAboveNominal(t *testing.T) {
	m := &Model{Kind: Gas, DroopPct: 5, DeadbandHz: 0.01, GovernorS: 0.3}
	sys := &System{NominalHz: 50, InertiaMWs: 5000, LoadMW: 2000, DampingPctPerHz: 1, Units: []Unit{{Model: m, N: 1, RatingMW: 500, UpMW: 0, DownMW: 40}}}
	o := run(t, sys, []Loss{{MW: -80}}, Options{WindowS: 0.5, SteadyByS: 100, UntilS: 150})
	near(t, "highest", -o.EndHz, 2, 1e-3)
	near(t, "steady above", o.SteadyOverHz, 2, 1e-3)
	if o.NadirHz != 0 || o.RiseHzPerS <= 0 {
		t.Errorf("%+v", o.NadirHz)
	}
	near(t, "first rise", -o.Points[0].HzPerS, 50*80/10_000.0, 1e-9)
}

// E1. Great Britain, 9 August 2019 (public technical and regulator reports; figures from memory
// save where marked read): about 210 GVA·s and 29 GW of load; 737 MW wind, 244 MW steam
// turbine and 150 MW embedded lost within the first second, then about 350 MW embedded on
// RoCoF protection: 1,481 MW (read); about 900 MW of response delivered (read); frequency held
// near 49.1 to 49.2 Hz; 210 MW more lost at about 57 s (1,691 MW in all, read), then 48.8 Hz (read).
//
// Assumed here, as we know of no published figure: 900 MW of response as 500 MW of quick droop
// and 400 MW of steam turbines, all out by 0.5 Hz; all losses without their inertia. Load damping
// of 2.27 % per Hz is what the figures imply: 1,691 − 900 MW carried at 1.2 Hz by 29 GW. The first
// arrest then is a prediction.
func TestRecordedEventOf2019(t *testing.T) {
	quick := &Model{Kind: Droop, DroopPct: 2, DeadbandHz: 0.015, DelayS: 0.5, LagS: 0.5}
	slow := &Model{Kind: Steam, DroopPct: 4, DeadbandHz: 0.015, GovernorS: 0.3, ChestS: 0.3, ReheatS: 8, HighPressureShare: 0.3}
	sys := &System{NominalHz: 50, LoadMW: 29_000, DampingPctPerHz: 2.27, InertiaMWs: 210_000, Units: []Unit{
		{Name: "quick", Model: quick, N: 1, RatingMW: 1000, UpMW: 500}, {Name: "slow", Model: slow, N: 1, RatingMW: 2000, UpMW: 400}}}
	losses := []Loss{{Name: "wind, steam turbine, embedded", MW: 1131}, {Name: "embedded on RoCoF", AtS: 0.7, MW: 350}, {Name: "gas turbine", AtS: 57, MW: 210}}
	o := run(t, sys, losses, Options{WindowS: 0.5, SteadyByS: 30, UntilS: 90})
	near(t, "initial RoCoF from 1,131 MW by R1", o.Points[0].HzPerS, 0.135, 5e-4)
	near(t, "RoCoF from 1,481 MW by R1", 50*1481/(2*210_000.0), 0.176, 5e-4)
	if r := o.RoCoFHzPerS; r < 0.13 || r > 0.18 {
		t.Errorf("RoCoF over half a second %.3f Hz/s, reported about 0.16", r)
	}
	low := 0.0
	for _, p := range o.Points {
		if p.S < 57 {
			low = max(low, p.Hz)
		}
	}
	if f := 50 - low; f < 49.05 || f > 49.25 {
		t.Errorf("first arrest at %.3f Hz, published near 49.1 to 49.2", f)
	}
	reached := math.Inf(1)
	for _, p := range o.Points {
		if p.Hz >= 1.195 { // 48.8 as rounded
			reached = min(reached, p.S)
		}
	}
	if reached < 57 || reached > 117 {
		t.Errorf("48.8 Hz reached at %.1f s, published after the second loss at 57 s; lowest %.3f", reached, 50-o.NadirHz)
	}
}

// A loss at 20 s does 20 s later what it does at 0 s, jumps of shapes and of courses included.
func TestLaterLossDoesTheSame(t *testing.T) {
	jump, err := limits.Timing{DelayS: 0.2, RampS: 0.6, HoldS: 8, WithdrawS: 2, RecoveryShare: 0.3, RecoveryS: 15}.Shape() // comes back at once
	if err != nil {
		t.Fatal(err)
	}
	step := &Model{Kind: Step, LevelHz: 0.15, Course: limits.Timing{DelayS: 0.1, HoldS: 20, WithdrawS: 0}, RestS: 900}
	gas := Defaults(Gas)
	sys := &System{NominalHz: 50, LoadMW: 400, DampingPctPerHz: 1, InertiaMWs: 2000, Units: []Unit{
		{Name: "s", Model: step, N: 1, RatingMW: 20, UpMW: 12}, {Name: "g", Model: &gas, N: 3, RatingMW: 60, UpMW: 12}},
		Promises: []Promise{{"p", jump, 10}}}
	opt := Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60, TolHz: 1e-7}
	a := run(t, sys, []Loss{{MW: 50}}, opt)
	for _, at := range []float64{0.1, 7.3, 20, 33.337} {
		b := run(t, sys, []Loss{{AtS: at, MW: 50}}, opt)
		near(t, "nadir", b.NadirHz, a.NadirHz, 1e-5)
		near(t, "instant of the nadir", b.NadirS-at, a.NadirS, 0.02)
		near(t, "steady", b.SteadyHz, a.SteadyHz, 1e-5)
		for _, s := range []float64{5, 19, 21, 25.5, 26.5, 40} {
			near(t, fmt.Sprintf("at %g + %g s", at, s), deviationAt(&b, at+s), deviationAt(&a, s), 1e-4)
		}
	}
}

// What is lost altogether is out of the equations: its filter would be followed in steps that
// are too long for it, as nothing hangs on it any more.
func TestLostUnitsAreLeftOut(t *testing.T) {
	syn := &Model{Kind: Synthetic, FilterS: 0.05}
	hydro := Defaults(Hydro)
	sys := &System{NominalHz: 50, LoadMW: 300, DampingPctPerHz: 1, InertiaMWs: 1500, Units: []Unit{
		{Name: "battery", Model: syn, N: 1, RatingMW: 30, UpMW: 10, DownMW: 10, SyntheticMWs: 300}, {Name: "river", Model: &hydro, N: 2, RatingMW: 60, UpMW: 25}}}
	o := run(t, sys, []Loss{{Name: "battery", MW: 20, Units: []Gone{{Index: 0, Much: 1}}}}, Options{SteadyByS: 30, UntilS: 600, TolHz: 2e-5})
	sys.Units = sys.Units[1:]
	want := run(t, sys, []Loss{{Name: "battery", MW: 20}}, Options{SteadyByS: 30, UntilS: 600, TolHz: 2e-5})
	near(t, "nadir", o.NadirHz, want.NadirHz, 1e-9)
	near(t, "end", o.EndHz, want.EndHz, 1e-6)
}
