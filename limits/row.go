package limits

// Instant says where in time a limit is tested: over an interval after the loss, or at
// one instant (FromS = ToS).
type Instant struct {
	Kind Kind
	// Balance, for Steady only, tests that response and damping together carry the loss
	// at SteadyHz; otherwise Steady tests that frequency is back within SteadyHz.
	Balance bool
	// Before, where FromS = ToS, tests the side before a jump of a shape, not the one after.
	Before bool
	FromS  float64 // seconds after the loss
	ToS    float64
}

// Row is one linear row that keeps a limit at one instant after one loss:
//
//	InertiaPerMWs·E + Σ Response[s]·R_s + DampingHz·D ≥ LossS·P,
//
// E being the kinetic energy left after the loss (MW·s), R_s the MW left of the
// response with shape s, D the damping of the load (MW/Hz) and P the MW lost.
type Row struct {
	At            Instant
	InertiaPerMWs float64   // 2·X/f0, X the drop allowed; 1/s where the row is at one instant
	LossS         float64   // seconds; 1 where the row is at one instant
	DampingHz     float64   // Hz; 0 save for a balance
	Response      []float64 // one a shape; seconds, or the share delivered where the row is at one instant
}

// Row gives the row that keeps the limits l at an instant, for responses of the given
// shapes. a0 (1/s) is a lower bound of D·f0/(2·E); 0 leaves damping out.
//
//   - RoCoF over an interval no longer than WindowS: the drop within it is at most
//     MaxHzPerS·WindowS. Damping is left out, which is safe since deviation is never
//     below zero. An interval shorter than the window counts in full because frequency
//     was at rest for the remainder of the window: it starts at the loss, or where
//     response has brought frequency back to nominal.
//   - RoCoF at one instant: the rate there is at most MaxHzPerS.
//   - Nadir and the return to the steady band: the drop at ToS, counted from FromS, is
//     at most NadirHz or SteadyHz.
//   - Balance: the response at ToS and damping at SteadyHz carry the loss.
func (l Limits) Row(at Instant, shapes []Shape, a0 float64) Row {
	r := Row{At: at, Response: make([]float64, len(shapes))}
	switch {
	case at.Balance, at.Kind == RoCoF && at.ToS <= at.FromS:
		r.LossS = 1
		if at.Balance {
			r.DampingHz = l.SteadyHz
		} else {
			r.InertiaPerMWs = 2 * l.MaxHzPerS / l.NominalHz
		}
		for i, s := range shapes {
			if at.Before {
				r.Response[i] = s.Before(at.ToS)
			} else {
				r.Response[i] = s.At(at.ToS)
			}
		}
		return r
	case at.Kind == RoCoF:
		a0 = 0
	}
	r.InertiaPerMWs = 2 * l.dropHz(at.Kind) / l.NominalHz
	r.LossS = decayedS(at.ToS-at.FromS, a0)
	for i, s := range shapes {
		r.Response[i] = s.Weighted(at.FromS, at.ToS, a0)
	}
	return r
}

// dropHz is the drop that a limit of the given kind allows over an interval, in Hz.
func (l Limits) dropHz(k Kind) float64 {
	switch k {
	case RoCoF:
		return l.MaxHzPerS * l.WindowS
	case Nadir:
		return l.NadirHz
	default:
		return l.SteadyHz
	}
}

// ExcessMW gives the MW of the loss that the row does not cover: above 0 the row is
// broken, below 0 that much more could be lost. responseMW has one entry a shape.
func (r Row) ExcessMW(lossMW, inertiaMWs float64, responseMW []float64, dampingMWPerHz float64) float64 {
	sum := r.LossS*lossMW - r.InertiaPerMWs*inertiaMWs - r.DampingHz*dampingMWPerHz
	for i, share := range r.Response {
		sum -= share * responseMW[i]
	}
	return sum / r.LossS
}
