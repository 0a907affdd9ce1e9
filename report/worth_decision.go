package report

import (
	"fmt"
	"io"
	"math"

	"evenkeel/study/worth"
)

// demandCSV writes the volume worth buying by price.
func demandCSV(w io.Writer, r *worth.Result) error {
	list := r.Demand()
	return rows(w, []string{"price_from_per_mw_year", "price_below_per_mw_year", "volume_mw", "saving_net"}, len(list), func(i int) []string {
		d := list[i]
		below := ""
		if !math.IsInf(d.ToPrice, 1) {
			below = fixed(d.ToPrice, decMoney)
		}
		p := &r.Points[d.Point]
		return []string{fixed(d.FromPrice, decMoney), below, fixed(p.VolumeMW, decMW), fixed(p.Net, decMoney)}
	})
}

// demand prints the volume worth buying by price.
func (p *worthPage) demand() {
	p.section("What to buy at a yearly price on top of its hourly pay (" + p.c.Currency + " a MW and year)")
	p.line("  %24s %12s %16s", "price from and below", "buy, MW", "saves a year")
	list := p.r.Demand()
	const listed = 12
	for i, d := range list {
		if i == listed {
			p.line("  %24s", fmt.Sprintf("%d more: demand.csv", len(list)-listed))
			break
		}
		prices := grouped(d.FromPrice, 0) + " to " + grouped(d.ToPrice, 0)
		if math.IsInf(d.ToPrice, 1) {
			prices = grouped(d.FromPrice, 0) + " and more"
		}
		point := &p.r.Points[d.Point]
		p.line("  %24s %12s %16s", prices, fixed(point.VolumeMW, 1), grouped(point.Net, 0))
	}
	p.text("Saves: net of the hourly pay that holding asks for (price_steps), before the yearly price.", "  ")
}

// rightAt says at which prices a volume is the right one.
func (p *worthPage) rightAt(k int) string {
	from, to := p.r.PricesOf(k)
	volume := plain(roundMW(p.r.VolumesMW[k])) + " MW"
	if !(from < to) {
		return volume + " is the best volume at no yearly price: the list above gives those that are"
	}
	return fmt.Sprintf("%s is right at any price between %s and %s a MW and year on top of the hourly pay", volume, grouped(from, 0), amount(to)+" "+p.c.Currency)
}

// bill gives the three numbers of a volume at a yearly price.
func (p *worthPage) bill(k int) string {
	bill, net := p.w.At*p.r.VolumesMW[k], p.r.Points[k].Net
	return fmt.Sprintf("It saves %s a year, net of the hourly pay that holding asks for (price_steps); the yearly price on top of that comes to %s; %s are left.",
		p.money(net), amount(bill), amount(net-bill))
}

// speed says what another activation time saves at full volume.
func (p *worthPage) speed() {
	r := p.r
	if len(r.ActivationsS) == 0 {
		p.text("--activation 0.25,1,2 tries other speeds.", "")
		return
	}
	own := &r.Points[len(r.VolumesMW)-1]
	list := r.Speeds()
	text, fastest := "", -1
	for i := range list {
		s := &list[i]
		if i+1 < len(list) && fastest < 0 && s.Net-list[i+1].Net > p.w.Gap*math.Abs(own.Cost) {
			fastest = i
		}
		if s.ActivationS == own.ActivationS {
			continue
		}
		more := s.Net - own.Net
		word := "more"
		if more < 0 {
			word = "less"
		}
		if text != "" {
			text += ", "
		}
		text += fmt.Sprintf("%s s saves %s %s", plain(s.ActivationS), grouped(math.Abs(more), 0), word)
	}
	if text == "" {
		return
	}
	text = fmt.Sprintf("Speed, at all %s MW against its own %s s, %s a year: %s.", plain(own.VolumeMW), plain(own.ActivationS), p.c.Currency, text)
	if fastest < 0 {
		text += " No step to a faster one saves more than the gap."
	} else {
		a, b := &list[fastest], &list[fastest+1]
		text += fmt.Sprintf(" The fastest that saves more than the next slower one, beyond the gap, is %s s: worth up to %s %s a MW and year more than %s s.",
			plain(a.ActivationS), grouped((a.Net-b.Net)/a.VolumeMW, 0), p.c.Currency, plain(b.ActivationS))
	}
	p.text(text, "")
}
