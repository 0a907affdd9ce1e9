package floor

import (
	"math"
	"slices"

	"evenkeel/limits"
	"evenkeel/study/ranges"
)

// Instruction is a line of an operating instruction: with HeldMW of a response held or more, as far
// as the chart goes, keep FloorMWs online after a loss of up to LossMW.
type Instruction struct {
	LossMW, HeldMW, FloorMWs float64
	By                       limits.Kind
}

const (
	enough = 1.02 // by how much the floor may still fall where more response is of no more use
	worth  = 1.05 // by how much it must fall up to there to be worth a line
	brink  = 1.5  // by how much it falls with a cell more response where the steady state is only just kept
)

// Instructions are the few cells of a chart that an operating instruction needs. The losses are
// those that half of the hours and nine in ten do not pass, and quarters of the largest, for those that
// are the largest in no hour; without a year, quarters of the chart; each on the chart's next cell. For
// each they give the least response with which some kinetic energy is enough, where a little more does
// not save much of it, and the response from which on more of it saves no more inertia. Each number
// covers all smaller losses and all more response on the chart. Where no kinetic energy is enough, the
// one line is the end of the chart.
func (r *Result) Instructions(chart int) []Instruction {
	k := &r.Charts[chart]
	var losses []float64
	if r.Year != nil {
		var lost []float64
		for _, h := range r.Year.Hours {
			lost = append(lost, h.Mix.LargestMW)
		}
		most := ranges.Quantile(lost, 1)
		losses = []float64{most / 4, most / 2, 3 * most / 4, ranges.Quantile(lost, 0.5), ranges.Quantile(lost, 0.9), most}
		slices.Sort(losses)
	} else {
		losses = []float64{k.Loss.At(k.Loss.N / 4), k.Loss.At(k.Loss.N / 2), k.Loss.At(3 * k.Loss.N / 4), k.Loss.To}
	}
	const rounding = 1e-9
	var out []Instruction
	last := -1
	for _, mw := range losses {
		i := 0
		for i+1 < k.Loss.N && k.Loss.At(i) < mw*(1-rounding) {
			i++
		}
		if i != last {
			out = append(out, k.instructions(i)...)
		}
		last = i
	}
	return out
}

// instructions are the lines for losses up to loss i of the chart.
func (k *Chart) instructions(i int) []Instruction {
	lines := make([]Instruction, k.Held.N) // one a response: what it and all more of it need
	for j := k.Held.N - 1; j >= 0; j-- {
		l := &lines[j]
		l.LossMW, l.HeldMW = k.Loss.At(i), k.Held.At(j)
		if j+1 < k.Held.N {
			l.FloorMWs, l.By = lines[j+1].FloorMWs, lines[j+1].By
		}
		for n := range i + 1 {
			if c := &k.Cells[n*k.Held.N+j]; c.FloorMWs > l.FloorMWs {
				l.FloorMWs, l.By = c.FloorMWs, c.By
			}
		}
	}
	end := lines[k.Held.N-1]
	if math.IsInf(end.FloorMWs, 1) {
		return []Instruction{end}
	}
	first := 0
	for math.IsInf(lines[first].FloorMWs, 1) {
		first++
	}
	for first+1 < k.Held.N && lines[first].By == limits.Steady && lines[first].FloorMWs > brink*lines[first+1].FloorMWs {
		first++
	}
	best := first
	for lines[best].FloorMWs > enough*end.FloorMWs {
		best++
	}
	if lines[first].FloorMWs <= worth*lines[best].FloorMWs {
		return lines[first : first+1]
	}
	return []Instruction{lines[first], lines[best]}
}
