package fleet

import (
	"fmt"
	"math"

	"evenkeel/limits"
	"evenkeel/limits/dynamic"
)

// NamedModel is a dynamic model that resources answer by, and the test in which its shape
// is what it delivers.
type NamedModel struct {
	Name  string
	Model *dynamic.Model
	Test  dynamic.Test
	Shape int // index into Case.Shapes
}

// ModelOf gives the model of each shape; nil: the shape is a promise.
func (c *Case) ModelOf() []*dynamic.Model {
	of := make([]*dynamic.Model, len(c.Shapes))
	for i := range c.Models {
		of[c.Models[i].Shape] = c.Models[i].Model
	}
	return of
}

// paramKeys are the keys of each kind of model.
var paramKeys = map[dynamic.Kind][]string{
	dynamic.Steam: {"droop_pct", "gain", "deadband_hz", "rate_pct_per_s", "governor_s", "chest_s", "reheat_s", "high_pressure_share"},
	dynamic.Gas:   {"droop_pct", "gain", "deadband_hz", "rate_pct_per_s", "governor_s", "fuel_s", "turbine_s"},
	dynamic.Hydro: {"droop_pct", "gain", "deadband_hz", "rate_pct_per_s", "governor_s", "transient_droop_pct", "dashpot_s", "water_s"},
	dynamic.Droop: {"droop_pct", "gain", "deadband_hz", "rate_pct_per_s", "delay_s", "lag_s"},
	dynamic.Step:  {"level_hz", "delay_s", "ramp_s", "hold_s", "withdraw_s", "recovery_share", "recovery_s", "return_s", "rest_s"},
}

var testKeys = []string{"hz_per_s", "to_hz"}

// models reads the dynamic models. Each is a shape too, under its name; those of governors
// are made by qualify once it is known what hangs on them.
func (r *reader) models(s *section, taken map[string]int) {
	known := append([]string{"name", "kind", "qualification"}, allParams()...)
	for i, n := range s.items("models", "a list of dynamic models") {
		g := r.section(n, entryPath(n, "models", i), n.Line, known)
		if g == nil {
			continue
		}
		m := NamedModel{Name: r.claim(g, taken, "shape and model"), Shape: len(r.c.Shapes)}
		model, made := r.model(g)
		m.Model = model
		l := r.c.Limits
		m.Test = usualTest(l)
		if q := g.part("qualification", testKeys); q != nil {
			m.Test = dynamic.Test{HzPerS: q.numberOr("hz_per_s", notBelow0, m.Test.HzPerS), ToHz: q.number("to_hz", positive)}
		}
		made = made && m.Test.HzPerS >= 0 && m.Test.ToHz > 0
		sh := NamedShape{Name: m.Name, Model: true}
		if made {
			sh.Shape, made = r.firstShape(g, &m)
		}
		r.c.Models = append(r.c.Models, m)
		r.c.Shapes = append(r.c.Shapes, sh)
		r.shapeInputs = append(r.shapeInputs, shapeInput{section: g, made: made})
		if _, twice := r.shapeIndex[m.Name]; !twice {
			r.shapeIndex[m.Name] = m.Shape
		}
	}
}

// model reads the parameters of one model.
func (r *reader) model(g *section) (*dynamic.Model, bool) {
	var names []string
	var kind dynamic.Kind
	found := false
	for _, k := range dynamic.Kinds() {
		if paramKeys[k] == nil {
			continue
		}
		names = append(names, k.String())
		if e, ok := g.get("kind"); ok && e.node.Value == k.String() {
			kind, found = k, true
		}
	}
	if !found {
		if e, ok := g.get("kind"); ok {
			r.fault(e.node.Line, g.key("kind"), describe(e.node), list(names))
		} else {
			g.missing("kind", list(names))
		}
		return &dynamic.Model{}, false
	}
	m := dynamic.Defaults(kind)
	sound := true
	for _, key := range allParams() {
		if e, has := g.get(key); has && !contains(paramKeys[kind], key) {
			r.fault(e.line, g.key(key), "a parameter that a "+kind.String()+" model does not have", "one of "+list(paramKeys[kind]))
			sound = false
		}
	}
	if kind == dynamic.Step && (g.has("delay_s") || g.has("ramp_s") || g.has("hold_s")) {
		m.Course = limits.Timing{} // its times belong together
	}
	for _, key := range paramKeys[kind] {
		at := param(&m, key)
		*at = g.numberOr(key, rule{lo: 0, hi: maxSeconds}, *at)
		sound = sound && !math.IsNaN(*at)
	}
	m.Name, _ = g.textOr("name", "")
	if !sound {
		return &m, false
	}
	if err := m.Check(); err != nil {
		r.fault(g.line, g.path, "parameters that make no model", err.Error())
		return &m, false
	}
	return &m, true
}

// param is where a model keeps what a key gives.
func param(m *dynamic.Model, key string) *float64 {
	c := &m.Course
	if m.Kind == dynamic.Step {
		switch key {
		case "delay_s":
			return &c.DelayS
		case "ramp_s":
			return &c.RampS
		case "hold_s":
			return &c.HoldS
		case "withdraw_s":
			return &c.WithdrawS
		case "recovery_share":
			return &c.RecoveryShare
		case "recovery_s":
			return &c.RecoveryS
		case "return_s":
			return &c.ReturnS
		}
	}
	return map[string]*float64{
		"droop_pct": &m.DroopPct, "gain": &m.Gain, "deadband_hz": &m.DeadbandHz, "rate_pct_per_s": &m.RatePctPerS, "governor_s": &m.GovernorS,
		"chest_s": &m.ChestS, "reheat_s": &m.ReheatS, "high_pressure_share": &m.HighPressureShare, "fuel_s": &m.FuelS, "turbine_s": &m.TurbineS,
		"transient_droop_pct": &m.TransientDroopPct, "dashpot_s": &m.DashpotS, "water_s": &m.WaterS, "delay_s": &m.DelayS, "lag_s": &m.LagS,
		"level_hz": &m.LevelHz, "rest_s": &m.RestS,
	}[key]
}

// allParams lists the parameters of all kinds.
func allParams() []string {
	var all []string
	for _, k := range dynamic.Kinds() {
		for _, key := range paramKeys[k] {
			if !contains(all, key) {
				all = append(all, key)
			}
		}
	}
	return all
}

// firstShape gives a shape before it is known what hangs on a model: that of a triggered
// response is its course from the instant at which the test passes its level.
func (r *reader) firstShape(g *section, m *NamedModel) (limits.Shape, bool) {
	if m.Model.Kind != dynamic.Step {
		s, err := limits.Timing{RampS: 1}.Shape()
		return s, err == nil
	}
	if m.Test.ToHz < m.Model.LevelHz {
		g.fault("level_hz", num(m.Model.LevelHz), fmt.Sprintf("at most the %s Hz to which its qualification goes", num(m.Test.ToHz)))
		return limits.Shape{}, false
	}
	s, err := m.course()
	return s, err == nil
}

// course is what a triggered response delivers in its qualification, whose fall passes its level
// some time after it began.
func (m *NamedModel) course() (limits.Shape, error) {
	c := m.Model.Course
	if m.Test.HzPerS > 0 {
		c.DelayS += m.Model.LevelHz / m.Test.HzPerS
	}
	return c.Shape()
}

// delivered is the shape of a governor model: what a unit of a rating that can hold so much
// delivers in the qualification, and how much of it there is at its end.
func (m *NamedModel) delivered(sim *dynamic.Simulator, l limits.Limits, ratingMW, mostMW float64) (s limits.Shape, end float64, err error) {
	until := min(max(l.SteadyUntilS, limits.LeastHorizonS), 120)
	u := dynamic.Unit{Model: m.Model, N: 1, RatingMW: ratingMW, UpMW: mostMW}
	share := sim.Deliver(&u, l.NominalHz, m.Test.At, until, sampleS)
	s, err = dynamic.ShapeBelow(share, sampleS, shapeWithin)
	return s, share[len(share)-1], err
}

// usualTest is the qualification of a model without one of its own.
func usualTest(l limits.Limits) dynamic.Test {
	return dynamic.Test{HzPerS: l.MaxHzPerS / 2, ToHz: l.SteadyHz}
}

const (
	sampleS     = 0.02
	shapeWithin = 0.01
)

// qualify makes the shapes of the governor models: what the unit with the most response
// for its rating delivers in the test, which is the slowest to deliver all of it.
func (r *reader) qualify() {
	var sim dynamic.Simulator
	for i := range r.c.Models {
		m := &r.c.Models[i]
		if m.Model == nil || m.Model.Kind == dynamic.Step || !r.shapeInputs[m.Shape].made {
			continue
		}
		rating, most, who := 0.0, 0.0, -1
		for j := range r.c.Resources {
			res := &r.c.Resources[j]
			mw := 0.0
			if res.Response.Shape == m.Shape {
				mw = res.Response.CapMW.most()
			}
			if res.Down.Shape == m.Shape {
				mw = max(mw, res.Down.CapMW.most())
			}
			if res.Response.Shape != m.Shape && res.Down.Shape != m.Shape {
				continue
			}
			base := res.Base()
			if !(base > 0) {
				r.inputs[j].section.fault("response", "a "+m.Model.Kind.String()+" model without a rating", "rating_mva (machines) or power_mw (converters), which its droop counts on")
				continue
			}
			if mw*max(rating, 1e-9) > most*base || who < 0 {
				rating, most, who = base, mw, j
			}
		}
		if who < 0 || !(most > 0) {
			continue
		}
		if l := r.c.Limits; math.IsNaN(l.NominalHz + l.SteadyUntilS + m.Test.HzPerS + m.Test.ToHz + rating + most) {
			continue // a fault of these is reported where it stands
		}
		s, end, err := m.delivered(&sim, r.c.Limits, rating, most)
		if err != nil {
			r.fault(r.shapeInputs[m.Shape].section.line, r.shapeInputs[m.Shape].section.path, "a model that delivers nothing in its qualification", "some response before it ends ("+err.Error()+")")
			continue
		}
		if end < 0.98 {
			r.inputs[who].section.warn("response", fmt.Sprintf("a cap of which %s delivers %.0f %% in its qualification", m.Name, 100*end), fmt.Sprintf("a cap that its droop asks for at %s Hz, or a lower one", num(m.Test.ToHz)))
		}
		r.c.Shapes[m.Shape].Shape = s
	}
}

// Base is the rating that a resource's droop counts on, MW: rating_mva of machines, power_mw
// of converters.
func (r *Resource) Base() float64 {
	if r.Kind.Machine() {
		return r.RatingMVA
	}
	if math.IsInf(r.PowerMW, 1) {
		return 0
	}
	return r.PowerMW
}
