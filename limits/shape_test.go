package limits_test

import (
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/limits"
)

// mustShape makes a shape of knots known to be good.
func mustShape(t interface {
	Helper()
	Fatalf(string, ...any)
}, knots ...limits.Knot) limits.Shape {
	t.Helper()
	s, err := limits.NewShape(knots)
	if err != nil {
		t.Fatalf("NewShape(%v): %v", knots, err)
	}
	return s
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s is %.12g, want %.12g within %g", what, got, want, tol)
	}
}

// drawShape draws a shape whose knots lie on a coarse grid, so that jumps, equal times
// in several shapes and long level stretches are common.
func drawShape(t *rapid.T, label string) limits.Shape {
	n := rapid.IntRange(1, 6).Draw(t, label+" knots")
	var knots []limits.Knot
	at, same, best := 0.0, 0, 0.0
	for range n {
		step := rapid.SampledFrom([]float64{0, 0, 0.25, 0.5, 1, 1.7, 4, 9}).Draw(t, label+" step")
		if step == 0 && same == 2 {
			step = 0.3
		}
		at += step
		if step > 0 {
			same = 0
		}
		same++
		share := rapid.SampledFrom([]float64{0, 0, 1, 1, 0.5, 0.8, -0.4}).Draw(t, label+" share")
		knots = append(knots, limits.Knot{S: at, Share: share})
		best = math.Max(best, share)
	}
	s, err := limits.NewShape(knots)
	if err != nil {
		// Nothing delivered, or only inside the jump it starts with: end on all of it.
		s = mustShape(t, append(knots, limits.Knot{S: at + 1, Share: 1})...)
	}
	return s
}

func TestShapeValues(t *testing.T) {
	s := mustShape(t, limits.Knot{S: 1, Share: 0}, limits.Knot{S: 3, Share: 1}, limits.Knot{S: 5, Share: 1},
		limits.Knot{S: 5, Share: -0.5}, limits.Knot{S: 7, Share: -0.5}, limits.Knot{S: 8, Share: 0})
	for _, c := range []struct{ t, before, at float64 }{
		{-1, 0, 0}, {0, 0, 0}, {1, 0, 0}, {2, 0.5, 0.5}, {3, 1, 1}, {4, 1, 1}, {5, 1, -0.5}, {6, -0.5, -0.5},
		{7.5, -0.25, -0.25}, {8, 0, 0}, {100, 0, 0},
	} {
		near(t, "At", s.At(c.t), c.at, 1e-15)
		near(t, "Before", s.Before(c.t), c.before, 1e-15)
	}
	if !s.Withdraws() || !s.Recovery() {
		t.Error("the shape withdraws and recovers")
	}
	near(t, "FullActivationS", s.FullActivationS(), 3, 0)
	near(t, "HoldEnergyS", s.HoldEnergyS(), 3, 1e-15) // 2 s of ramp, 2 s of hold
	near(t, "Integral", s.Integral(0, 100), 3-1-0.25, 1e-14)
	near(t, "Integral from 2 to 6", s.Integral(2, 6), 0.75+2-0.5, 1e-14)
	near(t, "Integral inside one piece", s.Integral(1.5, 2.5), 0.5, 1e-14)
	near(t, "empty Integral", s.Integral(3, 3), 0, 0)
	near(t, "reversed Integral", s.Integral(4, 2), 0, 0)
	near(t, "LeastAfter 4", s.LeastAfter(4, 6), -0.5, 0)
	near(t, "LeastAfter up to a jump", s.LeastAfter(3, 5), 1, 0)
	near(t, "LeastAfter from a jump", s.LeastAfter(5, 5), -0.5, 0)
	near(t, "LeastAfter on a ramp", s.LeastAfter(2, 4), 0.5, 1e-15)
}

func TestShapeHeldForEver(t *testing.T) {
	s := mustShape(t, limits.Knot{S: 2, Share: 0}, limits.Knot{S: 12, Share: 1})
	if s.Withdraws() || s.Recovery() {
		t.Error("a ramp neither withdraws nor recovers")
	}
	if !math.IsInf(s.HoldEnergyS(), 1) {
		t.Errorf("HoldEnergyS = %v, want +Inf", s.HoldEnergyS())
	}
	near(t, "FullActivationS", s.FullActivationS(), 12, 0)
	near(t, "Integral", s.Integral(0, 20), 5+8, 1e-14)
}

func TestShapeHoldEnergyCountsOnlyWhatIsDelivered(t *testing.T) {
	// Straight from 1 at 0 s to −1 at 4 s, back to 0 at 5 s: above zero for 2 s.
	s := mustShape(t, limits.Knot{S: 0, Share: 1}, limits.Knot{S: 4, Share: -1}, limits.Knot{S: 5, Share: 0})
	near(t, "HoldEnergyS", s.HoldEnergyS(), 1, 1e-15)
}

func TestZeroShapeDeliversNothing(t *testing.T) {
	var s limits.Shape
	for _, v := range []float64{s.At(1), s.Before(1), s.Integral(0, 9), s.Weighted(0, 9, 1), s.LeastAfter(0, 9), s.HoldEnergyS(), s.FullActivationS()} {
		near(t, "a value of the zero shape", v, 0, 0)
	}
}

func TestNewShapeRefuses(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		name  string
		knots []limits.Knot
		says  string
	}{
		{"none", nil, "no knots"},
		{"never", []limits.Knot{{S: 0, Share: 0}, {S: 5, Share: -0.2}}, "never delivers"},
		{"inside a first jump only", []limits.Knot{{S: 1, Share: 1}, {S: 1, Share: 0}}, "never delivers"},
		{"back in time", []limits.Knot{{S: 5, Share: 0}, {S: 2, Share: 1}}, "order of time"},
		{"three at once", []limits.Knot{{S: 2, Share: 0}, {S: 2, Share: 1}, {S: 2, Share: 0.5}}, "third"},
		{"negative time", []limits.Knot{{S: -1, Share: 1}}, "between 0 and"},
		{"endless time", []limits.Knot{{S: math.Inf(1), Share: 1}}, "between 0 and"},
		{"no time", []limits.Knot{{S: nan, Share: 1}}, "between 0 and"},
		{"share above one", []limits.Knot{{S: 0, Share: 1.01}}, "between -1 and 1"},
		{"no share", []limits.Knot{{S: 0, Share: nan}}, "between -1 and 1"},
	} {
		if _, err := limits.NewShape(c.knots); err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: error %v, want one with %q", c.name, err, c.says)
		}
	}
}

func TestShapeEqual(t *testing.T) {
	a := mustShape(t, limits.Knot{S: 1, Share: 0}, limits.Knot{S: 3, Share: 1})
	same := mustShape(t, limits.Knot{S: 0, Share: 0}, limits.Knot{S: 1, Share: 0}, limits.Knot{S: 2, Share: 0.5},
		limits.Knot{S: 3, Share: 1}, limits.Knot{S: 9, Share: 1})
	other := mustShape(t, limits.Knot{S: 1, Share: 0}, limits.Knot{S: 3, Share: 1}, limits.Knot{S: 9, Share: 0})
	if !a.Equal(same) || !same.Equal(a) {
		t.Error("further knots on the same line do not change a shape")
	}
	if a.Equal(other) || other.Equal(a) {
		t.Error("a later withdrawal changes a shape")
	}
}

func TestKnotsMakeTheSameShape(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawShape(t, "shape")
		again, err := limits.NewShape(s.Knots())
		if err != nil || !again.Equal(s) {
			t.Fatalf("%v → %v, %v", s.Knots(), again.Knots(), err)
		}
	})
}

func TestLeastAfterIsTheLeast(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawShape(t, "shape")
		from := float64(rapid.IntRange(0, 40).Draw(t, "from")) / 4
		until := from + float64(rapid.IntRange(0, 40).Draw(t, "length"))/4
		least := s.LeastAfter(from, until)
		reached := false
		const n = 400
		for i := 0; i <= n; i++ {
			at := from + (until-from)*float64(i)/n
			if v := s.At(at); i < n && v < least-1e-12 {
				t.Fatalf("φ(%v) = %v lies below the least, %v", at, v, least)
			}
		}
		ks := append(s.Knots(), limits.Knot{S: from}, limits.Knot{S: until})
		for _, k := range ks {
			if k.S >= from && k.S <= until && (s.At(k.S) == least || s.Before(k.S) == least) {
				reached = true
			}
		}
		if !reached {
			t.Fatalf("the least, %v, is reached nowhere", least)
		}
	})
}
