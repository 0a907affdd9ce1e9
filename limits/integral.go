package limits

import "math"

// Integral gives ∫ φ dτ over [from, to], in seconds; 0 if to ≤ from.
func (s Shape) Integral(from, to float64) float64 {
	return s.Weighted(from, to, 0)
}

// Weighted gives ∫ exp(−a0·(to−τ))·φ(τ) dτ over [from, to], in seconds; 0 if
// to ≤ from. a0 is in 1/s. It is the closed form of each linear piece, not a quadrature.
func (s Shape) Weighted(from, to, a0 float64) float64 {
	ps := s.points
	sum := 0.0
	for i := range ps {
		u, a := ps[i].s, ps[i].right
		if u >= to {
			break
		}
		v, b := to, a
		if i+1 < len(ps) {
			v, b = ps[i+1].s, ps[i+1].left
			if v <= from {
				continue
			}
			// Both ends are cut from the whole piece, never one from a cut one.
			if from > u {
				u, a = from, between(&ps[i], &ps[i+1], from)
			}
			if to < v {
				v, b = to, between(&ps[i], &ps[i+1], to)
			}
		} else if from > u {
			u = from
		}
		h := v - u
		if h <= 0 {
			continue
		}
		p1, p2 := pieceWeights(a0 * h)
		piece := h * (a*p1 + (b-a)*p2)
		if a0 != 0 {
			piece *= math.Exp(-a0 * (to - v))
		}
		sum += piece
	}
	return sum
}

// pieceWeights gives the weights of a linear piece of unit length, z = a0·h:
//
//	∫₀¹ e^(−z(1−x)) dx   = (1−e^(−z))/z
//	∫₀¹ e^(−z(1−x))·x dx = (z−1+e^(−z))/z²
//
// The second loses its digits to cancellation for small z, where its series is used.
func pieceWeights(z float64) (p1, p2 float64) {
	if z == 0 {
		return 1, 0.5
	}
	p1 = -math.Expm1(-z) / z
	if math.Abs(z) > 0.5 {
		return p1, (1 - p1) / z
	}
	// Σ (−z)^k/(k+2)!, k = 0…12, by Horner: the next term is below 1e-16 of the sum.
	p2 = 1.0
	for k := 14.0; k >= 3; k-- {
		p2 = 1 - p2*z/k
	}
	return p1, p2 / 2
}

// decayedS gives ∫₀ʰ e^(−a0·τ) dτ in seconds; h for a0 = 0.
func decayedS(h, a0 float64) float64 {
	p1, _ := pieceWeights(a0 * h)
	return h * p1
}
