package worth

import (
	"evenkeel/fleet"
	"evenkeel/solve"
)

type settlement struct{ Marginal, Hull settled }

type settled struct {
	Prices     solve.Prices
	DownPerMW  []float64
	Resources  []earning
	Uplift     float64
	SlackValue float64
}

type earning struct {
	Energy, Inertia, Response, Down, LossCharge, Cost, Profit, Best, MakeWhole, LostOpportunity float64
}

func settlementOf(c *fleet.Case, h *solve.Hour) settlement {
	w := settled{Prices: h.Prices, Resources: make([]earning, len(c.Resources))}
	if h.Above != nil {
		w.DownPerMW = h.Above.DownPerMW
	}
	for i, d := range h.Dispatch {
		e := earning{Energy: d.OutputMW * h.Prices.EnergyPerMWh, Inertia: d.InertiaMWs * h.Prices.InertiaPerMWs, Cost: d.Cost}
		if s := c.Resources[i].Response.Shape; s >= 0 {
			e.Response = d.ResponseMW * h.Prices.ResponsePerMW[s]
		}
		e.Profit = e.Energy + e.Inertia + e.Response - e.Cost
		e.MakeWhole = max(-e.Profit, 0)
		e.Best = max(e.Profit, 0)
		w.Resources[i] = e
		w.Uplift += e.MakeWhole
	}
	return settlement{w, w}
}
