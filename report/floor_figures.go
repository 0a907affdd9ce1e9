package report

import (
	"fmt"
	"image/color"
	"math"
	"slices"
	"strings"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/limits"
	"evenkeel/study/floor"
	"evenkeel/study/ranges"
)

// limitColors are those of the limits in every figure.
var limitColors = [limits.Kinds]color.Color{cellColors[rocofBit], cellColors[nadirBit], cellColors[steadyBit]}

// tile is a coloured rectangle in the plot's own units with a word in it.
type tile struct {
	x0, x1, y0, y1 float64
	color          color.Color
	word           string
}

// tiles draws rectangles with thin white lines between them and, where it fits in all, their words.
type tiles []tile

func (t tiles) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	style := sans(7, ink, draw.XCenter, draw.YCenter)
	fits := true
	for _, k := range t {
		fits = fits && style.Width(k.word) < (tx(k.x1)-tx(k.x0))*0.94 && style.Height("0") < (ty(k.y1)-ty(k.y0))*0.9
	}
	for _, k := range t {
		box := []vg.Point{{X: tx(k.x0), Y: ty(k.y0)}, {X: tx(k.x1), Y: ty(k.y0)}, {X: tx(k.x1), Y: ty(k.y1)}, {X: tx(k.x0), Y: ty(k.y1)}}
		c.FillPolygon(k.color, box)
		c.StrokeLines(draw.LineStyle{Color: color.White, Width: vg.Points(0.5)}, append(box, box[0]))
		if fits && k.word != "" {
			word := style
			if dark(k.color) {
				word.Color = color.White
			}
			c.FillText(word, vg.Point{X: (tx(k.x0) + tx(k.x1)) / 2, Y: (ty(k.y0) + ty(k.y1)) / 2}, k.word)
		}
	}
}

// dark tells whether white text reads better on a colour than ink does.
func dark(c color.Color) bool {
	r, g, b, _ := c.RGBA()
	return 0.299*float64(r)+0.587*float64(g)+0.114*float64(b) < 0.5*0xFFFF
}

// tint mixes a colour with white: 0 gives white, 1 the colour.
func tint(c color.Color, share float64) color.Color {
	r, g, b, _ := c.RGBA()
	mix := func(v uint32) uint8 { return uint8(math.Round(255 - share*(255-float64(v>>8)))) }
	return color.RGBA{R: mix(r), G: mix(g), B: mix(b), A: 255}
}

// noFloor is the colour of cells in which no kinetic energy is enough.
var noFloor = rgb(0x555555)

// halves gives the borders of the tile around value i of a range.
func halves(r ranges.Range, i int) (lo, hi float64) {
	step := r.At(1) - r.At(0)
	if r.N < 2 || step == 0 {
		step = max(r.To, 1)
	}
	return r.At(i) - step/2, r.At(i) + step/2
}

// floorChart shows the floor over loss and response held, coloured by the limit that sets it.
func floorChart(r *floor.Result, chart int) figure {
	k := &r.Charts[chart]
	name := r.Case.Shapes[k.Shape].Name
	var finite []float64
	seen := [limits.Kinds]bool{}
	none := false
	for i := range k.Cells {
		c := &k.Cells[i]
		if math.IsInf(c.FloorMWs, 1) {
			none = true
			continue
		}
		seen[c.By] = true
		finite = append(finite, c.FloorMWs)
	}
	slices.Sort(finite)
	full := 1.0
	if n := len(finite); n > 0 {
		full = max(finite[(n-1)*9/10], 1)
	}
	var all tiles
	for i := range k.Loss.N {
		for j := range k.Held.N {
			c := &k.Cells[i*k.Held.N+j]
			t := tile{color: noFloor}
			t.x0, t.x1 = halves(k.Loss, i)
			t.y0, t.y1 = halves(k.Held, j)
			if !math.IsInf(c.FloorMWs, 1) {
				t.color = tint(limitColors[c.By], 0.15+0.75*min(c.FloorMWs/full, 1))
				t.word = threeDigits(c.FloorMWs / 1000)
			}
			all = append(all, t)
		}
	}
	p := newPlot()
	p.X.Min, _ = halves(k.Loss, 0)
	_, p.X.Max = halves(k.Loss, k.Loss.N-1)
	p.Y.Min, _ = halves(k.Held, 0)
	_, p.Y.Max = halves(k.Held, k.Held.N-1)
	p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(12), niceTicks(10)
	p.X.Label.Text = "loss, MW"
	p.Y.Label.Text = name + " held after the loss, MW"
	p.Add(all)
	var key []entry
	for kind, has := range seen {
		if has {
			key = append(key, entry{name: "set by " + limitWords(r.Case.Limits, limits.Kind(kind)), color: tint(limitColors[kind], 0.8)})
		}
	}
	if none {
		key = append(key, entry{name: "no inertia is enough", color: noFloor})
	}
	below := fmt.Sprintf("GW·s, the larger of what the rows ask for and closed-loop bisection finds; load %s MW; also held: %s", grouped(k.LoadMW, 0), othersHeld(r, chart))
	return figure{width: 10 * vg.Inch, height: 6.4 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "Kinetic energy that must be left after a loss: "+r.Case.Name, "")
		style := sans(9.5, faded, draw.XLeft, draw.YTop)
		area.Max.Y += vg.Points(6)
		for _, line := range wrap(below, 130) {
			area.FillText(style, vg.Point{X: area.Min.X, Y: area.Max.Y}, line)
			area.Max.Y -= vg.Points(13)
		}
		area.Max.Y -= vg.Points(6)
		used := drawKeyRow(area, key)
		p.Draw(draw.Crop(area, 0, -vg.Points(6), 0, -used-vg.Points(6)))
	}}
}

// othersHeld lists the other responses of a chart.
func othersHeld(r *floor.Result, chart int) string {
	k := &r.Charts[chart]
	var list []string
	for s, held := range k.Others {
		if s != k.Shape && held > 0 {
			list = append(list, r.Case.Shapes[s].Name+" "+grouped(held, 1))
		}
	}
	if len(list) == 0 {
		return "nothing"
	}
	return strings.Join(list, ", ") + " MW"
}

// monthRows mark the months, January at the top.
func monthRows() plot.ConstantTicks {
	var ticks plot.ConstantTicks
	for m := range 12 {
		ticks = append(ticks, plot.Tick{Value: 11.5 - float64(m), Label: time.Month(m + 1).String()[:3]})
	}
	return ticks
}

// floorWhen shows by month and hour of the day how often inertia lacks, and how much of it.
func floorWhen(r *floor.Result) figure {
	y := r.Year
	most := 0.0
	for m := range y.When {
		for h := range y.When[m] {
			most = max(most, y.When[m][h].MeanGapMWs())
		}
	}
	panel := func(title string, shade func(w *floor.When) (share float64, word string)) *plot.Plot {
		p := newPlot()
		p.Title.Text = title
		p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = 0, 24, 0, 12
		p.X.Tick.Marker = hoursOfDay
		p.Y.Tick.Marker = monthRows()
		p.Y.Tick.Length = 0
		var all tiles
		for m := range y.When {
			for h := range y.When[m] {
				if w := &y.When[m][h]; w.Hours > 0 {
					share, word := shade(w)
					all = append(all, tile{float64(h), float64(h + 1), float64(11 - m), float64(12 - m), tint(cellColors[rocofBit], 0.06+0.9*share), word})
				}
			}
		}
		p.Add(all)
		return p
	}
	often := panel("hours that lack inertia, % of those looked at", func(w *floor.When) (float64, string) {
		s := float64(w.Lacking) / float64(w.Hours)
		return s, fixed(100*s, 0)
	})
	much := panel("what they lack on average, GW·s", func(w *floor.When) (float64, string) {
		if w.Known == 0 {
			return 0, ""
		}
		return w.MeanGapMWs() / most, fixed(w.MeanGapMWs()/1000, 1)
	})
	much.X.Label.Text = "hour of the day (UTC)"
	below := fmt.Sprintf("%s; a dispatch for the steady state alone, against its own floor%s", yearWords(y), cellWords(y))
	return figure{width: 10 * vg.Inch, height: 7 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "When inertia lacks: "+r.Case.Name, below)
		half := (area.Max.Y - area.Min.Y) / 2
		drawStacked(often, draw.Crop(area, 0, 0, half+vg.Points(8), 0), much, draw.Crop(area, 0, 0, 0, -half))
	}}
}

// cellWords say how few hours of a sample a cell stands for, and what a blank one is.
func cellWords(y *floor.Year) string {
	hours, cells, blanks := 0, 0, 0
	for m := range y.When {
		for h := range y.When[m] {
			if n := y.When[m][h].Hours; n > 0 {
				hours, cells = hours+n, cells+1
			} else {
				blanks++
			}
		}
	}
	sample := y.Scale != 1 && cells > 0
	about := ""
	if sample {
		about = fmt.Sprintf("; about %s a cell", hoursOf(int(math.Round(float64(hours)/float64(cells)))))
	}
	switch {
	case blanks > 0 && sample:
		return about + ", none where blank"
	case blanks > 0:
		return "; blank: no hour looked at"
	}
	return about
}

// yearWords say which hours a study looked at.
func yearWords(y *floor.Year) string {
	first, last := y.Hours[0].Time.UTC(), y.Hours[len(y.Hours)-1].Time.UTC()
	const day = "2 January 2006"
	s := fmt.Sprintf("%s, %s to %s", hoursOf(len(y.Hours)), first.Format(day), last.Format(day))
	if y.Scale != 1 {
		s += ", a sample"
	}
	return s
}

// floorDuration shows what the dispatch for the steady state alone needs and has online, and what
// the secure mix has.
func floorDuration(r *floor.Result) figure {
	y := r.Year
	take := func(f func(*floor.Hour) float64) []float64 {
		var v []float64
		for _, h := range y.Hours {
			if x := f(h); !h.Short && !math.IsInf(x, 1) {
				v = append(v, x/1000)
			}
		}
		return v
	}
	dashes := []vg.Length{vg.Points(4), vg.Points(2.5)}
	var curves []curve
	for _, k := range []struct {
		name  string
		of    func(*floor.Hour) float64
		style draw.LineStyle
	}{
		{"dispatch for the steady state alone: needed", func(h *floor.Hour) float64 { return h.Bare.FloorMWs }, draw.LineStyle{Color: rgb(0xD55E00), Width: vg.Points(1.6), Dashes: dashes}},
		{"the same dispatch: online", func(h *floor.Hour) float64 { return h.Bare.OnlineMWs }, draw.LineStyle{Color: rgb(0xD55E00), Width: vg.Points(1.6)}},
		{"secure mix: needed", func(h *floor.Hour) float64 { return h.Mix.FloorMWs }, draw.LineStyle{Color: rgb(0x0072B2), Width: vg.Points(1.6), Dashes: dashes}},
		{"secure mix: online", func(h *floor.Hour) float64 { return h.Mix.OnlineMWs }, draw.LineStyle{Color: rgb(0x0072B2), Width: vg.Points(1.6)}},
		{"dispatch without any limit: online", func(h *floor.Hour) float64 { return h.FreeMWs }, draw.LineStyle{Color: rgb(0x999999), Width: vg.Points(1.2)}},
	} {
		if v := take(k.of); len(v) > 0 {
			curves = append(curves, newCurve(k.name, v, k.style))
		}
	}
	p := newPlot()
	p.X.Min, p.X.Max = 0, 100
	p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(10), niceTicks(7)
	p.X.Label.Text = "share of the hours with at least this much, %"
	p.Y.Label.Text = "kinetic energy, GW·s"
	top := 0.0
	p.Add(rules{})
	var key []entry
	for _, d := range curves {
		top = max(top, d.values[0])
		p.Add(d)
		key = append(key, entry{name: d.name, line: &d.style})
	}
	p.Y.Min, p.Y.Max = 0, roundUp(top)
	below := yearWords(y)
	if y.NoInertia > 0 {
		below += fmt.Sprintf("; left out of the first: %s in which no inertia is enough", hoursOf(y.NoInertia))
	}
	return figure{width: 8 * vg.Inch, height: 5 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "Inertia needed and online, each curve sorted by itself: "+r.Case.Name, below)
		keyHeight := entryHeight*vg.Length(len(key)) + vg.Points(6)
		drawKey(area, key)
		p.Draw(draw.Crop(area, 0, -vg.Points(6), 0, -keyHeight))
	}}
}
