package report

import (
	"fmt"
	"image/color"
	"math"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/study/size"
)

// Colours of the two sides, apart from those of the limits.
var sideColors = [size.Sides]color.Color{size.Owner: rgb(0xD55E00), size.System: rgb(0x332288)}

var sideNames = [size.Sides]string{size.Owner: "owner", size.System: "system"}

func sideLine(side size.Side) draw.LineStyle {
	return draw.LineStyle{Color: sideColors[side], Width: vg.Points(1.8)}
}

var takerLine = draw.LineStyle{Color: rgb(0x999999), Width: vg.Points(1.4), Dashes: []vg.Length{vg.Points(5), vg.Points(3)}}

// spots mark what was solved, on a line through them.
type spots struct {
	points [][2]float64
	color  color.Color
}

func (d spots) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	for _, q := range d.points {
		at := vg.Point{X: tx(q[0]), Y: ty(q[1])}
		if !c.Contains(at) {
			continue
		}
		const r = vg.Length(2.6)
		path := vg.Path{}
		path.Move(vg.Point{X: at.X + r, Y: at.Y})
		path.Arc(at, r, 0, 2*math.Pi)
		path.Close()
		c.SetColor(d.color)
		c.Fill(path)
	}
}

// mark is a line across the plot with its name at the top, on the given row of names.
type mark struct {
	x     float64
	name  string
	color color.Color
	row   int
	left  bool // the name stands left of the line
}

func (m mark) Plot(c draw.Canvas, p *plot.Plot) {
	tx, _ := p.Transforms(&c)
	x := tx(m.x)
	c.StrokeLine2(draw.LineStyle{Color: m.color, Width: vg.Points(1), Dashes: []vg.Length{vg.Points(2), vg.Points(2)}}, x, c.Min.Y, x, c.Max.Y)
	style, gap := sans(9, m.color, draw.XLeft, draw.YTop), vg.Points(4)
	if m.left {
		style.XAlign, gap = draw.XRight, -gap
	}
	at := vg.Point{X: x + gap, Y: c.Max.Y - vg.Points(3) - vg.Length(m.row)*entryHeight}
	from, to := at.X, at.X+style.Width(m.name)
	if m.left {
		from, to = at.X-style.Width(m.name), at.X
	}
	c.FillPolygon(color.White, []vg.Point{{X: from, Y: at.Y}, {X: to, Y: at.Y}, {X: to, Y: at.Y - entryHeight}, {X: from, Y: at.Y - entryHeight}})
	c.FillText(style, at, m.name)
}

// perYear scales money for an axis: what to divide by and what to call it.
func perYear(most float64, currency string) (by float64, label string) {
	switch {
	case most >= 2e6:
		return 1e6, "million " + currency + " a year"
	case most >= 2e3:
		return 1e3, "thousand " + currency + " a year"
	}
	return 1, currency + " a year"
}

type namedFigure struct {
	name string
	fig  figure
}

func sizeFigures(s *size.Study) []namedFigure {
	out := []namedFigure{{"size", netFigure(s)}}
	if f, ok := energyFigure(s); ok {
		out = append(out, namedFigure{"energy", f})
	}
	if len(s.Paces) > 1 {
		out = append(out, namedFigure{"activation", activationFigure(s)})
	}
	return append(out, namedFigure{"needed", neededFigure(s)}, namedFigure{"sensitivity", sensitivityFigure(s)})
}

func sizeTitle(s *size.Study, what string) string {
	return what + ": " + s.Plan.Project.Name + " on " + s.Plan.Case.Name
}

// extent widens an axis to hold values, with some air.
func extent(values ...float64) (lo, hi float64) {
	lo, hi = math.Min(0, slices.Min(values)), math.Max(0, slices.Max(values))
	if lo == hi {
		return -1, 1
	}
	air := 0.08 * (hi - lo)
	if lo < 0 {
		lo -= air
	}
	return lo, hi + air
}

// netFigure shows net value a year over size, for the owner, for the system, and as it looks to
// an owner who takes prices as they are.
func netFigure(s *size.Study) figure {
	pace := bestPace(s)
	unit := s.Plan.Project.Kind.SizeUnit()
	var lines [size.Sides][][2]float64
	var low, high [][2]float64
	values := []float64{0}
	for side := range size.Sides {
		lines[side] = [][2]float64{{0, 0}}
		for _, k := range pace.Curve[side] {
			r := &s.Results[k]
			lines[side] = append(lines[side], [2]float64{r.MW, r.Net[side]})
			values = append(values, r.Net[side])
			if side == size.System {
				low = append(low, [2]float64{r.MW, r.Year.SavingAtLeast - r.Cost})
				high = append(high, [2]float64{r.MW, r.Year.SavingAtMost - r.Cost})
			}
		}
	}
	taker := [][2]float64{{0, 0}}
	for _, k := range pace.Full {
		taker = append(taker, [2]float64{s.Results[k].MW, s.Results[k].TakerNet})
	}
	lo, hi := extent(values...)
	if hi > 0 {
		lo = math.Max(lo, -1.5*hi) // far below nothing there is nothing to be seen
	}
	taker, cut := below(taker, hi)
	takerName := "owner, were prices those without it"
	if cut {
		takerName += " (cut: it rises beyond the axis)"
	}
	hi += 0.12 * (hi - lo) // room for the names of the marks
	by, label := perYear(math.Max(hi, -lo), s.Plan.Case.Currency)
	scale := func(points [][2]float64) [][2]float64 {
		for i := range points {
			points[i][1] /= by
		}
		return points
	}
	p := newPlot()
	p.X.Min, p.X.Max = 0, 1.02*slices.Max(lastOf(lines))
	p.Y.Min, p.Y.Max = lo/by, hi/by
	p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(8), niceTicks(6)
	p.X.Label.Text, p.Y.Label.Text = "size, "+unit, "net value, "+label
	p.Add(rules{}, zeroLine{}, path{scale(taker), takerLine})
	var at, l, h []float64
	for i := range scale(low) {
		at, l, h = append(at, low[i][0]), append(l, low[i][1]), append(h, high[i][1]/by)
	}
	p.Add(band{at, l, h, rgb(0xD9D4EA)})
	for side := range size.Sides {
		points := scale(lines[side])
		p.Add(path{points, sideLine(side)}, spots{points[1:], sideColors[side]})
	}
	row := 0
	for side := range size.Sides {
		if stop := pace.Stop[side]; stop.MW > 0 && !stop.Beyond {
			p.Add(mark{x: markAt(s, pace, side), name: sideNames[side] + ": " + stopSize(s, pace, side), color: sideColors[side], row: row, left: stop.MW > 0.7*p.X.Max})
			row++
		}
	}
	key := []entry{
		{name: "owner, paid at prices with itself in the market", line: ptr(sideLine(size.Owner))},
		{name: "system: what it saves (pale: within the gaps)", line: ptr(sideLine(size.System))},
		{name: takerName, line: &takerLine},
		{name: "where the next " + step(s.Plan.Project) + " stops paying", line: &draw.LineStyle{Color: faded, Width: vg.Points(1), Dashes: []vg.Length{vg.Points(2), vg.Points(2)}}},
	}
	about := "energy as is best for each; owner paid at " + s.Rule.Words() + "; " + conditions(s)
	if !s.Plan.Project.Kind.Stores() {
		about = "owner paid at " + s.Rule.Words() + "; " + conditions(s)
	}
	if s.Plan.Project.Paced() {
		about = fmt.Sprintf("out within %s s; ", plain(pace.ActivationS)) + about
	}
	return drawn(p, sizeTitle(s, "Net value a year by size"), about, key)
}

// below cuts a line where it first passes most, and tells whether it does.
func below(points [][2]float64, most float64) (line [][2]float64, cut bool) {
	for i := 1; i < len(points); i++ {
		if a, b := points[i-1], points[i]; b[1] > most && b[1] > a[1] {
			return append(points[:i:i], [2]float64{a[0] + (b[0]-a[0])*(most-a[1])/(b[1]-a[1]), most}), true
		}
	}
	return points, false
}

// drawn is a figure of one plot with its key above.
func drawn(p *plot.Plot, title, below string, key []entry) figure {
	return figure{width: 9 * vg.Inch, height: 4.8 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), title, below)
		used := drawKeyRow(area, key)
		p.Draw(draw.Crop(area, 0, 0, 0, -used-vg.Points(6)))
	}}
}

func lastOf(lines [size.Sides][][2]float64) []float64 {
	var out []float64
	for _, l := range lines {
		out = append(out, l[len(l)-1][0])
	}
	return out
}

// bestPace is the activation time of the owner's best design.
func bestPace(s *size.Study) *size.Pace { return s.Pace(&s.Results[s.Best[size.Owner]]) }

// energyFigure shows net value over energy at the owner's best size.
func energyFigure(s *size.Study) (figure, bool) {
	r := &s.Results[s.Best[size.Owner]]
	curve := s.EnergyCurve(r)
	if curve == nil {
		return figure{}, false
	}
	var values []float64
	for _, e := range curve {
		values = append(values, e.Net[:]...)
	}
	lo, hi := extent(values...)
	hi += 0.08 * (hi - lo) // room for the name of the mark
	by, label := perYear(math.Max(hi, -lo), s.Plan.Case.Currency)
	p := newPlot()
	p.X.Min, p.X.Max = 0, 1.02*curve[len(curve)-1].MWh
	p.Y.Min, p.Y.Max = lo/by, hi/by
	p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(8), niceTicks(6)
	p.X.Label.Text, p.Y.Label.Text = "energy, MWh", "net value, "+label
	p.Add(rules{}, zeroLine{})
	for side := range size.Sides {
		var line, solved [][2]float64
		for _, e := range curve {
			q := [2]float64{e.MWh, e.Net[side] / by}
			line = append(line, q)
			if e.Solved {
				solved = append(solved, q)
			}
		}
		p.Add(path{line, sideLine(side)}, spots{solved, sideColors[side]})
	}
	need := r.MW * r.NeedMWhPerMW
	p.Add(mark{x: need, name: fmt.Sprintf("%s MWh carry the response of all %s MW", round(need), plain(r.MW)), color: ink, left: need > 0.6*p.X.Max})
	key := []entry{{name: "owner", line: ptr(sideLine(size.Owner))}, {name: "system", line: ptr(sideLine(size.System))}}
	below := fmt.Sprintf("%s MW, out within %s s; dots: solved, with as much held; %s", plain(r.MW), plain(r.ActivationS), conditions(s))
	return drawn(p, sizeTitle(s, "Net value a year by energy"), below, key), true
}

// activationFigure shows the best net value over activation time.
func activationFigure(s *size.Study) figure {
	p := newPlot()
	values := []float64{0}
	var lines [size.Sides][][2]float64
	for i := range s.Paces {
		for side := range size.Sides {
			best := math.Inf(-1)
			for _, k := range s.Paces[i].Curve[side] {
				best = math.Max(best, s.Results[k].Net[side])
			}
			lines[side] = append(lines[side], [2]float64{s.Paces[i].ActivationS, best})
			values = append(values, best)
		}
	}
	lo, hi := extent(values...)
	by, label := perYear(math.Max(hi, -lo), s.Plan.Case.Currency)
	p.X.Min, p.X.Max = 0, 1.05*s.Paces[len(s.Paces)-1].ActivationS
	p.Y.Min, p.Y.Max = lo/by, hi/by
	p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(8), niceTicks(6)
	p.X.Label.Text, p.Y.Label.Text = "activation time, s: from the loss or the trigger until all of it is out", "net value, "+label
	p.Add(rules{}, zeroLine{})
	for side := range size.Sides {
		for i := range lines[side] {
			lines[side][i][1] /= by
		}
		p.Add(path{lines[side], sideLine(side)}, spots{lines[side], sideColors[side]})
	}
	key := []entry{{name: "owner, at the size that is best for it", line: ptr(sideLine(size.Owner))}, {name: "system, at the size that is best for it", line: ptr(sideLine(size.System))}}
	return drawn(p, sizeTitle(s, "What speed is worth"), "net value a year at the best of the sizes and energies tried; "+conditions(s), key)
}

// bars draws the swing of each input: a bar for each side, from low to high.
type bars struct {
	swings []size.Swing
	by     float64
}

func (b bars) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	for i := range b.swings {
		w := &b.swings[i]
		for side := range size.Sides {
			top := ty(float64(len(b.swings)-i) - 0.14 - 0.38*float64(side))
			bottom := ty(float64(len(b.swings)-i) - 0.14 - 0.38*float64(side) - 0.34)
			x0, x1 := tx(w.NetLow[side]/b.by), tx(w.NetHigh[side]/b.by)
			if x0 > x1 {
				x0, x1 = x1, x0
			}
			c.FillPolygon(sideColors[side], []vg.Point{{X: x0, Y: bottom}, {X: x1, Y: bottom}, {X: x1, Y: top}, {X: x0, Y: top}})
		}
	}
}

// sensitivityFigure shows how far each input moves the net value of the owner's best design.
func sensitivityFigure(s *size.Study) figure {
	r := &s.Results[s.Best[size.Owner]]
	swings := s.Sensitivity(r)
	values := []float64{0}
	var ticks []plot.Tick
	for i := range swings {
		w := &swings[i]
		for side := range size.Sides {
			values = append(values, w.NetLow[side], w.NetHigh[side])
		}
		ticks = append(ticks, plot.Tick{Value: float64(len(swings)-i) - 0.5, Label: w.Input + " (" + grouped(w.At, decimals(w.At)) + " " + w.Unit + ")"})
	}
	lo, hi := extent(values...)
	by, label := perYear(math.Max(hi, -lo), s.Plan.Case.Currency)
	p := newPlot()
	p.X.Min, p.X.Max = lo/by, hi/by
	p.Y.Min, p.Y.Max = 0, float64(len(swings))
	p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(8), plot.ConstantTicks(ticks)
	p.X.Label.Text = "net value, " + label
	p.Add(bars{swings, by})
	for side := range size.Sides {
		p.Add(upright{r.Net[side] / by, draw.LineStyle{Color: sideColors[side], Width: vg.Points(1)}})
	}
	p.Add(upright{0, draw.LineStyle{Color: ink, Width: vg.Points(0.6)}})
	key := []entry{{name: "owner", color: sideColors[size.Owner]}, {name: "system", color: sideColors[size.System]}, {name: "as it is", line: &draw.LineStyle{Color: faded, Width: vg.Points(1)}}}
	below := fmt.Sprintf("each input by ±%.0f %% with the others kept; %s", 100*size.SwingShare, designWords(s, r))
	return drawn(p, sizeTitle(s, "What moves the net value"), below, key)
}

// decimals are those that a number of an input needs.
func decimals(v float64) int {
	if v == math.Trunc(v) || math.Abs(v) >= 10 {
		return 0
	}
	return 2
}

// upright is a line across the plot.
type upright struct {
	x     float64
	style draw.LineStyle
}

func (u upright) Plot(c draw.Canvas, p *plot.Plot) {
	tx, _ := p.Transforms(&c)
	c.StrokeLine2(u.style, tx(u.x), c.Min.Y, tx(u.x), c.Max.Y)
}
