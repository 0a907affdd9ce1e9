package limits

import "slices"

// onset is an instant at which net imbalance turns positive and the undamped integral
// of the imbalance up to it.
type onset struct {
	s, mws float64
}

// steepestFirst gives the span with the largest rise within one RoCoF window where no
// shape withdraws: net imbalance never grows, so it starts at the loss and ends with
// the window or where the imbalance has gone.
func (s *Scan) steepestFirst() span {
	net, w := s.net, s.limits.WindowS
	sum := 0.0
	for j := range s.pieces {
		h, n0, n1 := s.pieces[j].h, net[j], net[j+1]
		switch {
		case s.atS[j] >= w, n0 <= 0 && net[0] > 0:
			return span{sum, 0, s.atS[j]}
		case n0 > 0 && n1 < 0 && h > 0:
			t := h * (n0 / (n0 - n1))
			return span{sum + t*n0/2, 0, s.atS[j] + t}
		}
		sum += h * (n0 + n1) / 2
	}
	return span{sum, 0, w}
}

// window is the start of a RoCoF window; up to the next start, window start and end
// each stay in one piece.
type window struct {
	fromS, toS     float64
	length         float64 // to the next start, s
	first, last    int     // the pieces of start and end
	inFirst, inEnd float64 // how far into them, s
}

// windowStarts lists the starts at which a RoCoF window begins or ends at a node.
func (s *Scan) windowStarts(windowS float64) []window {
	var at []float64
	lastS := s.atS[s.steep] - windowS
	for _, t := range s.atS {
		for _, from := range [2]float64{t, t - windowS} {
			if from >= 0 && from <= lastS {
				at = append(at, from)
			}
		}
	}
	slices.Sort(at)
	at = slices.Compact(at)
	ws := make([]window, len(at))
	for i, from := range at {
		w := window{fromS: from, toS: from + windowS}
		if i+1 < len(at) {
			w.length = at[i+1] - from
		}
		// By the middle, so that rounding of a start cannot pick the neighbour.
		w.first, w.inFirst = s.locate(from, w.length)
		w.last, w.inEnd = s.locate(w.toS, w.length)
		ws[i] = w
	}
	return ws
}

// locate gives the piece that holds the middle of [t, t+length] and how far into it t is.
func (s *Scan) locate(t, length float64) (j int, in float64) {
	for j < s.steep-1 && s.atS[j+1] <= t+length/2 {
		j++
	}
	return j, min(max(t-s.atS[j], 0), s.pieces[j].h)
}

// steepest gives the span with the largest rise within one RoCoF window at any time.
// It is a window in full, or shorter where the imbalance is positive for less than a
// window.
func (s *Scan) steepest() span {
	net, cum := s.net, s.cum
	starts := s.starts[:0]
	w := s.limits.WindowS
	best := span{}
	found := false
	try := func(sp span) {
		if !found || sp.mws > best.mws {
			best, found = sp, true
		}
	}
	if net[0] > 0 {
		starts = append(starts, onset{})
	}
	cum[0] = 0
	for j := range s.pieces[:s.steep] {
		h, n0, n1 := s.pieces[j].h, net[j], net[j+1]
		cum[j+1] = cum[j] + h*(n0+n1)/2
		switch {
		case n0 <= 0 && n1 > 0:
			t := h * (-n0 / (n1 - n0))
			starts = append(starts, onset{s.atS[j] + t, cum[j] + t*n0/2})
		case n0 > 0 && (n1 <= 0 || j == s.steep-1):
			t := h
			if n1 < 0 {
				t = h * (n0 / (n0 - n1))
			}
			endS := s.atS[j] + t
			endMWs := cum[j] + t*n0
			if h > 0 {
				endMWs -= t * t * (n0 - n1) / h / 2
			}
			for _, o := range starts {
				if endS > o.s && endS-o.s < w {
					try(span{endMWs - o.mws, o.s, endS})
				}
			}
		}
	}
	for i := range s.windows {
		v := &s.windows[i]
		a, slopeA := s.netAt(v.first, v.inFirst)
		b, slopeB := s.netAt(v.last, v.inEnd)
		rise := cum[v.last] + v.inEnd*(net[v.last]+b)/2 - cum[v.first] - v.inFirst*(net[v.first]+a)/2
		try(span{rise, v.fromS, v.toS})
		gain := b - a // by which the rise grows as the window moves on
		end := gain + (slopeB-slopeA)*v.length
		if gain > 0 && end < 0 {
			t := v.length * (gain / (gain - end))
			try(span{rise + t*gain/2, v.fromS + t, v.fromS + t + w})
		}
	}
	return best
}

// netAt gives the net imbalance and its slope some way into a piece.
func (s *Scan) netAt(j int, in float64) (net, slope float64) {
	if h := s.pieces[j].h; h > 0 {
		slope = (s.net[j+1] - s.net[j]) / h
	}
	return s.net[j] + slope*in, slope
}
