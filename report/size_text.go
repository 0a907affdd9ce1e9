package report

import (
	"fmt"
	"io"
	"math"
	"strings"

	"evenkeel/fleet"
	"evenkeel/study/ranges"
	"evenkeel/study/size"
)

// round prints a size or an energy for people: two figures, or whole numbers.
func round(v float64) string {
	if v <= 0 {
		return "0"
	}
	return grouped(v, max(0, 1-int(math.Floor(math.Log10(v)))))
}

// conditions say what a study looked at, in a few words.
func conditions(s *size.Study) string {
	if n, all := len(s.Hours), s.Plan.Case.Hours(); n < all {
		return fmt.Sprintf("%s of %s, counted up to a year", count(n), hoursOf(all))
	} else if n != ranges.HoursAYear {
		return fmt.Sprintf("%s, counted to a year of %s", hoursOf(n), count(ranges.HoursAYear))
	}
	return hoursOf(len(s.Hours))
}

// designWords name a design.
func designWords(s *size.Study, r *size.Result) string {
	p := s.Plan.Project
	if p.Kind == fleet.CondenserProject {
		return unitsOf(p, r.MW)
	}
	text := plain(r.MW) + " " + p.Kind.SizeUnit()
	if p.Kind.Stores() {
		text += " / " + round(r.EnergyMWh) + " MWh"
	}
	if p.Kind != fleet.CondenserProject && r.ActivationS > 0 {
		text += ", out within " + plain(r.ActivationS) + " s"
	}
	return text
}

// SizeText writes what a developer could paste into a mail, a decision at its end.
func SizeText(w io.Writer, sized *Sized) error {
	s := sized.Study
	p := &page{c: s.Plan.Case}
	project := s.Plan.Project
	p.text(fmt.Sprintf("%s (%s) on %s", project.Name, strings.ReplaceAll(project.Kind.String(), "_", " "), s.Plan.Case.Name), "")
	sizeLooked(p, s, sized.Gap)
	sizeTable(p, s)
	sizeStops(p, s)
	sizeEnergy(p, s)
	sizeUse(p, s)
	sizeSwings(p, s)
	sizeDecision(p, s, sized.Other)
	p.line("")
	note := "Hours are solved one by one and start costs left out"
	if sized.StartSpreadH > 0 {
		note = "Hours are solved one by one, start costs spread over " + plain(sized.StartSpreadH) + " h"
	}
	p.text(note+". The project's costs are those of its file. Prices are those of the last MW and machines are whole, so what is earned can exceed what is saved.", "")
	p.text(Caution, "")
	_, err := w.Write(p.out.Bytes())
	return err
}

func sizeLooked(p *page, s *size.Study, gap float64) {
	c := s.Plan.Case
	first, last := c.Times[s.Hours[0]], c.Times[s.Hours[len(s.Hours)-1]]
	p.line("%s, %s to %s UTC", conditions(s), minute(first), minute(last))
	best := &s.Results[s.Best[size.System]]
	p.text(fmt.Sprintf("%s; gap %s %%. Given the gaps, the saving at %s lies between %s and %s %s a year.", casesWords(s.Plan), plain(100*gap), designWords(s, best), wholeMoney(best.Year.SavingAtLeast), wholeMoney(best.Year.SavingAtMost), c.Currency), "")
	if s.Plan.Project.Promised() {
		p.text("PROMISE: with times alone the project comes in whole after any loss, whatever frequency does. That is taken at its word: no model of it is proven in "+
			"closed loop, and it is worth more than what has to wait for a level or follows frequency."+promiseKeys(s.Plan.Project), "")
	}
	short := 0.0
	for i := range s.Results {
		short = max(short, s.Results[i].Year.ShortH)
	}
	if bare := s.Years[0][0].ShortH; bare > 0 || short > 0 {
		p.text(fmt.Sprintf("SHORT: %s hours a year without it, at most %s with it; what it saves and earns in them is at the prices set on shortfalls.", count(int(math.Round(bare))), count(int(math.Round(short)))), "")
	}
}

func plural(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return count(n) + " " + what + "s"
}

// casesWords say how many designs there are, and in how many cases they are solved.
func casesWords(plan *size.Plan) string {
	bare := len(plan.Ladders)
	built := plan.Cases() - bare
	text := plural(len(plan.Points), "design")
	if built < len(plan.Points) {
		text += ", solved in " + plural(built, "case") + " (designs that hold the same share one)"
	} else {
		text += ", each solved in a case of its own"
	}
	if bare > 1 {
		return text + ", and the case with nothing built for each activation time"
	}
	return text + ", and the case with nothing built"
}

// promiseKeys name what would make a model of a promise, where the file has keys for it.
func promiseKeys(p *fleet.Project) string {
	if !p.Kind.Stores() {
		return ""
	}
	return " Give level_hz, droop_pct or model for that."
}

// wholeMoney prints money a year without cents, where it is not small.
func wholeMoney(v float64) string {
	if math.Abs(v) < 100 {
		return grouped(v, 2)
	}
	return grouped(v, 0)
}

// tableMoney is the unit of a table of money: by how much to divide, and its name. Thousands
// would print small figures as 0.
func tableMoney(most float64, currency string) (by float64, name string) {
	const least = 20_000
	if most < least {
		return 1, currency
	}
	return 1000, "thousand " + currency
}

func sizeTable(p *page, s *size.Study) {
	pace := bestPace(s)
	unit := s.Plan.Project.Kind.SizeUnit()
	title := "By size, with the energy that its MW can use"
	if !s.Plan.Project.Kind.Stores() {
		title = "By size"
	}
	if s.Plan.Project.Kind != fleet.CondenserProject && pace.ActivationS > 0 {
		title += ", out within " + plain(pace.ActivationS) + " s"
	}
	most := 0.0
	for _, k := range pace.Full {
		r := &s.Results[k]
		for _, v := range []float64{r.Cost, r.Value[size.System], r.Net[size.System], r.Value[size.Owner], r.Net[size.Owner], r.TakerNet} {
			most = max(most, math.Abs(v))
		}
	}
	by, name := tableMoney(most, s.Plan.Case.Currency)
	money := func(v float64) string { return grouped(v/by, 0) }
	p.section(title + fmt.Sprintf(" (%s a year)", name))
	mwh := ""
	if s.Plan.Project.Kind.Stores() {
		mwh = "MWh"
	}
	p.line("%s%s%s%s%s%s%s%s", padLeft(unit, 9), padLeft(mwh, 9), padLeft("costs", 9), padLeft("saves", 10), padLeft("net", 10), padLeft("earns", 10), padLeft("net", 10), padLeft("as taker", 11))
	p.line("%s%s%s%s%s%s%s%s", "", padLeft("", 18), padLeft("", 9), padLeft("system", 10), padLeft("system", 10), padLeft("owner", 10), padLeft("owner", 10), padLeft("owner", 11))
	for _, k := range pace.Full {
		r := &s.Results[k]
		if mwh != "" {
			mwh = round(r.EnergyMWh)
		}
		p.line("%s%s%s%s%s%s%s%s", padLeft(plain(r.MW), 9), padLeft(mwh, 9), padLeft(money(r.Cost), 9), padLeft(money(r.Value[size.System]), 10), padLeft(money(r.Net[size.System]), 10),
			padLeft(money(r.Value[size.Owner]), 10), padLeft(money(r.Net[size.Owner]), 10), padLeft(money(r.TakerNet), 11))
	}
	p.text("saves: the system's cost without it less that with it, its own cost of holding counted in. earns: what it holds at the hour's prices with itself in the "+
		"market, less its own cost. as taker: net, were prices those without it.", "  ")
}

func sizeStops(p *page, s *size.Study) {
	p.section("Where the next " + step(s.Plan.Project) + " stops paying")
	for i := range s.Paces {
		pace := &s.Paces[i]
		name := "  any"
		if s.Plan.Project.Paced() {
			name = "  out in " + plain(pace.ActivationS) + " s"
		} else if len(s.Paces) == 1 {
			name = "  size"
		}
		var words []string
		for side := range size.Sides {
			words = append(words, fmt.Sprintf("%s %s (net %s at best)", sideNames[side], stopWords(s, pace, side), wholeMoney(peak(s, pace, side).Net[side])))
		}
		p.fact(name, strings.Join(words, "; "))
	}
}

// perMW prints MWh for a MW: a flywheel has few.
func perMW(v float64) string {
	if v < 0.1 {
		return fixed(v, 4)
	}
	return fixed(v, 3)
}

func sizeEnergy(p *page, s *size.Study) {
	project := s.Plan.Project
	if !project.Kind.Stores() {
		return
	}
	pace := bestPace(s)
	e := pace.Energy
	p.section("Energy for each MW held")
	p.fact("  in all", fmt.Sprintf("%s MWh", perMW(e.TotalMWh)))
	p.fact("  hold", fmt.Sprintf("%s MWh: %s s at full power, %s, %s %% there and back", perMW(e.EventsMWh), plain(math.Round(e.HoldS*10)/10), plural(project.Events, "event"), plain(project.EfficiencyPct)))
	charge := fmt.Sprintf("charged again after %s min at %s %% of its power", fixed(e.RechargeS/60, 0), plain(100*project.RechargeShare))
	if e.RechargeMWh > 0 {
		p.fact("  recovery", fmt.Sprintf("%s MWh: it is %s and must be ready after %s min", perMW(e.RechargeMWh), charge, plain(math.Round(project.ReadyAgainS/6)/10)))
	} else {
		p.fact("  recovery", "none: it is "+charge+", before it must be ready")
	}
	if e.DownMWh > 0 {
		p.fact("  downwards", fmt.Sprintf("%s MWh of room for what comes in", perMW(e.DownMWh)))
	}
	r := &s.Results[s.Best[size.Owner]]
	times := "just what all of its MW need"
	if t := math.Round(100*r.EnergyMWh/(r.MW*r.NeedMWhPerMW)) / 100; t != 1 {
		times = plain(t) + " times what all of its MW need"
	}
	p.fact("  best energy", fmt.Sprintf("%s MWh for %s MW: %s", round(r.EnergyMWh), plain(r.MW), times))
}

func sizeUse(p *page, s *size.Study) {
	r := &s.Results[s.Best[size.Owner]]
	y := r.Year
	paid := y.Paid[s.Rule]
	p.section("In use: " + designWords(s, r))
	p.fact("  needed", fmt.Sprintf("%s h a year paid more than its own cost; in %s h it is sure to save; utilisation %s %%", grouped(y.PaidH[s.Rule], 0), grouped(y.SureH, 0), fixed(100*r.Utilisation, 0)))
	if when := sizeWhen(s); when != "" {
		p.fact("", when)
	}
	var parts []string
	for _, part := range []struct {
		name string
		v    float64
	}{{"response", paid.Response}, {"response downwards", paid.Down}, {"inertia", paid.Inertia}, {"energy drawn", paid.Energy}, {"own cost", -paid.Own}} {
		if part.v != 0 {
			parts = append(parts, part.name+" "+wholeMoney(part.v))
		}
	}
	if len(parts) == 0 {
		parts = append(parts, "0")
	}
	p.fact("  income", strings.Join(parts, ", ")+" "+s.Plan.Case.Currency+" a year")
	if taker := y.Taker[s.Rule]; !(taker > 0) {
		p.fact("  as price taker", "nothing: no price without it is above its own cost")
		return
	}
	effect, takes := 100*(1-paid.Net()/y.Taker[s.Rule]), "takes %s %% of that"
	if effect < 0 {
		effect, takes = -effect, "adds %s %% to that"
	}
	p.fact("  as price taker", fmt.Sprintf("%s a year: its own effect on prices "+takes, wholeMoney(y.Taker[s.Rule]), fixed(effect, 0)))
}

// sizeWhen says when half of the income falls.
func sizeWhen(s *size.Study) string {
	const week = 168
	var byHour [24]int
	var byMonth [12]int
	if len(s.Hours) < week || !(s.Results[s.Best[size.Owner]].Value[size.Owner] > 0) {
		return ""
	}
	for _, c := range s.Cells {
		sum := int(max(c.MeanIncome*float64(c.Hours), 0))
		byHour[c.HourOfDay] += sum
		byMonth[c.Month-1] += sum
	}
	month, hour := monthWindow(byMonth), hourWindow(byHour)
	if month == "any time" && hour == "any hour" {
		return "its income is spread over all months and all hours of the day"
	}
	return "half of its income falls in: " + month + "; by hour of the day (UTC): " + hour
}

// swingsListed is how many of the inputs that matter are listed.
const swingsListed = 3

func sizeSwings(p *page, s *size.Study) {
	r := &s.Results[s.Best[size.Owner]]
	swings := s.Sensitivity(r)
	p.section(fmt.Sprintf("What matters most (each by ±%.0f %%; the owner's net of %s)", 100*size.SwingShare, designWords(s, r)))
	for i := range swings[:min(swingsListed, len(swings))] {
		w := &swings[i]
		p.line("  %s %s to %s   at %s to %s %s", padRight(w.Input, 25), padLeft(wholeMoney(w.NetLow[size.Owner]), 11), padLeft(wholeMoney(w.NetHigh[size.Owner]), 11),
			grouped(w.Low, decimals(w.Low)), grouped(w.High, decimals(w.High)), strings.TrimSuffix(w.Unit, " a year"))
	}
}
