package worth

import (
	"fmt"
	"math"
	"slices"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/study/ranges"
)

// Asked says which exchange rates are wanted. The zero value asks for the usual ones.
type Asked struct {
	Primary    string             // shape; empty: of those held that never withdraw the slowest
	HeldMW     map[string]float64 // of other shapes, by name
	InertiaMWs []float64          // empty: the 10th, 50th and 90th percentile of what the worst loss leaves
	LossMW     []float64          // empty: the same percentiles of the worst losses, and the largest
}

// Exchange prepares the exchange rates of a study: of every shape that somebody holds, of the product
// and of its other activation times against the primary response. Where none is said, kinetic
// energies and losses are left open; see Levels.
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
			if held[i] && !n.Shape.Withdraws() && (primary < 0 || mostlyOutS(n.Shape) > mostlyOutS(c.Shapes[primary].Shape)) {
				primary = i
			}
		}
		if primary < 0 {
			return nil, fmt.Errorf("no response that is held is never withdrawn, so that none can be the primary one by itself; name one of %s", names(c.Shapes, held))
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
	add := func(name string, sh limits.Shape, mw float64) {
		x.Names, x.Shapes, x.HeldMW = append(x.Names, name), append(x.Shapes, sh), append(x.HeldMW, mw)
	}
	add(c.Shapes[primary].Name, c.Shapes[primary].Shape, 0)
	for i, n := range c.Shapes {
		mw, said := a.HeldMW[n.Name]
		if i != primary && (said || held[i]) {
			add(n.Name, n.Shape, mw)
		}
	}
	for k, other := range s.Others {
		sh := other.Shapes[len(other.Shapes)-1]
		add(fmt.Sprintf("%s in %g s", sh.Name, s.ActivationsS[k]), sh.Shape, 0)
	}
	return x, x.Check()
}

// mostlyOutS is when a shape first delivers 90 % of all: how fast it is, as that of a governor takes
// for ever to deliver the last of it (share: common practice).
func mostlyOutS(s limits.Shape) float64 {
	const share = 0.9
	knots := s.Knots()
	for i, k := range knots {
		if k.Share < share {
			continue
		}
		if i == 0 || k.S == knots[i-1].S {
			return k.S
		}
		a := knots[i-1]
		return a.S + (k.S-a.S)*(share-a.Share)/(k.Share-a.Share)
	}
	return s.FullActivationS()
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
	fill := func(list []float64, of func(rec *Record) float64, shares ...float64) []float64 {
		if len(list) > 0 {
			return list
		}
		v := valuesOf(records, of)
		for _, share := range shares {
			if q := roundTo3(ranges.Quantile(v, share)); q > 0 && !slices.Contains(list, q) {
				list = append(list, q)
			}
		}
		return list
	}
	x.InertiaMWs = fill(x.InertiaMWs, left, 0.1, 0.5, 0.9)
	x.LossMW = fill(x.LossMW, func(rec *Record) float64 { return rec.WorstLossMW }, 0.1, 0.5, 0.9, 1)
}

// Middle is the loss to look at first: the one in the middle of those asked for; 0 where there is none.
func (x *Exchange) Middle() float64 {
	if len(x.LossMW) == 0 || len(x.InertiaMWs) == 0 {
		return 0
	}
	return ranges.Quantile(x.LossMW, 0.5)
}

func left(rec *Record) float64 { return rec.InertiaLeftMWs }

func valuesOf(records []Record, of func(rec *Record) float64) []float64 {
	v := make([]float64, len(records))
	for i := range records {
		v[i] = of(&records[i])
	}
	return v
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
	v := valuesOf(records, left)
	lo, hi := ranges.Quantile(v, 0), ranges.Quantile(v, 1)
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
