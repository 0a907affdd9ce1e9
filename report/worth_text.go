package report

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"evenkeel/fleet"
	"evenkeel/study/ranges"
	"evenkeel/study/worth"
)

// worthPage is a page on a study of worth.
type worthPage struct {
	page
	r *worth.Result
	x *worth.Exchange
	w WorthOptions
}

// WorthText writes what a market designer could paste into a mail: plain text, at most 80 columns.
func WorthText(w io.Writer, r *worth.Result, x *worth.Exchange, o WorthOptions) error {
	p := &worthPage{page: page{c: r.Full()}, r: r, x: x, w: o}
	p.opening()
	p.prices()
	p.earnings()
	p.exchange()
	if r.Product != nil {
		p.product()
		p.displaced()
		p.demand()
		p.decision()
		p.speed()
	}
	p.line("")
	p.text(WorthLoss, "")
	p.text(hoursNote(Options{StartSpreadH: o.StartSpreadH}), "")
	p.text(Caution, "")
	_, err := w.Write(p.out.Bytes())
	return err
}

// lookedAt says which hours a study looked at and how sums come about.
func lookedAt(r *worth.Result, o WorthOptions) string {
	first, last := r.Records[0].Time, r.Records[len(r.Records)-1].Time
	s := fmt.Sprintf("%s, %s to %s UTC", hoursOf(len(r.Records)), minute(first), minute(last))
	if o.Sample {
		s += "; a sample, counted up to a year of " + count(ranges.HoursAYear) + " hours"
	}
	return s
}

func (p *worthPage) opening() {
	title := "What services are worth: " + p.c.Name
	if p.r.Product != nil {
		title += ", and what " + p.r.Product.Name + " would save"
	}
	p.text(title, "")
	p.text(lookedAt(p.r, p.w)+". Each hour to a gap of "+plain(100*p.w.Gap)+" %.", "")
	if n := p.r.Short(0); n > 0 {
		p.text(fmt.Sprintf("%s SHORT: a limit cannot be met or load cannot be served; what that costs is set by the case.", hoursOf(n)), "")
	}
}

func (p *worthPage) prices() {
	with := p.r.Product != nil
	p.section("Mean prices over the hours, " + p.c.Currency + " for an hour")
	head := fmt.Sprintf("  %s %10s %10s", padRight("", 31), "marginal", "hull")
	if with {
		p.line("  %s %21s  %21s", padRight("", 31), "without the product", "with all of it")
		head += fmt.Sprintf("  %10s %10s", "marginal", "hull")
	}
	p.line("%s", head)
	for _, q := range p.r.Prices {
		if q.Hours == [2][worth.Ways]int{} || q.Of == "response downwards" && !heldDown(p.c, q.Shape) {
			continue
		}
		dec := 2
		if q.Of == "inertia" {
			dec = 4
		}
		text := fmt.Sprintf("  %s %10s %10s", padRight(priceName(&q), 31), grouped(q.Mean[0][worth.Marginal], dec), grouped(q.Mean[0][worth.Hull], dec))
		if with {
			text += fmt.Sprintf("  %10s %10s", grouped(q.Mean[1][worth.Marginal], dec), grouped(q.Mean[1][worth.Hull], dec))
		}
		p.line("%s", text)
	}
}

// heldDown tells whether somebody could hold a shape downwards.
func heldDown(c *fleet.Case, shape string) bool {
	return slices.ContainsFunc(c.Resources, func(r fleet.Resource) bool {
		return r.Down.Shape >= 0 && c.Shapes[r.Down.Shape].Name == shape
	})
}

func priceName(q *worth.PriceOf) string {
	switch q.Of {
	case "energy":
		return "1 MWh of energy"
	case "inertia":
		return "1 MW·s of inertia"
	case "response":
		return "1 MW of " + q.Shape
	case "response downwards":
		return "1 MW down of " + q.Shape
	}
	if q.Of == "smaller loss of load" {
		return "1 MW off the losses of load"
	}
	return "1 MW off the losses that bind"
}

func (p *worthPage) earnings() {
	p.section("Uplift a year, " + p.c.Currency + ": what is missed by following the schedule")
	p.line("  %s %14s %18s %12s %10s", padRight("", 20), "make-whole", "lost opportunity", "together", "% of load")
	for i := range p.r.Uplifts {
		u := &p.r.Uplifts[i]
		name := worth.WayNames[u.Way] + " prices"
		if p.r.Product != nil {
			name = worth.WayNames[u.Way] + ", " + mixName(u.With) + " it"
		}
		p.line("  %s %14s %18s %12s %10s", padRight(name, 20), grouped(u.MakeWhole, 0), grouped(u.Lost, 0), grouped(u.MakeWhole+u.Lost, 0), fixed(100*(u.MakeWhole+u.Lost)/u.Served, 2))
	}
	p.text("Of load: of what it pays for energy at those prices. By resource: earnings.csv.", "  ")
	const listed = 8
	list := slices.DeleteFunc(slices.Clone(p.r.Earnings), func(e worth.Earning) bool {
		return e.With || e.Way != worth.Marginal || printsZero(e.Inertia+e.Response+e.Down, 0)
	})
	slices.SortStableFunc(list, func(a, b worth.Earning) int {
		return cmp.Compare(b.Inertia+b.Response+b.Down, a.Inertia+a.Response+a.Down)
	})
	p.section("Who earns most by frequency services in a year (marginal prices, " + p.c.Currency + ")")
	if len(list) == 0 {
		p.line("  nobody")
		return
	}
	p.line("  %s %10s %10s %11s %11s %10s", padRight("", 20), "inertia", "response", "downwards", "loss paid", "uplift")
	for _, e := range list[:min(len(list), listed)] {
		p.line("  %s %10s %10s %11s %11s %10s", padRight(p.c.Resources[e.Resource].Name, 20), grouped(e.Inertia, 0), grouped(e.Response, 0), grouped(e.Down, 0), grouped(e.Loss, 0), grouped(e.MakeWhole+e.Lost, 0))
	}
}

func (p *worthPage) exchange() {
	x := p.x
	loss := x.Middle()
	if loss == 0 {
		p.section("Exchange rates: there is no loss to compute them for")
		return
	}
	var cells []worth.Cell
	for _, c := range x.Cells() {
		if c.LossMW == loss && len(cells) < 4 {
			cells = append(cells, c)
		}
	}
	primary := x.Names[x.Primary]
	p.section(fmt.Sprintf("Exchange rates after a loss of %s MW (others: exchange.csv)", grouped(loss, 1)))
	row := func(name string, of func(c *worth.Cell) string) {
		text := "  " + padRight(name, 30)
		for i := range cells {
			text += " " + padLeft(of(&cells[i]), 11)
		}
		p.line("%s", text)
	}
	row("kinetic energy left, MW·s", func(c *worth.Cell) string { return grouped(c.InertiaMWs, 0) })
	row("what governs", func(c *worth.Cell) string {
		if c.Governs == worth.Beyond {
			return "beyond"
		}
		return strings.TrimSuffix(governsText(c), " state")
	})
	row("at, s after the loss", func(c *worth.Cell) string {
		if c.Governs == worth.Nothing {
			return ""
		}
		return fixed(c.ToS, 1)
	})
	row("least "+primary+", MW", func(c *worth.Cell) string { return grouped(c.PrimaryMW, 1) })
	p.line("  MW of %s that 1 MW replaces, of", primary)
	for s := range x.Shapes {
		if s != x.Primary {
			row("  "+x.Names[s], func(c *worth.Cell) string { return rated(c, c.Rates, s, false) })
		}
	}
	p.line("  MW·s of inertia that 1 MW replaces, of")
	for s := range x.Shapes {
		row("  "+x.Names[s], func(c *worth.Cell) string { return rated(c, c.Rates, s, true) })
	}
	held := ""
	for s, mw := range x.HeldMW {
		if mw > 0 {
			held += fmt.Sprintf(", %s MW of %s", plain(mw), x.Names[s])
		}
	}
	if held == "" {
		held = ", nothing else"
	}
	dash, below := false, false
	for i := range cells {
		c := &cells[i]
		dash = dash || !c.Rated() || c.InertiaPerPrimary == 0
		if c.Rated() {
			below = below || slices.ContainsFunc(c.Rates, func(t worth.Rate) bool { return t.PrimaryMW < 0 })
		}
	}
	note := "Rates of the next small part of a MW, with" + strings.TrimPrefix(held, ",") + " held. What comes after the instant that governs, or is gone by then, replaces nothing."
	if below {
		note += " What has gone the wrong way by then counts below zero: a hydro governor does so at first, a wind rotor when it recovers."
	}
	if dash {
		note += " No rate (–): nothing governs, no reserve helps, or in the steady state, where inertia does not help."
	}
	p.text(note, "  ")
}

// rated prints a rate where there is one.
func rated(c *worth.Cell, rates []worth.Rate, s int, inertia bool) string {
	switch {
	case !c.Rated(), inertia && c.InertiaPerPrimary == 0:
		return "–"
	case inertia:
		return grouped(rates[s].InertiaMWs, 1)
	}
	return fixed(rates[s].PrimaryMW, 2)
}

func (p *worthPage) product() {
	q, r := p.r.Product, p.r
	p.section(fmt.Sprintf("%s: all out %s; %s; up to %s MW", q.Name, activationWords(q, q.ActivationS), holdWords(q), plain(q.MostMW())))
	p.text(fmt.Sprintf("A year without it costs %s. With it, %s a year:", p.money(r.Points[0].Cost), p.c.Currency), "  ")
	p.line("  %8s %10s %12s %12s %10s %10s %9s", "volume", "held", "saves", "before its", "saves", "next MW", "more CO2")
	p.line("  %8s %10s %12s %12s %10s %10s %9s", "MW", "mean MW", "net", "own pay", "per MW", "saves", "t")
	for k := range r.Points {
		pt := &r.Points[k]
		if k == len(r.VolumesMW) {
			p.line("  other activation times, %s MW:", plain(pt.VolumeMW))
		}
		first := fixed(pt.VolumeMW, 1)
		if k >= len(r.VolumesMW) {
			first = plain(pt.ActivationS) + " s"
		}
		next, per := "", ""
		if !math.IsNaN(pt.NextPerMW) {
			next = grouped(pt.NextPerMW, 0)
		}
		if k > 0 {
			per = grouped(pt.PerMW, 0)
		}
		p.line("  %8s %10s %12s %12s %10s %10s %9s", first, fixed(pt.MeanMW, 1), grouped(pt.Net, 0), grouped(pt.Gross, 0), per, next, grouped(pt.CO2T-r.Points[0].CO2T, 0))
	}
	last := &r.Points[len(r.VolumesMW)-1]
	p.line("")
	p.fact("Gaps", fmt.Sprintf("costs are known to within a gap an hour, so the last volume saves between %s and %s", p.money(last.AtLeast), amount(last.AtMost)))
	if last.InShort != 0 {
		p.fact("Short hours", fmt.Sprintf("%s of what it saves lies in hours that are short, at the prices set on shortfalls", p.money(last.InShort)))
	}
	first := p.r.Prices[2+len(p.c.Shapes)-1]
	p.fact("First MW", fmt.Sprintf("worth %s a year at the hours' marginal prices, %s at hull prices, before its own pay",
		p.money(ranges.HoursAYear*first.Mean[0][worth.Marginal]), amount(ranges.HoursAYear*first.Mean[0][worth.Hull])))
	p.fact("Held", heldWhen(r))
	for k := 1; k < len(r.VolumesMW); k++ {
		if a, b := &r.Points[k-1], &r.Points[k]; b.Net < a.Net-p.w.Gap*math.Abs(a.Cost) {
			p.fact("More saves less", fmt.Sprintf("from %s MW to %s MW, beyond the gap: with more of it hours had to be mended in closed loop. The smaller volume is the better one",
				plain(roundMW(a.VolumeMW)), plain(roundMW(b.VolumeMW))))
			break
		}
	}
}

func activationWords(q *fleet.Product, activationS float64) string {
	if q.LevelHz > 0 {
		return plain(activationS) + " s after " + plain(q.LevelHz) + " Hz"
	}
	return plain(activationS) + " s after the loss"
}

func holdWords(q *fleet.Product) string {
	if q.HoldS == 0 {
		return "held for ever"
	}
	return "held " + plain(q.HoldS) + " s"
}

// heldWhen says at which hours of the day the product is held most and least.
func heldWhen(r *worth.Result) string {
	most, least := -1, -1
	for i := range r.ByHour {
		switch h := &r.ByHour[i]; {
		case h.Hours == 0:
		case most < 0:
			most, least = i, i
		default:
			if h.MeanMW > r.ByHour[most].MeanMW {
				most = i
			}
			if h.MeanMW < r.ByHour[least].MeanMW {
				least = i
			}
		}
	}
	return fmt.Sprintf("most from %02d:00 UTC (mean %s MW), least from %02d:00 (%s MW); see product-hours.csv",
		most, fixed(r.ByHour[most].MeanMW, 1), least, fixed(r.ByHour[least].MeanMW, 1))
}

func (p *worthPage) displaced() {
	swept := p.r.Swept
	list := slices.DeleteFunc(slices.Clone(p.r.Displaced), func(d worth.Displaced) bool { return slices.Contains(swept, d.Resource) })
	change := func(d worth.Displaced) float64 { return d.ResponseMWh[1] - d.ResponseMWh[0] }
	slices.SortStableFunc(list, func(a, b worth.Displaced) int { return cmp.Compare(change(a), change(b)) })
	p.section("Who is displaced by all of it: mean MW held, and hours on a year")
	if len(list) == 0 || change(list[0]) > -1 {
		p.line("  nobody")
		return
	}
	p.line("  %s %10s %10s  %10s %10s", padRight("", 31), "held", "with it", "on, h", "with it")
	for i := range list[:min(len(list), 6)] {
		d := &list[i]
		if change(*d) > -1 {
			break
		}
		on := [2]string{}
		if p.c.Resources[d.Resource].Kind.Machine() {
			on = [2]string{grouped(d.OnH[0], 0), grouped(d.OnH[1], 0)}
		}
		p.line("  %s %10s %10s  %10s %10s", padRight(p.c.Resources[d.Resource].Name, 31), fixed(d.ResponseMWh[0]/ranges.HoursAYear, 2), fixed(d.ResponseMWh[1]/ranges.HoursAYear, 2), on[0], on[1])
	}
}

func (p *worthPage) decision() {
	r := p.r
	p.line("")
	last := len(r.VolumesMW) - 1
	k := r.Choice(p.w.AtGiven, p.w.At)
	if p.w.AtGiven {
		price := amount(p.w.At) + " " + p.c.Currency + " a MW and year on top of its hourly pay"
		switch {
		case k == 0:
			p.text(fmt.Sprintf("Buy none of it at %s: no volume looked at saves that much a MW.", price), "")
		case k == last:
			p.text(fmt.Sprintf("Buy all %s MW at %s: even the last MW saves more. %s",
				plain(r.VolumesMW[k]), price, p.bill(k)), "")
		default:
			p.text(fmt.Sprintf("Buy about %s MW: beyond it the next MW saves less than %s. %s",
				plain(roundMW(r.VolumesMW[k])), price, p.bill(k)), "")
		}
		return
	}
	if k == 0 {
		p.text("Buy none of it: no volume looked at saves more than it is paid.", "")
		return
	}
	next := ""
	switch {
	case k == last:
	case r.Points[k].NextPerMW > 0:
		next = fmt.Sprintf(", and the next MW saves %s %s a year", grouped(r.Points[k].NextPerMW, 0), p.c.Currency)
	default:
		next = ", and the next MW saves nothing"
	}
	p.text(fmt.Sprintf("Buy about %s MW: they bring %s %% of what there is to save (%s a year)%s. %s.",
		plain(roundMW(r.VolumesMW[k])), fixed(100*r.Points[k].Net/r.Points[r.Best(0)].Net, 0), p.money(r.Points[k].Net), next, p.rightAt(k)), "")
}

func roundMW(v float64) float64 { return math.Round(v*10) / 10 }
