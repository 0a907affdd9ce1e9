package report

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// An invented island and hours made up by simple rules: enough of the shape of real
// results (seasons, nights, calm weeks) to test and look at reports, and balanced in
// every hour. No optimiser is behind them.

type synthResource struct {
	name  string
	kind  fleet.Kind
	count int
	mva   float64
	h     float64
	maxMW float64
	cost  float64
	shape int
}

const (
	synthPrimary = iota
	synthFast
	synthMedium
)

var synthFleet = []synthResource{
	{"Tarn steam 1", fleet.Thermal, 1, 350, 5, 300, 42, synthPrimary},
	{"Tarn steam 2", fleet.Thermal, 1, 350, 5, 300, 44, synthPrimary},
	{"Coldharbour combined cycle", fleet.Thermal, 2, 260, 4.5, 220, 58, synthPrimary},
	{"Ness gas turbine", fleet.Thermal, 4, 60, 3.2, 50, 95, synthPrimary},
	{"Ferry diesel", fleet.Thermal, 6, 12, 1.8, 10, 140, synthMedium},
	{"Peat works", fleet.Thermal, 1, 90, 4, 75, 51, synthPrimary},
	{"Biomass Arden", fleet.Thermal, 1, 55, 3.8, 45, 63, -1},
	{"Waste to energy", fleet.Thermal, 1, 30, 3, 25, 12, -1},
	{"High Loch", fleet.Hydro, 3, 70, 3.1, 60, 5, synthPrimary},
	{"River Sand", fleet.Hydro, 5, 14, 2.5, 12, 1, -1},
	{"Glen pumped storage", fleet.Hydro, 2, 120, 3.4, 100, 70, synthMedium},
	{"Old Mill", fleet.Hydro, 1, 8, 2.2, 6, 1, -1},
	{"Skerry condenser A", fleet.Condenser, 1, 150, 6, 0, 0, -1},
	{"Skerry condenser B, with \"flywheel\"", fleet.Condenser, 1, 100, 9, 0, 0, -1},
	{"Quay battery", fleet.Battery, 1, 0, 0, 80, 0, synthFast},
	{"Moor battery", fleet.Battery, 1, 0, 0, 40, 0, synthFast},
	{"West offshore", fleet.Wind, 1, 0, 0, 400, 0, -1},
	{"Moor wind", fleet.Wind, 1, 0, 0, 180, 0, -1},
	{"Hill wind", fleet.Wind, 1, 0, 0, 120, 0, synthMedium},
	{"South solar", fleet.Solar, 1, 0, 0, 220, 0, -1},
	{"Roof solar", fleet.Solar, 1, 0, 0, 160, 0, -1},
	{"Airfield solar", fleet.Solar, 1, 0, 0, 60, 0, -1},
	{"Smelter", fleet.Demand, 1, 0, 0, 0, 0, synthFast},
	{"Mainland link", fleet.Link, 1, 0, 0, 350, 48, synthMedium},
	{"Sister island link", fleet.Link, 1, 0, 0, 100, 66, -1},
}

func synthCase(n int, from time.Time, hours int) *fleet.Case {
	c := &fleet.Case{
		Path: "case.yaml", Name: "Skerry island 2031 (invented)", Note: "An invented island.", Currency: "EUR",
		Hash: "0f1e2d3c4b5a69788796a5b4c3d2e1f00f1e2d3c4b5a69788796a5b4c3d2e1f0",
		Limits: limits.Limits{NominalHz: 50, MaxHzPerS: 1, WindowS: 0.5, NadirHz: 0.8,
			SteadyHz: 0.5, SteadyByS: 30, SteadyUntilS: 900},
		UnservedPerMWh: 6000, ShortPerMW: 1000,
		Shapes: []fleet.NamedShape{{Name: "primary 10 s"}, {Name: "fast 1 s"}, {Name: "medium 4 s"}},
	}
	for h := range hours {
		c.Times = append(c.Times, from.Add(time.Duration(h)*time.Hour))
	}
	for i := range n {
		s := synthFleet[i%len(synthFleet)]
		if i >= len(synthFleet) {
			s.name = fmt.Sprintf("%s no. %d", s.name, i/len(synthFleet)+1)
		}
		c.Resources = append(c.Resources, fleet.Resource{
			Name: s.name, Kind: s.kind, Count: s.count, RatingMVA: s.mva, InertiaS: s.h,
			MaxMW: fleet.Value{Const: s.maxMW}, Steps: []fleet.Step{{ToMW: s.maxMW, CostPerMWh: s.cost}},
			Response: fleet.Response{Shape: s.shape},
		})
	}
	return c
}

// synthHours makes hours first to last (exclusive) of the case; kept tells whether the
// limits were.
func synthHours(c *fleet.Case, first, last int, kept bool) []solve.Hour {
	rng := rand.New(rand.NewPCG(7, 11))
	wind, cold := 0.0, 0.0
	scale := float64(len(c.Resources)) / float64(len(synthFleet))
	var list []solve.Hour
	for i := range last {
		wind = 0.97*wind + 0.25*rng.NormFloat64()
		cold = 0.99*cold + 0.35*rng.NormFloat64()
		noise := 0.4 * rng.NormFloat64()
		if i >= first {
			list = append(list, synthHour(c, i, scale, wind, cold+noise, kept))
		}
	}
	return list
}

func synthHour(c *fleet.Case, i int, scale, wind, noise float64, kept bool) solve.Hour {
	at := c.Times[i]
	season := math.Cos(2 * math.Pi * float64(at.YearDay()-15) / 365)
	hod := float64(at.Hour())
	h := solve.Hour{Index: i, Time: at}
	h.DemandMW = scale * (640 + 130*season + 120*math.Sin(math.Pi*(hod-7)/12) + 60*math.Cos(math.Pi*(hod-18)/5.5) + 12*noise)
	windShare := 1 / (1 + math.Exp(-(1.6*wind + 0.4*season - 0.7)))
	sun := math.Max(0, math.Sin(math.Pi*(hod-6+1.2*-season)/(12-2.4*season))) * (0.75 - 0.35*season)
	if hod < 4 || hod > 21 {
		sun = 0
	}
	h.Dispatch = make([]solve.Dispatch, len(c.Resources))
	left := h.DemandMW
	use := func(r int, mw float64) {
		d, res := &h.Dispatch[r], &c.Resources[r]
		d.OutputMW += mw
		d.Cost += mw * res.Steps[0].CostPerMWh
		left -= mw
		if res.Kind == fleet.Thermal {
			d.CO2T += 0.6 * mw
		}
	}
	commit := func(r, n int) {
		d, res := &h.Dispatch[r], &c.Resources[r]
		d.On = n
		d.InertiaMWs = float64(n) * res.RatingMVA * res.InertiaS
		d.Cost += float64(n) * 2 * res.RatingMVA
	}
	for r := range c.Resources {
		res := &c.Resources[r]
		capMW := res.MaxMW.Const * float64(res.Count)
		switch res.Kind {
		case fleet.Wind:
			use(r, capMW*windShare)
		case fleet.Solar:
			use(r, capMW*sun)
		case fleet.Battery:
			use(r, capMW*0.5*math.Sin(math.Pi*(hod-12)/6))
		}
		if !res.Kind.Machine() {
			h.Dispatch[r].On = res.Count
		}
	}
	pressure := math.Max(0, 0.8-left/(560*scale))
	for _, r := range meritOrder(c) {
		res := &c.Resources[r]
		if left <= 0 {
			break
		}
		for n := 1; n <= res.Count && left > 0; n++ {
			if res.Kind.Machine() {
				commit(r, n)
			}
			use(r, math.Min(left, res.MaxMW.Const))
		}
	}
	if left > 0 {
		h.UnservedMW, h.Status, h.Why = left, solve.Short, fmt.Sprintf("%.1f MW of load cannot be served", left)
		left = 0
	}
	if !kept {
		pressure = 0
	}
	secure(c, &h, scale, pressure, commit)
	for r := range c.Resources { // what is too much is curtailed, then in excess
		if res := &c.Resources[r]; left < 0 && (res.Kind == fleet.Wind || res.Kind == fleet.Solar) {
			cut := math.Min(-left, h.Dispatch[r].OutputMW)
			use(r, -cut)
			h.Dispatch[r].CurtailedMW = cut
		}
	}
	h.ExcessMW = math.Max(0, -left)
	synthReplay(c, &h, scale, pressure)
	return h
}

func meritOrder(c *fleet.Case) []int {
	var order []int
	for cost := 0; cost < 200; cost++ {
		for r := range c.Resources {
			res := &c.Resources[r]
			if int(res.Steps[0].CostPerMWh) == cost && (res.Kind <= fleet.Hydro || res.Kind == fleet.Link) {
				order = append(order, r)
			}
		}
	}
	return order
}

// secure commits condensers and machines until a floor of inertia is online that
// rises with pressure, and has the resources hold response.
func secure(c *fleet.Case, h *solve.Hour, scale, pressure float64, commit func(r, n int)) {
	if pressure == 0 {
		return
	}
	floor := scale * 3000 * (0.8 + 0.4*pressure)
	online := 0.0
	for r := range h.Dispatch {
		online += h.Dispatch[r].InertiaMWs
	}
	for _, kind := range []fleet.Kind{fleet.Condenser, fleet.Hydro, fleet.Thermal} {
		for r := range c.Resources {
			res := &c.Resources[r]
			for res.Kind == kind && online < floor && h.Dispatch[r].On < res.Count {
				online -= h.Dispatch[r].InertiaMWs
				commit(r, h.Dispatch[r].On+1)
				online += h.Dispatch[r].InertiaMWs
			}
		}
	}
	for r := range c.Resources {
		res := &c.Resources[r]
		room := res.MaxMW.Const*float64(h.Dispatch[r].On) - math.Abs(h.Dispatch[r].OutputMW)
		if res.Kind == fleet.Demand {
			room = 30 * scale
		}
		if res.Response.Shape >= 0 && room > 0 {
			h.Dispatch[r].ResponseMW = math.Min(room, 0.15*math.Max(res.RatingMVA, 250)) * (0.3 + pressure)
		}
	}
}

func synthReplay(c *fleet.Case, h *solve.Hour, scale, pressure float64) {
	h.InertiaMWs = 0.4 * h.DemandMW
	h.WorstLoss, h.WorstLossMW = "none", 0
	for r := range h.Dispatch {
		d, res := &h.Dispatch[r], &c.Resources[r]
		h.Cost += d.Cost
		h.CO2T += d.CO2T
		h.CurtailedMW += d.CurtailedMW
		h.InertiaMWs += d.InertiaMWs
		if res.Response.Shape == synthFast {
			h.FastMW += d.ResponseMW
		} else {
			h.PrimaryMW += d.ResponseMW
		}
		if one := d.OutputMW / float64(res.Count); one > h.WorstLossMW {
			h.WorstLoss, h.WorstLossMW = res.Name, one
			h.InertiaLeftMWs = d.InertiaMWs / float64(max(1, d.On))
		}
	}
	h.InertiaLeftMWs = h.InertiaMWs - h.InertiaLeftMWs
	h.RoCoFHzPerS = math.Min(0.999, 50*h.WorstLossMW/(2*h.InertiaLeftMWs+1))
	h.NadirHz = math.Min(0.8, 0.35+pressure)
	h.NadirS = 2 + 3*pressure
	h.SteadyHz = math.Min(0.5, 0.2+h.WorstLossMW/(1000*scale))
	binds := [limits.Kinds]bool{
		pressure > 0.6, pressure > 0.3 && pressure < 0.65, h.WorstLossMW > 250 && h.DemandMW > 680*scale,
	}
	values := [limits.Kinds]float64{h.RoCoFHzPerS, h.NadirHz, h.SteadyHz}
	for k := range h.Limits {
		l := &h.Limits[k]
		l.Margin = limitValue(c.Limits, limits.Kind(k)) - values[k]
		l.Loss = h.WorstLoss
		if binds[k] {
			l.Binds, l.Margin = true, 0
			l.Price = 400 + 4000*pressure*float64(k+1)
		}
	}
	if pressure > 1.18 {
		h.Status = solve.Short
		h.Limits[limits.Nadir].ShortMW = 20 * scale * (pressure - 1.17)
		h.Limits[limits.Nadir].Margin = -0.03
		h.Why = fmt.Sprintf("nadir: %.1f MW of the loss of %s is not covered", h.Limits[limits.Nadir].ShortMW, h.WorstLoss)
		h.Cost += c.ShortPerMW * h.Limits[limits.Nadir].ShortMW
	}
	h.Cost += c.UnservedPerMWh*h.UnservedMW + 900*pressure*(1+h.NadirS/9+0.2*h.WorstLossMW/300)
	h.Bound = h.Cost * (1 - 0.0008*pressure)
	h.Gap = (h.Cost - h.Bound) / math.Abs(h.Cost)
	h.Prices.EnergyPerMWh = 40 + 60*pressure
	h.Prices.ResponsePerMW = make([]float64, len(c.Shapes))
	if binds[0] || binds[1] {
		h.Prices.InertiaPerMWs = 0.4 * pressure
		for s := range h.Prices.ResponsePerMW {
			h.Prices.ResponsePerMW[s] = 12 * pressure / float64(s+1)
		}
		h.Prices.LossPerMW = 30 * pressure
	}
	h.Effort = solve.Effort{Nodes: 3 + int(20*pressure), Pivots: 40, Rows: 5}
}

func synthYear(n, year int) (c *fleet.Case, hours, without []solve.Hour) {
	from := time.Date(year, 1, 1, 0, 0, 0, 0, time.UTC)
	c = synthCase(n, from, int(from.AddDate(1, 0, 0).Sub(from).Hours()))
	return c, synthHours(c, 0, c.Hours(), true), synthHours(c, 0, c.Hours(), false)
}
