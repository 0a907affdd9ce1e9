package sweep

import (
	"context"
	"math"
	"path/filepath"
	"reflect"
	"slices"
	"testing"
	"time"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/limits/dynamic"
	"evenkeel/solve"
)

// rungsOf adds a quick response of growing volume to the demo case.
func rungsOf(t testing.TB, volumes ...float64) ([]*fleet.Case, []int) {
	t.Helper()
	return rungsWith(t, limits.Timing{DelayS: 0.1, RampS: 0.4, HoldS: 900, WithdrawS: 10}, volumes...)
}

func rungsWith(t testing.TB, times limits.Timing, volumes ...float64) ([]*fleet.Case, []int) {
	t.Helper()
	c, found := fleet.Read(filepath.Join("..", "..", "testdata", "skerra", "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	shape, err := times.Shape()
	if err != nil {
		t.Fatal(err)
	}
	var rungs []*fleet.Case
	for _, v := range volumes {
		r := *c
		r.Shapes = append(append([]fleet.NamedShape(nil), c.Shapes...), fleet.NamedShape{Name: "quick", Shape: shape})
		r.Resources = append(append([]fleet.Resource(nil), c.Resources...), fleet.Resource{Name: "Quick", Kind: fleet.Demand, Count: 1,
			Response: fleet.Response{CapMW: fleet.Value{Const: v}, PricePerMW: 1.5, Shape: len(c.Shapes)}, Down: fleet.Response{Shape: -1}})
		rungs = append(rungs, &r)
	}
	return rungs, []int{len(c.Resources)}
}

// The ends of a ladder are those of a shorter one, no rung costs more than the one below, and
// what a rung has taken over is within the gap of what it finds alone.
func TestLadder(t *testing.T) {
	volumes := []float64{0, 5, 10, 15, 20, 25, 30}
	opt := solve.Options{Gap: 2e-4}
	rungs, swept := rungsOf(t, volumes...)
	all := NewLadder(rungs, swept, opt)
	ends := NewLadder([]*fleet.Case{rungs[0], rungs[len(rungs)-1]}, swept, opt)
	for _, i := range []int{17, 1200, 2900, 4312, 6050, 8100} {
		whole, err := all.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		two, err := ends.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(whole[0], two[0]) || !reflect.DeepEqual(whole[len(whole)-1], two[1]) {
			t.Errorf("hour %d: the ends differ from a ladder of the ends alone", i)
		}
		for k := range whole {
			if whole[k].Status != solve.Secure {
				t.Errorf("hour %d, rung %d: %s", i, k, whole[k].Why)
			}
			if held := whole[k].Dispatch[swept[0]].ResponseMW; held > volumes[k]+1e-6 {
				t.Errorf("hour %d, rung %d holds %.3f of %.3f MW", i, k, held, volumes[k])
			}
			if k > 0 && k < len(whole)-1 && whole[k].Cost > whole[k-1].Cost+1e-6 {
				t.Errorf("hour %d: rung %d costs %.3f, the one below %.3f", i, k, whole[k].Cost, whole[k-1].Cost)
			}
			alone, err := all.solvers[k].Hour(context.Background(), rungs[k].Hour(i, fleet.HourOptions{}))
			if err != nil {
				t.Fatal(err)
			}
			within := opt.Gap // of what the rung finds alone; mended rows are one way to be safe among several
			if alone.Closed.Mended+whole[k].Closed.Mended > 0 {
				within += 2e-3
			}
			if d := whole[k].Cost - alone.Cost; d > within*math.Abs(alone.Cost) {
				t.Errorf("hour %d, rung %d: %.3f, alone %.3f", i, k, whole[k].Cost, alone.Cost)
			}
		}
	}
}

// A response that comes in whole after any loss and goes again soon can leave more behind than a
// large loss: with much of it most mixes must be mended, and their cost proves nothing of those with
// less of it. No rung between costs more than the one below all the same.
func TestLadderWhereMoreIsDear(t *testing.T) {
	rungs, swept := rungsWith(t, limits.Timing{DelayS: 0.2, RampS: 0.3, HoldS: 20, WithdrawS: 10}, 0, 4, 8, 16, 24, 32, 40)
	l := NewLadder(rungs, swept, solve.Options{Gap: 2e-4})
	mended, saved := 0, 0.0
	for i := 0; i < rungs[0].Hours(); i += 487 {
		out, err := l.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		for k := range out {
			mended += out[k].Closed.Mended
			if k > 0 && k < len(out)-1 && out[k].Cost > out[k-1].Cost+1e-6 {
				t.Errorf("hour %d: rung %d costs %.3f, the one below %.3f", i, k, out[k].Cost, out[k-1].Cost)
			}
		}
		alone, err := l.solvers[1].Hour(context.Background(), rungs[1].Hour(i, fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		// A search that starts from a neighbour's mended shapes may keep them where it need not.
		if out[1].Cost > alone.Cost+2e-3*alone.Cost {
			t.Errorf("hour %d: 4 MW cost %.3f, alone %.3f", i, out[1].Cost, alone.Cost)
		}
		saved += out[0].Cost - out[1].Cost
	}
	if mended == 0 || !(saved > 0) {
		t.Errorf("%d mends, %.3f saved by 4 MW: these hours test nothing", mended, saved)
	}
}

// Where the rating of a resource with a model grows, its droop grows with it: what was proven on
// one rung says nothing of the next. Every mix of the ladder holds when simulated anew.
func TestLadderOfRatings(t *testing.T) {
	c, found := fleet.Read(filepath.Join("..", "..", "testdata", "skerra", "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	battery := slices.IndexFunc(c.Resources, func(r fleet.Resource) bool { return r.Name == "Holm battery" })
	var rungs []*fleet.Case
	for _, times := range []float64{0.25, 0.75, 1, 1.5, 3} {
		r := *c
		r.Resources = slices.Clone(c.Resources)
		r.Resources[battery].PowerMW *= times
		rungs = append(rungs, &r)
	}
	ladder := NewLadder(rungs, []int{battery}, solve.Options{})
	var sim dynamic.Simulator
	for _, i := range []int{1220, 1769, 5000} {
		out, err := ladder.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		for k, m := range out {
			if m.Status != solve.Secure {
				t.Errorf("hour %d, rung %d: %s", i, k, m.Why)
				continue
			}
			h := rungs[k].Hour(i, fleet.HourOptions{})
			on := solve.NewOnline(rungs[k], h, m.Dispatch, m.UnservedMW)
			for _, l := range h.Losses {
				if !l.Single || l.Over {
					continue
				}
				lost := dynamic.Loss{MW: l.FixedMW}
				on.Lose(&lost, l.Members[0], 1)
				if lost.MW <= 0 {
					continue
				}
				o := sim.Run(&on.Sys, []dynamic.Loss{lost}, ladder.solvers[k].ClosedOptions())
				if o.RoCoFHzPerS > c.Limits.MaxHzPerS+solve.ClosedTolHz || o.NadirHz > c.Limits.NadirHz+solve.ClosedTolHz || o.SteadyHz > c.Limits.SteadyHz+solve.ClosedTolHz {
					t.Errorf("hour %d, rung %d: the loss of %s reaches %.4f Hz/s, %.4f Hz, %.4f Hz in the steady band", i, k, l.Name, o.RoCoFHzPerS, o.NadirHz, o.SteadyHz)
				}
			}
		}
	}
}

// A mix taken from another rung is told by its own rung: wind that grows curtails more.
func TestLadderOfWind(t *testing.T) {
	c, found := fleet.Read(filepath.Join("..", "..", "testdata", "skerra", "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	wind := slices.IndexFunc(c.Resources, func(r fleet.Resource) bool { return r.Name == "Vestan wind" })
	var rungs []*fleet.Case
	for _, times := range []float64{1, 1.1, 1.2, 1.4, 2} {
		r := *c
		r.Resources = slices.Clone(c.Resources)
		most := slices.Clone(c.Resources[wind].MaxMW.Series)
		for i := range most {
			most[i] *= times
		}
		r.Resources[wind].MaxMW.Series = most
		rungs = append(rungs, &r)
	}
	ladder := NewLadder(rungs, []int{wind}, solve.Options{})
	for _, i := range []int{0, 97} {
		out, err := ladder.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		for k, m := range out {
			h := rungs[k].Hour(i, fleet.HourOptions{})
			all := 0.0
			for u, d := range m.Dispatch {
				if !h.Units[u].Renewable {
					continue
				}
				curtailed := max(float64(h.Units[u].Count)*h.Units[u].MaxMW-d.OutputMW, 0)
				all += curtailed
				if math.Abs(d.CurtailedMW-curtailed) > 1e-3 {
					t.Errorf("hour %d, rung %d: %s curtails %.3f MW, told %.3f", i, k, c.Resources[u].Name, curtailed, d.CurtailedMW)
				}
			}
			if math.Abs(m.CurtailedMW-all) > 1e-3 {
				t.Errorf("hour %d, rung %d: %.3f MW are curtailed, told %.3f", i, k, all, m.CurtailedMW)
			}
		}
	}
}

// Ten points over the hours of a year, against one solve of the same hours.
func BenchmarkTenPoints(b *testing.B) {
	opt := solve.Options{Gap: 2e-4}
	rungs, swept := rungsOf(b, 0, 4, 8, 12, 16, 20, 24, 28, 32, 36)
	ladder, one := NewLadder(rungs, swept, opt), solve.New(rungs[0], opt)
	var ten, single, cold time.Duration
	var alone []*solve.Solver
	for _, r := range rungs {
		alone = append(alone, solve.New(r, opt))
	}
	for b.Loop() {
		for i := 0; i < rungs[0].Hours(); i += 29 {
			start := time.Now()
			if _, err := ladder.Hour(context.Background(), i); err != nil {
				b.Fatal(err)
			}
			ten += time.Since(start)
			start = time.Now()
			if _, err := one.Hour(context.Background(), rungs[0].Hour(i, fleet.HourOptions{})); err != nil {
				b.Fatal(err)
			}
			single += time.Since(start)
			start = time.Now()
			for k, s := range alone {
				if _, err := s.Hour(context.Background(), rungs[k].Hour(i, fleet.HourOptions{})); err != nil {
					b.Fatal(err)
				}
			}
			cold += time.Since(start)
		}
	}
	b.ReportMetric(ten.Seconds()/single.Seconds(), "solves")
	b.ReportMetric(cold.Seconds()/single.Seconds(), "solves-one-by-one")
}
