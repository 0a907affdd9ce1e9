package limits

import (
	"errors"
	"fmt"
	"math"
)

// Timing describes the usual kind of response shape by its times, in seconds: nothing
// until DelayS, a straight ramp over RampS to the whole response, a hold over HoldS
// (0: for ever), a straight withdrawal over WithdrawS to −RecoveryShare (0: to
// nothing), RecoveryS there and a straight return to nothing over ReturnS. A ramp of
// zero length is a jump.
type Timing struct {
	DelayS        float64
	RampS         float64
	HoldS         float64
	WithdrawS     float64
	RecoveryShare float64 // of the response, 0 to 1
	RecoveryS     float64
	ReturnS       float64
}

// Shape makes the shape that the timing describes. It refuses times that are negative
// or not finite, and times that another one makes meaningless.
func (t Timing) Shape() (Shape, error) {
	for _, v := range []struct {
		name string
		s    float64
	}{
		{"delay", t.DelayS}, {"ramp", t.RampS}, {"hold", t.HoldS}, {"withdrawal", t.WithdrawS},
		{"recovery", t.RecoveryS}, {"return", t.ReturnS},
	} {
		if !(v.s >= 0) || math.IsInf(v.s, 0) {
			return Shape{}, fmt.Errorf("the %s lasts %v s; it must be 0 s or more and finite", v.name, v.s)
		}
	}
	if !(t.RecoveryShare >= 0 && t.RecoveryShare <= 1) {
		return Shape{}, fmt.Errorf("the recovery share is %v; it must be between 0 and 1", t.RecoveryShare)
	}
	if t.HoldS == 0 && (t.WithdrawS > 0 || t.RecoveryShare > 0 || t.RecoveryS > 0 || t.ReturnS > 0) {
		return Shape{}, errors.New("the response is held for ever (hold 0 s), so it can neither withdraw nor recover; give a hold above 0 s")
	}
	if t.RecoveryShare == 0 && (t.RecoveryS > 0 || t.ReturnS > 0) {
		return Shape{}, errors.New("the recovery has times but no share; give a recovery share above 0 or leave its times out")
	}
	if t.RecoveryShare > 0 && t.WithdrawS == 0 && t.RecoveryS == 0 && t.ReturnS == 0 {
		return Shape{}, errors.New("the recovery has a share but lasts no time; give its times or leave the share out")
	}
	// A step too short to move the clock becomes a jump, and no jump has a third knot.
	knots := make([]Knot, 0, 7)
	now := 0.0
	to := func(afterS, share float64) {
		now += afterS
		n := len(knots)
		if n >= 2 && knots[n-1].S == now && knots[n-2].S == now {
			knots[n-1].Share = share
			return
		}
		knots = append(knots, Knot{now, share})
	}
	to(t.DelayS, 0)
	to(t.RampS, 1)
	if t.HoldS > 0 {
		to(t.HoldS, 1)
		to(t.WithdrawS, -t.RecoveryShare)
		if t.RecoveryShare > 0 {
			to(t.RecoveryS, -t.RecoveryShare)
			to(t.ReturnS, 0)
		}
	}
	return NewShape(knots)
}
