package report

import (
	"fmt"
	"slices"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// aboveNames are the limits above nominal in files.
var aboveNames = [limits.Kinds]string{limits.RoCoF: "rise", limits.Nadir: "peak", limits.Steady: "steady_over"}

// aboveHeader lists the columns of hours.csv for the other side of nominal; none where the
// case has no limits there.
func aboveHeader(c *fleet.Case) []string {
	if c.Above == nil {
		return nil
	}
	h := []string{"down_mw", "over_loss", "over_loss_mw", "rise_hz_per_s", "peak_hz", "peak_s", "steady_over_hz"}
	for k, name := range aboveNames {
		h = append(h, name+"_margin_"+limitUnit[k], name+"_binds", name+"_price_per_"+limitUnit[k], name+"_loss", name+"_short_mw")
	}
	h = append(h, "closed_rise_hz_per_s", "closed_peak_hz", "closed_steady_over_hz")
	for _, s := range c.Shapes {
		h = append(h, "down_price_per_mw:"+s.Name)
	}
	return append(h, "over_loss_price_per_mw")
}

func aboveRow(row []string, c *fleet.Case, h *solve.Hour) []string {
	if c.Above == nil {
		return row
	}
	a := h.Above
	if a == nil {
		a = &solve.Above{}
	}
	row = append(row, fixed(a.DownMW, decMW), a.WorstLoss, fixed(a.WorstLossMW, decMW), fixed(a.RoCoFHzPerS, decHz), fixed(a.PeakHz, decHz), fixed(a.PeakS, decS), fixed(a.SteadyHz, decHz))
	for _, l := range a.Limits {
		binds := "0"
		if l.Binds {
			binds = "1"
		}
		row = append(row, fixed(l.Margin, decHz), binds, fixed(l.Price, decPrice), l.Loss, fixed(l.ShortMW, decMW))
	}
	if h.Closed.Simulated > 0 {
		row = append(row, fixed(a.ClosedRoCoFHzPerS, decHz), fixed(a.ClosedPeakHz, decHz), fixed(a.ClosedSteadyHz, decHz))
	} else {
		row = append(row, "", "", "")
	}
	for s := range c.Shapes {
		v := 0.0
		if s < len(a.DownPerMW) {
			v = a.DownPerMW[s]
		}
		row = append(row, fixed(v, decPrice))
	}
	return append(row, fixed(a.LossPerMW, decPrice))
}

// aboveTally sums up the other side of nominal.
type aboveTally struct {
	binding [limits.Kinds]limitTally
	down    []pricing
	loss    pricing
	held    spread
	worst   [limits.Kinds]float64
}

func tallyAbove(c *fleet.Case, hours []solve.Hour) *aboveTally {
	t := &aboveTally{down: make([]pricing, len(c.Shapes))}
	for i := range hours {
		h := &hours[i]
		a := h.Above
		if a == nil {
			continue
		}
		for k, v := range [limits.Kinds]float64{a.RoCoFHzPerS, a.PeakHz, a.SteadyHz} {
			t.worst[k] = max(t.worst[k], v)
			addLimit(&t.binding[k], &a.Limits[k], h)
		}
		for s := range t.down {
			if s < len(a.DownPerMW) {
				t.down[s].add(a.DownPerMW[s])
			}
		}
		t.loss.add(a.LossPerMW)
		t.held.add(a.DownMW, h.Index)
	}
	return t
}

type aboveJSON struct {
	Limits   []limitJSON `json:"limits"`
	MeanDown number      `json:"mean_down_mw"`
	Prices   []priceJSON `json:"prices"`
	RoCoF    number      `json:"largest_rise_hz_per_s"`
	Peak     number      `json:"largest_peak_hz"`
	Steady   number      `json:"largest_steady_over_hz"`
}

// aboveOf is nil where the case has no limits above nominal.
func aboveOf(c *fleet.Case, hours []solve.Hour) *aboveJSON {
	if c.Above == nil {
		return nil
	}
	t := tallyAbove(c, hours)
	j := &aboveJSON{MeanDown: mw(t.held.mean()), RoCoF: hz(t.worst[limits.RoCoF]), Peak: hz(t.worst[limits.Nadir]), Steady: hz(t.worst[limits.Steady])}
	for k := range t.binding {
		b := &t.binding[k]
		j.Limits = append(j.Limits, limitJSON{
			Limit: aboveNames[k], Value: hz(limitValue(*c.Above, limits.Kind(k))), Unit: limitUnit[k],
			HoursBinding: b.binding, PercentBinding: number{100 * float64(b.binding) / float64(len(hours)), decPercent},
			HoursShort: b.short, MeanPrice: number{b.price.mean(), decPrice}, HighestPrice: number{b.price.max, decPrice},
			LeastMargin: valueAtHour{hz(b.margin.min), b.margin.minAtHour}, ByHourOfDay: b.byHour, ByMonth: b.byMonth,
		})
	}
	for s := range c.Shapes {
		if p := t.down[s]; p.hours > 0 {
			j.Prices = append(j.Prices, priceJSON{"response downwards", c.Shapes[s].Name, "mw", p.hours, number{p.mean(), decPrice}, number{p.max, decPrice}})
		}
	}
	j.Prices = append(j.Prices, priceJSON{"smaller loss of load", "", "mw", t.loss.hours, number{t.loss.mean(), decPrice}, number{t.loss.max, decPrice}})
	return j
}

// offeredDown tells whether some resource holds response of a shape downwards.
func offeredDown(c *fleet.Case, shape int) bool {
	return slices.ContainsFunc(c.Resources, func(r fleet.Resource) bool { return r.Down.Shape == shape })
}

// above writes the other side of nominal for people.
func (p *page) above() {
	if p.c.Above == nil {
		return
	}
	t, l := tallyAbove(p.c, p.hours), p.c.Above
	p.section("Above nominal, after losses of load and of exports")
	p.text(fmt.Sprintf("Limits: RoCoF %s Hz/s, peak %s Hz, steady %s Hz. Replayed at most: %s Hz/s, %s Hz, %s Hz.",
		plain(l.MaxHzPerS), plain(l.NadirHz), plain(l.SteadyHz), fixed(t.worst[0], 3), fixed(t.worst[1], 3), fixed(t.worst[2], 3)), "  ")
	for k := range t.binding {
		b := &t.binding[k]
		price, hod, month := "", "", ""
		if b.binding > 0 {
			price = amount(b.price.mean()) + " per " + priceUnit(limits.Kind(k))
			hod, month = hourWindow(b.byHour), monthWindow(b.byMonth)
		}
		p.limitRow(limits.Kind(k).WordAbove()+" binds", count(b.binding), share(b.binding, len(p.hours)), hod, month, price)
	}
	for s := range t.down {
		if w := t.down[s]; w.hours > 0 && offeredDown(p.c, s) {
			p.line("  %s mean %s  most %s  in %s h", padRight("1 MW downwards of "+p.c.Shapes[s].Name, 34), padLeft(grouped(w.mean(), 2), 9), padLeft(grouped(w.max, 2), 9), count(w.hours))
		}
	}
	p.line("  %s mean %s MW", padRight("held downwards", 34), grouped(t.held.mean(), 1))
}
