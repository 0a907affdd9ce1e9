package formulate

import (
	"math"
	"slices"

	"evenkeel/fleet"
)

// Point is an operating point of one unit: what it costs and what it puts into the rows.
type Point struct {
	Cost       float64 // currency per hour
	OutputMW   float64
	InertiaMWs float64
	ResponseMW float64
	DownMW     float64
}

// Points lists the operating points of a unit that is on and puts out at most capMW:
// every vertex of the polytope of (output, response, response downwards, synthetic inertia), subdivided
// at the steps of its marginal cost. Convex combinations of them are exactly what the
// unit can do when on. There is none where the unit cannot run under the cap.
//
// The set of outputs visited holds every output at which the cross-section in response
// and synthetic inertia changes its form; each cross-section is a box less a corner,
// and its vertices are listed, each without response downwards and with the most of it.
func Points(u *fleet.Unit, capMW float64) []Point {
	const eps = 1e-9
	top := min(u.MaxMW, capMW)
	if top < u.MinMW-eps || u.MinMW > u.HeadMW+eps {
		return nil
	}
	top = min(max(top, u.MinMW), u.HeadMW)
	head := 0.0 // MW of headroom that 1 MW of response takes
	if u.FromHead {
		head = 1
	}
	outputs := []float64{u.MinMW, top}
	visit := func(p float64) {
		if p > u.MinMW+eps && p < top-eps {
			outputs = append(outputs, p)
		}
	}
	for _, s := range u.Steps {
		visit(s.ToMW)
	}
	visit(0)
	synth := u.HeadPerMWs * u.SyntheticCapMWs
	visit(u.HeadMW - head*u.ResponseCapMW)
	visit(u.HeadMW - synth)
	visit(u.HeadMW - head*u.ResponseCapMW - synth)
	if share := u.ShareOfOutput; share > 0 {
		visit(u.ResponseCapMW / share)
		visit(u.HeadMW / (1 + head*share))
		visit((u.HeadMW - synth) / (1 + head*share))
	}
	if u.DownCapMW > 0 {
		visit(u.FootMW + u.DownCapMW)
		visit(u.FootMW)
	}
	slices.Sort(outputs)
	outputs = slices.CompactFunc(outputs, func(a, b float64) bool { return math.Abs(b-a) < eps })

	var points []Point
	for _, p := range outputs {
		room := max(u.HeadMW-p, 0)
		most := u.ResponseCapMW
		if u.ShareOfOutput > 0 {
			most = min(most, u.ShareOfOutput*max(p, 0))
		}
		if u.FromHead {
			most = min(most, room)
		}
		cost := u.OnCost + OutputCost(u.Steps, p)
		down := max(min(u.DownCapMW, p-u.FootMW), 0)
		add := func(response, synthetic float64) {
			pt := Point{
				Cost:       cost + u.ResponsePerMW*response + u.SyntheticPerMWs*synthetic,
				OutputMW:   p,
				InertiaMWs: u.InertiaMWs + synthetic,
				ResponseMW: response,
			}
			points = append(points, pt)
			if down > eps { // whatever else is held, as far as the foot-room goes
				pt.Cost += u.DownPerMW * down
				pt.DownMW = down
				points = append(points, pt)
			}
		}
		add(0, 0)
		if most > eps {
			add(most, 0)
		}
		if u.SyntheticCapMWs <= eps {
			continue
		}
		// The cross-section: response ≤ most, synthetic ≤ its cap, head·r + κ·e ≤ room.
		atMost := u.SyntheticCapMWs // synthetic inertia with no response
		if u.HeadPerMWs > 0 {
			atMost = min(atMost, room/u.HeadPerMWs)
		}
		if atMost <= eps {
			continue
		}
		add(0, atMost)
		if most <= eps {
			continue
		}
		beside := atMost // synthetic inertia next to the most response
		if u.HeadPerMWs > 0 {
			beside = min(beside, (room-head*most)/u.HeadPerMWs)
		}
		if beside > eps {
			add(most, beside)
		}
		if beside < atMost-eps {
			if r := room - u.HeadPerMWs*atMost; r > eps && r < most {
				add(r, atMost)
			}
		}
	}
	return points
}

// OutputCost is the cost of p MW for an hour under a convex marginal cost counted from
// 0 MW; the first step also prices negative output, the last holds beyond its end.
func OutputCost(steps []fleet.Step, p float64) float64 {
	if len(steps) == 0 {
		return 0
	}
	if p < 0 {
		return p * steps[0].CostPerMWh
	}
	cost, from := 0.0, 0.0
	for i, s := range steps {
		to := math.Inf(1)
		if i < len(steps)-1 {
			to = s.ToMW
		}
		if p <= to {
			return cost + (p-from)*s.CostPerMWh
		}
		cost += (to - from) * s.CostPerMWh
		from = to
	}
	return cost
}
