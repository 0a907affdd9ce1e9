package report

import (
	"image/color"
	"math"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/study"
)

// path is a line through points in the plot's own units.
type path struct {
	points [][2]float64
	style  draw.LineStyle
}

func (l path) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	line := make([]vg.Point, len(l.points))
	for i, q := range l.points {
		line[i] = vg.Point{X: tx(q[0]), Y: ty(q[1])}
	}
	c.StrokeLines(l.style, c.ClipLinesXY(line)...)
}

// band fills the area between two lines over the same instants.
type band struct {
	at, low, high []float64
	color         color.Color
}

func (b band) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	var poly []vg.Point
	for i := range b.at {
		poly = append(poly, vg.Point{X: tx(b.at[i]), Y: ty(b.high[i])})
	}
	for i := len(b.at) - 1; i >= 0; i-- {
		poly = append(poly, vg.Point{X: tx(b.at[i]), Y: ty(b.low[i])})
	}
	c.FillPolygon(b.color, c.ClipPolygonXY(poly))
}

var tripColors = []color.Color{
	rgb(0x0072B2), rgb(0xE69F00), rgb(0x009E73), rgb(0xCC79A7), rgb(0x56B4E9), rgb(0xD55E00), rgb(0xF0E442), rgb(0x332288), rgb(0x88CCEE), rgb(0x999999),
}

const tripBands = 9 // sources shown by themselves; the others are one

// tripFigure draws frequency above and what is delivered, stacked, below.
func tripFigure(t *study.Trip) figure {
	span, f0 := tripSpan(t), t.Sys.NominalHz
	upper := newPlot()
	upper.X.Min, upper.X.Max = 0, span
	upper.X.Tick.Marker, upper.Y.Tick.Marker = niceTicks(8), niceTicks(6)
	upper.Y.Label.Text = "frequency, Hz"
	low := min(max(t.NadirHz, t.Limits.NadirHz)*1.08, 10)
	upper.Y.Min, upper.Y.Max = f0-low, f0+max(t.PeakHz*1.1, 0.03)
	above := t.Above
	if above != nil && (t.PeakHz < 0.05 || math.IsInf(above.NadirHz, 1) || math.IsInf(above.SteadyHz, 1)) {
		above = nil // nothing to be held against it
	}
	if above != nil {
		upper.Y.Max = f0 + max(t.PeakHz, above.NadirHz)*1.08
	}
	var course [][2]float64
	for i, at := range t.Times {
		if at <= span {
			course = append(course, [2]float64{at, f0 - t.Deviation[i]})
		}
	}
	from := 0.0
	if len(t.Losses) > 0 {
		from = t.Losses[0].AtS
	}
	dashed := func(c uint32) draw.LineStyle {
		return draw.LineStyle{Color: rgb(c), Width: vg.Points(1.1), Dashes: []vg.Length{vg.Points(5), vg.Points(3)}}
	}
	nadir, steady := limitsAt(t.Limits, from, span)
	turn := func(v [][2]float64) [][2]float64 {
		out := slices.Clone(v)
		for i := range out {
			out[i][1] = f0 - out[i][1]
		}
		return out
	}
	slope := [][2]float64{{from, f0}, {from + low/t.Limits.MaxHzPerS, f0 - low}}
	if above != nil && len(t.Losses) > 0 && t.Losses[0].MW < 0 {
		high := upper.Y.Max - f0
		slope[1] = [2]float64{from + high/above.MaxHzPerS, f0 + high}
	}
	if above != nil {
		peak, band := limitsAt(*above, from, span)
		for _, line := range [][][2]float64{peak, band} {
			for i := range line {
				line[i][1] += f0
			}
		}
		upper.Add(path{peak, dashed(0xD55E00)}, path{band, dashed(0x009E73)})
	}
	upper.Add(path{turn(nadir), dashed(0xD55E00)}, path{turn(steady), dashed(0x009E73)}, path{slope, dashed(0x999999)},
		path{course, draw.LineStyle{Color: rgb(0x0072B2), Width: vg.Points(1.8)}})
	key := []entry{
		{name: "frequency", line: &draw.LineStyle{Color: rgb(0x0072B2), Width: vg.Points(1.8)}},
		{name: "limit at any time", line: ptr(dashed(0xD55E00))}, {name: "steady limit", line: ptr(dashed(0x009E73))}, {name: "largest RoCoF", line: ptr(dashed(0x999999))},
	}

	lower := newPlot()
	lower.X.Min, lower.X.Max = 0, span
	lower.X.Tick.Marker, lower.Y.Tick.Marker = niceTicks(8), niceTicks(5)
	lower.X.Label.Text = "time, s"
	lower.Y.Label.Text = "delivered, MW"
	order := make([]int, len(t.Sources))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		if d := math.Abs(t.EnergyMWs[b]) - math.Abs(t.EnergyMWs[a]); d > 0 {
			return 1
		} else if d < 0 {
			return -1
		}
		return 0
	})
	order = slices.DeleteFunc(order, func(s int) bool { // who does nothing is not drawn
		return !slices.ContainsFunc(t.MW[s], func(v float64) bool { return math.Abs(v) > 0.005 })
	})
	n := 0
	for n < len(t.Times) && t.Times[n] <= span {
		n++
	}
	base := make([]float64, n)
	var stack []entry
	most, least := 0.0, 0.0
	for k, s := range order {
		if k >= tripBands && k > tripBands { // joined with the band before
			continue
		}
		high := slices.Clone(base)
		name := t.Sources[s]
		members := order[k : k+1]
		if k == tripBands && len(order) > tripBands {
			members, name = order[k:], "all others"
		}
		for _, m := range members {
			for i := range n {
				high[i] += t.MW[m][i]
			}
		}
		c := tripColors[min(k, len(tripColors)-1)]
		lower.Add(band{t.Times[:n], base, high, c})
		stack = append(stack, entry{name: name, color: c})
		for _, v := range high {
			most, least = max(most, v), min(least, v)
		}
		base = high
	}
	if most == least {
		most = 1
	}
	lower.Y.Min, lower.Y.Max = least*1.1, most*1.1
	slices.Reverse(stack)
	return figure{width: 10 * vg.Inch, height: 6.6 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "A trip in closed loop: "+t.Mix.Case.Name, t.Mix.From+", "+minute(t.Mix.Hour.Time)+" UTC")
		used := drawKeyRow(area, key)
		area = draw.Crop(area, 0, 0, 0, -used-vg.Points(4))
		half := (area.Max.Y - area.Min.Y) / 2
		names := draw.Crop(area, area.Max.X-area.Min.X-vg.Points(150), 0, 0, -half-vg.Points(14))
		for i, e := range stack {
			y := names.Max.Y - entryHeight*vg.Length(i) - entryHeight
			drawEntry(names, e, names.Min.X, y)
			names.FillText(sans(8.5, ink, draw.XLeft, draw.YCenter), vg.Point{X: names.Min.X + vg.Points(18), Y: y}, fit(e.name, sans(8.5, ink, draw.XLeft, draw.YCenter), vg.Points(132)))
		}
		wide := draw.Crop(area, 0, -vg.Points(160), 0, 0)
		drawStacked(upper, draw.Crop(wide, 0, 0, half, 0), lower, draw.Crop(wide, 0, 0, 0, -half-vg.Points(6)))
	}}
}

func ptr[T any](v T) *T { return &v }
