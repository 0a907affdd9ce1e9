package fleet

import (
	"path/filepath"

	"evenkeel/limits/dynamic"
)

// ProjectKind says what someone thinks of building.
type ProjectKind uint8

// The kinds of project.
const (
	BatteryProject ProjectKind = iota
	FlywheelProject
	CondenserProject
	WindRecoveryProject
)

func (k ProjectKind) String() string {
	return [...]string{"battery", "flywheel", "condenser", "wind_recovery"}[k]
}

// SizeUnit is what a project of the kind is sized in.
func (k ProjectKind) SizeUnit() string {
	if k == CondenserProject {
		return "MVA"
	}
	return "MW"
}

// Stores tells whether a project of the kind has energy of its own, to be sized too.
func (k ProjectKind) Stores() bool { return k == BatteryProject || k == FlywheelProject }

// Project is a resource that someone thinks of building for a case: all of it but its size.
type Project struct {
	Path string // of the YAML file, as given
	Name string
	Note string
	Kind ProjectKind
	Hash string // sha256 over the YAML file, hex

	// Battery, flywheel, wind recovery: how the response comes in. LevelHz, if above 0, sets it
	// off; DroopPct, if above 0, makes it follow frequency; Model, if 0 or more, is an index into
	// Case.Models that says it all. Otherwise it comes in by its times after any loss.
	DelayS, ActivationS, HoldS, WithdrawS float64
	LevelHz                               float64
	DroopPct, DeadbandHz                  float64
	Model                                 int
	PricePerMW                            float64 // its own cost of holding 1 MW for an hour
	Down                                  bool    // it holds response downwards too
	DownPricePerMW                        float64

	// Battery and flywheel: synthetic inertia for each MW (0: none), and what the energy must do.
	SyntheticMWsPerMW float64
	SyntheticPerMWs   float64
	SyntheticS        float64
	EfficiencyPct     float64 // there and back
	Events            int     // that it must last for before it is charged again
	RechargeShare     float64 // of its power, charging after an event
	ReadyAgainS       float64 // after the end of an event

	// Condenser, made of like machines.
	UnitMVA, InertiaS float64
	LossesShare       float64 // of its rating
	OnCostPerMVAh     float64

	// Wind recovery.
	Host                              int // index into Case.Resources
	ShareOfOutput                     float64
	RecoveryShare, RecoveryS, ReturnS float64

	Money Money
}

// Money is what a project costs to build and to keep. A condenser's MW are its MVA.
type Money struct {
	CapitalPerMW   float64
	CapitalPerMWh  float64
	FixedPerMWYear float64
	LifetimeYears  float64
	DiscountPct    float64
}

var (
	projectKeys = []string{"project", "note", "kind", "money",
		"model", "level_hz", "droop_pct", "deadband_hz", "delay_s", "activation_s", "hold_s", "withdraw_s", "price_per_mw", "down_price_per_mw", "synthetic_inertia",
		"efficiency_pct", "events_before_recharge", "recharge_mw_share", "ready_again_s",
		"inertia_s", "unit_mva", "losses_share", "on_cost_per_mva_h",
		"host", "share_of_output", "recovery_share", "recovery_s", "return_s"}
	projectSyntheticKeys = []string{"mws_per_mw", "filter_s", "price_per_mws"}
	moneyKeys            = []string{"capital_per_mw", "capital_per_mwh", "fixed_per_mw_year", "lifetime_years", "discount_pct"}
)

// projectKindKeys are the keys that each kind has besides project, note, kind and money.
var projectKindKeys = map[ProjectKind][]string{
	BatteryProject: {"model", "level_hz", "droop_pct", "deadband_hz", "delay_s", "activation_s", "hold_s", "withdraw_s", "price_per_mw", "down_price_per_mw",
		"synthetic_inertia", "efficiency_pct", "events_before_recharge", "recharge_mw_share", "ready_again_s"},
	CondenserProject:    {"inertia_s", "unit_mva", "losses_share", "on_cost_per_mva_h"},
	WindRecoveryProject: {"host", "share_of_output", "delay_s", "activation_s", "hold_s", "withdraw_s", "price_per_mw", "recovery_share", "recovery_s", "return_s"},
}

func init() { projectKindKeys[FlywheelProject] = projectKindKeys[BatteryProject] }

// mostHoldS is the longest that a project may have to hold its response: a day.
const mostHoldS = 86_400

// ReadProject reads and vets a project for a case. As Read does, it reports every fault it can
// find; the project is nil if there is any error.
func ReadProject(path string, c *Case) (*Project, Findings) { return readProject(path, c, openFile) }

func readProject(path string, c *Case, open opener) (*Project, Findings) {
	r := &reader{path: path, dir: filepath.Dir(path), open: open, what: "project", c: c, elsewhere: keysElsewhere}
	raw, err := open(path, maxCaseBytes)
	if err != nil {
		r.fault(0, "", err.Error(), "a project file that can be read")
		return nil, r.found
	}
	p := &Project{Path: path, Model: -1, Host: -1}
	if root := r.parse(raw); root != nil {
		if s := r.section(root, "", root.Line, projectKeys); s != nil {
			r.project(s, p)
		}
	}
	r.found = r.found.sorted(path)
	if len(r.found.Errors()) > 0 {
		return nil, r.found
	}
	p.Hash, _ = r.hash(raw)
	return p, r.found
}

func (r *reader) project(s *section, p *Project) {
	p.Name, _ = s.text("project")
	p.Note = s.note("note")
	if r.c.taken(p.Name) {
		s.fault("project", quoted(p.Name)+", a name that the case has", "a name of its own, no resource's, connection's, loss's, shape's or model's")
	}
	if m := s.required("money", moneyKeys); m != nil {
		p.Money.CapitalPerMW = m.number("capital_per_mw", notBelow0)
		p.Money.CapitalPerMWh = m.numberOr("capital_per_mwh", notBelow0, 0)
		p.Money.FixedPerMWYear = m.numberOr("fixed_per_mw_year", notBelow0, 0)
		p.Money.LifetimeYears = m.number("lifetime_years", rule{lo: 0, hi: 200, above: true})
		p.Money.DiscountPct = m.number("discount_pct", rule{lo: 0, hi: 100})
		defer func() { m.unusualMoney(p) }() // once the kind is known
	}
	var names []string
	found := false
	e, has := s.get("kind")
	for k := BatteryProject; k <= WindRecoveryProject; k++ {
		names = append(names, k.String())
		if has && e.node.Value == k.String() {
			p.Kind, found = k, true
		}
	}
	switch {
	case !has:
		s.missing("kind", list(names))
		return
	case !found:
		r.fault(e.node.Line, s.key("kind"), describe(e.node), list(names))
		return
	}
	for _, key := range projectKeys[4:] {
		if s.has(key) && !contains(projectKindKeys[p.Kind], key) {
			s.fault(key, "the key for a "+p.Kind.String(), "one of "+list(projectKindKeys[p.Kind]))
		}
	}
	if m := s.part("money", moneyKeys); m != nil {
		switch {
		case p.Kind.Stores() && !m.has("capital_per_mwh"):
			m.missing("capital_per_mwh", notBelow0.String()+" (energy has a price of its own)")
		case !p.Kind.Stores() && p.Money.CapitalPerMWh > 0:
			m.fault("capital_per_mwh", num(p.Money.CapitalPerMWh), "nothing: a "+p.Kind.String()+" has no energy to size")
		}
	}
	switch p.Kind {
	case CondenserProject:
		p.InertiaS = s.number("inertia_s", positive)
		p.UnitMVA = s.number("unit_mva", positive)
		p.LossesShare = s.numberOr("losses_share", rule{lo: 0, hi: 0.2}, 0.015)
		p.OnCostPerMVAh = s.numberOr("on_cost_per_mva_h", notBelow0, 0)
		if p.InertiaS > 60 {
			s.warn("inertia_s", num(p.InertiaS), "1 to 3 s for a condenser alone, to about 20 s with a flywheel (common practice)")
		}
	case WindRecoveryProject:
		r.windRecovery(s, p)
	default:
		r.store(s, p)
	}
}

// windRecovery reads what a wind farm's rotors give and take back.
func (r *reader) windRecovery(s *section, p *Project) {
	r.projectTimes(s, p)
	p.RecoveryShare = s.number("recovery_share", rule{lo: 0, hi: 1, above: true})
	p.RecoveryS = s.number("recovery_s", rule{lo: 0, hi: maxSeconds, above: true})
	p.ReturnS = s.numberOr("return_s", rule{lo: 0, hi: maxSeconds}, 0)
	p.ShareOfOutput = s.numberOr("share_of_output", rule{lo: 0, hi: 1, above: true}, 0.1)
	if name, ok := s.text("host"); ok {
		for i := range r.c.Resources {
			if r.c.Resources[i].Name == name {
				p.Host = i
			}
		}
		switch {
		case p.Host < 0:
			want := "the name of a wind resource of the case"
			if near := nearestName(name, len(r.c.Resources), func(i int) string {
				if r.c.Resources[i].Kind != Wind {
					return ""
				}
				return r.c.Resources[i].Name
			}); near != "" {
				want += " (" + near + "?)"
			}
			s.fault("host", "the unknown resource "+quoted(name), want)
		case r.c.Resources[p.Host].Kind != Wind:
			s.fault("host", quoted(name)+", which is "+r.c.Resources[p.Host].Kind.String(), "a wind resource of the case")
		case r.c.Resources[p.Host].Response.Shape >= 0:
			s.fault("host", quoted(name)+", which has a response in the case", "a wind resource without one")
		}
	}
	r.tryShape(s, p)
}

// projectTimes reads when a response comes and goes.
func (r *reader) projectTimes(s *section, p *Project) {
	q := rule{lo: 0, hi: maxSeconds}
	p.DelayS = s.numberOr("delay_s", q, 0)
	p.ActivationS = s.number("activation_s", rule{lo: 0, hi: maxSeconds, above: true})
	s.usualActivation(p.ActivationS)
	p.HoldS = s.number("hold_s", rule{lo: 0, hi: mostHoldS, above: true})
	p.WithdrawS = s.numberOr("withdraw_s", q, 0)
	p.PricePerMW = s.numberOr("price_per_mw", notBelow0, 0)
	if p.DelayS > p.ActivationS {
		s.fault("delay_s", num(p.DelayS), "at most activation_s ("+num(p.ActivationS)+"), which it is a part of")
	}
}

// store reads a battery or a flywheel.
func (r *reader) store(s *section, p *Project) {
	forms := 0
	for _, key := range []string{"model", "level_hz", "droop_pct"} {
		if s.has(key) {
			if forms++; forms > 1 {
				s.fault(key, "a second way to come in", "one of model, level_hz, droop_pct, or times alone")
			}
		}
	}
	if name, _ := s.textOr("model", ""); name != "" {
		r.projectModel(s, p, name)
	} else {
		r.projectTimes(s, p)
	}
	p.LevelHz = s.levelHz(r.c.Limits)
	p.DroopPct = s.numberOr("droop_pct", rule{lo: 0, hi: 100, above: true}, 0)
	if s.has("droop_pct") {
		s.usual("droop_pct", p.DroopPct, 0.1, 12, "0.1 to 12, in per cent (common practice)")
	}
	p.DeadbandHz = s.numberOr("deadband_hz", rule{lo: 0, hi: r.c.Limits.SteadyHz}, 0)
	switch {
	case s.has("deadband_hz") && !s.has("droop_pct"):
		s.fault("deadband_hz", "a deadband without a droop", "droop_pct beside it")
	case s.has("droop_pct") && s.has("withdraw_s"):
		s.fault("withdraw_s", "a withdrawal of what follows frequency", "nothing: with droop_pct it goes as frequency comes back")
	}
	if until := r.c.Limits.SteadyUntilS; s.has("droop_pct") && p.HoldS < until {
		s.fault("hold_s", num(p.HoldS), "at least the "+num(until)+" s of steady.until_s in the case: what follows frequency is held as long")
	}
	if s.has("down_price_per_mw") {
		p.Down, p.DownPricePerMW = true, s.number("down_price_per_mw", notBelow0)
		if r.c.Above == nil {
			s.fault("down_price_per_mw", "response downwards", "limits above nominal (frequency.above) in the case for it")
		}
	}
	p.EfficiencyPct = s.numberOr("efficiency_pct", rule{lo: 1, hi: 100}, 85)
	s.usual("efficiency_pct", p.EfficiencyPct, 50, 100, "70 to 95 there and back, in per cent (common practice)")
	p.Events = s.whole("events_before_recharge", rule{lo: 1, hi: 100, integer: true}, 1)
	p.RechargeShare = s.numberOr("recharge_mw_share", rule{lo: 0, hi: 1, above: true}, 0.25)
	p.ReadyAgainS = s.numberOr("ready_again_s", rule{lo: 0, hi: mostHoldS, above: true}, 900)
	if g := s.part("synthetic_inertia", projectSyntheticKeys); g != nil {
		p.SyntheticMWsPerMW = g.number("mws_per_mw", positive)
		p.SyntheticPerMWs = g.numberOr("price_per_mws", notBelow0, 0)
		p.SyntheticS = g.numberOr("filter_s", rule{lo: 0.01, hi: 10}, 0)
	}
	r.tryShape(s, p)
}

// projectModel finds the model of the case that a project follows.
func (r *reader) projectModel(s *section, p *Project, name string) {
	for i := range r.c.Models {
		if r.c.Models[i].Name == name {
			p.Model = i
		}
	}
	for _, key := range []string{"delay_s", "activation_s", "withdraw_s"} {
		if s.has(key) {
			s.fault(key, "a time beside a model", "nothing: the model says how it comes and goes")
		}
	}
	p.PricePerMW = s.numberOr("price_per_mw", notBelow0, 0)
	if p.Model < 0 {
		want := "the name of a model of the case"
		if near := nearestName(name, len(r.c.Models), func(i int) string { return r.c.Models[i].Name }); near != "" {
			want += " (" + near + "?)"
		}
		s.fault("model", "the unknown model "+quoted(name), want)
		return
	}
	m := &r.c.Models[p.Model]
	if m.Model.Kind != dynamic.Droop && m.Model.Kind != dynamic.Step {
		s.fault("model", quoted(name)+", a "+m.Model.Kind.String()+" model", "a droop or step model: it stands behind a converter")
		return
	}
	least := r.c.Limits.SteadyUntilS
	if m.Model.Kind == dynamic.Step && m.Model.Course.HoldS > 0 {
		least = m.Model.Course.HoldS
	}
	p.HoldS = s.numberOr("hold_s", rule{lo: 0, hi: mostHoldS, above: true}, least)
	if p.HoldS < least {
		s.fault("hold_s", num(p.HoldS), "at least the "+num(least)+" s that the model asks for")
	}
}

// tryShape reports times that make no shape.
func (r *reader) tryShape(s *section, p *Project) {
	if len(r.found.Errors()) > 0 {
		return
	}
	if _, _, err := p.response(r.c, p.ActivationS); err != nil {
		r.fault(s.line, "activation_s", "times that make no response", err.Error())
	}
}

// Promised tells whether the project's response comes in whole by its times after any loss,
// whatever frequency does: no level sets it off, and it follows neither a droop nor a model.
func (p *Project) Promised() bool {
	return p.Kind != CondenserProject && p.Model < 0 && p.LevelHz == 0 && p.DroopPct == 0
}

// Paced tells whether the project's activation time can be varied.
func (p *Project) Paced() bool { return p.Kind != CondenserProject && p.Model < 0 }
