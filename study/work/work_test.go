package work

import (
	"context"
	"errors"
	"testing"
)

// Results do not depend on workers nor on where a run was interrupted, and what is done stays.
func TestRunGoesOn(t *testing.T) {
	w := New[int](100)
	ctx, stop := context.WithCancel(context.Background())
	calls := 0
	square := func() func(context.Context, int) (int, error) {
		return func(ctx context.Context, i int) (int, error) { return i * i, ctx.Err() }
	}
	err := w.Run(ctx, 3, square, func() {
		if calls++; calls == 40 {
			stop()
		}
	})
	if !errors.Is(err, context.Canceled) || w.Count() < 40 || w.Count() > 43 {
		t.Fatalf("interrupted: %v after %d items", err, w.Count())
	}
	before := w.Count()
	if err := w.Run(context.Background(), 7, square, func() { before++ }); err != nil || before != 100 || w.Count() != 100 {
		t.Fatalf("went on: %v, %d items", err, before)
	}
	for i, v := range w.Out {
		if v != i*i {
			t.Fatalf("item %d is %d", i, v)
		}
	}
}

// An item's error ends the run and is the one reported.
func TestRunStopsAtAnError(t *testing.T) {
	w, broken := New[int](50), errors.New("broken")
	err := w.Run(context.Background(), 2, func() func(context.Context, int) (int, error) {
		return func(_ context.Context, i int) (int, error) {
			if i == 7 {
				return 0, broken
			}
			return i, nil
		}
	}, nil)
	if !errors.Is(err, broken) || w.Done[7] {
		t.Fatalf("%v", err)
	}
}
