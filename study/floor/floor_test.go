package floor

import (
	"context"
	"errors"
	"fmt"
	"math"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
	"evenkeel/limits/dynamic"
	"evenkeel/limits/replay"
	"evenkeel/solve"
	"evenkeel/study/work"
)

func demo(t testing.TB) *fleet.Case {
	c, found := fleet.Read(filepath.Join("..", "..", "testdata", "skerra", "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	return c
}

// studyOf runs a study of some hours of the demo.
func studyOf(t testing.TB, c *fleet.Case, workers int, hours []int, w Words) *Result {
	w.Brackets = max(w.Brackets, 1)
	ask, err := w.Read(c)
	if err != nil {
		t.Fatal(err)
	}
	ask.Hours = hours
	s := New(c, ask)
	items := work.New[Item](s.Items())
	if err := items.Run(context.Background(), workers, s.Start(items), nil); err != nil {
		t.Fatal(err)
	}
	return s.Result(items)
}

func someHours(from, every, n int) []int {
	var hours []int
	for i := range n {
		hours = append(hours, from+i*every)
	}
	return hours
}

// What an hour must have online is what the time-domain replay of its losses confirms: as much
// kinetic energy keeps every limit after every loss, 1 % less does not.
func TestNeedAgainstReplay(t *testing.T) {
	c := demo(t)
	var knots [][]replay.Knot
	for i := range c.Shapes {
		var ks []replay.Knot
		for _, k := range c.Shapes[i].Shape.Knots() {
			ks = append(ks, replay.Knot{S: k.S, Share: k.Share})
		}
		knots = append(knots, ks)
	}
	l := c.Limits
	sys := replay.NewSystem(replay.Limits{NominalHz: l.NominalHz, WindowS: l.WindowS, SteadyByS: l.SteadyByS, SteadyUntilS: l.SteadyUntilS}, knots)
	bare := solve.New(c, solve.Options{SteadyOnly: true, RowsOnly: true})
	n := newNeeds(c)
	seen := map[limits.Kind]int{}
	for _, i := range someHours(7, 351, 24) {
		h := c.Hour(i, fleet.HourOptions{})
		m, err := bare.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		p := formulate.Build(c, h)
		need := n.of(p, &m)
		if math.IsInf(need.FloorMWs, 1) {
			continue
		}
		over := func(onlineMWs float64) float64 {
			worst := math.Inf(-1)
			for side, losses := range [][]formulate.Loss{p.Losses, p.OverLosses} {
				for k := range losses {
					x := n.candidate(p, m.Dispatch, &losses[k], side == 1)
					damping, lim := h.DampingMWPerHz, c.Limits
					if side == 1 {
						damping, lim = p.AboveDampingMWPerHz, *c.Above
					}
					if x.mw <= 0 {
						continue
					}
					o := sys.Run(replay.Event{LossMW: x.mw, InertiaMWs: onlineMWs - x.takes, DampingMWPerHz: damping, ResponseMW: x.response})
					worst = max(worst, o.RoCoFHzPerS/lim.MaxHzPerS, o.NadirHz/lim.NadirHz, o.SteadyHz/lim.SteadyHz)
				}
			}
			return worst - 1
		}
		seen[need.By]++
		if v := over(need.FloorMWs); v > 1e-5 {
			t.Errorf("hour %d: with the floor of %g MW·s set by %v a limit is passed by %g of it", i, need.FloorMWs, need.By, v)
		}
		if v := over(need.FloorMWs * 0.99); v < -1e-3 && need.By != limits.RoCoF { // the rows of RoCoF leave damping out
			t.Errorf("hour %d: with 1 %% less than the floor of %g MW·s set by %v no limit is near (%g)", i, need.FloorMWs, need.By, v)
		}
	}
	if seen[limits.RoCoF] == 0 || seen[limits.Nadir] == 0 {
		t.Errorf("the hours show %v, want RoCoF and nadir among them", seen)
	}
}

// The year holds together: a secure mix has its floor online, no way and no rule costs less than the
// mix by more than the gaps, and a rule made of the hours' floors covers each of them.
func TestYear(t *testing.T) {
	c := demo(t)
	r := studyOf(t, c, 2, someHours(3, 199, 44), Words{Brackets: 3, Policies: []float64{2500, 1}, Loss: "50:50:1", Axes: []string{"fast"}, Held: []string{"fast=20:20:1"}})
	y := r.Year
	if y.Short > 0 || y.Lacking == 0 || len(y.Rules) != 4 {
		t.Fatalf("%d short, %d lacking, %d rules", y.Short, y.Lacking, len(y.Rules))
	}
	one, table := y.Rules[0].Rule, y.Rules[1].Rule
	for _, h := range y.Hours {
		m := &h.Mix
		if m.OnlineMWs < m.FloorMWs-0.01 {
			t.Errorf("hour %d: the secure mix has %g of %g MW·s", h.Index, m.OnlineMWs, m.FloorMWs)
		}
		spare := solve.DefaultGap * h.MixCost.Cost
		if h.BareCost.Bound > h.MixCost.Cost {
			t.Errorf("hour %d: the steady state alone costs at least %g, all limits %g", h.Index, h.BareCost.Bound, h.MixCost.Cost)
		}
		for w, k := range h.Ways {
			if k.Met && k.Cost < h.MixCost.Cost-h.MendCost-spare {
				t.Errorf("hour %d: %s alone costs %g, the mix %g", h.Index, WayNames[w], k.Cost, h.MixCost.Cost-h.MendCost)
			}
		}
		if one.Steps[0].MWs < m.FloorMWs || table.step(m.LargestMW).MWs < m.FloorMWs {
			t.Errorf("hour %d: the rules ask for %g and %g of %g MW·s", h.Index, one.Steps[0].MWs, table.step(m.LargestMW).MWs, m.FloorMWs)
		}
	}
	for _, k := range y.Rules {
		if k.AtMost < k.Cost || k.AtLeast > k.Cost || k.AtMost < 0 {
			t.Errorf("%s costs %g more, between %g and %g", k.Rule.Name, k.Cost, k.AtLeast, k.AtMost)
		}
		if k.OnlineMWs < k.MixMWs-1e-6 && k.Kept > 0 && k.Rule.Name == "one number" {
			t.Errorf("%s has %g MW·s online, the mixes %g", k.Rule.Name, k.OnlineMWs, k.MixMWs)
		}
	}
	for i, k := range y.Rules { // made to cover every hour, or none, or some
		n := 0
		for _, h := range y.Hours {
			if h.Mix.FloorMWs <= k.Rule.step(h.Mix.LargestMW).MWs {
				n++
			}
		}
		if k.Covers != n || i < 2 && n != len(y.Hours) || i == 2 && (n == 0 || n == len(y.Hours)) || i == 3 && n != 0 {
			t.Errorf("%s of %g MW·s covers %d of %d hours, counted again %d", k.Rule.Name, k.Rule.Steps[0].MWs, k.Covers, len(y.Hours), n)
		}
	}
	if last := y.Rules[3]; last.Same != len(y.Hours) || last.Cost != 0 {
		t.Errorf("a rule of 1 MW·s changes something: %+v", last)
	}
	if y.Rules[0].Kept > 0 && y.Rules[0].Cost < y.Rules[1].Cost-y.Rules[1].AtMost+y.Rules[1].AtLeast && y.Rules[0].NotKept == 0 {
		t.Errorf("one number costs %g, less than a table's %g", y.Rules[0].Cost, y.Rules[1].Cost)
	}
}

// A rule is not kept by output above the load: what lacks of it then is what machines that fit under
// the load lack.
func TestRuleWithinTheLoad(t *testing.T) {
	c := demo(t)
	s := newSolvers(c, solve.Options{})
	for _, i := range []int{4155, 5020, 6577} {
		h := c.Hour(i, fleet.HourOptions{})
		h.LeastInertiaMWs = 4150
		m, err := s.firm.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		if m.ExcessMW > 0 || m.UnservedMW > 0 || m.FloorShortMWs <= 0 {
			t.Errorf("hour %d: %.1f MW above the load, %.1f MW not served, %.1f MW·s lacking", i, m.ExcessMW, m.UnservedMW, m.FloorShortMWs)
		}
	}
}

// A bracket of losses that no hour has falls to the one above: it never asks for nothing.
func TestTableHasNoEmptySteps(t *testing.T) {
	got := joined([]RuleStep{{50, 60, 2300, 4}, {60, 70, 0, 0}, {70, 80, 0, 0}, {80, 90, 3000, 1}, {90, 100, 2800, 2}})
	want := []RuleStep{{50, 60, 2300, 4}, {60, 90, 3000, 1}, {90, 100, 2800, 2}}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

// Every hour that counts lies in just one step of a rule, the one with the smallest loss too; where no
// hour counts there is no table.
func TestStepsCoverEveryHour(t *testing.T) {
	s := &Study{ask: &Ask{Brackets: 3}, hours: []*Hour{{Short: true}}}
	if rules := s.makeRules(); len(rules) != 1 {
		t.Errorf("without an hour that counts the rules are %+v", rules)
	}
	for _, mw := range []float64{40, 55, 90, 100} {
		s.hours = append(s.hours, &Hour{Mix: Need{LargestMW: mw, FloorMWs: 20 * mw}})
	}
	for _, r := range s.makeRules() {
		for _, h := range s.hours[1:] {
			in := 0
			for _, st := range r.Steps {
				if h.Mix.LargestMW > st.FromMW && h.Mix.LargestMW <= st.ToMW && h.Mix.FloorMWs <= st.MWs {
					in++
				}
			}
			if in != 1 {
				t.Errorf("%s: the hour with %g MW lies in %d steps of %+v", r.Name, h.Mix.LargestMW, in, r.Steps)
			}
		}
	}
}

// A way to close the gap has no freedom that the mix has not, so it costs no less; and constraining
// machines on holds no more response, not even by further units of a kind that has some.
func TestWaysAreNoMoreThanTheMix(t *testing.T) {
	c := demo(t)
	s := newSolvers(c, solve.Options{Gap: -1})
	n := newNeeds(c)
	for _, i := range []int{1101, 1711, 4578, 5371} {
		h := c.Hour(i, fleet.HourOptions{})
		p := formulate.Build(c, h)
		bare, err := s.bare.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		mix, err := s.rows.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		largest := n.of(p, &bare).LargestMW
		for w := range Ways {
			asked := way(w, p, &bare, largest)
			closed, err := s.rows.Hour(context.Background(), asked)
			if err != nil {
				t.Fatal(err)
			}
			if closed.Met() && closed.Cost < mix.Bound-1e-3 {
				t.Errorf("hour %d: %s alone costs %.3f, the mix at least %.3f", i, WayNames[w], closed.Cost, mix.Bound)
			}
			held := make([]float64, len(c.Shapes))
			for k, d := range bare.Dispatch {
				if shape := h.Units[k].Shape; shape >= 0 {
					held[shape] += d.ResponseMW
				}
			}
			for k, d := range closed.Dispatch {
				if shape := asked.Units[k].Shape; shape >= 0 {
					held[shape] -= d.ResponseMW
				}
			}
			for shape, mw := range held {
				if w != Response && mw < -1e-4 {
					t.Errorf("hour %d: %s alone holds %.3f MW more of %s than the plain dispatch", i, WayNames[w], -mw, c.Shapes[shape].Name)
				}
			}
		}
	}
}

// R1 and R5 in closed loop: with nothing held the floor is f0·ΔP/(2ρ); with one ramp that covers the loss,
// f0·ΔP²·T/(4·R·X), the limits being the case's and the simulation's own error (computed; sources in limits).
func TestClosedFloors(t *testing.T) {
	shape, err := limits.Timing{RampS: 12}.Shape()
	if err != nil {
		t.Fatal(err)
	}
	c := &fleet.Case{Shapes: []fleet.NamedShape{{Name: "ramp", Shape: shape}},
		Limits: limits.Limits{NominalHz: 50, MaxHzPerS: 5, WindowS: 0.5, NadirHz: 0.8, SteadyHz: 0.8, SteadyByS: 30, SteadyUntilS: 60}}
	x := closed{c: c, plants: plants(c, []int{0}), opt: dynamic.Options{WindowS: 0.5, SteadyByS: 30, UntilS: 60}}
	x.online([]float64{1500}, 10_000)
	got, v := x.least(1000, 200_000)
	want := 50.0 * 1000 * 1000 * 12 / (4 * 1500 * (0.8 + solve.ClosedTolHz))
	if math.Abs(got-want) > 1.2*closedWithin*want || v.by != limits.Nadir || math.Abs(v.atS-8) > 0.01 {
		t.Errorf("one ramp: %g MW·s set by %v at %g s, want %g at 8 s", got, v.by, v.atS, want)
	}
	c.Limits.NadirHz, c.Limits.SteadyHz = 1e6, 1e6
	x.online([]float64{0}, 10_000)
	got, v = x.least(1000, 3000)
	want = 50.0 * 1000 / (2 * (5 + solve.ClosedTolHz))
	if math.Abs(got-want) > 1.2*closedWithin*want || v.by != limits.RoCoF {
		t.Errorf("nothing held: %g MW·s set by %v, want %g", got, v.by, want)
	}
}

// No kinetic energy is enough where the response does not carry the loss, by the rows and in closed
// loop; a floor never falls as the loss grows, and with more than it every limit holds in closed loop too.
func TestChart(t *testing.T) {
	c := demo(t)
	r := studyOf(t, c, 2, nil, Words{Loss: "5:80:16", Axes: []string{"fast"}, Held: []string{"fast=0:30:4", "gas_governor=10"}, LoadMW: 300})
	k := &r.Charts[0]
	none := 0
	s := New(c, r.Ask)
	sim := &newCharter(c, s.all.secure, s.plants).closed
	for i, cell := range k.Cells {
		if cell.FloorMWs < cell.Rows.MWs || cell.FloorMWs < cell.Closed {
			t.Errorf("%g MW: %g MW·s, rows %g, closed loop %g", cell.LossMW, cell.FloorMWs, cell.Rows.MWs, cell.Closed)
		}
		carried := cell.HeldMW + 10 + 0.01*300*c.Limits.SteadyHz
		if math.IsInf(cell.Rows.MWs, 1) {
			none++
			if cell.LossMW < carried-1e-3 || cell.Rows.By != limits.Steady {
				t.Errorf("%g MW lost, %g carried, yet no kinetic energy is enough (%v)", cell.LossMW, carried, cell.Rows.By)
			}
		} else if cell.LossMW > carried+1e-3 {
			t.Errorf("%g MW lost, %g carried, yet %g MW·s are enough", cell.LossMW, carried, cell.Rows.MWs)
		}
		if !math.IsInf(cell.FloorMWs, 1) { // it is a floor: more of it holds as well
			held := append([]float64(nil), k.Others...)
			held[k.Shape] = cell.HeldMW
			sim.online(held, k.LoadMW)
			for _, more := range []float64{1, 1.3, 3} {
				if v := sim.try(cell.LossMW, more*cell.FloorMWs); !v.holds {
					t.Errorf("%g MW lost, %g held: the simulation passes %v with %g times the floor of %g MW·s", cell.LossMW, cell.HeldMW, v.by, more, cell.FloorMWs)
				}
			}
		}
		if i >= k.Held.N && cell.Rows.MWs < k.Cells[i-k.Held.N].Rows.MWs {
			t.Errorf("the floor falls from %g to %g MW·s as the loss grows to %g MW", k.Cells[i-k.Held.N].Rows.MWs, cell.Rows.MWs, cell.LossMW)
		}
	}
	if none == 0 || none == len(k.Cells) {
		t.Errorf("%d of %d cells have no floor", none, len(k.Cells))
	}
}

// A study that is interrupted again and again, with any number of workers, gives the same results.
func TestResume(t *testing.T) {
	c := demo(t)
	hours := someHours(100, 700, 9)
	want := studyOf(t, c, 1, hours, Words{Loss: "10:90:3", Brackets: 2})
	ask, err := Words{Loss: "10:90:3", Brackets: 2}.Read(c)
	if err != nil {
		t.Fatal(err)
	}
	ask.Hours = hours
	var s *Study
	items := work.New[Item](New(c, ask).Items())
	for round := 0; ; round++ {
		s = New(c, ask)
		ctx, stop := context.WithCancel(context.Background())
		done := 0
		err = items.Run(ctx, 1+round%3, s.Start(items), func() {
			if done++; done == 4 {
				stop()
			}
		})
		stop()
		if err == nil {
			break
		}
		if !errors.Is(err, context.Canceled) || round > 20 {
			t.Fatal(err)
		}
	}
	got := s.Result(items)
	if !reflect.DeepEqual(got.Charts, want.Charts) || !reflect.DeepEqual(got.Year, want.Year) {
		t.Error("results differ from those of a run in one go")
	}
}

// Every fault of what is asked for is named, all at once.
func TestReadNamesEveryFault(t *testing.T) {
	c := demo(t)
	_, err := Words{Loss: "9:3:4", Axes: []string{"fast", "fast", "fats"}, Held: []string{"fast", "gas_governor=1:2:3", "hydro=3", "steam_governor=-1", "fast=0:x:2"},
		LoadMW: -3, Brackets: 0, Policies: []float64{0}}.Read(c)
	if err == nil {
		t.Fatal("nothing is found wrong")
	}
	for _, want := range []string{"--loss is \"9:3:4\"", "\"fast\" twice", "--axis is \"fats\"", "--held is \"fast\"", "--axis does not name gas_governor", "--held is \"hydro=3\"",
		"--held is \"steam_governor=-1\"", "--held is \"fast=0:x:2\"", "--load is -3", "--brackets is 0", "--policy is 0"} {
		if !strings.Contains(err.Error(), want) {
			t.Errorf("nothing says %s in\n%v", want, err)
		}
	}
}

// The whole chart of 20 × 20 cells, by the rows and in closed loop.
func BenchmarkChart(b *testing.B) {
	c := demo(b)
	for _, workers := range []int{1, 2} {
		b.Run(fmt.Sprintf("%d workers", workers), func(b *testing.B) {
			for b.Loop() {
				r := studyOf(b, c, workers, nil, Words{Loss: "5:100:20", Axes: []string{"fast"}, Held: []string{"fast=0:38:20", "hydro_governor=30", "gas_governor=20", "steam_governor=10"}})
				if len(r.Charts[0].Cells) != 400 {
					b.Fatal("cells are missing")
				}
			}
		})
	}
}
