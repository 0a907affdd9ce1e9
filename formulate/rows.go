package formulate

import "evenkeel/limits"

// Row is one limit at one instant after one loss, in MW of that loss:
//
//	Σ InertiaPerMWs·E + Σ Response[s]·R_s + DampingMW − (the lost one's own parts) ≥ MW lost.
//
// It is a limits.Row divided by its LossS.
type Row struct {
	Loss int  // index into Problem.Losses (Over: OverLosses); AnyLoss: a loss of at least MW
	Over bool // of the other side of nominal: Response is of the responses downwards
	MW   float64
	At   limits.Instant

	InertiaPerMWs float64
	Response      []float64 // one a shape
	DampingMW     float64   // at full demand
	DampingShare  float64   // MW less for each MW of load not served
	// The derivative of the left-hand side by the limit itself, per Hz (RoCoF: Hz/s), is
	// HzPerInertia·E_left + HzDamping.
	HzPerInertia float64
	HzDamping    float64
}

// AnyLoss marks a row that holds for whichever loss is the largest.
const AnyLoss = -1

// Row formulates an instant for a loss.
func (p *Problem) Row(loss int, r limits.Row) Row {
	inv := 1 / r.LossS
	row := Row{
		Loss: loss, At: r.At,
		InertiaPerMWs: r.InertiaPerMWs * inv,
		Response:      make([]float64, len(r.Response)),
		DampingMW:     r.DampingHz * p.Hour.DampingMWPerHz * inv,
	}
	for s, v := range r.Response {
		row.Response[s] = v * inv
	}
	if p.Hour.DemandMW > 0 {
		row.DampingShare = row.DampingMW / p.Hour.DemandMW
	}
	row.perHz(p.Limits)
	return row
}

// OverRow formulates an instant for a loss of load or export.
func (p *Problem) OverRow(loss int, r limits.Row) Row {
	inv := 1 / r.LossS
	row := Row{
		Loss: loss, Over: true, At: r.At,
		InertiaPerMWs: r.InertiaPerMWs * inv,
		Response:      make([]float64, len(r.Response)),
		DampingMW:     r.DampingHz * p.AboveDampingMWPerHz * inv,
	}
	for s, v := range r.Response {
		row.Response[s] = v * inv
	}
	if p.Hour.DemandMW > 0 {
		row.DampingShare = row.DampingMW / p.Hour.DemandMW
	}
	row.perHz(*p.Above)
	return row
}

func (r *Row) perHz(l limits.Limits) {
	switch r.At.Kind {
	case limits.RoCoF:
		r.HzPerInertia = r.InertiaPerMWs / l.MaxHzPerS
	case limits.Nadir:
		r.HzPerInertia = r.InertiaPerMWs / l.NadirHz
	case limits.Steady:
		r.HzPerInertia = r.InertiaPerMWs / l.SteadyHz
		r.HzDamping = r.DampingMW / l.SteadyHz
	}
}
