package report

import (
	"bytes"
	"fmt"
	"io"
	"slices"
	"strings"
	"time"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

const columns = 80

// Summary writes what a planner could paste into a mail: plain text, at most 80
// columns. without are the same hours solved without frequency limits, matched by
// index; nil leaves out the cost of security and the machines run for frequency.
func Summary(w io.Writer, c *fleet.Case, hours, without []solve.Hour, o Options) error {
	if err := checkRun(c, hours, without); err != nil {
		return err
	}
	p := &page{c: c, hours: hours, partner: pair(hours, without), o: o}
	p.tally = tallyHours(c, hours, o.Gap)
	p.security = compare(hours, p.partner)
	p.heading()
	p.shortHours()
	p.costs()
	if !o.WithoutLimits {
		p.whatBinds()
		p.worths()
	}
	p.inertia()
	if !o.WithoutLimits {
		p.machines()
		p.hardest()
	}
	p.notes()
	_, err := w.Write(p.out.Bytes())
	return err
}

type page struct {
	c        *fleet.Case
	hours    []solve.Hour
	partner  []*solve.Hour
	o        Options
	tally    *tally
	security *security
	out      bytes.Buffer
}

func (p *page) line(format string, args ...any) {
	p.out.WriteString(strings.TrimRight(fmt.Sprintf(format, args...), " "))
	p.out.WriteByte('\n')
}

func (p *page) section(title string) {
	p.line("")
	p.text(title, "")
}

// text writes a paragraph, every line indented.
func (p *page) text(s, indent string) {
	for _, l := range wrap(s, columns-len(indent)) {
		p.line("%s%s", indent, l)
	}
}

// fact writes a name and what is to be said of it, in two columns.
func (p *page) fact(name, what string) {
	const at = 20
	for i, l := range wrap(what, columns-at) {
		if i > 0 {
			name = ""
		}
		p.line("%s%s", padRight(name, at), l)
	}
}

func (p *page) heading() {
	first, last := &p.hours[0], &p.hours[len(p.hours)-1]
	p.text(p.c.Name, "")
	span := "1 hour, " + minute(first.Time) + " UTC"
	if n := len(p.hours); n > 1 {
		span = count(n) + " hours, " + minute(first.Time) + " to " + minute(last.Time.Add(time.Hour)) + " UTC"
	}
	p.line("%s", span)
	l := p.c.Limits
	p.text(fmt.Sprintf("Nominal %s Hz. Limits: %s; %s; %s.", plain(l.NominalHz),
		limitWords(l, limits.RoCoF), limitWords(l, limits.Nadir), limitWords(l, limits.Steady)), "")
	p.line("")
	short := len(p.tally.short)
	verdict := "All " + count(len(p.hours)) + " hours are secure: "
	if len(p.hours) == 1 {
		verdict = "The hour is secure: "
	}
	switch {
	case p.o.WithoutLimits:
		p.text("Solved WITHOUT frequency limits: nothing here says that an hour is secure.", "")
	case short == 0:
		p.text(verdict+"every limit holds in the replay of every loss.", "")
	}
	if short > 0 {
		p.text(fmt.Sprintf("%s of %s hours SHORT: a limit cannot be met or load cannot be served.",
			count(short), count(len(p.hours))), "")
	}
}

// limitWords states a limit.
func limitWords(l limits.Limits, k limits.Kind) string {
	switch k {
	case limits.RoCoF:
		if l.WindowS == 0 {
			return "RoCoF " + plain(l.MaxHzPerS) + " Hz/s at once"
		}
		return "RoCoF " + plain(l.MaxHzPerS) + " Hz/s over " + plain(l.WindowS) + " s"
	case limits.Nadir:
		return "nadir " + plain(l.NadirHz) + " Hz"
	}
	return "steady " + plain(l.SteadyHz) + " Hz by " + plain(l.SteadyByS) + " s"
}

func (p *page) shortHours() {
	const listed = 10
	for i, h := range p.tally.short {
		if i == listed {
			p.line("  and %s more: status short in hours.csv", count(len(p.tally.short)-listed))
			return
		}
		lines := wrap(h.Why, columns-21)
		if len(lines) == 0 {
			lines = []string{"no reason given"}
		}
		p.line("  %s   %s", minute(h.Time), lines[0])
		for _, l := range lines[1:] {
			p.line("%21s%s", "", l)
		}
	}
}

// amount prints money for people: whole units once cents no longer matter.
func amount(v float64) string {
	if v >= 10_000 || v <= -10_000 {
		return grouped(v, 0)
	}
	return grouped(v, 2)
}

// energy prints MWh for people.
func energy(v float64) string {
	if v >= 1000 || printsZero(v, decMW) {
		return grouped(v, 0)
	}
	return grouped(v, 1)
}

func (p *page) money(v float64) string { return amount(v) + " " + p.c.Currency }

func (p *page) costs() {
	t := p.tally
	p.line("")
	p.fact("Cost", fmt.Sprintf("%s; proven: it cannot be less than %s", p.money(t.cost), amount(t.bound)))
	over := ""
	if t.overGap > 0 {
		over = fmt.Sprintf("; %s above the %s %% asked for", hoursOf(t.overGap), plain(100*p.o.Gap))
	}
	p.fact("Largest gap", fmt.Sprintf("%s %% in hour %d%s", fixed(100*t.gap, 3), t.gapAtHour, over))
	if !p.o.WithoutLimits {
		p.securityCost()
	}
	p.fact("Demand", fmt.Sprintf("%s MWh; %s MWh not served, %s MWh curtailed, %s MWh in excess",
		energy(t.demandMWh), energy(t.unservedMWh), energy(t.curtailedMWh), energy(t.excessMWh)))
	p.fact("CO2", grouped(t.co2T, 0)+" t"+p.addedCO2())
}

func (p *page) addedCO2() string {
	if p.security == nil || p.o.WithoutLimits {
		return ""
	}
	if p.security.co2T < 0 {
		return fmt.Sprintf(", %s t less than without limits", grouped(-p.security.co2T, 0))
	}
	return fmt.Sprintf(", %s t more than without limits", grouped(p.security.co2T, 0))
}

func hoursOf(n int) string {
	if n == 1 {
		return "1 hour"
	}
	return count(n) + " hours"
}

func (p *page) securityCost() {
	s := p.security
	if s == nil {
		p.fact("Cost of security", "not known: the run without limits was left out")
		return
	}
	over := ""
	if s.without != 0 {
		over = ", " + fixed(s.percent(), 2) + " % of the cost without limits"
	}
	p.fact("Cost of security", p.money(s.cost())+over)
	if s.demandMWh != 0 {
		p.fact("", fmt.Sprintf("%s %s per MWh of demand", fixed(s.perMWh(), 3), p.c.Currency))
	}
	p.fact("", fmt.Sprintf("given the gaps, between %s and %s", amount(s.least), amount(s.most)))
	if s.hours < len(p.hours) {
		p.fact("", fmt.Sprintf("known for %s of %s hours only", count(s.hours), count(len(p.hours))))
	}
	if len(p.tally.short) > 0 {
		p.fact("", fmt.Sprintf("%s of it in short hours, at the prices set on shortfalls", p.money(s.inShort)))
	}
}

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
		p.limitRow(limitWords(p.c.Limits, kind), count(b.binding), share(b.binding, n), hod, month, price)
	}
	for _, s := range []struct {
		name string
		is   state
	}{{"more than one", bySeveral}, {"none", free}, {"(short)", isShort}} {
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
	row := func(name string, w worth, dec int) {
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
			names = append(names, limits.Kind(k).String())
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

func (p *page) notes() {
	p.line("")
	p.text(hoursNote(p.o), "")
	p.text(Caution, "")
}
