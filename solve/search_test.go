package solve

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"evenkeel/formulate"
)

// The search must find what trying every commitment finds.
func TestSearchAgainstEnumeration(t *testing.T) {
	hours := uint64(300)
	if testing.Short() {
		hours = 40
	}
	for seed := uint64(0); seed < hours; seed++ {
		rng := rand.New(rand.NewPCG(seed, 7))
		c, h := randomHour(rng, 5+rng.IntN(4))
		p := formulate.Build(c, h)
		want := bruteForce(p)
		for _, gap := range []float64{-1, 0.001} {
			s := newSearch(p, Options{Gap: gap})
			if err := s.run(context.Background()); err != nil {
				t.Fatal(err)
			}
			// Rows are met to within roundingShare of the largest loss at the instant of the
			// lowest frequency. A drop over fewer seconds weighs more in MW: up to 60 s over
			// about 1 s. No MW of a loss is dearer than the price of a shortfall.
			slack := 1e-7*(1+math.Abs(want)) + 60*roundingShare*s.m.shortMW*p.ShortPerMW
			if s.best < want-slack || s.best > want+max(gap, 1e-7)*math.Abs(s.best)+slack {
				t.Errorf("seed %d gap %g: cost %.8g, enumeration %.8g", seed, gap, s.best, want)
			}
			if s.bound() > want+slack {
				t.Errorf("seed %d gap %g: bound %.8g above the optimum %.8g", seed, gap, s.bound(), want)
			}
			if s.bound() < s.best-max(gap, 1e-7)*math.Abs(s.best)-slack {
				t.Errorf("seed %d gap %g: bound %.8g, cost %.8g", seed, gap, s.bound(), s.best)
			}
		}
	}
}

func BenchmarkRandomHour100(b *testing.B) {
	for i := 0; b.Loop(); i++ {
		rng := rand.New(rand.NewPCG(uint64(i%20), 9))
		c, h := randomHour(rng, 100)
		s := newSearch(formulate.Build(c, h), Options{})
		if err := s.run(context.Background()); err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(s.nodes), "nodes")
	}
}
