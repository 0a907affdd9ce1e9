package limits_test

import (
	"math"
	"strings"
	"testing"

	"evenkeel/limits"
)

func TestTiming(t *testing.T) {
	for _, c := range []struct {
		name   string
		timing limits.Timing
		want   []limits.Knot
	}{
		{"at once, for ever", limits.Timing{}, []limits.Knot{{S: 0, Share: 1}}},
		{"delay and ramp", limits.Timing{DelayS: 2, RampS: 8}, []limits.Knot{{S: 2, Share: 0}, {S: 10, Share: 1}}},
		{"step", limits.Timing{DelayS: 0.5}, []limits.Knot{{S: 0.5, Share: 0}, {S: 0.5, Share: 1}}},
		{"hold and jump out", limits.Timing{RampS: 1, HoldS: 30},
			[]limits.Knot{{S: 0, Share: 0}, {S: 1, Share: 1}, {S: 31, Share: 1}, {S: 31, Share: 0}}},
		{"the whole of it", limits.Timing{DelayS: 1, RampS: 1, HoldS: 8, WithdrawS: 5, RecoveryShare: 0.4, RecoveryS: 10, ReturnS: 2},
			[]limits.Knot{{S: 1, Share: 0}, {S: 2, Share: 1}, {S: 10, Share: 1}, {S: 15, Share: -0.4}, {S: 25, Share: -0.4}, {S: 27, Share: 0}}},
		{"all jumps", limits.Timing{DelayS: 1, HoldS: 4, RecoveryShare: 0.5, RecoveryS: 2},
			[]limits.Knot{{S: 1, Share: 0}, {S: 1, Share: 1}, {S: 5, Share: 1}, {S: 5, Share: -0.5}, {S: 7, Share: -0.5}, {S: 7, Share: 0}}},
		{"recovery that returns straight away", limits.Timing{HoldS: 4, RecoveryShare: 0.5, ReturnS: 2},
			[]limits.Knot{{S: 0, Share: 1}, {S: 4, Share: 1}, {S: 4, Share: -0.5}, {S: 6, Share: 0}}},
		{"a ramp below the clock's rounding is a jump", limits.Timing{DelayS: 1e6, RampS: 1e-12}, []limits.Knot{{S: 1e6, Share: 0}, {S: 1e6, Share: 1}}},
	} {
		s, err := c.timing.Shape()
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if want := mustShape(t, c.want...); !s.Equal(want) {
			t.Errorf("%s: %v, want %v", c.name, s.Knots(), want.Knots())
		}
	}
}

func TestTimingRefuses(t *testing.T) {
	for _, c := range []struct {
		timing limits.Timing
		says   string
	}{
		{limits.Timing{DelayS: -1}, "delay lasts -1 s"},
		{limits.Timing{RampS: math.NaN()}, "ramp lasts NaN s"},
		{limits.Timing{HoldS: math.Inf(1)}, "hold lasts +Inf s"},
		{limits.Timing{HoldS: 1, RecoveryShare: 2, RecoveryS: 1}, "recovery share is 2"},
		{limits.Timing{WithdrawS: 5}, "held for ever"},
		{limits.Timing{HoldS: 5, RecoveryS: 5}, "times but no share"},
		{limits.Timing{HoldS: 5, RecoveryShare: 0.3}, "lasts no time"},
	} {
		if _, err := c.timing.Shape(); err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%+v: error %v, want one with %q", c.timing, err, c.says)
		}
	}
}
