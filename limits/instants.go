package limits

// side is an instant, before or after what may jump there.
type side struct {
	s      float64
	before bool
}

// instants are sides of instants at which the response delivered is compared.
type instants struct {
	at     []side
	shares []float64 // instant by instant, one share a shape
	shapes int
}

// sidesBetween keeps those nodes between the first nodes at two instants at which shapes
// may deliver least: a node at which every shape delivers at least what it does at
// another is left out.
func (s *Scan) sidesBetween(from, until int) instants {
	nodes := len(s.atS)
	last := until // before a jump there
	if s.left[from] && from+1 < nodes {
		from++ // after a jump there
		last = max(last, from)
	}
	in := instants{shapes: len(s.shapes)}
	for j := from; j <= last; j++ {
		beaten := false
		for k := from; k <= last && !beaten; k++ {
			beaten = k != j && s.covers(j, k) && (k < j || !s.covers(k, j))
		}
		if beaten {
			continue
		}
		in.at = append(in.at, side{s.atS[j], s.left[j]})
		for i := range s.shapes {
			in.shares = append(in.shares, s.shares[i*nodes+j])
		}
	}
	return in
}

// covers tells whether no shape delivers less at node j than at node k.
func (s *Scan) covers(j, k int) bool {
	for i := range s.shapes {
		if s.shares[i*len(s.atS)+j] < s.shares[i*len(s.atS)+k] {
			return false
		}
	}
	return true
}

// least gives the instant with the least response delivered, and the MW delivered.
func (in *instants) least(responseMW []float64) (at side, mw float64) {
	for i := range in.at {
		sum := 0.0
		for k, share := range in.shares[i*in.shapes:][:in.shapes] {
			sum += share * responseMW[k]
		}
		if i == 0 || sum < mw {
			at, mw = in.at[i], sum
		}
	}
	return at, mw
}
