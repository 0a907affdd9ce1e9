package fleet

import (
	"math"

	"evenkeel/limits"
)

// keysElsewhere says where keys of a project's sections belong that stand outside of them.
var keysElsewhere = map[string]string{}

func init() {
	for _, key := range moneyKeys {
		keysElsewhere[key] = "money." + key
	}
	for _, key := range projectSyntheticKeys {
		keysElsewhere[key] = "synthetic_inertia." + key
	}
}

// usual warns of a number outside what is usual: most often it is in another unit.
func (s *section) usual(name string, x, lo, hi float64, want string) {
	if x < lo || x > hi {
		s.warn(name, num(x), want)
	}
}

func (s *section) usualActivation(x float64) {
	s.usual("activation_s", x, 0.02, 30, "0.02 to 30, in seconds: fast to primary response (common practice)")
}

// unusualMoney warns of money in thousands or millions, and of shares for per cents. The bounds
// are wide, as currencies differ; 0 is a question of its own (what if it cost nothing?).
func (s *section) unusualMoney(p *Project) {
	whole := "in whole " + s.r.c.Currency + ", not thousands or millions (common practice)"
	m, least := &p.Money, 5000.0
	want := "10,000 to 2,000,000 in EUR or USD, "
	if p.Kind == WindRecoveryProject {
		least, want = 50, "100 or more in EUR or USD, " // software on what is there
	}
	above0 := func(x float64) float64 {
		if x == 0 {
			return math.NaN() // which no bound complains about
		}
		return x
	}
	s.usual("capital_per_mw", above0(m.CapitalPerMW), least, math.Inf(1), want+whole)
	s.usual("capital_per_mwh", above0(m.CapitalPerMWh), 5000, math.Inf(1), "50,000 or more in EUR or USD, "+whole)
	if m.CapitalPerMW >= least {
		const lo, hi = 0.001, 0.5
		s.usual("fixed_per_mw_year", above0(m.FixedPerMWYear), lo*m.CapitalPerMW, hi*m.CapitalPerMW,
			"0.5 to 10 % of capital_per_mw ("+num(m.CapitalPerMW)+"), "+whole)
	}
	s.usual("lifetime_years", m.LifetimeYears, 3, 60, "5 to 50, in years (common practice)")
	s.usual("discount_pct", above0(m.DiscountPct), 0.5, 30, "2 to 15, in per cent (common practice)")
}

// levelHz reads the level that sets a response off, below nominal; 0 where none is given.
func (s *section) levelHz(l limits.Limits) float64 {
	x := s.numberOr("level_hz", positive, 0)
	if x > l.SteadyHz {
		want, below := "", math.Round((l.NominalHz-x)*1e6)/1e6
		switch {
		case math.Abs(below) > 0.2*l.NominalHz: // no frequency near nominal
		case below > 0:
			want = "it counted below nominal (for " + num(x) + " Hz write " + num(below) + "), "
		default:
			want = "it counted below nominal, "
		}
		want += "at most frequency.steady.max_deviation_hz of the case (" + num(l.SteadyHz) + "), to which responses are qualified"
		s.fault("level_hz", num(x), want)
	}
	return x
}
