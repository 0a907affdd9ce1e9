package study

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"evenkeel/limits/dynamic"
)

// noisy makes a record of a simulated event: quiet before, noise, gaps, an offset, a start that
// is nobody's business.
func noisy(rng *rand.Rand, every, noise float64, inertia, damping, gain, lag, lost float64) (*Record, float64) {
	clean := simulated(50, 5000, lost, inertia, damping, gain, lag, 40, every)
	lead := 15 + 5*rng.Float64()
	offset := 0.02 * (rng.Float64() - 0.5)
	r := &Record{}
	for t := 0.0; t < lead; t += every {
		r.S, r.Hz = append(r.S, t), append(r.Hz, 50+offset+noise*rng.NormFloat64())
	}
	gap := lead + 12 + 10*rng.Float64()
	for i := range clean.S {
		if t := lead + clean.S[i]; t < gap || t > gap+2 {
			r.S, r.Hz = append(r.S, t), append(r.Hz, clean.Hz[i]+offset+noise*rng.NormFloat64())
		}
	}
	return r, lead
}

// Known parameters are recovered from noisy simulated events: kinetic energy within 3 %, its
// interval covering the truth in at least 17 of 20.
func TestMatchRecoversTheSystem(t *testing.T) {
	covered := 0
	for seed := range uint64(20) {
		rng := rand.New(rand.NewPCG(seed, 5))
		inertia, damping, gain, lag := 12_000+16_000*rng.Float64(), 30+40*rng.Float64(), 400+500*rng.Float64(), 1.5+3*rng.Float64()
		every := []float64{0.01, 0.02, 0.05, 0.1}[seed%4]
		r, lead := noisy(rng, every, 0.001, inertia, damping, gain, lag, 200)
		f, err := Match(r, 50, 5000, 200, 0)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		e := f.Estimates[parInertia]
		if off := e.Value/inertia - 1; math.Abs(off) > 0.03 || !e.Identified {
			t.Errorf("seed %d, every %g s: kinetic energy %.0f [%.0f, %.0f], truth %.0f (%.1f %%)", seed, every, e.Value, e.Low, e.High, inertia, 100*off)
		}
		if e.Low <= inertia && inertia <= e.High {
			covered++
		}
		if math.Abs(f.StartS-lead) > 0.1 {
			t.Errorf("seed %d: start %.3f s, truth %.3f s", seed, f.StartS, lead)
		}
		if f.Residual > 0.0015 {
			t.Errorf("seed %d: residual %.5f Hz", seed, f.Residual)
		}
	}
	if covered < 17 {
		t.Errorf("the interval covers the truth in %d of 20", covered)
	}
	t.Logf("covered in %d of 20", covered)
}

// Slow sampling, a loss of load, bad samples.
func TestMatchTakesWhatThereIs(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 6))
	r, _ := noisy(rng, 0.5, 0.001, 20_000, 40, 600, 3, 200)
	f, err := Match(r, 50, 5000, 200, 0)
	if err != nil {
		t.Fatal(err)
	}
	if e := f.Estimates[parInertia]; math.Abs(e.Value/20_000-1) > 0.15 {
		t.Errorf("every half second: %+v", e)
	}
	r, _ = noisy(rng, 0.05, 0.001, 20_000, 40, 600, 3, -200)
	for i := 0; i < len(r.Hz); i += 17 {
		r.Hz[i] = math.NaN()
	}
	f, err = Match(r, 50, 5000, -200, 0)
	if err != nil {
		t.Fatal(err)
	}
	if e := f.Estimates[parInertia]; math.Abs(e.Value/20_000-1) > 0.04 {
		t.Errorf("load lost: %+v", e)
	}
}

// A record without an event is refused.
func TestMatchRefusesQuietRecords(t *testing.T) {
	for seed := range uint64(10) {
		rng := rand.New(rand.NewPCG(seed, 7))
		r := &Record{}
		drift := 0.0
		for s := 0.0; s < 60; s += 0.05 {
			drift += 0.0003 * rng.NormFloat64() // frequency wanders
			r.S, r.Hz = append(r.S, s), append(r.Hz, 50+drift+0.001*rng.NormFloat64())
		}
		if f, err := Match(r, 50, 5000, 200, 0); !errors.Is(err, ErrNoEvent) {
			t.Errorf("seed %d: %v, %v", seed, err, f != nil)
		}
	}
}

// Damping and gain cannot be told apart where the response has no lag to speak of: said so.
func TestMatchSaysWhatItCannotTell(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 8))
	r, _ := noisy(rng, 0.5, 0.003, 20_000, 100, 200, 0.05, 200)
	f, err := Match(r, 50, 5000, 200, 0)
	if err != nil {
		t.Fatal(err)
	}
	d, g := f.Estimates[parDamping], f.Estimates[parGain]
	if d.Identified && g.Identified {
		t.Errorf("damping %+v, gain %+v", d, g)
	}
	if together := d.Value + g.Value; math.Abs(together/300-1) > 0.15 {
		t.Errorf("together %g MW/Hz, truth 300", together)
	}
}

// The closed form against the matrix exponential (gonum/mat).
func TestMatchModelAgainstMatrixExponential(t *testing.T) {
	for _, v := range [][4]float64{{20_000, 40, 600, 3}, {20_000, 400, 60, 0.5}, {5000, 50, 1000, 8}} {
		inertia, damping, gain, lag := v[0], v[1], v[2], v[3]
		k := 50 / (2 * inertia)
		a := mat.NewDense(3, 3, []float64{-k * damping, -k, k * 200, gain / lag, -1 / lag, 0, 0, 0, 0})
		for _, at := range []float64{0.1, 1, 5, 20} {
			var scaled, e mat.Dense
			scaled.Scale(at, a)
			e.Exp(&scaled)
			if got, want := deviation(at, 50, 200, inertia, damping, gain, lag), e.At(0, 2); math.Abs(got-want) > 1e-9*(1+math.Abs(want)) {
				t.Errorf("%v at %g s: %.12g, want %.12g", v, at, got, want)
			}
		}
	}
}

// Records as loggers and spreadsheets write them.
func TestReadRecord(t *testing.T) {
	for _, text := range []string{
		"time_s,hz\n0,50.001\n0.5,49.99\n1,49.98\n",
		"0;50,001\n0,5;49,99\n1;49,98\n",
		"\"0\",\"50,001\"\n\"0,5\",\"49,99\"\n\"1\",\"49,98\"\n",
		"\uFEFF# a comment\nt\tf\n0\t50.001\n0.5\t49.99\n1\t49.98\n",
		"2019-08-09T15:52:33Z,50.001\n2019-08-09T15:52:33.5Z,49.99\n2019-08-09T15:52:34Z,49.98\n",
		"0 50.001\nnan nan\n0.5 49.99\n1 49.98\n",
	} {
		r, _, err := ReadRecord(strings.NewReader(text), "x.csv")
		if err != nil || len(r.S) != 3 || r.S[1] != 0.5 || r.S[2] != 1 || r.Hz[0] != 50.001 || r.Hz[2] != 49.98 {
			t.Errorf("%q: %v %+v", text, err, r)
		}
	}
	for _, text := range []string{"", "a\nb\n", "1\n2\n", "0,5000\n1,5000\n"} {
		if _, _, err := ReadRecord(strings.NewReader(text), "x.csv"); err == nil {
			t.Errorf("%q is taken", text)
		}
	}
}

// What contradicts the record, or is no record in seconds, is refused.
func TestMatchRefusesContradictions(t *testing.T) {
	r, _ := noisy(rand.New(rand.NewPCG(2, 9)), 0.1, 0.001, 20_000, 40, 600, 3, 200)
	for _, lost := range []float64{-200, 0, math.NaN(), math.Inf(1)} {
		if _, err := Match(r, 50, 5000, lost, 0); err == nil {
			t.Errorf("%g MW taken", lost)
		}
	}
	for i := range r.S {
		r.S[i] *= 1000
	}
	if _, err := Match(r, 50, 5000, 200, 0); err == nil {
		t.Error("milliseconds taken for seconds")
	}
}

// simulated is a record as a system of one droop would leave it in the closed-loop simulation.
func simulated(f0, loadMW, lostMW, inertia, damping, gain, lag, untilS, everyS float64) *Record {
	m := &dynamic.Model{Kind: dynamic.Droop, DroopPct: 100 / f0, LagS: lag} // 1 MW/Hz a MW of rating
	sys := &dynamic.System{NominalHz: f0, LoadMW: loadMW, DampingPctPerHz: 100 * damping / loadMW, InertiaMWs: inertia,
		Units: []dynamic.Unit{{Name: "response", Model: m, N: 1, RatingMW: gain, UpMW: 1e9, DownMW: 1e9}}}
	var s dynamic.Simulator
	o := s.Run(sys, []dynamic.Loss{{MW: lostMW}}, dynamic.Options{SteadyByS: untilS, UntilS: untilS, TolHz: 1e-7, Record: true})
	r := &Record{}
	at := 0
	for t := 0.0; t <= untilS; t += everyS {
		for at+1 < len(o.Times)-1 && o.Times[at+1] <= t {
			at++
		}
		x := o.Deviation[at]
		if h := o.Times[at+1] - o.Times[at]; h > 0 {
			x += (o.Deviation[at+1] - o.Deviation[at]) * (t - o.Times[at]) / h
		}
		r.S, r.Hz = append(r.S, t), append(r.Hz, f0-x)
	}
	return r
}
