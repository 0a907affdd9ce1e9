package fleet

import "math"

// Hour resolves hour h of the case into plain numbers.
//
// Machines: what one can put out at most is max_output_mw × availability. A unit with no
// availability, or whose most lies below its minimum, is out of service. Response comes
// out of the headroom below that most. A condenser consumes its losses when on.
//
// Wind and solar can be turned down from what is available to nothing, and hold response
// out of what is turned down, unless its shape is a recovery shape: that takes its energy
// from the rotor, at most as much as is put out and as the converter carries besides. A battery follows its schedule; output, response and synthetic
// inertia share its power, and the energy of the hold bounds its response. Demand puts
// out nothing and holds response up to its cap and its power. A link runs between its two limits.
//
// Synthetic inertia of E MW·s takes headroom of 2·E/f0·(largest RoCoF) MW.
func (c *Case) Hour(h int, opt HourOptions) *Hour {
	out := &Hour{
		Index: h, Time: c.Times[h],
		DemandMW: c.Load.DemandMW.At(h),
		Units:    make([]Unit, len(c.Resources)),
		Losses:   make([]HourLoss, 0, len(c.Resources)+len(c.Connections)+len(c.Losses)),
	}
	out.DampingMWPerHz = c.Load.DampingPctPerHz / 100 * out.DemandMW
	out.LoadInertiaMWs = c.Load.InertiaMWsPerMW * out.DemandMW
	for i := range c.Resources {
		r := &c.Resources[i]
		u := &out.Units[i]
		if r.Kind.Machine() {
			c.machine(u, r, h, opt)
		} else {
			c.converter(u, r, h)
		}
		u.bound()
		if c.Above != nil && r.Down.Shape >= 0 {
			u.down(r, h)
		}
		if r.LostAsOne {
			out.Losses = append(out.Losses, HourLoss{Name: r.Name, Members: []int{i}, Single: true})
			if c.Above != nil && !r.Kind.Machine() && u.MinMW < 0 { // it can draw power: that lost raises frequency
				out.Losses = append(out.Losses, HourLoss{Name: r.Name, Members: []int{i}, Single: true, Over: true})
			}
		}
	}
	for _, g := range c.Connections {
		out.Losses = append(out.Losses, HourLoss{Name: g.Name, Members: g.Resources})
	}
	for _, l := range c.Losses {
		out.Losses = append(out.Losses, HourLoss{Name: l.Name, FixedMW: l.MW.At(h), Members: l.Resources, Over: l.Over})
	}
	return out
}

func (c *Case) machine(u *Unit, r *Resource, h int, opt HourOptions) {
	*u = Unit{
		Count: r.Count, Commit: true, MustRun: r.MustRun,
		OnCost: r.OnCostPerH, Steps: r.Steps, FromHead: true,
		InertiaMWs: r.InertiaS * r.RatingMVA, CO2TPerMWh: r.CO2TPerMWh,
	}
	if opt.StartSpreadH > 0 {
		u.OnCost += r.StartCost / opt.StartSpreadH
	}
	u.price(r, h)
	u.response(&r.Response, h)
	available := r.Availability.At(h)
	if r.Kind == Condenser {
		u.MinMW, u.MaxMW = -r.LossesMW, -r.LossesMW
		if available <= 0 {
			u.Count = 0
		}
		return
	}
	u.MinMW = r.MinMW.At(h)
	u.MaxMW = r.MaxMW.At(h) * available
	u.HeadMW = u.MaxMW
	const rounding = 1e-9
	if available <= 0 || u.MaxMW < u.MinMW-rounding {
		u.Count = 0
	}
}

func (c *Case) converter(u *Unit, r *Resource, h int) {
	*u = Unit{
		Count: r.Count, FromHead: true, CO2TPerMWh: r.CO2TPerMWh,
		SyntheticCapMWs: r.SyntheticMWs.At(h), SyntheticPerMWs: r.SyntheticPerMWs,
		HeadPerMWs: 2 / c.Limits.NominalHz * c.Limits.MaxHzPerS,
		MinMW:      r.MinMW.At(h), MaxMW: r.MaxMW.At(h),
	}
	u.price(r, h)
	u.response(&r.Response, h)
	switch r.Kind {
	case Wind, Solar:
		u.Renewable = true
		u.HeadMW = u.MaxMW
		if u.Shape >= 0 && c.Shapes[u.Shape].Shape.Recovery() {
			// Out of the rotor, which turns only where there is output, and no more than the
			// converter carries.
			u.FromHead = false
			if !math.IsInf(r.PowerMW, 1) {
				u.FromHead, u.HeadMW = true, r.PowerMW
			}
			if u.ShareOfOutput == 0 {
				u.ShareOfOutput = 1
			}
		}
	case Battery:
		u.HeadMW = r.PowerMW
		if u.Shape >= 0 {
			s := c.Shapes[u.Shape].Shape.HoldEnergyS()
			if math.IsInf(s, 1) {
				s = c.Limits.SteadyUntilS
			}
			if s > 0 {
				u.ResponseCapMW = min(u.ResponseCapMW, r.EnergyMWh*3600/s)
			}
		}
	case Demand:
		u.HeadMW = u.ResponseCapMW
		if r.PowerMW > 0 {
			u.HeadMW = min(u.HeadMW, r.PowerMW)
		}
	case Link:
		u.HeadMW = u.MaxMW
		if r.PowerMW > 0 {
			u.HeadMW = r.PowerMW
		}
	}
}

// price replaces the steps by the one price that a resource without steps has.
func (u *Unit) price(r *Resource, h int) {
	if len(r.Steps) > 0 {
		return
	}
	if p := r.PricePerMWh.At(h); p != 0 {
		u.Steps = []Step{{ToMW: max(r.MaxMW.At(h), 0), CostPerMWh: p}}
	}
}

func (u *Unit) response(r *Response, h int) {
	u.Shape = r.Shape
	if r.Shape < 0 {
		return
	}
	u.ResponseCapMW = max(r.CapMW.At(h), 0)
	u.ResponsePerMW = r.PricePerMW
	u.ShareOfOutput = r.ShareOfOutput
}

// down is the response downwards: a machine down to its minimum, wind and sun to nothing, a
// battery and demand to all of their power drawn, a link to the other end of its power.
func (u *Unit) down(r *Resource, h int) {
	u.DownShape, u.DownCapMW, u.DownPerMW = r.Down.Shape, max(r.Down.CapMW.At(h), 0), r.Down.PricePerMW
	u.FootMW = u.MinMW
	switch r.Kind {
	case Wind, Solar:
		u.FootMW = 0
	case Battery:
		u.FootMW = -r.PowerMW
	case Demand:
		u.FootMW = -u.DownCapMW
		if r.PowerMW > 0 {
			u.FootMW = -r.PowerMW
		}
	case Link:
		if r.PowerMW > 0 {
			u.FootMW = -r.PowerMW
		}
	}
	u.DownCapMW = min(u.DownCapMW, max(u.MaxMW-u.FootMW, 0))
}

// bound cuts what can be held to what the headroom can ever give.
func (u *Unit) bound() {
	room := u.HeadMW - u.MinMW
	if u.FromHead {
		u.ResponseCapMW = min(u.ResponseCapMW, max(room, 0))
	}
	if u.HeadPerMWs > 0 {
		u.SyntheticCapMWs = min(u.SyntheticCapMWs, max(room, 0)/u.HeadPerMWs)
	}
}
