// Package work runs a study's items of work over workers, in any order and over any
// interrupts, to the same results.
package work

import (
	"context"
	"sync"
	"sync/atomic"
)

// Items is the state of a study whose items do not know each other. Out[i] holds item i's
// result once Done[i] is set. It can be kept in a file and gone on with; T must then have
// exported fields only.
type Items[T any] struct {
	Done []bool
	Out  []T
}

// New prepares n items.
func New[T any](n int) *Items[T] { return &Items[T]{Done: make([]bool, n), Out: make([]T, n)} }

// Count counts the items that are done.
func (w *Items[T]) Count() int {
	n := 0
	for _, d := range w.Done {
		if d {
			n++
		}
	}
	return n
}

// Whole tells whether the state holds together, as one read from a file may not.
func (w *Items[T]) Whole(n int) bool { return w != nil && len(w.Done) == n && len(w.Out) == n }

// Run does the items that are not done yet. start is called once a worker and gives what does
// one item, so that a worker can keep memory from one to the next. progress is called after each
// item, from one goroutine at a time; it may be nil.
//
// An error of an item ends the run. When ctx ends, items begun and not finished stay undone and
// ctx's error is returned.
func (w *Items[T]) Run(ctx context.Context, workers int, start func() func(ctx context.Context, i int) (T, error), progress func()) error {
	var open []int
	for i, done := range w.Done {
		if !done {
			open = append(open, i)
		}
	}
	inner, stop := context.WithCancel(ctx)
	defer stop()
	var (
		next  atomic.Int64
		mutex sync.Mutex
		first error
		wait  sync.WaitGroup
	)
	for range min(max(workers, 1), max(len(open), 1)) {
		wait.Go(func() {
			do := start()
			for {
				n := int(next.Add(1)) - 1
				if n >= len(open) || inner.Err() != nil {
					return
				}
				i := open[n]
				out, err := do(inner, i)
				mutex.Lock()
				switch {
				case err == nil:
					w.Out[i], w.Done[i] = out, true
					if progress != nil {
						progress()
					}
				case inner.Err() == nil:
					first = err
					stop()
				}
				mutex.Unlock()
				if err != nil {
					return
				}
			}
		})
	}
	wait.Wait()
	switch {
	case first != nil:
		return first
	case w.Count() == len(w.Done):
		return nil
	}
	return ctx.Err()
}
