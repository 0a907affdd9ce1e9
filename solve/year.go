package solve

import (
	"context"
	"slices"
	"sync"
	"sync/atomic"

	"evenkeel/fleet"
)

// Year is the state of a run over hours [From, To) of a case. Solved tells which hours are
// done; those of Without, the same hours without frequency limits, are done with them if
// Compare is set. All slices have To − From entries.
type Year struct {
	From, To int
	Compare  bool
	Solved   []bool
	Hours    []Hour
	Without  []Hour
}

// NewYear prepares hours [from, to) of a case.
func NewYear(from, to int, compare bool) *Year {
	y := &Year{From: from, To: to, Compare: compare, Solved: make([]bool, to-from), Hours: make([]Hour, to-from)}
	if compare {
		y.Without = make([]Hour, to-from)
	}
	return y
}

// Done counts the hours solved.
func (y *Year) Done() int {
	n := 0
	for _, s := range y.Solved {
		if s {
			n++
		}
	}
	return n
}

// Run solves the hours of y that are not solved yet, spread over workers. Every hour is
// solved by itself, so results do not depend on the number of workers nor on where a run
// was interrupted. progress is called after each hour, from one goroutine at a time.
//
// When ctx ends, hours begun but not finished stay unsolved and ctx's error is returned.
func (y *Year) Run(ctx context.Context, c *fleet.Case, opt Options, workers int, progress func()) error {
	with := New(c, opt)
	bare := opt
	bare.WithoutLimits, bare.RowsOnly = true, true
	without := New(c, bare)
	var open []int
	for i, done := range y.Solved {
		if !done {
			open = append(open, i)
		}
	}
	var next atomic.Int64
	var report sync.Mutex
	var wait sync.WaitGroup
	for range max(workers, 1) {
		wait.Go(func() {
			for {
				n := int(next.Add(1)) - 1
				if n >= len(open) || ctx.Err() != nil {
					return
				}
				i := open[n]
				h := c.Hour(y.From+i, fleet.HourOptions{StartSpreadH: opt.StartSpreadH})
				secure, err := with.Hour(ctx, h)
				if err != nil {
					return
				}
				var alone Hour
				if y.Compare {
					if alone, err = without.Hour(ctx, h); err != nil {
						return
					}
				}
				report.Lock()
				y.Hours[i] = secure
				if y.Compare {
					y.Without[i] = alone
				}
				y.Solved[i] = true
				if progress != nil {
					progress()
				}
				report.Unlock()
			}
		})
	}
	wait.Wait()
	if y.Done() == len(y.Solved) {
		return nil
	}
	return ctx.Err()
}

// AnyShort tells whether some hour is short.
func AnyShort(hours []Hour) bool {
	return slices.ContainsFunc(hours, func(h Hour) bool { return h.Status == Short })
}
