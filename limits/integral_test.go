package limits_test

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
	"pgregory.net/rapid"

	"evenkeel/limits"
)

// drawInterval draws an interval that starts and ends on knots, between them or beyond.
func drawInterval(t *rapid.T) (from, to float64) {
	from = float64(rapid.IntRange(0, 60).Draw(t, "from"))/4 + rapid.SampledFrom([]float64{0, 0, 0.1}).Draw(t, "off")
	return from, from + rapid.SampledFrom([]float64{0.01, 0.25, 1, 3.3, 12, 50}).Draw(t, "length")
}

// TestWeightedAgainstQuadrature compares the closed form with Gauss–Legendre quadrature
// (gonum) of exp(−a0(to−τ))·φ(τ), piece by piece.
func TestWeightedAgainstQuadrature(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawShape(t, "shape")
		from, to := drawInterval(t)
		a0 := rapid.SampledFrom([]float64{0, 1e-12, 1e-7, 1e-3, 0.05, 0.3, 1, 4}).Draw(t, "a0")
		want := 0.0
		u := from
		piece := func(v float64) {
			v = math.Min(v, to)
			// Halves of a second keep the exponential within reach of 16 nodes.
			for u < v {
				w := math.Min(v, u+0.5)
				want += quad.Fixed(func(x float64) float64 { return math.Exp(-a0*(to-x)) * s.At(x) }, u, w, 16, nil, 0)
				u = w
			}
		}
		for _, k := range s.Knots() {
			piece(k.S)
		}
		piece(to)
		got := s.Weighted(from, to, a0)
		if !(math.Abs(got-want) <= 1e-11*(1+to-from)) {
			t.Fatalf("Weighted(%v, %v, %v) of %v = %.15g, quadrature gives %.15g", from, to, a0, s.Knots(), got, want)
		}
	})
}

// TestWeightedTendsToIntegral: for small a0 the two differ by no more than the weight
// does from 1, and the closed form loses no digits on the way there.
func TestWeightedTendsToIntegral(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawShape(t, "shape")
		from, to := drawInterval(t)
		whole := s.Integral(from, to)
		for a0 := 1e-2; a0 > 1e-22; a0 /= 10 {
			length := to - from
			diff := math.Abs(s.Weighted(from, to, a0) - whole)
			if bound := a0*length*length/2 + 1e-14*length; diff > bound {
				t.Fatalf("a0 = %g: Weighted is %g off Integral, more than %g", a0, diff, bound)
			}
		}
	})
}

func TestWeightedOfAStep(t *testing.T) {
	// ∫₀ᵗ e^(−a(t−τ)) dτ = (1−e^(−at))/a (computed).
	s := mustShape(t, limits.Knot{S: 0, Share: 1})
	for _, a := range []float64{1e-9, 0.01, 0.1, 2} {
		near(t, "Weighted", s.Weighted(0, 7, a), (1-math.Exp(-7*a))/a, 1e-6*a+1e-6)
		near(t, "Weighted", s.Weighted(0, 7, a), -math.Expm1(-7*a)/a, 1e-14*7)
	}
	// A jump at the start of the interval counts with its later side.
	step := mustShape(t, limits.Knot{S: 2, Share: 0}, limits.Knot{S: 2, Share: 1})
	near(t, "Integral from a jump", step.Integral(2, 5), 3, 0)
	near(t, "Integral up to a jump", step.Integral(0, 2), 0, 0)
}

func TestIntegralsDoNotAllocate(t *testing.T) {
	s := mustShape(t, limits.Knot{S: 1, Share: 0}, limits.Knot{S: 3, Share: 1}, limits.Knot{S: 9, Share: 0})
	sum := 0.0
	if n := testing.AllocsPerRun(100, func() { sum += s.Weighted(0, 20, 0.1) + s.Integral(0, 20) + s.At(4) }); n != 0 {
		t.Errorf("%v allocations, want none", n)
	}
}

func BenchmarkWeighted(b *testing.B) {
	s := mustShape(b, limits.Knot{S: 1, Share: 0}, limits.Knot{S: 3, Share: 1}, limits.Knot{S: 9, Share: 1}, limits.Knot{S: 12, Share: 0})
	sum := 0.0
	for b.Loop() {
		sum += s.Weighted(0, 20, 0.1)
	}
	_ = sum
}
