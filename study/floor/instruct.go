package floor

import (
	"math"

	"evenkeel/limits"
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
)

// Instructions are the few cells of a chart that an operating instruction needs. The losses are
// those that half of the hours, nine in ten and all of them do not pass, or thirds of the chart
// without a year, on the chart's next cell. For each they give the least response with which some
// kinetic energy is enough, and the response from which on more of it saves no more inertia. Each
// number covers all smaller losses and all more response on the chart.
func (r *Result) Instructions(chart int) []Instruction {
	k := &r.Charts[chart]
	losses := []float64{k.Loss.At(k.Loss.N / 3), k.Loss.At(2 * k.Loss.N / 3), k.Loss.To}
	if r.Year != nil {
		var lost []float64
		for _, h := range r.Year.Hours {
			lost = append(lost, h.Mix.LargestMW)
		}
		losses = []float64{quantileOf(lost, 0.5), quantileOf(lost, 0.9), quantileOf(lost, 1)}
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
	best := first
	for lines[best].FloorMWs > enough*end.FloorMWs {
		best++
	}
	if lines[first].FloorMWs <= worth*lines[best].FloorMWs {
		return lines[first : first+1]
	}
	return []Instruction{lines[first], lines[best]}
}
