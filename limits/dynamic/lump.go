package dynamic

// lump is all units of one model prepared for integration: rates instead of lags. Behind what
// droop asks for, a chain of lags is linear, so units of any size and room share it. Rate
// limits and synthetic inertia are not: their units share a lump only where they are alike.
type lump struct {
	model *Model
	kind  Kind
	parts []part
	band  float64
	rate  float64 // MW/s of all units; 0: not limited

	r1, r2, r3 float64 // 1/lag of the stages, 0: none
	hp         float64 // share before r3 (Steam)
	lead       float64 // direct share of the transient droop (Hydro)
	delay      float64
	mwsPerHz   float64 // Synthetic: 2·E/f0 of all units
	up, down   float64 // MW of all units
	gone       bool    // no unit is left
	reach      float64 // beyond the deadband, from where on all units are at their room

	at     int // first state
	states int
	cursor int // into the history, for delay
	p      float64
}

// part is N units alike in a lump.
type part struct {
	n, k     float64 // units; MW per Hz of deviation beyond the deadband, of one
	up, down float64 // MW of one
	rate     float64 // MW/s of one
	mwsPerHz float64 // of one
}

func partOf(u *Unit, f0 float64) part {
	m := u.Model
	gain := m.Gain
	if gain == 0 {
		gain = 1
	}
	p := part{n: u.N, up: max(u.UpMW, 0), down: max(u.DownMW, 0), rate: m.RatePctPerS / 100 * u.RatingMW, mwsPerHz: 2 * u.SyntheticMWs / f0}
	if m.DroopPct > 0 {
		p.k = gain * u.RatingMW * 100 / (m.DroopPct * f0)
	}
	return p
}

// takes tells whether another part may share the lump; exactly: so that its own delivery
// can be told from the lump's by its room.
func (l *lump) takes(m *Model, p *part, exactly bool) bool {
	if l.model != m || m.Kind == Step {
		return false
	}
	q := &l.parts[0]
	switch {
	case m.Kind == Synthetic:
		return p.up == q.up && p.down == q.down && p.mwsPerHz == q.mwsPerHz
	case m.RatePctPerS > 0:
		return p.up == q.up && p.down == q.down && p.rate == q.rate && p.k == q.k
	}
	return !exactly || p.up*q.k == q.up*p.k && p.down*q.k == q.down*p.k
}

// total sums up what hangs on the number of units.
func (l *lump) total() {
	l.rate, l.mwsPerHz, l.up, l.down, l.reach = 0, 0, 0, 0, 0
	l.gone = true
	for i := range l.parts {
		p := &l.parts[i]
		l.gone = l.gone && p.n <= 0
		l.rate += p.n * p.rate
		l.mwsPerHz += p.n * p.mwsPerHz
		l.up += p.n * p.up
		l.down += p.n * p.down
		if p.k > 0 {
			l.reach = max(l.reach, max(p.up, p.down)/p.k)
		}
	}
}

func (l *lump) prepare(m *Model, at int) {
	parts := l.parts[:0]
	*l = lump{model: m, kind: m.Kind, parts: parts, band: m.DeadbandHz, at: at, hp: 1}
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
	}
}

// asked is what droop asks for at a deviation, of all units.
func (l *lump) asked(x float64) float64 {
	sum := 0.0
	switch {
	case x > l.band:
		x -= l.band
		if x >= l.reach {
			return l.up
		}
		for i := range l.parts {
			p := &l.parts[i]
			sum += p.n * min(p.k*x, p.up)
		}
	case x < -l.band:
		x += l.band
		if -x >= l.reach {
			return -l.down
		}
		for i := range l.parts {
			p := &l.parts[i]
			sum += p.n * max(p.k*x, -p.down)
		}
	}
	return sum
}

func (l *lump) limited(v float64) float64 {
	if l.rate > 0 {
		return min(max(v, -l.rate), l.rate)
	}
	return v
}

// derive gives what all units deliver at a deviation x (as it measures it) and fills in the
// derivatives of its states.
func (l *lump) derive(x float64, y, dy []float64) float64 {
	i := l.at
	if l.gone {
		clear(dy[i : i+l.states])
		return 0
	}
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

// weight weighs a state's error in MW.
func (l *lump) weight() float64 {
	if l.kind == Synthetic {
		return l.mwsPerHz * l.r1
	}
	return 1
}
