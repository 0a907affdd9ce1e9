package floor

import (
	"context"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// Rule is a fixed floor as a policy: so much online, the load's own included, whatever the limits
// need besides. What is asked for hangs on the hour's largest loss where there are several steps.
type Rule struct {
	Name  string
	Steps []RuleStep
}

// RuleStep is what a rule asks for with a largest loss above FromMW, up to ToMW.
type RuleStep struct {
	FromMW, ToMW float64
	MWs          float64
	Hours        int // of the year that it is for
}

// Kept is an hour under a rule.
type Kept struct {
	AskedMWs float64
	Same     bool // the mix has that online as it is
	LackMWs  float64
	Met      bool // secure, the rule kept
	Cost     Priced
	MWs      float64 // online
}

// makeRules are one number for all hours, one for each bracket of the largest loss that hours fall
// into, and those asked for. The first two are the least that cover every hour's own floor, in the secure mixes.
func (s *Study) makeRules() []Rule {
	one := RuleStep{}
	low, high := -1.0, 0.0
	for _, h := range s.hours {
		if h.Short {
			continue
		}
		one.MWs = max(one.MWs, h.Mix.FloorMWs)
		one.Hours++
		if low < 0 || h.Mix.LargestMW < low {
			low = h.Mix.LargestMW
		}
		high = max(high, h.Mix.LargestMW)
	}
	one.ToMW = high
	rules := []Rule{{Name: "one number", Steps: []RuleStep{one}}}
	if n := s.ask.Brackets; n > 1 && one.Hours > 0 && high > low {
		table := Rule{Name: "table by loss", Steps: make([]RuleStep, n)}
		for b := range table.Steps {
			st := &table.Steps[b]
			st.FromMW, st.ToMW = low+(high-low)*float64(b)/float64(n), low+(high-low)*float64(b+1)/float64(n)
		}
		table.Steps[0].FromMW, table.Steps[n-1].ToMW = 0, high
		for _, h := range s.hours {
			if !h.Short {
				st := table.step(h.Mix.LargestMW)
				st.MWs = max(st.MWs, h.Mix.FloorMWs)
				st.Hours++
			}
		}
		table.Steps = joined(table.Steps)
		rules = append(rules, table)
	}
	for _, mws := range s.ask.Policies {
		st := one
		st.MWs = mws
		rules = append(rules, Rule{Name: "own number", Steps: []RuleStep{st}})
	}
	return rules
}

// joined drops steps that no hour has asked for: such losses count to the next step, which is for
// larger ones. The last step has an hour.
func joined(steps []RuleStep) []RuleStep {
	var out []RuleStep
	from := steps[0].FromMW
	for _, st := range steps {
		if st.Hours == 0 {
			continue
		}
		st.FromMW, from = from, st.ToMW
		out = append(out, st)
	}
	return out
}

// step is the step for a largest loss; those beyond the ends count to them.
func (r *Rule) step(lossMW float64) *RuleStep {
	for b := range r.Steps[:len(r.Steps)-1] {
		if lossMW <= r.Steps[b].ToMW {
			return &r.Steps[b]
		}
	}
	return &r.Steps[len(r.Steps)-1]
}

// keep solves an hour under every rule. Where the mix has what a rule asks for as it is, it stays.
func (s *Study) keep(ctx context.Context, i int) ([]Kept, error) {
	h := s.hours[i]
	out := make([]Kept, len(s.rules))
	for r := range s.rules {
		k := &out[r]
		if h.Short {
			continue
		}
		k.AskedMWs = s.rules[r].step(h.Mix.LargestMW).MWs
		if h.Mix.OnlineMWs >= k.AskedMWs {
			k.Same, k.Met, k.Cost, k.MWs = true, true, h.MixCost, h.Mix.OnlineMWs
			continue
		}
		if done := sameAsked(out[:r], k.AskedMWs); done != nil {
			*k = *done
			continue
		}
		asked := s.c.Hour(h.Index, fleet.HourOptions{StartSpreadH: s.all.spread})
		asked.LeastInertiaMWs = k.AskedMWs
		mix, err := s.all.firm.Hour(ctx, asked)
		if err != nil {
			return nil, err
		}
		k.LackMWs, k.Met, k.Cost, k.MWs = mix.FloorShortMWs, mix.Status == solve.Secure, priced(&mix), mix.InertiaMWs
	}
	return out, nil
}

// sameAsked is the hour under an earlier rule that asks for the same.
func sameAsked(list []Kept, mws float64) *Kept {
	for i := range list {
		if list[i].AskedMWs == mws && !list[i].Same {
			return &list[i]
		}
	}
	return nil
}
