package limits

// instants are single instants at which the response delivered is compared.
type instants struct {
	atS    []float64
	shares []float64 // instant by instant, one share a shape
	shapes int
}

// newInstants keeps those times at which the shapes may deliver least: a time at which
// every shape delivers at least what it does at another is left out.
func newInstants(times []float64, shapes []Shape) instants {
	all := make([][]float64, len(times))
	for i, t := range times {
		all[i] = make([]float64, len(shapes))
		for k, sh := range shapes {
			all[i][k] = sh.Least(t)
		}
	}
	in := instants{shapes: len(shapes)}
	for i, t := range times {
		beaten := false
		for k := range times {
			if k != i && covers(all[i], all[k]) && (k < i || !covers(all[k], all[i])) {
				beaten = true
				break
			}
		}
		if !beaten {
			in.atS = append(in.atS, t)
			in.shares = append(in.shares, all[i]...)
		}
	}
	return in
}

// covers tells whether no entry of a is below that of b.
func covers(a, b []float64) bool {
	for i := range a {
		if a[i] < b[i] {
			return false
		}
	}
	return true
}

// least gives the instant with the least response delivered, and the MW delivered.
func (in *instants) least(responseMW []float64) (atS, mw float64) {
	for i, t := range in.atS {
		sum := 0.0
		for k, share := range in.shares[i*in.shapes:][:in.shapes] {
			sum += share * responseMW[k]
		}
		if i == 0 || sum < mw {
			atS, mw = t, sum
		}
	}
	return atS, mw
}
