package solve

import (
	"context"
	"fmt"
	"io"
	"time"

	"evenkeel/fleet"
	"evenkeel/formulate"
	"evenkeel/limits"
)

// Model writes the whole problem of one hour as MPS: every instant at which the
// optimiser found a row, and a coarse grid of further ones, for every possible loss.
func (s *Solver) Model(ctx context.Context, h *fleet.Hour, w io.Writer) error {
	p, q, err := s.search(ctx, h, nil, nil)
	if err != nil {
		return err
	}
	comments := []string{
		fmt.Sprintf("%s, hour %d, %s", s.c.Name, h.Index, h.Time.UTC().Format(time.RFC3339)),
		"The least of 'cost' is the cost of the hour per hour, in the currency of the case.",
		"on_C_I: unit I of class C is on; mw_C_I_S: its output above the minimum, step S; response_C_I: MW held;",
		"synthetic_C_I: MW.s of synthetic inertia; unserved, excess: MW off balance; short_LIMIT: MW of a loss not covered;",
		"cover_T_LIMIT: MW of loss covered at instant T; loss_T_K_I: loss K (of unit I) at instant T.",
		"down_C_I: MW held downwards; over_T_K_I: load loss K at instant T; short_over_LIMIT as above.",
	}
	for c := range p.Classes {
		comments = append(comments, fmt.Sprintf("class %d: %s", c, s.c.Resources[p.Classes[c].Unit].Name))
	}
	for k := range p.Losses {
		comments = append(comments, fmt.Sprintf("loss %d: %s", k, p.Losses[k].Name))
	}
	for k := range p.OverLosses {
		comments = append(comments, fmt.Sprintf("load loss %d: %s", k, p.OverLosses[k].Name))
	}
	var at []limits.Instant
	var over []limits.Instant
	for _, f := range q.sep.order {
		if f.over {
			over = append(over, f.at)
		} else {
			at = append(at, f.at)
		}
	}
	return p.Model(append(at, p.Grid()...), over).WriteMPS(w, fmt.Sprintf("hour_%d", h.Index), comments)
}

// search solves an hour. The damping bound supposes that the load is served and the
// balance met. Where the cheapest mix does neither, two problems share the hour between
// them: mixes that meet the balance, with damping in their rows, and all mixes without it.
// The cheaper answer stands, with the lower of the two bounds.
//
// shapes, if given, replace those of the case. Commitments of near are tried first.
func (s *Solver) search(ctx context.Context, h *fleet.Hour, shapes []limits.Shape, near []*Trail) (*formulate.Problem, *search, error) {
	p := formulate.Build(s.c, h)
	if shapes != nil {
		p.Shapes = shapes
	}
	p.WithoutLimits = s.opt.WithoutLimits
	if s.opt.SteadyOnly {
		p.SteadyOnly()
	}
	q, met, err := s.searchOne(ctx, p, near)
	if err != nil || met || p.DampingA0 == 0 || p.WithoutLimits {
		return p, q, err
	}
	undamped := *p
	undamped.DampingA0 = 0
	q, _, err = s.searchOne(ctx, &undamped, near)
	if err != nil {
		return nil, nil, err
	}
	served := *p
	served.UnservedPerMWh *= offBalance
	r, met, err := s.searchOne(ctx, &served, near)
	if err != nil {
		return nil, nil, err
	}
	bound := min(q.bound(), r.bound())
	if met && r.best < q.best {
		r.pruned = min(r.pruned, bound)
		return &served, r, nil
	}
	q.pruned = min(q.pruned, bound)
	return &undamped, q, nil
}

// offBalance makes a mix that is off balance too dear to be of use.
const offBalance = 1000

// searchOne solves one problem and tells whether its mix meets the balance.
func (s *Solver) searchOne(ctx context.Context, p *formulate.Problem, near []*Trail) (*search, bool, error) {
	q := newSearch(p, s.opt)
	q.near = near
	if err := q.run(ctx); err != nil {
		return nil, false, err
	}
	st, excess := q.mix()
	return q, st.unserved <= shortTolMW && excess <= shortTolMW, nil
}
