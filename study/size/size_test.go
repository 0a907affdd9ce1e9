package size

import (
	"context"
	"math"
	"path/filepath"
	"reflect"
	"testing"

	"evenkeel/fleet"
	"evenkeel/solve"
)

func skerra(t *testing.T) (*fleet.Case, *fleet.Project) {
	t.Helper()
	dir := filepath.Join("..", "..", "testdata", "skerra")
	c, found := fleet.Read(filepath.Join(dir, "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	p, found := fleet.ReadProject(filepath.Join(dir, "project.yaml"), c)
	if p == nil {
		t.Fatal(found)
	}
	return c, p
}

// hours are spread over the demo year.
var hours = []int{17, 2900, 6050, 8100}

const gap = 2e-4

// studyOf solves a plan in those hours.
func studyOf(t *testing.T, c *fleet.Case, p *fleet.Project, g Grid) (*Study, [][][]Rung) {
	t.Helper()
	plan, err := NewPlan(c, p, g)
	if err != nil {
		t.Fatal(err)
	}
	climber := plan.Climber(solve.Options{Gap: gap})
	var of [][][]Rung
	for _, h := range hours {
		out, err := climber.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		of = append(of, out)
	}
	return New(plan, Marginal, hours, of), of
}

// Designs that hold the same are one case: 10 MW on all of its energy, 20 MW on half, 10 MW on
// twice what it needs.
func TestDesignsThatHoldTheSameAreOneCase(t *testing.T) {
	c, p := skerra(t)
	plan, err := NewPlan(c, p, Grid{SizesMW: []float64{10, 20, 40}, Energies: []Amount{{Times: 0.5}, {Times: 1}, {Times: 2}}})
	if err != nil {
		t.Fatal(err)
	}
	if len(plan.Points) != 9 || len(plan.Ladders) != 1 {
		t.Fatalf("%d points on %d ladders, want 9 on 1", len(plan.Points), len(plan.Ladders))
	}
	if got, want := plan.Ladders[0].HoldMW, []float64{0, 5, 10, 20, 40}; !reflect.DeepEqual(got, want) {
		t.Fatalf("rungs of %v MW, want %v", got, want)
	}
	for _, q := range plan.Points {
		if want := min(q.MW, q.MW*q.Amount.Times); q.ResponseMW != want || plan.Ladders[0].HoldMW[q.Rung] != want {
			t.Errorf("%g MW with %g of its energy holds %g on a rung of %g, want %g", q.MW, q.Amount.Times, q.ResponseMW, plan.Ladders[0].HoldMW[q.Rung], want)
		}
	}
}

// The ends of a sweep are what single runs find; a larger design never costs the system more than
// a smaller one, nor less than is proven; its taker's income is price less own cost on all it has.
func TestSweepOfSkerra(t *testing.T) {
	c, p := skerra(t)
	one := []Amount{{Times: 1}}
	s, of := studyOf(t, c, p, Grid{SizesMW: []float64{10, 20, 40}, Energies: one})
	_, single := studyOf(t, c, p, Grid{SizesMW: []float64{40}, Energies: one})
	for i := range hours {
		rungs := of[i][0]
		if !reflect.DeepEqual(rungs[0], single[i][0][0]) || !reflect.DeepEqual(rungs[3], single[i][0][1]) {
			t.Errorf("hour %d: the ends of the sweep differ from a single run", hours[i])
		}
		for k := 1; k < len(rungs); k++ {
			if rungs[k].Cost > rungs[k-1].Cost+1e-6 {
				t.Errorf("hour %d: %g MW cost %g, %g MW %g", hours[i], s.Plan.Ladders[0].HoldMW[k], rungs[k].Cost, s.Plan.Ladders[0].HoldMW[k-1], rungs[k-1].Cost)
			}
		}
		solver := solve.New(s.Plan.Ladders[0].Rungs[0], solve.Options{Gap: gap})
		bare, err := solver.Hour(context.Background(), s.Plan.Ladders[0].Rungs[0].Hour(hours[i], fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		price := bare.Prices.ResponsePerMW[p.Shape(c)]
		for k, mw := range s.Plan.Ladders[0].HoldMW {
			if want := mw * max(0, price-p.PricePerMW); math.Abs(rungs[k].Taker[Marginal]-want) > 1e-6*(1+want) {
				t.Errorf("hour %d: a taker of %g MW earns %g, want %g", hours[i], mw, rungs[k].Taker[Marginal], want)
			}
		}
	}
	for i := range s.Results {
		r := &s.Results[i]
		y := r.Year
		if !(y.SavingAtLeast <= y.Saving && y.Saving <= y.SavingAtMost) {
			t.Errorf("%g MW: a saving of %g outside of %g to %g", r.MW, y.Saving, y.SavingAtLeast, y.SavingAtMost)
		}
		if math.Abs(r.Net[System]-(y.Saving-r.Cost)) > 1e-6 || math.Abs(r.Net[Owner]-(y.Paid[Marginal].Net()-r.Cost)) > 1e-6 {
			t.Errorf("%g MW: net values that are not value less cost", r.MW)
		}
		if r.Utilisation < 0 || r.Utilisation > 1+1e-9 {
			t.Errorf("%g MW: a utilisation of %g", r.MW, r.Utilisation)
		}
	}
	// More of a service at no cost of its own lowers its price: a taker sees more than there is.
	if last := &s.Results[len(s.Results)-1]; last.TakerNet < last.Net[Owner] {
		t.Errorf("a taker of %g MW nets %g, less than the %g in the market", last.MW, last.TakerNet, last.Net[Owner])
	}
}

// A project that costs nothing to build nets what it is worth; one whose money is scaled has all its
// costs scaled.
func TestSensitivityMovesWhatItSays(t *testing.T) {
	c, p := skerra(t)
	s, _ := studyOf(t, c, p, Grid{SizesMW: []float64{20}, Energies: []Amount{{Times: 1}}})
	r := &s.Results[0]
	for _, w := range s.Sensitivity(r) {
		if math.Abs(w.Low-0.8*w.At) > 1e-9*w.At || math.Abs(w.High-1.2*w.At) > 1e-9*w.At {
			t.Errorf("%s: %g to %g of %g", w.Input, w.Low, w.High, w.At)
		}
		// What is linear moves by its own part, up and down alike (computed).
		recovery := Recovery(p.Money.DiscountPct, p.Money.LifetimeYears)
		part, linear := map[string]float64{
			"capital per MW": recovery * p.Money.CapitalPerMW * r.MW, "capital per MWh": recovery * p.Money.CapitalPerMWh * r.EnergyMWh,
			"fixed cost per MW": p.Money.FixedPerMWYear * r.MW, "own cost of holding": r.Year.Paid[Marginal].Own,
		}[w.Input]
		if linear && (math.Abs(r.Net[Owner]-w.NetHigh[Owner]-0.2*part) > 1e-6*part || math.Abs(w.NetLow[System]-r.Net[System]-0.2*part) > 1e-6*part) {
			t.Errorf("%s: from %g to %g, want ±%g of %g", w.Input, w.NetLow[Owner], w.NetHigh[Owner], 0.2*part, r.Net[Owner])
		}
		if w.Input == "lifetime" && !(w.NetLow[Owner] < r.Net[Owner] && r.Net[Owner] < w.NetHigh[Owner]) {
			t.Error("a longer life does not pay more")
		}
		if w.Input == "hold" && !(w.NetLow[Owner] > r.Net[Owner] && r.Net[Owner] > w.NetHigh[Owner]) {
			t.Error("a longer hold does not cost more")
		}
	}
}

// The energy curve passes through the designs that were solved.
func TestEnergyCurveMeetsTheDesigns(t *testing.T) {
	c, p := skerra(t)
	s, _ := studyOf(t, c, p, Grid{SizesMW: []float64{20}, Energies: []Amount{{Times: 0.5}, {Times: 1}, {Times: 2}}})
	curve := s.EnergyCurve(&s.Results[1])
	met := 0
	for i := range s.Results {
		for _, e := range curve {
			if same(e.MWh, s.Results[i].EnergyMWh) {
				met++
				for side := range Sides {
					if math.Abs(e.Net[side]-s.Results[i].Net[side]) > 1e-3 {
						t.Errorf("%g MWh: %g on the curve, %g solved", e.MWh, e.Net[side], s.Results[i].Net[side])
					}
				}
			}
		}
	}
	if met != 3 {
		t.Errorf("the curve meets %d designs, want 3", met)
	}
}

func TestPlanRefuses(t *testing.T) {
	c, p := skerra(t)
	condenser := *p
	condenser.Kind, condenser.UnitMVA, condenser.InertiaS = fleet.CondenserProject, 20, 10
	for name, q := range map[string]struct {
		p *fleet.Project
		g Grid
	}{
		"half a machine":        {&condenser, Grid{SizesMW: []float64{30}}},
		"a condenser's energy":  {&condenser, Grid{SizesMW: []float64{20}, Energies: []Amount{{MWh: 1}}}},
		"a condenser's pace":    {&condenser, Grid{SizesMW: []float64{20}, Activations: []float64{1}}},
		"faster than its delay": {p, Grid{SizesMW: []float64{20}, Energies: []Amount{{MWh: 1}}, Activations: []float64{0.1}}},
	} {
		if _, err := NewPlan(c, q.p, q.g); err == nil {
			t.Errorf("%s is taken", name)
		}
	}
}

// Of what cannot be turned down, a machine of 52 MW is the most that the demo can lose at once.
// Condensers of 12 s go in whole machines up to the inertia that its loss needs, by the closed form
// E = f0·P/(2·RoCoF) (REFERENCES, R1): 50·52/1.6 = 1,625 MW·s, 135.4 MVA (computed).
func TestDefaultSizes(t *testing.T) {
	c, p := skerra(t)
	if got, want := DefaultSizes(c, p), []float64{3, 6, 9, 12, 18, 24, 30, 36, 48, 60}; !reflect.DeepEqual(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
	condenser := *p
	condenser.Kind, condenser.UnitMVA, condenser.InertiaS = fleet.CondenserProject, 15, 12
	if got, want := DefaultSizes(c, &condenser), []float64{15, 30, 45, 60, 90, 120, 150}; !reflect.DeepEqual(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

// No design costs the system more than one that can do no more in anything, whatever the closed
// loop made of either: a short hold beside synthetic inertia is what has to be mended most.
func TestMoreOfEverythingNeverCostsMore(t *testing.T) {
	c, p := skerra(t)
	fly := *p
	fly.Kind, fly.LevelHz, fly.HoldS, fly.WithdrawS = fleet.FlywheelProject, 0, 15, 5
	fly.SyntheticMWsPerMW, fly.SyntheticPerMWs, fly.SyntheticS = 8, 0.02, 0.1
	plan, err := NewPlan(c, &fly, Grid{SizesMW: []float64{9, 18}, Energies: []Amount{{Times: 0.5}, {Times: 1}}})
	if err != nil {
		t.Fatal(err)
	}
	climber := plan.Climber(solve.Options{})
	for _, h := range hours {
		out, err := climber.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		for a := range plan.Points {
			for b := range plan.Points {
				q, r := &plan.Points[a], &plan.Points[b]
				if q.MW <= r.MW && q.ResponseMW <= r.ResponseMW && out[0][q.Rung].Cost < out[0][r.Rung].Cost {
					t.Errorf("hour %d: %g MW with %g MW of response cost %g, less than %g with %g", h, q.MW, q.ResponseMW, out[0][q.Rung].Cost, r.MW, r.ResponseMW)
				}
			}
		}
	}
}

// What is on of a condenser is what its kinetic energy says, in a mix taken over from a smaller
// design too.
func TestCondenserIsOnAsItsInertiaSays(t *testing.T) {
	c, p := skerra(t)
	condenser := *p
	condenser.Kind, condenser.UnitMVA, condenser.InertiaS, condenser.LossesShare, condenser.OnCostPerMVAh = fleet.CondenserProject, 20, 8, 0.02, 0.1
	plan, err := NewPlan(c, &condenser, Grid{SizesMW: []float64{20, 40, 60, 80, 120, 160, 240}})
	if err != nil {
		t.Fatal(err)
	}
	climber := plan.Climber(solve.Options{Gap: gap})
	on := 0.0
	for _, h := range []int{0, 582, 679} {
		out, err := climber.Hour(context.Background(), h)
		if err != nil {
			t.Fatal(err)
		}
		for k := range out[0] {
			r := &out[0][k]
			if want := r.InertiaMWs / condenser.InertiaS; math.Abs(plan.held(r)-want) > 1e-6 {
				t.Errorf("hour %d: of %g MVA %g are on by the count of machines, %g by their inertia", h, plan.Ladders[0].HoldMW[k], plan.held(r), want)
			}
			on += r.OnMVA
		}
	}
	if on == 0 {
		t.Error("no condenser is on: these hours test nothing")
	}
}
