package invent

import (
	"hash/fnv"
	"math"
	"math/rand/v2"
)

// streams hands out independent random streams by name, so that a change to one part
// of the generator leaves the numbers of the others alone.
type streams uint64

func (s streams) of(name string) *rand.Rand {
	h := fnv.New64a()
	h.Write([]byte(name))
	return rand.New(rand.NewPCG(uint64(s), h.Sum64()))
}

func uniform(r *rand.Rand, low, high float64) float64 { return low + (high-low)*r.Float64() }

// spread is a lognormal factor with median 1, cut off at two standard deviations.
func spread(r *rand.Rand, sigma float64) float64 {
	return math.Exp(sigma * clamp(r.NormFloat64(), -2, 2))
}

func clamp(x, low, high float64) float64 { return math.Min(math.Max(x, low), high) }

// roundTo rounds x to a multiple of step.
func roundTo(x, step float64) float64 { return math.Round(x/step) * step }
