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
	var scarce, rigid repeat
	for h := range c.Times {
		hour := c.Hour(h, HourOptions{})
		most, least := 0.0, 0.0
		for i := range hour.Units {
			u := &hour.Units[i]
			n := float64(max(u.Count, 0))
			most += n * max(u.MaxMW, 0)
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
	line := demand.line
	if scarce.count > 0 {
		r.warn(line, "load.demand_mw", fmt.Sprintf("more than all that is available in %s (first: hour %d)", hoursWord(scarce.count), scarce.line), "enough output for the load; else some of it is not served")
	}
	if rigid.count > 0 {
		r.warn(line, "load.demand_mw", fmt.Sprintf("less than what must run in %s (first: hour %d)", hoursWord(rigid.count), rigid.line), "a load of at least the minimum output that must run")
	}
}

func hoursWord(n int) string {
	if n == 1 {
		return "1 hour"
	}
	return fmt.Sprintf("%d hours", n)
}
