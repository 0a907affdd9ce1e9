package limits

import "math"

// sweep follows y' = net − a0·y from y(0) = 0, held at or above zero, and gives the
// largest y outside of the steady band's time, and that at its start; alone: the largest up
// to the horizon, and within the steady band's time. y·f0/(2·E) bounds the
// deviation. Each span starts at the last instant with y = 0 before the largest y, so
// that its row is the tightest that ends there. Where y never leaves zero, the span
// starts at the loss and its integral is below zero.
func (s *Scan) sweep(alone bool) (nadir, back span) {
	net := s.net
	a0 := s.a0
	y, zeroS := 0.0, 0.0
	for j := range s.pieces {
		p := &s.pieces[j]
		if p.h == 0 {
			continue
		}
		n0, n1 := net[j], net[j+1]
		steady := alone && j >= s.by && j < s.until
		watched := alone || j < s.by || j >= s.until
		end := y*p.decay + n0*p.c1 + (n1-n0)*p.c2
		rate0, rate1 := n0-a0*y, n1-a0*end // of y; it changes sign at most once in a piece
		fell := end < 0
		if rate0 > 0 && rate1 < 0 {
			t := turn(rate0, (n1-n0)/p.h, a0, p.h)
			top := span{ahead(y, n0, (n1-n0)/p.h, a0, t), zeroS, s.atS[j] + t}
			if watched && top.mws > nadir.mws {
				nadir = top
			}
			if steady && top.mws > back.mws {
				back = top
			}
		} else if !fell && rate0 < 0 && rate1 > 0 {
			slope := (n1 - n0) / p.h
			fell = ahead(y, n0, slope, a0, turn(rate0, slope, a0, p.h)) < 0
		}
		switch {
		case fell && n1 > 0:
			// Held at zero until the imbalance turns positive, then up along a straight line.
			wait := p.h * (math.Max(-n0, 0) / (n1 - n0))
			zeroS = s.atS[j] + wait
			y = ahead(0, 0, (n1-n0)/p.h, a0, p.h-wait)
		case fell || end == 0:
			zeroS, y = s.atS[j+1], 0
		default:
			y = end
		}
		if watched && y > nadir.mws {
			nadir = span{y, zeroS, s.atS[j+1]}
		}
		if (j+1 == s.by || alone && j+1 > s.by && j < s.until) && y > back.mws {
			back = span{y, zeroS, s.atS[j+1]}
		}
	}
	if nadir.mws <= 0 {
		nadir = s.unheld(len(net) - 1)
	}
	if back.mws <= 0 {
		node := s.by
		if s.atS[node] == 0 { // no interval ends there
			node = len(net) - 1
		}
		back = s.unheld(node)
	}
	return nadir, back
}

// unheld is the span from the loss to a node, y not held at zero.
func (s *Scan) unheld(node int) span {
	y := 0.0
	for j := range s.pieces[:node] {
		p := &s.pieces[j]
		y = y*p.decay + s.net[j]*p.c1 + (s.net[j+1]-s.net[j])*p.c2
	}
	return span{y, 0, s.atS[node]}
}

// turn gives the time at which y' = rate·e^(−a0·t) + slope·(1−e^(−a0·t))/a0 is zero,
// held within [0, h]: log1p(−a0·rate/slope)/a0, or −rate/slope without damping.
func turn(rate, slope, a0, h float64) float64 {
	t := -rate / slope
	if z := a0 * t; z > 1e-9 {
		t = math.Log1p(z) / a0
	} else {
		t *= 1 - z/2
	}
	// A slope that vanishes beside its rate leaves no number: the turn is at an end.
	if !(t < h) {
		return h
	}
	return math.Max(t, 0)
}

// ahead gives y after t seconds of an imbalance that starts at net and has a slope.
func ahead(y, net, slope, a0, t float64) float64 {
	z := a0 * t
	p1, p2 := pieceWeights(z)
	return y*(1-z*p1) + t*(net*p1+slope*t*p2)
}
