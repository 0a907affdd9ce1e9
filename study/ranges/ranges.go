// Package ranges holds what studies share about ranges of values, quantiles and the year that they
// count up to.
package ranges

import (
	"math"
	"slices"
	"strconv"
	"strings"
)

// HoursAYear is what yearly figures are counted up to.
const HoursAYear = 8760

// Range is N values from From to To, evenly spread, both among them.
type Range struct {
	From, To float64
	N        int
}

// Parse reads A:B:N with finite A ≤ B and N from 1 to most.
func Parse(text string, most int) (Range, bool) {
	parts := strings.Split(text, ":")
	if len(parts) != 3 {
		return Range{}, false
	}
	from, err1 := strconv.ParseFloat(parts[0], 64)
	to, err2 := strconv.ParseFloat(parts[1], 64)
	n, err3 := strconv.Atoi(parts[2])
	ok := err1 == nil && err2 == nil && err3 == nil && to >= from && !math.IsInf(from, 0) && !math.IsInf(to, 0) && n >= 1 && n <= most
	return Range{from, to, n}, ok
}

// At gives value i. Of a single value it is To.
func (r Range) At(i int) float64 {
	if i >= r.N-1 {
		return r.To
	}
	return r.From + (r.To-r.From)*float64(i)/float64(r.N-1)
}

// Values gives all of them.
func (r Range) Values() []float64 {
	v := make([]float64, r.N)
	for i := range v {
		v[i] = r.At(i)
	}
	return v
}

// Quantile is the value that a share of values lies at or below (nearest rank, common practice); 0 of
// none.
func Quantile(values []float64, share float64) float64 {
	if len(values) == 0 {
		return 0
	}
	v := slices.Clone(values)
	slices.Sort(v)
	return v[min(max(int(math.Ceil(share*float64(len(v))))-1, 0), len(v)-1)]
}
