package report

import (
	"fmt"
	"io"
	"math"
	"slices"

	"evenkeel/limits"
	"evenkeel/study/floor"
	"evenkeel/study/ranges"
)

// FloorText writes what a study of inertia floors has found, for people.
func FloorText(w io.Writer, r *floor.Result) error {
	p := &floorPage{page: page{c: r.Case}, r: r}
	p.text("How much inertia must be online: "+r.Case.Name, "")
	if y := r.Year; y != nil {
		first, last := y.Hours[0], y.Hours[len(y.Hours)-1]
		p.line("%s, %s to %s UTC", hoursOf(len(y.Hours)), minute(first.Time), minute(last.Time))
		if y.Scale != 1 {
			p.text(fmt.Sprintf("A sample: yearly figures are counted up to %s hours, %s for each one looked at.", count(ranges.HoursAYear), figures(y.Scale)), "")
		}
	}
	l := r.Case.Limits
	p.text(fmt.Sprintf("Nominal %s Hz. Limits: %s; %s; %s.", plain(l.NominalHz), limitWords(l, limits.RoCoF), limitWords(l, limits.Nadir), limitWords(l, limits.Steady)), "")
	for i := range r.Charts {
		p.chart(i)
	}
	above := ""
	if r.Case.Above != nil && r.Year != nil {
		above = "; what losses of load need counts in what follows"
	}
	p.text("Response and kinetic energy count as they are left after the loss. A cell is the larger of what the rows ask for and what closed-loop bisection finds, relays left out. Losses of infeed only"+above+".", "")
	if r.Year != nil {
		p.lacking()
		p.ways()
		p.policies()
	}
	p.line("")
	p.text(Caution, "")
	_, err := w.Write(p.out.Bytes())
	return err
}

type floorPage struct {
	page
	r *floor.Result
}

// mws prints kinetic energy for people, in GW·s.
func gws(mws float64) string {
	if math.IsInf(mws, 1) {
		return "none is enough"
	}
	return threeDigits(mws/1000) + " GW·s"
}

func (p *floorPage) chart(i int) {
	k := &p.r.Charts[i]
	name := p.c.Shapes[k.Shape].Name
	p.section("Operating instruction: kinetic energy to keep online, counted after the loss")
	p.instruction(i)
	others := ""
	if p.r.Year != nil && slices.ContainsFunc(p.r.Ask.HeldMW, math.IsNaN) {
		others = " (by default: medians of the tenth of the hours with the largest losses)"
	}
	least := ""
	if math.IsNaN(p.r.Ask.LoadMW) {
		least = " (the hours' least, which damps least)"
	}
	p.text(fmt.Sprintf("Besides %s: %s%s. Load %s MW%s.", name, othersHeld(p.r, i), others, grouped(k.LoadMW, 0), least), "  ")
	none := 0
	by := [limits.Kinds]int{}
	for j := range k.Cells {
		if math.IsInf(k.Cells[j].FloorMWs, 1) {
			none++
		} else {
			by[k.Cells[j].By]++
		}
	}
	more, most := 0, 0.0
	for j := range k.Cells {
		if c := &k.Cells[j]; !math.IsInf(c.FloorMWs, 1) && c.Closed > c.Rows.MWs {
			more++
			most = max(most, c.Closed/c.Rows.MWs-1)
		}
	}
	closed := "Closed loop asks for no more than the rows in any."
	if more > 0 {
		closed = fmt.Sprintf("Closed loop asks for more than the rows in %s, by at most %s %%.", count(more), fixed(100*most, 1))
	}
	p.text(fmt.Sprintf("Of %s cells of the chart %s are set by RoCoF, %s by the nadir, %s by the steady state; in %s no inertia is enough. %s",
		count(len(k.Cells)), count(by[limits.RoCoF]), count(by[limits.Nadir]), count(by[limits.Steady]), count(none), closed), "  ")
}

// instruction is one line a loss: the least response, and from where on more of it saves nothing.
func (p *floorPage) instruction(i int) {
	k := &p.r.Charts[i]
	name := p.c.Shapes[k.Shape].Name
	const loss, held, keep, by = 12, 12, 10, 6
	pair := func(at, mws, kind string) string {
		return padLeft(at, held) + " " + padLeft(mws, keep) + "  " + padRight(kind, by)
	}
	at := func(n floor.Instruction) string {
		return pair(grouped(n.HeldMW, 1)+" MW", gws(n.FloorMWs), n.By.Word())
	}
	lines := p.r.Instructions(i)
	p.text(fmt.Sprintf("By how much of %s is left. Below \"at least\" none is enough, or far more. Beyond \"saves up to\", or where that is blank, more saves little.", name), "  ")
	p.line("  %s  %s  %s", padLeft("loss up to", loss), pair("at least", "keep", "set by"), pair("saves up to", "keep", "set by"))
	none, uncharted := false, false
	for j := 0; j < len(lines); j++ {
		n := lines[j]
		first, second := at(n), ""
		switch {
		case math.IsInf(n.FloorMWs, 1):
			none = true
			first = "   none is enough with up to " + grouped(n.HeldMW, 1) + " MW"
		case n.HeldMW == 0:
			first = pair("any", gws(n.FloorMWs), n.By.Word())
		case n.HeldMW == k.Held.At(0):
			uncharted = true
		}
		if j+1 < len(lines) && lines[j+1].LossMW == n.LossMW {
			j++
			second = at(lines[j])
		}
		p.line("  %s  %s  %s", padLeft(grouped(n.LossMW, 1)+" MW", loss), first, second)
	}
	if uncharted {
		p.text(fmt.Sprintf("The axis begins at %s MW: less was not looked at.", grouped(k.Held.At(0), 1)), "  ")
	}
	if none {
		p.text(fmt.Sprintf("Where none is enough: hold more that stays to the steady state, of %s (--held %s=A:B:N; the axis ends at %s MW) or besides it, or cut the loss.", name, name, grouped(k.Held.To, 1)), "  ")
	}
}

// yearly counts hours up to a year.
func (p *floorPage) yearly(n int) string { return grouped(float64(n)*p.r.Year.Scale, 0) }

// yearlyMoney counts money up to a year.
func (p *floorPage) yearlyMoney(v float64) string { return grouped(v*p.r.Year.Scale, 0) }

func (p *floorPage) lacking() {
	y := p.r.Year
	p.section("A year without limits on RoCoF and nadir: what is online and what is needed")
	p.text("A dispatch without any limit holds no response, and then no inertia would be enough. So what is looked at is the cheapest dispatch that keeps the steady-state limit alone.", "  ")
	if y.Short > 0 {
		p.fact("  Left out", fmt.Sprintf("%s that cannot be made secure", hoursOf(y.Short)))
	}
	text := fmt.Sprintf("%s of %s (%s %%); for RoCoF %s, for the nadir %s, for the steady state %s", p.yearly(y.Lacking), p.yearly(len(y.Hours)-y.Short),
		share(y.Lacking, max(len(y.Hours)-y.Short, 1)), p.yearly(y.LackBy[limits.RoCoF]), p.yearly(y.LackBy[limits.Nadir]), p.yearly(y.LackBy[limits.Steady]))
	if p.c.Above != nil {
		text += fmt.Sprintf("; in %s of them a loss of load asks for most", p.yearly(y.LackOver))
	}
	p.fact("  Hours lacking", text)
	if y.NoInertia > 0 {
		p.fact("", fmt.Sprintf("in %s of them no inertia would be enough", p.yearly(y.NoInertia)))
	}
	if y.MostGapAt < 0 {
		return
	}
	h := y.Hours[y.MostGapAt]
	p.fact("  By how much", fmt.Sprintf("%s on average, at most %s (%s UTC: %s needed, %s online)", gws(y.MeanGapMWs), gws(y.MostGapMWs), minute(h.Time), gws(h.Bare.FloorMWs), gws(h.Bare.OnlineMWs)))
	var byHour [24]int
	var byMonth [12]int
	for m := range y.When {
		for d := range y.When[m] {
			byHour[d] += y.When[m][d].Lacking
			byMonth[m] += y.When[m][d].Lacking
		}
	}
	hod, month := hourWindow(byHour), monthWindow(byMonth)
	switch {
	case hod == "any hour" && month == "any time":
		p.fact("  When", "spread over the day and the year")
	default:
		p.fact("  When", fmt.Sprintf("half of them: %s UTC, %s", hod, month))
	}
}

func (p *floorPage) ways() {
	y := p.r.Year
	if y.Lacking == 0 {
		return
	}
	p.section("To close the gap, a year (" + p.c.Currency + " above that dispatch)")
	row := func(name, hours, cost, within, mix string) {
		p.line("  %s %s %s %s %s", padRight(name, 24), padLeft(hours, 13), padLeft(cost, 13), padLeft(within, 11), padLeft(mix, 13))
	}
	row("way, alone", "hours closed", "cost there", "", "mix there")
	for _, k := range []struct {
		name string
		w    *floor.WayCost
	}{
		{"constrain machines on", &y.Ways[floor.Machines]}, {"hold more response", &y.Ways[floor.Response]},
		{"cut the largest loss", &y.Ways[floor.Smaller]}, {"cheapest mix of all", &y.Mix},
	} {
		if k.w.Hours == 0 {
			row(k.name, "0", "", "", "")
			continue
		}
		row(k.name, p.yearly(k.w.Hours), p.yearlyMoney(k.w.Cost), "± "+p.yearlyMoney(k.w.Within), p.yearlyMoney(k.w.MixCost))
	}
	p.text(fmt.Sprintf("Alone: the largest loss, who runs and what is held stay as they are, but for what is named. Mix there: what the cheapest mix costs in the hours that the way closes; the others are in no cost. ±: the gaps to which hours are solved. All by the rows; the mix's proof in closed loop adds %s.", p.yearlyMoney(y.MendCost)), "  ")
}

func (p *floorPage) policies() {
	y := p.r.Year
	p.section("A fixed floor as a rule, on top of the limits (" + p.c.Currency + " a year above the mix)")
	p.text("Counted before the loss, not after it as in the instruction above.", "  ")
	row := func(name, number, covers, kept, not, cost string) {
		p.line("  %s  %s  %s  %s  %s %s", padRight(name, 28), padLeft(number, 6), padLeft(covers, 9), padLeft(kept, 7), padLeft(not, 8), padLeft(cost, 11))
	}
	row("rule, online before the loss", "GW·s", "covers, h", "kept, h", "not kept", "cost")
	for i := range y.Rules {
		k := &y.Rules[i]
		name, number, cost := "by the hour's largest loss", "", ""
		if len(k.Rule.Steps) == 1 {
			name = map[string]string{"one number": "one number for all hours", "own number": "your number"}[k.Rule.Name]
			number = threeDigits(k.Rule.Steps[0].MWs / 1000)
		}
		if k.Kept > 0 {
			cost = p.yearlyMoney(k.Cost)
		}
		row(name, number, p.yearly(k.Covers), p.yearly(k.Kept), p.yearly(k.NotKept), cost)
		if len(k.Rule.Steps) == 1 {
			continue
		}
		for _, st := range k.Rule.Steps {
			row(fmt.Sprintf("  up to %s MW, %s h", grouped(st.ToMW, 1), p.yearly(st.Hours)), threeDigits(st.MWs/1000), "", "", "", "")
		}
	}
	p.text("Covers: hours whose own floor the number reaches by itself. A rule that covers fewer hours leaves the rest to the limits.", "  ")
	mix, kept := 0.0, true
	for _, h := range y.Hours {
		if !h.Short {
			mix += h.MixCost.Cost
		}
	}
	for i := range y.Rules {
		kept = kept && y.Rules[i].NotKept == 0
	}
	text := fmt.Sprintf("The mix itself, which has just what each hour needs, costs %s.", p.yearlyMoney(mix))
	if !kept {
		text += " Not kept: all that fits under the load does not reach the rule; those hours are not in its cost."
	}
	p.text(text, "  ")
}
