package worth_test

import (
	"context"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"evenkeel/fleet"
	"evenkeel/fleet/invent"
	"evenkeel/solve"
	"evenkeel/study/ranges"
	"evenkeel/study/worth"
)

const quick = `product: Quick
activation_s: 0.5
delay_s: 0.1
hold_s: 700
withdraw_s: 30
cap_mw: 40
price_steps: [{to_mw: 15, per_mw: 0.5}, {to_mw: 40, per_mw: 1.5}]
`

// invented gives an invented case, its YAML text and a product for it.
func invented(t testing.TB, seed uint64, product string) (*fleet.Case, string, *fleet.Product) {
	t.Helper()
	dir := t.TempDir()
	if err := invent.Write(dir, invent.Options{Machines: 10, Seed: seed, Hours: 400}); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(dir, "case.yaml")
	c, found := fleet.Read(path)
	if c == nil {
		t.Fatal(found)
	}
	at := filepath.Join(dir, "product.yaml")
	if err := os.WriteFile(at, []byte(product), 0o666); err != nil {
		t.Fatal(err)
	}
	p, found := fleet.ReadProduct(at, c)
	if p == nil {
		t.Fatal(found)
	}
	return c, path, p
}

func study(t testing.TB, p worth.Plan) (*worth.Study, []worth.Record) {
	t.Helper()
	s, err := p.Prepare()
	if err != nil {
		t.Fatal(err)
	}
	var records []worth.Record
	for i := range p.Hours {
		r, err := s.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		records = append(records, r)
	}
	return s, records
}

var someHours = []int{3, 60, 131, 200, 287, 350}

// A product is nothing but a shape and a resource a price step: written into the case by hand it
// gives the same hours, bit by bit.
func TestProductIsWhatItSays(t *testing.T) {
	c, path, p := invented(t, 4, quick)
	raw, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	text := string(raw)
	for _, part := range []struct{ before, add string }{
		{"\n\nmachines:", "\n  - {name: Quick, delay_s: 0.1, ramp_s: 0.4, hold_s: 700, withdraw_s: 30}"},
		{"\n\n# Net feed-in", "\n  - {name: Quick 1, kind: demand, response: {shape: Quick, cap_mw: 15, price_per_mw: 0.5}}" +
			"\n  - {name: Quick 2, kind: demand, response: {shape: Quick, cap_mw: 15, price_per_mw: 1.5}}"},
	} {
		if strings.Count(text, part.before) != 1 {
			t.Fatalf("the invented case holds %q %d times", part.before, strings.Count(text, part.before))
		}
		text = strings.Replace(text, part.before, part.add+part.before, 1)
	}
	if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	byHand, found := fleet.Read(path)
	if byHand == nil {
		t.Fatal(found)
	}
	in, err := p.In(c, 30, 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, h := range someHours {
		a, err := solve.New(byHand, solve.Options{}).Hour(context.Background(), byHand.Hour(h, fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		b, err := solve.New(in, solve.Options{}).Hour(context.Background(), in.Hour(h, fleet.HourOptions{}))
		if err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(a, b) {
			t.Errorf("hour %d: by hand %.6f with %+v, as a product %.6f with %+v", h, a.Cost, a.Prices, b.Cost, b.Prices)
		}
	}
}

// Adding a product never raises the cost by more than the gap, and more of it never does. The ends
// of a sweep are those of a sweep of the ends alone, and what single runs of these two cases find.
func TestProductNeverCosts(t *testing.T) {
	for seed := range uint64(4) {
		c, _, p := invented(t, seed, quick)
		for _, gap := range []float64{0.001, 0.0002} {
			opt := solve.Options{Gap: gap}
			plan := worth.Plan{Case: c, Product: p, VolumesMW: ranges.Range{To: 40, N: 6}.Values(), ActivationsS: []float64{0.2, 3}, Options: opt, Hours: someHours}
			s, records := study(t, plan)
			plan.VolumesMW = []float64{0, 40}
			_, ends := study(t, plan)
			for i := range records {
				r := &records[i]
				for k, pt := range r.Points {
					if zero := r.Points[0]; pt.Cost > zero.Cost+gap*math.Abs(zero.Cost) {
						t.Errorf("seed %d, hour %d: %v MW raise the cost from %v to %v", seed, r.Index, pt.HeldMW, zero.Cost, pt.Cost)
					}
					if k > 0 && k < 6 && pt.Cost > r.Points[k-1].Cost+gap*math.Abs(pt.Cost) {
						t.Errorf("seed %d, hour %d: volume %d raises the cost from %v to %v", seed, r.Index, k, r.Points[k-1].Cost, pt.Cost)
					}
					if k < 6 && pt.HeldMW > (ranges.Range{To: 40, N: 6}).At(k)+1e-6 {
						t.Errorf("seed %d, hour %d: %v MW held at volume %d", seed, r.Index, pt.HeldMW, k)
					}
				}
				e := &ends[i]
				if r.Points[0] != e.Points[0] || r.Points[5] != e.Points[1] || !reflect.DeepEqual(r.Without, e.Without) || !reflect.DeepEqual(r.With, e.With) {
					t.Errorf("seed %d, hour %d: the ends of the sweep differ from the ends alone", seed, r.Index)
				}
				for k, rung := range []*fleet.Case{s.Rungs[0], s.Full()} {
					h, err := solve.New(rung, opt).Hour(context.Background(), rung.Hour(r.Index, fleet.HourOptions{}))
					if err != nil {
						t.Fatal(err)
					}
					if got := e.Points[k]; got.Cost != h.Cost && !(k == 1 && got.Cost == e.Points[0].Cost) {
						t.Errorf("seed %d, hour %d: the sweep's end costs %v, a single run %v", seed, r.Index, got.Cost, h.Cost)
					}
				}
			}
		}
	}
}

// In closed loop too: with the demo's product, which a level sets off, and with one that goes again so
// soon that with all of it most mixes must be mended.
func TestProductNeverCostsInClosedLoop(t *testing.T) {
	c, found := fleet.Read("../../testdata/skerra/case.yaml")
	if c == nil {
		t.Fatal(found)
	}
	short := filepath.Join(t.TempDir(), "short.yaml")
	if err := os.WriteFile(short, []byte(strings.Replace(quick, "hold_s: 700", "hold_s: 20", 1)), 0o666); err != nil {
		t.Fatal(err)
	}
	for _, path := range []string{"../../testdata/skerra/product.yaml", short} {
		p, found := fleet.ReadProduct(path, c)
		if p == nil {
			t.Fatal(found)
		}
		const gap = 0.0002
		_, records := study(t, worth.Plan{Case: c, Product: p, VolumesMW: ranges.Range{To: 40, N: 5}.Values(), ActivationsS: []float64{0.25, 2},
			Options: solve.Options{Gap: gap}, Hours: []int{33, 1461, 2500, 4870, 6331, 8279}})
		held, mended := 0.0, 0
		for i := range records {
			r := &records[i]
			for k, pt := range r.Points {
				if zero := r.Points[0]; pt.Short || pt.Cost > zero.Cost*(1+gap) {
					t.Errorf("%s, hour %d, point %d: short %v, %v, without it %v", p.Name, r.Index, k, pt.Short, pt.Cost, zero.Cost)
				}
				for j := range min(k, 5) { // fewer MW are to be had with more; not so at another activation time
					if pt.Bound > r.Points[j].Cost && k < 5 {
						t.Errorf("%s, hour %d: volume %d is bound by %v, volume %d costs %v", p.Name, r.Index, k, pt.Bound, j, r.Points[j].Cost)
					}
				}
				held += pt.HeldMW
				if pt.Mended {
					mended++
				}
			}
		}
		if held == 0 || mended == 0 {
			t.Errorf("%s: %v MW held, %d hours mended: these hours test nothing", p.Name, held, mended)
		}
	}
}

// What is paid for energy is what the load pays; a resource's uplift is never below zero; the year's
// sums are those of its hours.
func TestTallyBalances(t *testing.T) {
	c, _, p := invented(t, 2, quick)
	s, records := study(t, worth.Plan{Case: c, Product: p, VolumesMW: ranges.Range{To: 40, N: 3}.Values(), Hours: someHours})
	r := s.Tally(records)
	near(t, "counted up by", r.PerYear, 8760.0/float64(len(someHours)), 1e-9)
	for _, u := range r.Uplifts {
		energy, uplift := 0.0, 0.0
		for _, e := range r.Earnings {
			if e.With != u.With || e.Way != u.Way {
				continue
			}
			energy += e.Energy
			uplift += e.MakeWhole + e.Lost
			if e.MakeWhole < 0 || e.Lost < 0 {
				t.Errorf("%s misses less than nothing: %+v", s.Full().Resources[e.Resource].Name, e)
			}
		}
		near(t, "energy paid for, per energy sold", energy/u.Served, 1, 1e-4)
		sum := 0.0
		for i := range records {
			mix := &records[i].Without
			if u.With {
				mix = &records[i].With
			}
			sum += mix.Way(u.Way).Uplift * r.PerYear
		}
		near(t, "uplift", uplift, sum, 1e-4*(1+math.Abs(sum)))
	}
	for k, pt := range r.Points {
		near(t, "net saving", pt.Net, r.Points[0].Cost-pt.Cost, 1e-6*pt.Cost)
		near(t, "gross saving", pt.Gross, pt.Net+pt.Paid, 1e-6*pt.Cost)
		if pt.Net < pt.AtLeast-1e-6*pt.Cost || pt.Net > pt.AtMost+1e-6*pt.Cost {
			t.Errorf("point %d: %v lies outside of %v to %v", k, pt.Net, pt.AtLeast, pt.AtMost)
		}
	}
	// Hull prices have the least uplift of all prices (Hogan, Ring 2003, from memory).
	for k := 0; k < len(r.Uplifts); k += worth.Ways {
		m, h := r.Uplifts[k], r.Uplifts[k+1]
		if h.MakeWhole+h.Lost+h.SlackValue > m.MakeWhole+m.Lost+m.SlackValue+1e-6*m.Served {
			t.Errorf("uplift at hull prices %+v, at marginal prices %+v", h, m)
		}
	}
}

// The volume to buy, on savings of 100, 160, 180 and 182 for 10, 20, 30 and 40 MW: the next MW saves
// 10, 6, 2 and 0.2 (computed).
func TestVolumeToBuy(t *testing.T) {
	r := &worth.Result{Study: &worth.Study{Plan: worth.Plan{VolumesMW: []float64{0, 10, 20, 30, 40}}}}
	for _, net := range []float64{0, 100, 160, 180, 182} {
		r.Points = append(r.Points, worth.YearPoint{Net: net})
	}
	for price, want := range map[float64]int{0: 4, 0.1: 4, 1: 3, 3: 2, 7: 1, 11: 0} {
		if got := r.Choice(true, price); got != want {
			t.Errorf("at %v a MW: volume %d, want %d", price, got, want)
		}
	}
	for k, want := range [][2]float64{{10, math.Inf(1)}, {6, 10}, {2, 6}, {0.2, 2}, {0, 0.2}} {
		from, to := r.PricesOf(k)
		near(t, "from", from, want[0], 1e-9)
		if to != want[1] {
			near(t, "to", to, want[1], 1e-9)
		}
	}
	if got := r.Choice(false, 0); got != 3 { // 180 of 182 is the first above 90 %
		t.Errorf("without a price: volume %d, want 3", got)
	}
}

// Plans that make no sense are refused.
func TestPlanFaults(t *testing.T) {
	c, _, p := invented(t, 1, quick)
	good := worth.Plan{Case: c, Product: p, VolumesMW: []float64{0, 40}, Hours: someHours}
	for name, change := range map[string]func(*worth.Plan){
		"no hours":           func(q *worth.Plan) { q.Hours = nil },
		"one volume":         func(q *worth.Plan) { q.VolumesMW = []float64{0} },
		"not from 0":         func(q *worth.Plan) { q.VolumesMW = []float64{5, 40} },
		"falling":            func(q *worth.Plan) { q.VolumesMW = []float64{0, 20, 10} },
		"more than there is": func(q *worth.Plan) { q.VolumesMW = []float64{0, 41} },
		"no activation":      func(q *worth.Plan) { q.ActivationsS = []float64{0} },
	} {
		plan := good
		change(&plan)
		if _, err := plan.Prepare(); err == nil {
			t.Errorf("%s: taken", name)
		}
	}
	s, err := good.Prepare()
	if err != nil {
		t.Fatal(err)
	}
	for name, a := range map[string]worth.Asked{
		"unknown primary": {Primary: "none such"}, "unknown held": {HeldMW: map[string]float64{"none such": 1}},
		"held below 0": {HeldMW: map[string]float64{"Quick": -1}}, "no inertia": {InertiaMWs: []float64{0}}, "no loss": {LossMW: []float64{math.NaN()}},
	} {
		if _, err := s.Exchange(a); err == nil {
			t.Errorf("%s: taken", name)
		}
	}
}

// Where nobody holds the product, as the mix without it is cheaper, the bound is still that of the hours with it.
func TestBoundIsThatOfTheHoursWithTheProduct(t *testing.T) {
	kept := 0
	for seed := range uint64(4) {
		c, _, p := invented(t, seed, quick)
		opt := solve.Options{Gap: 0.1}
		s, records := study(t, worth.Plan{Case: c, Product: p, VolumesMW: []float64{0, 40}, ActivationsS: []float64{0.2, 1, 3, 6, 9, 20}, Options: opt, Hours: []int{0, 20, 40, 60, 80, 100, 120, 140, 160, 180, 200, 220}})
		for i := range records {
			r := &records[i]
			for k, other := range s.Others {
				h, err := solve.New(other, opt).Hour(context.Background(), other.Hour(r.Index, fleet.HourOptions{}))
				if err != nil {
					t.Fatal(err)
				}
				pt := &r.Points[2+k]
				if pt.Bound > h.Bound {
					t.Errorf("seed %d, hour %d, %v s: a bound of %v where %v is proven", seed, r.Index, s.ActivationsS[k], pt.Bound, h.Bound)
				}
				if pt.Cost < h.Cost {
					kept++
				}
			}
		}
	}
	if kept == 0 {
		t.Error("no mix without the product is kept: these hours test nothing")
	}
}
