package worth

import (
	"fmt"
	"math"
	"slices"

	"evenkeel/fleet"
	"evenkeel/limits"
)

// Asked says which exchange rates are wanted. The zero value asks for the usual ones.
type Asked struct {
	Primary    string             // shape; empty: the held one that never withdraws and is slowest to be all out
	HeldMW     map[string]float64 // of other shapes, by name
	InertiaMWs []float64          // empty: the 10th, 50th and 90th percentile of what the worst loss leaves
	LossMW     []float64          // empty: quarters of the largest worst loss
}

// Exchange prepares the exchange rates of a study: of every shape that somebody holds, of the product
// and of its other activation times against the primary response, where they are faster. Where
// none is said, kinetic energies and losses are left open; see Levels.
func (s *Study) Exchange(a Asked) (*Exchange, error) {
	c := s.Full()
	x := &Exchange{
		Limits: c.Limits, DampingMWPerHz: c.Load.DampingPctPerHz / 100 * c.MeanDemandMW(),
		InertiaMWs: a.InertiaMWs, LossMW: a.LossMW,
	}
	held := make([]bool, len(c.Shapes))
	for i := range c.Resources {
		if r := &c.Resources[i].Response; r.Shape >= 0 && anyAbove0(r.CapMW) {
			held[r.Shape] = true
		}
	}
	named := func(name string) int {
		return slices.IndexFunc(c.Shapes, func(n fleet.NamedShape) bool { return n.Name == name })
	}
	primary := -1
	if a.Primary != "" {
		if primary = named(a.Primary); primary < 0 {
			return nil, fmt.Errorf("the primary response is %q; want one of %s", a.Primary, names(c.Shapes, nil))
		}
	} else {
		for i, n := range c.Shapes {
			if held[i] && !n.Shape.Withdraws() && (primary < 0 || n.Shape.FullActivationS() > c.Shapes[primary].Shape.FullActivationS()) {
				primary = i
			}
		}
		if primary < 0 {
			return nil, fmt.Errorf("no response that is held stays for ever, so that none can be the primary one by itself; name one of %s", names(c.Shapes, held))
		}
	}
	for name, mw := range a.HeldMW {
		switch at := named(name); {
		case at < 0:
			return nil, fmt.Errorf("what is held is of the unknown response %q; want one of %s", name, names(c.Shapes, nil))
		case at == primary:
			return nil, fmt.Errorf("%q is the primary response, whose MW are looked for; it cannot be held besides", name)
		case !(mw >= 0) || math.IsInf(mw, 0):
			return nil, fmt.Errorf("%g MW of %q are held; want 0 or more", mw, name)
		}
	}
	slowest := c.Shapes[primary].Shape.FullActivationS()
	add := func(name string, sh limits.Shape, mw float64) {
		x.Names, x.Shapes, x.HeldMW = append(x.Names, name), append(x.Shapes, sh), append(x.HeldMW, mw)
	}
	add(c.Shapes[primary].Name, c.Shapes[primary].Shape, 0)
	for i, n := range c.Shapes {
		mw, said := a.HeldMW[n.Name]
		if i != primary && (said || held[i] && n.Shape.FullActivationS() < slowest) {
			add(n.Name, n.Shape, mw)
		}
	}
	for k, other := range s.Others {
		sh := other.Shapes[len(other.Shapes)-1]
		if sh.Shape.FullActivationS() < slowest {
			add(fmt.Sprintf("%s in %g s", sh.Name, s.ActivationsS[k]), sh.Shape, 0)
		}
	}
	return x, x.Check()
}

func names(shapes []fleet.NamedShape, which []bool) string {
	text := ""
	for i, n := range shapes {
		if which == nil || which[i] {
			if text != "" {
				text += ", "
			}
			text += n.Name
		}
	}
	if text == "" {
		return "the case's shapes (it has none)"
	}
	return text
}

func anyAbove0(v fleet.Value) bool {
	if v.Series == nil {
		return v.Const > 0
	}
	return slices.ContainsFunc(v.Series, func(x float64) bool { return x > 0 })
}

// Levels fills in the kinetic energies and losses that were not asked for from what the hours without
// the product show. No loss at all leaves an exchange without cells.
func (x *Exchange) Levels(records []Record) {
	if len(x.InertiaMWs) == 0 {
		for _, share := range []float64{0.1, 0.5, 0.9} {
			e := roundTo3(Quantile(lefts(records), share))
			if e > 0 && !slices.Contains(x.InertiaMWs, e) {
				x.InertiaMWs = append(x.InertiaMWs, e)
			}
		}
	}
	if len(x.LossMW) == 0 {
		most := 0.0
		for i := range records {
			most = max(most, records[i].WorstLossMW)
		}
		for k := 1; k <= 4; k++ {
			if p := roundTo3(most * float64(k) / 4); p > 0 && !slices.Contains(x.LossMW, p) {
				x.LossMW = append(x.LossMW, p)
			}
		}
	}
}

func lefts(records []Record) []float64 {
	v := make([]float64, len(records))
	for i := range records {
		v[i] = records[i].InertiaLeftMWs
	}
	return v
}

// Quantile is the value that a share of values lies at or below (nearest rank, common practice).
func Quantile(values []float64, share float64) float64 {
	v := slices.Clone(values)
	slices.Sort(v)
	return v[min(max(int(math.Ceil(share*float64(len(v))))-1, 0), len(v)-1)]
}

// roundTo3 rounds to three figures.
func roundTo3(v float64) float64 {
	if !(v > 0) {
		return 0
	}
	unit := math.Pow(10, math.Floor(math.Log10(v))-2)
	return math.Round(v/unit) * unit
}

// Course is the exchange at one loss over many kinetic energies, for a figure.
func (x *Exchange) Course(lossMW float64, records []Record, n int) []Cell {
	v := lefts(records)
	lo, hi := Quantile(v, 0), Quantile(v, 1)
	for _, e := range x.InertiaMWs {
		lo, hi = min(lo, e), max(hi, e)
	}
	y := *x
	y.LossMW, y.InertiaMWs = []float64{lossMW}, nil
	for i := range n {
		if e := lo + (hi-lo)*float64(i)/float64(n-1); e > 0 {
			y.InertiaMWs = append(y.InertiaMWs, e)
		}
	}
	return y.Cells()
}
