package report

import (
	"bytes"
	"fmt"
	"io"
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
		p.above()
	}
	p.closedLoop()
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
		what := "a limit cannot be met or load cannot be served."
		if p.o.WithoutLimits {
			what = "a limit is passed in the replay or load cannot be served."
		}
		p.text(fmt.Sprintf("%s of %s hours SHORT: %s", count(short), count(len(p.hours)), what), "")
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

func (p *page) notes() {
	p.line("")
	p.text(hoursNote(p.o), "")
	p.text(Caution, "")
}
