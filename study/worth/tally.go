package worth

import (
	"math"
	"slices"

	"evenkeel/solve"
	"evenkeel/study/ranges"
)

// Result is a study in numbers. Sums over the hours are counted up to a year of 8,760 hours.
type Result struct {
	*Study
	Records []Record
	// PerYear is what sums over the hours looked at are counted up by.
	PerYear float64

	Prices    []PriceOf   // energy, inertia, each shape, a smaller loss, each shape downwards
	Earnings  []Earning   // mix by mix, way by way, in the order of the case
	Uplifts   []Uplift    // mix by mix, way by way
	Points    []YearPoint // one a volume, then one an activation time; none without a product
	ByHour    [24]HourOfDay
	Displaced []Displaced // one a resource; none without a product
}

// Way numbers.
const (
	Marginal = iota
	Hull
	Ways
)

// WayNames name the ways in files.
var WayNames = [Ways]string{"marginal", "hull"}

// PriceOf is a price over the hours, one a way.
type PriceOf struct {
	Of, Shape, Per string
	Mean, Most     [2][Ways]float64 // without and with the product
	Hours          [2][Ways]int     // in which it is not zero
}

// Earning is what one resource earns in a year, currency.
type Earning struct {
	With                                        bool // the mix with the product
	Way                                         int
	Resource                                    int // of the case with the product
	Energy, Inertia, Response, Down, Loss, Cost float64
	MakeWhole, Lost                             float64
}

// Profit is what is left of the income.
func (e *Earning) Profit() float64 {
	return e.Energy + e.Inertia + e.Response + e.Down - e.Loss - e.Cost
}

// Uplift is the sum over all resources for a year, currency.
type Uplift struct {
	With            bool
	Way             int
	MakeWhole, Lost float64
	SlackValue      float64
	Served          float64 // what load pays for energy
}

// YearPoint is a year with so much of the product, for sums currency, MWh and t a year.
type YearPoint struct {
	VolumeMW, ActivationS float64
	Cost, Bound           float64 // what the product is paid included
	Paid                  float64
	// Net is what it saves less what it is paid for being held; Gross is before that.
	Net, Gross float64
	// Both costs are known within their gaps: the true Net lies between.
	AtLeast, AtMost float64
	InShort         float64 // the part of Net in hours that are short at one of both ends
	PerMW           float64 // Net for each MW of volume
	NextPerMW       float64 // what the next MW adds to Net, on the way to the next volume; NaN: there is none
	MeanMW, MostMW  float64 // held
	CO2T            float64
	HoursShort      float64 // a year
	HoursMended     float64
}

// HourOfDay is the product by the hour of the day (UTC), at the last volume.
type HourOfDay struct {
	Hours       int // looked at
	MeanMW      float64
	Net         float64 // a year
	FirstPerMW  float64 // mean price of the product without any of it, marginal
	FirstHullMW float64 // the same by hull prices
}

// Displaced is what a resource does in a year without the product and with the last volume of it.
type Displaced struct {
	Resource    int
	ResponseMWh [2]float64 // MW held times hours
	OnH         [2]float64 // unit-hours on
	OutputMWh   [2]float64
}

// Tally sums the hours up.
func (s *Study) Tally(records []Record) *Result {
	r := &Result{Study: s, Records: records, PerYear: ranges.HoursAYear / float64(len(records))}
	mixes := 1
	if s.Product != nil {
		mixes = 2
		r.points()
		r.byHour()
		r.displaced()
	}
	r.prices(mixes)
	for k := range mixes {
		for w := range Ways {
			r.earnings(k, w)
		}
	}
	return r
}

// Mix is the mix without the product (0) or with it (1).
func (rec *Record) Mix(k int) *Mix {
	if k == 0 {
		return &rec.Without
	}
	return &rec.With
}

// Way is the mix's prices one way.
func (m *Mix) Way(w int) *Way {
	if w == Marginal {
		return &m.Marginal
	}
	return &m.Hull
}

// Down is the price of 1 MW downwards of a shape; 0 where nothing lies above nominal.
func (w *Way) Down(shape int) float64 {
	if shape >= len(w.DownPerMW) {
		return 0
	}
	return w.DownPerMW[shape]
}

func (r *Result) points() {
	n := len(r.Records[0].Points)
	for k := range n {
		p := YearPoint{ActivationS: r.Product.ActivationS, NextPerMW: math.NaN()}
		if k < len(r.VolumesMW) {
			p.VolumeMW = r.VolumesMW[k]
		} else {
			p.VolumeMW, p.ActivationS = r.VolumesMW[len(r.VolumesMW)-1], r.ActivationsS[k-len(r.VolumesMW)]
		}
		for i := range r.Records {
			at, zero := &r.Records[i].Points[k], &r.Records[i].Points[0]
			p.Cost += at.Cost
			p.Bound += at.Bound
			p.Paid += at.Paid
			p.CO2T += at.CO2T
			p.MeanMW += at.HeldMW / float64(len(r.Records))
			p.MostMW = max(p.MostMW, at.HeldMW)
			p.Net += zero.Cost - at.Cost
			p.AtLeast += zero.Bound - at.Cost
			p.AtMost += zero.Cost - at.Bound
			if at.Short || zero.Short {
				p.InShort += zero.Cost - at.Cost
			}
			p.HoursShort += one(at.Short)
			p.HoursMended += one(at.Mended)
		}
		for _, v := range []*float64{&p.Cost, &p.Bound, &p.Paid, &p.CO2T, &p.Net, &p.AtLeast, &p.AtMost, &p.InShort, &p.HoursShort, &p.HoursMended} {
			*v *= r.PerYear
		}
		p.Gross = p.Net + p.Paid
		if p.VolumeMW > 0 {
			p.PerMW = p.Net / p.VolumeMW
		}
		if k == 0 { // a difference of equals
			p.AtLeast, p.AtMost = 0, 0
		}
		r.Points = append(r.Points, p)
	}
	for k := range len(r.VolumesMW) - 1 {
		a, b := &r.Points[k], &r.Points[k+1]
		a.NextPerMW = (b.Net - a.Net) / (b.VolumeMW - a.VolumeMW)
	}
}

func one(is bool) float64 {
	if is {
		return 1
	}
	return 0
}

// Best is the volume, of those looked at, at which Net less a price a MW and year is largest: the
// last one that is worth its price. The smallest of equals.
func (r *Result) Best(pricePerMWYear float64) int {
	best := 0
	for k := range r.VolumesMW {
		if r.Points[k].Net-pricePerMWYear*r.VolumesMW[k] > r.Points[best].Net-pricePerMWYear*r.VolumesMW[best] {
			best = k
		}
	}
	return best
}

// Knee is the first volume that brings a share of what the best one brings.
func (r *Result) Knee(share float64) int {
	most := r.Points[r.Best(0)].Net
	return slices.IndexFunc(r.Points[:len(r.VolumesMW)], func(p YearPoint) bool { return p.Net >= share*most })
}

func (r *Result) byHour() {
	last := len(r.VolumesMW) - 1
	shape := len(r.Case.Shapes)
	for i := range r.Records {
		rec := &r.Records[i]
		h := &r.ByHour[rec.Time.UTC().Hour()]
		h.Hours++
		h.MeanMW += rec.Points[last].HeldMW
		h.Net += (rec.Points[0].Cost - rec.Points[last].Cost) * r.PerYear
		h.FirstPerMW += rec.Without.Marginal.Prices.ResponsePerMW[shape]
		h.FirstHullMW += rec.Without.Hull.Prices.ResponsePerMW[shape]
	}
	for i := range r.ByHour {
		if h := &r.ByHour[i]; h.Hours > 0 {
			n := float64(h.Hours)
			h.MeanMW, h.FirstPerMW, h.FirstHullMW = h.MeanMW/n, h.FirstPerMW/n, h.FirstHullMW/n
		}
	}
}

func (r *Result) displaced() {
	for k := range r.Full().Resources {
		d := Displaced{Resource: k}
		for i := range r.Records {
			for w := range 2 {
				do := r.Records[i].Mix(w).Does[k]
				d.ResponseMWh[w] += float64(do.ResponseMW) * r.PerYear
				d.OutputMWh[w] += float64(do.OutputMW) * r.PerYear
				d.OnH[w] += float64(do.On) * r.PerYear
			}
		}
		r.Displaced = append(r.Displaced, d)
	}
}

func (r *Result) prices(mixes int) {
	c := r.Full()
	add := func(of, shape, per string, take func(w *Way) float64) {
		p := PriceOf{Of: of, Shape: shape, Per: per}
		for k := range mixes {
			for w := range Ways {
				for i := range r.Records {
					v := take(r.Records[i].Mix(k).Way(w))
					p.Mean[k][w] += v / float64(len(r.Records))
					p.Most[k][w] = max(p.Most[k][w], v)
					if math.Abs(v) > 1e-6 {
						p.Hours[k][w]++
					}
				}
			}
		}
		r.Prices = append(r.Prices, p)
	}
	price := func(f func(p *solve.Prices) float64) func(w *Way) float64 {
		return func(w *Way) float64 { return f(&w.Prices) }
	}
	add("energy", "", "mwh", price(func(p *solve.Prices) float64 { return p.EnergyPerMWh }))
	add("inertia", "", "mws", price(func(p *solve.Prices) float64 { return p.InertiaPerMWs }))
	for s := range c.Shapes {
		add("response", c.Shapes[s].Name, "mw", price(func(p *solve.Prices) float64 { return p.ResponsePerMW[s] }))
	}
	add("smaller loss", "", "mw", price(func(p *solve.Prices) float64 { return p.LossPerMW }))
	if c.Above == nil {
		return
	}
	add("smaller loss of load", "", "mw", func(w *Way) float64 { return w.OverPerMW })
	for s := range c.Shapes {
		add("response downwards", c.Shapes[s].Name, "mw", func(w *Way) float64 { return w.Down(s) })
	}
}

func (r *Result) earnings(k, w int) {
	u := Uplift{With: k == 1, Way: w}
	for res := range r.Full().Resources {
		e := Earning{With: k == 1, Way: w, Resource: res}
		for i := range r.Records {
			t := &r.Records[i].Mix(k).Way(w).Takes[res]
			e.Energy += float64(t.Energy) * r.PerYear
			e.Inertia += float64(t.Inertia) * r.PerYear
			e.Response += float64(t.Response) * r.PerYear
			e.Down += float64(t.Down) * r.PerYear
			e.Loss += float64(t.Loss) * r.PerYear
			e.Cost += float64(t.Cost) * r.PerYear
			e.MakeWhole += float64(t.MakeWhole) * r.PerYear
			e.Lost += float64(t.Lost) * r.PerYear
		}
		u.MakeWhole += e.MakeWhole
		u.Lost += e.Lost
		r.Earnings = append(r.Earnings, e)
	}
	for i := range r.Records {
		way := r.Records[i].Mix(k).Way(w)
		u.SlackValue += way.SlackValue * r.PerYear
		u.Served += way.Prices.EnergyPerMWh * r.Records[i].DemandMW * r.PerYear
	}
	r.Uplifts = append(r.Uplifts, u)
}

// AnyShort tells whether some hour is short without the product.
func (r *Result) AnyShort() bool { return r.Short(0) > 0 }

// Short counts the hours looked at that are short at a point.
func (r *Result) Short(point int) int {
	n := 0
	for i := range r.Records {
		if r.Records[i].Points[point].Short {
			n++
		}
	}
	return n
}

// KneeShare is the share of all that there is to save at which a volume is said to be enough where no
// price is given.
const KneeShare = 0.9

// Choice is the volume to buy, as an index: by price where one is given, else the first that brings
// KneeShare of the most; 0 where nothing is to be saved.
func (r *Result) Choice(priced bool, pricePerMWYear float64) int {
	switch {
	case priced:
		return r.Best(pricePerMWYear)
	case r.Best(0) == 0:
		return 0
	}
	return r.Knee(KneeShare)
}
