package report

import (
	"fmt"
	"io"
	"math"
	"strings"

	"evenkeel/fleet"
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
	} else if n != size.YearH {
		return fmt.Sprintf("%s, counted to a year of %s", hoursOf(n), count(size.YearH))
	}
	return hoursOf(len(s.Hours))
}

// designWords name a design.
func designWords(s *size.Study, r *size.Result) string {
	p := s.Plan.Project
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
	p.text(fmt.Sprintf("%s in %s (who holds the same is one); gap %s %%. Given the gaps, the saving at %s lies between %s and %s %s a year.", plural(len(s.Plan.Points), "design"), plural(s.Plan.Cases(), "case"),
		plain(100*gap), designWords(s, best), amount(best.Year.SavingAtLeast), amount(best.Year.SavingAtMost), c.Currency), "")
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

// thousands prints money in thousands.
func thousands(v float64) string { return grouped(v/1000, 0) }

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
	p.section(title + fmt.Sprintf(" (thousand %s a year)", s.Plan.Case.Currency))
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
		p.line("%s%s%s%s%s%s%s%s", padLeft(plain(r.MW), 9), padLeft(mwh, 9), padLeft(thousands(r.Cost), 9), padLeft(thousands(r.Value[size.System]), 10), padLeft(thousands(r.Net[size.System]), 10),
			padLeft(thousands(r.Value[size.Owner]), 10), padLeft(thousands(r.Net[size.Owner]), 10), padLeft(thousands(r.TakerNet), 11))
	}
	p.text("saves: the system's cost without it less that with it, its own cost of holding counted in. earns: what it holds at the hour's prices with itself in the "+
		"market, less its own cost. as taker: net, were prices those without it.", "  ")
}

func sizeStops(p *page, s *size.Study) {
	unit := s.Plan.Project.Kind.SizeUnit()
	p.section("Where the next " + unit + " stops paying")
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
			words = append(words, fmt.Sprintf("%s %s (net %s at best)", sideNames[side], stopWords(pace.Stop[side], unit), amount(math.Round(bestNet(s, pace, side)))))
		}
		p.fact(name, strings.Join(words, "; "))
	}
}

// bestNet is the most that a side can net at a pace.
func bestNet(s *size.Study, pace *size.Pace, side size.Side) float64 {
	best := math.Inf(-1)
	for _, k := range pace.Curve[side] {
		best = max(best, s.Results[k].Net[side])
	}
	return best
}

func stopWords(stop size.Stop, unit string) string {
	switch {
	case stop.Beyond:
		return "beyond the " + plain(stop.MW) + " " + unit + " tried"
	case stop.MW == 0:
		return "none pays"
	}
	return "about " + round(stop.MW) + " " + unit
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
			parts = append(parts, part.name+" "+amount(math.Round(part.v)))
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
	p.fact("  as price taker", fmt.Sprintf("%s a year: its own effect on prices "+takes, amount(math.Round(y.Taker[s.Rule])), fixed(effect, 0)))
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
		p.line("  %s %s to %s   at %s to %s %s", padRight(w.Input, 25), padLeft(amount(math.Round(w.NetLow[size.Owner])), 11), padLeft(amount(math.Round(w.NetHigh[size.Owner])), 11),
			grouped(w.Low, decimals(w.Low)), grouped(w.High, decimals(w.High)), strings.TrimSuffix(w.Unit, " a year"))
	}
}

func sizeDecision(p *page, s, other *size.Study) {
	project := s.Plan.Project
	unit := project.Kind.SizeUnit()
	r, sys := &s.Results[s.Best[size.Owner]], &s.Results[s.Best[size.System]]
	pace := s.Pace(r)
	p.section("Decision")
	money := func(v float64) string { return amount(math.Round(v)) + " " + s.Plan.Case.Currency }
	if !s.Pays(size.Owner) {
		when := "it would pay at no capital cost"
		if b := r.BreakEven[size.Owner]; b > 0 {
			when = fmt.Sprintf("it would pay with a capital cost of %s per %s (asked: %s)", money(b), unit, money(project.Money.CapitalPerMW))
		}
		p.text(fmt.Sprintf("Do not build on these prices: no size tried pays its owner. The least bad, %s, nets %s a year; %s.", designWords(s, r), money(r.Net[size.Owner]), when), "  ")
	} else {
		what := "Build " + stopSize(pace.Stop[size.Owner], r, unit)
		if project.Kind.Stores() {
			what += " / " + round(stopMW(pace.Stop[size.Owner], r)*r.HoursOfEnergy) + " MWh"
		}
		if pace.Stop[size.Owner].Beyond {
			what += " or more"
		}
		if project.Kind != fleet.CondenserProject && r.ActivationS > 0 {
			what += ", out within " + plain(r.ActivationS) + " s"
		}
		p.text(fmt.Sprintf("%s: at %s, the nearest design tried, the owner nets %s a year on a capital of %s, and breaks even at %s per %s (asked: %s).", what,
			designWords(s, r), money(r.Net[size.Owner]), money(size.Capital(project.Money, r.Design)), money(r.BreakEven[size.Owner]), unit, money(project.Money.CapitalPerMW)), "  ")
	}
	switch {
	case !s.Pays(size.System):
		p.text("For the system it does not pay at any size tried.", "  ")
	case s.Pace(sys).Stop[size.System].Beyond:
		p.text(fmt.Sprintf("For the system more pays still at the largest size tried: %s nets %s a year.", designWords(s, sys), money(sys.Net[size.System])), "  ")
	default:
		p.text(fmt.Sprintf("For the system about %s %s would be best: %s nets it %s a year.", round(s.Pace(sys).Stop[size.System].MW), unit, designWords(s, sys), money(sys.Net[size.System])), "  ")
	}
	if first := s.Results[pace.Curve[size.Owner][0]].MW; r.MW == first && r.BreakEven[size.Owner] > 0 && project.Kind != fleet.CondenserProject {
		p.text(fmt.Sprintf("That is the smallest size tried: --mw %s:%s:8 looks closer.", plain(first/4), plain(2*first)), "  ")
	}
	o := &other.Results[other.Best[size.Owner]]
	if other.Pays(size.Owner) {
		p.text(fmt.Sprintf("Paid at %s instead, the owner would build %s: %s nets %s a year.", other.Rule.Words(), stopWords(other.Pace(o).Stop[size.Owner], unit), designWords(other, o), money(o.Net[size.Owner])), "  ")
	} else {
		p.text(fmt.Sprintf("Paid at %s instead, no size tried would pay the owner.", other.Rule.Words()), "  ")
	}
}

func stopMW(stop size.Stop, r *size.Result) float64 {
	if stop.MW > 0 {
		return stop.MW
	}
	return r.MW
}

func stopSize(stop size.Stop, r *size.Result, unit string) string {
	if stop.Beyond {
		return plain(stop.MW) + " " + unit
	}
	return "about " + round(stopMW(stop, r)) + " " + unit
}
