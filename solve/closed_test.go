package solve

import (
	"context"
	"path/filepath"
	"testing"
	"time"

	"evenkeel/fleet"
	"evenkeel/limits/dynamic"
)

func readCase(t testing.TB, path string) *fleet.Case {
	t.Helper()
	c, found := fleet.Read(path)
	if c == nil {
		t.Fatal(found)
	}
	return c
}

// Mixes of the demo that count as secure hold in closed loop after every single loss: simulated
// anew, tightly, to the very end.
func TestSecureHoursHoldInClosedLoop(t *testing.T) {
	every := 83
	if testing.Short() {
		every = 499
	}
	provenEverywhere(t, readCase(t, filepath.Join("..", "testdata", "skerra", "case.yaml")), every)
}

// A harder system: a steep fall, hydro with a long water column, a battery that is set off
// late, all in the shapes of a qualification that flatters them. The mending must be seen to act.
func TestMendingActs(t *testing.T) {
	c := readCase(t, filepath.Join("testdata", "steep.yaml"))
	for mw := 250.0; mw <= 560; mw += 10 { // many hours of one
		c.Load.DemandMW.Series = append(c.Load.DemandMW.Series, mw)
	}
	for len(c.Times) < len(c.Load.DemandMW.Series) {
		c.Times = append(c.Times, c.Times[len(c.Times)-1].Add(time.Hour))
	}
	mended := provenEverywhere(t, c, 1)
	if mended < c.Hours()/4 {
		t.Errorf("%d of %d hours mended", mended, c.Hours())
	}
}

// Response that is set off and goes again makes small losses worse than large ones: none may
// be passed over.
func TestWithdrawnResponse(t *testing.T) {
	provenEverywhere(t, readCase(t, filepath.Join("testdata", "withdrawn.yaml")), 1)
}

func provenEverywhere(t *testing.T, c *fleet.Case, every int) (mended int) {
	t.Helper()
	s := New(c, Options{})
	l := c.Limits
	var sim dynamic.Simulator
	secure, simulated, all := 0, 0, 0
	for i := 0; i < c.Hours(); i += every {
		h := c.Hour(i, fleet.HourOptions{})
		out, err := s.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		if out.Closed.Mended > 0 {
			mended++
		}
		if out.Closed.MendedCost < -0.002*out.Cost {
			t.Errorf("hour %d: mending made it cheaper by %g", i, -out.Closed.MendedCost)
		}
		if out.Status != Secure {
			continue
		}
		secure++
		simulated += out.Closed.Simulated
		on := NewOnline(c, h, out.Dispatch, out.UnservedMW)
		for _, loss := range h.Losses {
			d := dynamic.Loss{Name: loss.Name, MW: loss.FixedMW}
			for _, m := range loss.Members {
				units := 1.0
				if !loss.Single {
					units = float64(h.Units[m].Count)
				}
				on.Lose(&d, m, units)
			}
			opt := dynamic.Options{WindowS: l.WindowS, SteadyByS: l.SteadyByS, UntilS: l.SteadyUntilS}
			if loss.Over {
				d.MW -= loss.FixedMW
				on.LoseLoad(&d, loss.FixedMW)
				if d.MW >= 0 {
					continue
				}
				all++
				o, a := sim.Run(&on.Sys, []dynamic.Loss{d}, opt), c.Above
				if tol := 2 * ClosedTolHz; o.RiseHzPerS > a.MaxHzPerS+tol || o.PeakHz > a.NadirHz+tol || o.SteadyOverHz > a.SteadyHz+tol {
					t.Errorf("hour %d, %s (%.1f MW): upwards RoCoF %.4f, peak %.4f, steady %.4f", i, loss.Name, d.MW, o.RiseHzPerS, o.PeakHz, o.SteadyOverHz)
				}
				continue
			}
			if d.MW <= 0 {
				continue
			}
			all++
			o := sim.Run(&on.Sys, []dynamic.Loss{d}, opt)
			const tol = 2 * ClosedTolHz // of the proof and of this
			if o.RoCoFHzPerS > l.MaxHzPerS+tol || o.NadirHz > l.NadirHz+tol || o.SteadyHz > l.SteadyHz+tol {
				t.Errorf("hour %d, %s (%.1f MW): RoCoF %.4f, nadir %.4f, steady %.4f", i, loss.Name, d.MW, o.RoCoFHzPerS, o.NadirHz, o.SteadyHz)
			}
		}
	}
	if secure == 0 {
		t.Error("no secure hour")
	}
	t.Logf("%d secure hours, %d mended; %d losses simulated by the proof, %d here", secure, mended, simulated, all)
	return mended
}

// The demo's hours solved and replayed in open loop, and the same proven in closed loop: a
// sample of the year, in ms an hour.
func BenchmarkClosedLoop(b *testing.B) {
	c := readCase(b, filepath.Join("..", "testdata", "skerra", "case.yaml"))
	proven, open := New(c, Options{}), New(c, Options{})
	open.closed = false
	var took [2]time.Duration
	hours, mended := 0, 0
	for b.Loop() {
		for i := 0; i < c.Hours(); i += 37 {
			h := c.Hour(i, fleet.HourOptions{})
			for k, s := range []*Solver{open, proven} {
				started := time.Now()
				out, err := s.Hour(context.Background(), h)
				if err != nil {
					b.Fatal(err)
				}
				took[k] += time.Since(started)
				if out.Closed.Mended > 0 {
					mended++
				}
			}
			hours++
		}
	}
	b.ReportMetric(1e3*took[0].Seconds()/float64(hours), "open_ms")
	b.ReportMetric(1e3*took[1].Seconds()/float64(hours), "proven_ms")
	b.ReportMetric(100*float64(mended)/float64(hours), "mended_%")
}
