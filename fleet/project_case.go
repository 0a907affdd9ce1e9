package fleet

import (
	"fmt"
	"math"

	"evenkeel/limits"
	"evenkeel/limits/dynamic"
)

// Design is one way to build a project.
type Design struct {
	MW          float64 // its size: of the converter, of the response; a condenser's MVA
	EnergyMWh   float64 // installed; of no meaning where the project has none
	ActivationS float64
}

// Energy is what each MW of a project's response needs in the store, MWh.
type Energy struct {
	HoldS     float64 // the hold and its ramps as seconds at full power
	EventMWh  float64 // drawn from the store by one event
	EventsMWh float64 // by all events it must last for
	// RechargeMWh is there because charging after an event takes longer than until it must be
	// ready again; RechargeS is how long charging takes.
	RechargeMWh, RechargeS float64
	DownMWh                float64 // room for what comes in downwards
	TotalMWh               float64
}

// Energy counts what 1 MW of response needs, built with an activation time. A store gives
// 1/√efficiency of what is delivered and takes √efficiency of what is drawn.
//
// Synthetic inertia of E MW·s gives what that much kinetic energy gives as frequency falls to the
// nadir: E·(1 − (1 − nadir/f0)²).
func (p *Project) Energy(c *Case, activationS float64) (Energy, error) {
	if !p.Kind.Stores() {
		return Energy{}, nil
	}
	sh, _, err := p.response(c, activationS)
	if err != nil {
		return Energy{}, err
	}
	e := Energy{HoldS: sh.HoldEnergyS()}
	if math.IsInf(e.HoldS, 1) || p.Model >= 0 {
		e.HoldS = max(p.HoldS, c.Limits.SteadyUntilS)
		if h := sh.HoldEnergyS(); !math.IsInf(h, 1) {
			e.HoldS = max(p.HoldS, h)
		}
	}
	left := 1 - c.Limits.NadirHz/c.Limits.NominalHz
	e.HoldS += p.SyntheticMWsPerMW * (1 - left*left)
	way := math.Sqrt(p.EfficiencyPct / 100)
	e.EventMWh = e.HoldS / 3600 / way
	e.EventsMWh = float64(p.Events) * e.EventMWh
	e.RechargeS = e.EventMWh * 3600 / (way * p.RechargeShare)
	e.RechargeMWh = max(0, e.EventMWh-way*p.RechargeShare*p.ReadyAgainS/3600)
	if p.Down {
		e.DownMWh = float64(p.Events) * e.HoldS / 3600 * way
	}
	e.TotalMWh = e.EventsMWh + e.RechargeMWh + e.DownMWh
	return e, nil
}

// ResponseMW is what a design can hold: its power, or what its energy lasts for.
func (p *Project) ResponseMW(c *Case, d Design) (float64, error) {
	if !p.Kind.Stores() {
		return d.MW, nil
	}
	e, err := p.Energy(c, d.ActivationS)
	if err != nil {
		return 0, err
	}
	const micro = 1e6 // a millionth of a MW is rounding: the same response is the same number
	return math.Round(min(d.MW, d.EnergyMWh/e.TotalMWh)*micro) / micro, nil
}

// Resource is the index, in a case that holds the project, of the resource that carries it.
func (p *Project) Resource(c *Case) int {
	if p.Kind == WindRecoveryProject {
		return p.Host
	}
	return len(c.Resources)
}

// Shape is the index of its response's shape in such a case; −1: it has none.
func (p *Project) Shape(c *Case) int {
	if p.Kind == CondenserProject {
		return -1
	}
	return len(c.Shapes)
}

// In is the case with the project built: a changed copy. powerMW is the converter's,
// which response and synthetic inertia share. responseMW is the most response that it holds; synthetic
// inertia is offered for as many MW, as the energy is counted for both. A condenser is whole machines
// of powerMW MVA in all. With nothing built the resource and its
// shape are there all the same, so that its services have a price. Cases that differ in power and
// response alone have the same resources, shapes and losses.
func (p *Project) In(c *Case, powerMW, responseMW, activationS float64) (*Case, error) {
	out := *c
	out.Shapes = append([]NamedShape(nil), c.Shapes...)
	out.Models = append([]NamedModel(nil), c.Models...)
	out.Resources = append([]Resource(nil), c.Resources...)
	response := Response{Shape: -1}
	if p.Kind != CondenserProject {
		sh, m, err := p.response(c, activationS)
		if err != nil {
			return nil, err
		}
		response = Response{CapMW: Value{Const: responseMW}, PricePerMW: p.PricePerMW, Shape: len(out.Shapes)}
		if m != nil {
			m.Shape = response.Shape
			out.Models = append(out.Models, *m)
		}
		out.Shapes = append(out.Shapes, NamedShape{Name: p.Name, Shape: sh, Model: m != nil})
	}
	switch p.Kind {
	case WindRecoveryProject:
		response.ShareOfOutput = p.ShareOfOutput
		out.Resources[p.Host].Response = response
		return &out, nil
	case CondenserProject:
		n := int(math.Round(powerMW / p.UnitMVA))
		r := Resource{Name: p.Name, Kind: Condenser, Count: max(n, 1), RatingMVA: p.UnitMVA, InertiaS: p.InertiaS,
			OnCostPerH: p.OnCostPerMVAh * p.UnitMVA, LossesMW: p.LossesShare * p.UnitMVA, Availability: Value{Const: 1},
			LostAsOne: true, Response: response, Down: Response{Shape: -1}}
		if n == 0 {
			r.Availability.Const = 0
		}
		out.Resources = append(out.Resources, r)
		return &out, nil
	}
	// Its loss takes no output from the system, and what it held is not needed for any other.
	r := Resource{Name: p.Name, Kind: Battery, Count: 1, PowerMW: powerMW, Response: response, Down: Response{Shape: -1},
		SyntheticMWs: Value{Const: p.SyntheticMWsPerMW * responseMW}, SyntheticPerMWs: p.SyntheticPerMWs, SyntheticS: p.SyntheticS}
	r.EnergyMWh = math.Inf(1) // counted before: it has cut responseMW
	if p.Down {
		r.Down = Response{CapMW: response.CapMW, PricePerMW: p.DownPricePerMW, Shape: response.Shape}
	}
	out.Resources = append(out.Resources, r)
	return &out, nil
}

// response makes the shape in which the project's response comes in, and the model that it
// follows where it has one.
func (p *Project) response(c *Case, activationS float64) (limits.Shape, *NamedModel, error) {
	t := limits.Timing{DelayS: p.DelayS, RampS: activationS - p.DelayS, HoldS: p.HoldS, WithdrawS: p.WithdrawS,
		RecoveryShare: p.RecoveryShare, RecoveryS: p.RecoveryS, ReturnS: p.ReturnS}
	if p.Model < 0 && !(t.RampS >= 0) {
		return limits.Shape{}, nil, fmt.Errorf("an activation time of %s s, shorter than delay_s (%s), which is a part of it", num(activationS), num(p.DelayS))
	}
	m := NamedModel{Name: p.Name, Test: usualTest(c.Limits)}
	switch {
	case p.Model >= 0:
		m.Test = c.Models[p.Model].Test
		model := *c.Models[p.Model].Model
		m.Model = &model
	case p.LevelHz > 0:
		m.Model = &dynamic.Model{Kind: dynamic.Step, LevelHz: p.LevelHz, Course: t, RestS: p.ReadyAgainS}
	case p.DroopPct > 0:
		model := dynamic.Defaults(dynamic.Droop)
		model.DroopPct, model.DeadbandHz, model.DelayS = p.DroopPct, p.DeadbandHz, p.DelayS
		model.LagS = t.RampS / lagsToFull
		m.Model = &model
	default:
		s, err := t.Shape()
		return s, nil, err
	}
	m.Model.Name = p.Name
	if err := m.Model.Check(); err != nil {
		return limits.Shape{}, nil, err
	}
	if m.Model.Kind == dynamic.Step {
		s, err := m.course()
		return s, &m, err
	}
	var sim dynamic.Simulator
	s, _, err := m.delivered(&sim, c.Limits, 1, 1)
	return s, &m, err
}

// lagsToFull is how many time constants a lag takes to 95 % (computed: 1 − e⁻³).
const lagsToFull = 3
