package report

import (
	"fmt"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// curve is a duration curve: values from the highest to the lowest.
type curve struct {
	name   string
	values []float64
	style  draw.LineStyle
}

func newCurve(name string, values []float64, style draw.LineStyle) curve {
	slices.SortFunc(values, func(a, b float64) int {
		switch {
		case a > b:
			return -1
		case a < b:
			return 1
		}
		return 0
	})
	mean := 0.0
	for _, v := range values {
		mean += v / float64(len(values))
	}
	least := values[len(values)-1]
	return curve{fmt.Sprintf("%s (least %s, mean %s GW·s)", name, threeDigits(least), threeDigits(mean)), values, style}
}

// threeDigits prints v with about three figures.
func threeDigits(v float64) string {
	switch {
	case v >= 99.95 || v <= -99.95:
		return grouped(v, 0)
	case v >= 9.995 || v <= -9.995:
		return fixed(v, 1)
	}
	return fixed(v, 2)
}

// Plot draws the curve as steps, one value a share of 1/n of the hours.
func (d curve) Plot(c draw.Canvas, p *plot.Plot) {
	c.StrokeLines(d.style, d.line(p.Transforms(&c)))
}

// tiny is a distance too small to see.
const tiny = vg.Length(0.25)

// line gives the corners of the steps. Steps lower than tiny are left out, so that a
// year draws in hundreds of points.
func (d curve) line(tx, ty func(float64) vg.Length) []vg.Point {
	n := len(d.values)
	line := []vg.Point{{X: tx(0), Y: ty(d.values[0])}}
	for i, v := range d.values {
		last := line[len(line)-1]
		at := vg.Point{X: tx(100 * float64(i) / float64(n)), Y: ty(v)}
		if i > 0 && last.Y-at.Y < tiny && i < n-1 {
			continue
		}
		if at.X-last.X > tiny || n <= 200 {
			line = append(line, vg.Point{X: at.X, Y: last.Y})
		}
		line = append(line, at)
	}
	return append(line, vg.Point{X: tx(100), Y: ty(d.values[n-1])})
}

// inertiaFigure is the duration curve of kinetic energy online, with and without
// limits, and of what the worst loss leaves.
func inertiaFigure(c *fleet.Case, hours, without []solve.Hour, o Options) figure {
	take := func(hours []solve.Hour, f func(*solve.Hour) float64) []float64 {
		v := make([]float64, len(hours))
		for i := range hours {
			v[i] = finite(f(&hours[i])) / 1000
		}
		return v
	}
	online := func(h *solve.Hour) float64 { return h.InertiaMWs }
	kept := ", limits kept"
	if o.WithoutLimits {
		kept = ", without limits"
	}
	curves := []curve{newCurve("online"+kept, take(hours, online),
		draw.LineStyle{Color: rgb(0x0072B2), Width: vg.Points(1.8)})}
	var free []solve.Hour
	for _, o := range pair(hours, without) {
		if o != nil {
			free = append(free, *o)
		}
	}
	if len(free) > 0 && !o.WithoutLimits {
		curves = append(curves, newCurve("online, without limits", take(free, online),
			draw.LineStyle{Color: rgb(0xD55E00), Width: vg.Points(1.4)}))
	}
	curves = append(curves, newCurve("left after the worst loss"+kept,
		take(hours, func(h *solve.Hour) float64 { return h.InertiaLeftMWs }),
		draw.LineStyle{Color: ink, Width: vg.Points(1.2), Dashes: []vg.Length{vg.Points(4), vg.Points(2.5)}}))

	p := newPlot()
	p.X.Min, p.X.Max = 0, 100
	p.X.Tick.Marker = niceTicks(10)
	p.X.Label.Text = fmt.Sprintf("share of %s with at least this much, %%", hoursOf(len(hours)))
	top := 0.0
	for _, d := range curves {
		top = max(top, d.values[0])
	}
	p.Y.Min, p.Y.Max = 0, roundUp(top)
	p.Y.Tick.Marker = niceTicks(7)
	p.Y.Label.Text = "kinetic energy, GW·s"
	p.Add(rules{})
	var key []entry
	for _, d := range curves {
		p.Add(d)
		key = append(key, entry{name: d.name, line: &d.style})
	}
	return figure{width: 8 * vg.Inch, height: 4.6 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "Inertia online, hours sorted from most to least: "+c.Name, span(hours))
		keyHeight := entryHeight*vg.Length(len(key)) + vg.Points(6)
		drawKey(area, key)
		p.Draw(draw.Crop(area, 0, -vg.Points(6), 0, -keyHeight))
	}}
}

// span says which hours a figure shows.
func span(hours []solve.Hour) string {
	first, last := &hours[0], &hours[len(hours)-1]
	if len(hours) == 1 {
		return "the hour from " + minute(first.Time) + " UTC"
	}
	if len(hours) <= 48 {
		return fmt.Sprintf("%s from %s UTC", hoursOf(len(hours)), minute(first.Time))
	}
	return fmt.Sprintf("%s, %s to %s", hoursOf(len(hours)), first.Time.UTC().Format("2 January 2006"), last.Time.UTC().Format("2 January 2006"))
}
