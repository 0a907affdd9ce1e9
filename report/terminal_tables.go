package report

import (
	"fmt"
	"slices"
	"strings"

	"evenkeel/limits"
	"evenkeel/solve"
)

// limitRow lays out the table of limits: name, hours, share, when, price.
func (p *page) limitRow(name, n, share, hod, month, price string) {
	p.line("  %s %s %s  %s %s %s", padRight(name, 24), padLeft(n, 6), padLeft(share, 6),
		padRight(hod, 8), padRight(month, 8), padLeft(price, 20))
}

func (p *page) whatBinds() {
	t, n := p.tally, len(p.hours)
	p.section("What binds, and when")
	p.line("  %s %6s %6s  %s %s", padRight("limit", 24), "hours", "%", padRight("half of them in", 17),
		padLeft("mean price, "+clip(p.c.Currency, 8), 20))
	for k := range t.binding {
		b := &t.binding[k]
		kind := limits.Kind(k)
		price, hod, month := "", "", ""
		if b.binding > 0 {
			price = amount(b.price.mean()) + " per " + priceUnit(kind)
			hod, month = hourWindow(b.byHour), monthWindow(b.byMonth)
		}
		p.limitRow(kind.Word(), count(b.binding), share(b.binding, n), hod, month, price)
	}
	for _, s := range []struct {
		name string
		is   state
	}{{"more than one at once", bySeveral}, {"none", free}, {"(short)", isShort}} {
		p.limitRow(s.name, count(t.states[s.is]), share(t.states[s.is], n), "", "", "")
	}
}

func priceUnit(k limits.Kind) string {
	if k == limits.RoCoF {
		return "Hz/s"
	}
	return "Hz"
}

func share(n, of int) string { return fixed(100*float64(n)/float64(of), 1) }

func (p *page) worths() {
	t := p.tally
	p.section("What a service is worth, in the hours that price it (" + p.c.Currency + " per hour)")
	row := func(name string, w pricing, dec int) {
		if w.hours == 0 {
			p.line("  %s never priced", padRight(name, 34))
			return
		}
		p.line("  %s mean %s  most %s  in %s h", padRight(name, 34),
			padLeft(grouped(w.mean(), dec), 9), padLeft(grouped(w.max, dec), 9), count(w.hours))
	}
	row("1 MW·s of inertia", t.inertiaPrice, 4)
	for s := range p.c.Shapes {
		row("1 MW of response "+p.c.Shapes[s].Name, t.response[s], 2)
	}
	row("1 MW off the largest loss", t.lossMW, 2)
}

func (p *page) inertia() {
	t := p.tally
	p.line("")
	p.line("%s %9s %9s", padRight("Inertia, GW·s", 34), "least", "mean")
	dec := 2
	if t.inertia.mean() < 2000 {
		dec = 3
	}
	row := func(name string, s spread) {
		p.line("  %s %s %s   least in hour %d", padRight(name, 32),
			padLeft(grouped(s.min/1000, dec), 9), padLeft(grouped(s.mean()/1000, dec), 9), s.minAtHour)
	}
	online := "online, limits kept"
	if p.o.WithoutLimits {
		online = "online"
	}
	row(online, t.inertia)
	if p.security != nil && !p.o.WithoutLimits {
		row("online, without limits", p.security.inertia)
	}
	row("left after the worst loss", t.left)
}

func (p *page) machines() {
	if p.security == nil {
		return
	}
	runs := frequencyRuns(p.c, p.hours, p.partner)
	p.section("Machines most run only for frequency (units on beyond the run without limits)")
	if len(runs) == 0 {
		p.line("  none")
	}
	for i, r := range runs {
		if i == 5 {
			break
		}
		p.line("  %s %s unit-hours in %s h, %s MW·s a unit", padRight(p.c.Resources[r.resource].Name, 26),
			padLeft(count(r.unitHours), 7), padLeft(count(r.hours), 6), padLeft(grouped(r.unitMWs, 0), 7))
	}
}

func (p *page) hardest() {
	const listed = 10
	m := measureHours(p.c, p.hours, p.partner)
	top := m.top(listed)
	if m.head != "" {
		// An hour that costs nothing extra is not hard by this measure.
		top = slices.DeleteFunc(top, func(i int) bool { return printsZero(max(m.of[i], 0), decMoney) })
	}
	p.section(fmt.Sprintf("Hardest hours, by %s", m.what))
	if len(top) == 0 {
		p.line("  none")
		return
	}
	p.line("  %s  %s  %s  %s  %s", padRight("time, UTC", 16), padLeft(m.head, 11),
		padRight("binds", 12), padRight("worst loss, MW", 24), padLeft("left", 6))
	for _, i := range top {
		h := &p.hours[i]
		value := ""
		if m.head != "" {
			value = amount(m.of[i])
		}
		p.line("  %s  %s  %s  %s %s  %s", minute(h.Time), padLeft(value, 11), padRight(bindWords(h), 12),
			padRight(h.WorstLoss, 17), padLeft(grouped(h.WorstLossMW, 0), 6), padLeft(grouped(h.InertiaLeftMWs/1000, 2), 6))
	}
	p.line("  left: GW·s of inertia after that loss")
}

// bindWords names the limits that bind in an hour, in at most 12 characters.
func bindWords(h *solve.Hour) string {
	if h.Status == solve.Short {
		return "SHORT"
	}
	var names []string
	for k, l := range h.Limits {
		if l.Binds {
			names = append(names, limits.Kind(k).Word())
		}
	}
	switch len(names) {
	case 0:
		return "none"
	case limits.Kinds:
		return "all three"
	}
	return strings.Join(names, "+")
}
