package dynamic

import "math"

// lump is one unit of the system prepared for integration: rates instead of lags.
type lump struct {
	kind     Kind
	n        float64
	k        float64 // MW per Hz of deviation beyond the deadband
	band     float64
	up, down float64
	rate     float64 // MW/s; 0: not limited

	r1, r2, r3 float64 // 1/lag of the stages, 0: none
	hp         float64 // share before r3 (Steam)
	lead       float64 // direct share of the transient droop (Hydro)
	delay      float64
	mwsPerHz   float64 // Synthetic: 2·E/f0

	at     int // first state
	states int
	cursor int // into the history, for delay
	p      float64
}

func (l *lump) prepare(u *Unit, f0 float64, at int) {
	m := u.Model
	gain := m.Gain
	if gain == 0 {
		gain = 1
	}
	*l = lump{kind: m.Kind, n: u.N, band: m.DeadbandHz, up: max(u.UpMW, 0), down: max(u.DownMW, 0), rate: m.RatePctPerS / 100 * u.RatingMW, at: at, hp: 1}
	if m.DroopPct > 0 {
		l.k = gain * u.RatingMW * 100 / (m.DroopPct * f0)
	}
	inverse := func(x float64) float64 {
		if x > 0 {
			l.states++
			return 1 / x
		}
		return 0
	}
	switch m.Kind {
	case Steam:
		l.r1, l.r2 = inverse(m.GovernorS), inverse(m.ChestS)
		if m.HighPressureShare < 1 && m.ReheatS > 0 {
			l.hp, l.r3 = m.HighPressureShare, inverse(m.ReheatS)
		}
	case Gas:
		l.r1, l.r2, l.r3 = inverse(m.GovernorS), inverse(m.FuelS), inverse(m.TurbineS)
	case Hydro:
		l.r1 = inverse(m.GovernorS)
		l.lead = 1
		if m.TransientDroopPct > m.DroopPct {
			l.lead = m.DroopPct / m.TransientDroopPct
			l.r2 = inverse(m.DashpotS / l.lead)
		}
		l.r3 = inverse(m.WaterS / 2)
	case Droop:
		l.r1 = inverse(m.LagS)
		l.delay = m.DelayS
	case Synthetic:
		l.r1 = inverse(m.FilterS)
		l.mwsPerHz = 2 * u.SyntheticMWs / f0
	}
}

// asked is what droop asks for at a deviation.
func (l *lump) asked(x float64) float64 {
	switch {
	case x > l.band:
		return min(l.k*(x-l.band), l.up)
	case x < -l.band:
		return max(l.k*(x+l.band), -l.down)
	}
	return 0
}

func (l *lump) limited(v float64) float64 {
	if l.rate > 0 {
		return min(max(v, -l.rate), l.rate)
	}
	return v
}

// derive gives what one unit delivers at a deviation x (as it measures it) and fills in the
// derivatives of its states.
func (l *lump) derive(x float64, y, dy []float64) float64 {
	i := l.at
	stage := func(in, r float64) float64 {
		if r == 0 {
			return in
		}
		out := y[i]
		dy[i] = (in - out) * r
		i++
		return out
	}
	switch l.kind {
	case Synthetic:
		// The filter's own slope: r·(x − filtered).
		slope := (x - y[i]) * l.r1
		dy[i] = slope
		return min(max(l.mwsPerHz*slope, -l.down), l.up)
	case Step:
		return 0 // a straight line between instants, see Simulator.line
	}
	u := l.asked(x)
	if l.kind == Hydro {
		if l.r2 > 0 { // transient droop: (1 + TR·s)/(1 + TR/lead·s)
			w := y[i+1]
			dy[i+1] = (u - w) * l.r2
			u = w + l.lead*(u-w)
		}
		gate := y[i]
		d := l.limited((u - gate) * l.r1)
		dy[i] = d
		if l.r3 == 0 {
			return gate
		}
		j := i + 1
		if l.r2 > 0 {
			j++
		}
		flow := y[j]
		dy[j] = (gate - flow) * l.r3
		return 3*flow - 2*gate
	}
	v := u
	if l.r1 > 0 {
		v = y[i]
		dy[i] = l.limited((u - v) * l.r1)
		i++
	}
	v = stage(v, l.r2)
	if l.kind == Steam && l.r3 > 0 {
		return l.hp*v + (1-l.hp)*stage(v, l.r3)
	}
	return stage(v, l.r3)
}

// room weighs a state's error: MW of all units.
func (l *lump) weight() float64 {
	if l.kind == Synthetic {
		return l.n * l.mwsPerHz * l.r1
	}
	return l.n
}

func isInf(x float64) bool { return math.IsInf(x, 0) }
