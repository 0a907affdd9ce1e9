package fleet

import "fmt"

// judge looks at a case without faults as a whole.
func (r *reader) judge(s *section, demand given) {
	c := r.c
	lost := len(c.Connections) + len(c.Losses)
	for i := range c.Resources {
		if c.Resources[i].LostAsOne {
			lost++
		}
	}
	if lost == 0 {
		r.warn(s.line, "losses", "no loss at all", "at least one loss; without any, no limit ever binds")
	}
	r.penalties(s)
	var who *Resource
	var scarce, rigid, derated repeat
	for h := range c.Times {
		hour := c.Hour(h, HourOptions{})
		most, least := 0.0, 0.0
		for i := range hour.Units {
			u := &hour.Units[i]
			n := float64(max(u.Count, 0))
			most += n * max(u.MaxMW, 0)
			if r := &c.Resources[i]; r.MustRun && u.Count == 0 && r.Availability.At(h) > 0 {
				if derated.add(h) {
					who = r
				}
			}
			if u.MustRun || !u.Commit {
				least += n * u.MinMW
			}
		}
		if most < hour.DemandMW {
			scarce.add(h)
		}
		if least > hour.DemandMW {
			rigid.add(h)
		}
	}
	if derated.count > 0 {
		r.warn(who.Line, "machines["+who.Name+"].must_run", fmt.Sprintf("an availability that leaves it less than its minimum output in %s (first: hour %d)", hoursWord(derated.count), derated.line), "0, or enough for the minimum: it is out of service then, must_run or not")
	}
	line := demand.line
	if scarce.count > 0 {
		r.warn(line, "load.demand_mw", fmt.Sprintf("more than all that is available in %s (first: hour %d)", hoursWord(scarce.count), scarce.line), "enough output for the load; else some of it is not served")
	}
	if rigid.count > 0 {
		r.warn(line, "load.demand_mw", fmt.Sprintf("less than what must run in %s (first: hour %d)", hoursWord(rigid.count), rigid.line), "a load of at least the minimum output that must run")
	}
}

// penalties warns of prices of a shortfall that some unit's own cost exceeds: falling short
// would then be a choice.
func (r *reader) penalties(s *section) {
	c := r.c
	dearest, who := 0.0, ""
	for i := range c.Resources {
		res := &c.Resources[i]
		most := res.PricePerMWh.most()
		for _, st := range res.Steps {
			most = max(most, st.CostPerMWh)
		}
		if most > dearest {
			dearest, who = most, res.Name
		}
	}
	if c.UnservedPerMWh <= dearest {
		r.warn(s.lineOf("prices"), "prices.unserved_per_mwh", num(c.UnservedPerMWh), fmt.Sprintf("more than the dearest MWh (%s of %s); else load is not served by choice", num(dearest), who))
	}
	dearest, who = 0, ""
	for i := range c.Resources {
		if p := c.Resources[i].Response.PricePerMW; p > dearest {
			dearest, who = p, c.Resources[i].Name
		}
	}
	if c.ShortPerMW <= dearest {
		r.warn(s.lineOf("prices"), "prices.shortfall_per_mw", num(c.ShortPerMW), fmt.Sprintf("more than the dearest response (%s of %s); else limits are passed by choice", num(dearest), who))
	}
}

func hoursWord(n int) string {
	if n == 1 {
		return "1 hour"
	}
	return fmt.Sprintf("%d hours", n)
}
