package report

import (
	"image/color"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// stateColors can be told apart with any common colour blindness, and by lightness.
var stateColors = [states]color.Color{
	free: rgb(0xE4E4E4), byRoCoF: rgb(0x0072B2), byNadir: rgb(0xE69F00),
	bySteady: rgb(0x009E73), bySeveral: rgb(0xCC79A7), isShort: rgb(0x000000),
}

var stateNames = [states]string{
	free: "no limit binds", byRoCoF: "RoCoF", byNadir: "nadir",
	bySteady: "steady state", bySeveral: "several", isShort: "short",
}

// calendar shows each hour as a cell: days to the right, hours of the day upwards.
type calendar struct {
	days []day
	of   []state // one an hour
	at   []int   // hour of the day of each hour
}

// block is a rectangle of cells of one state: days [from, to), hours [low, high).
type block struct {
	from, to  float64
	low, high int
	is        state
}

// blocks joins cells of one state into rectangles: up each day, then over days whose
// columns hold the same piece. Fewer shapes make a smaller file without seams.
func (k calendar) blocks() []block {
	var all []block
	open := []int{} // blocks of the day before, as indices into all
	for _, d := range k.days {
		x := xOf(d.start)
		var next []int
		for i := d.from; i < d.to; {
			j := i + 1
			for j < d.to && k.of[j] == k.of[i] && k.at[j] == k.at[j-1]+1 {
				j++
			}
			piece := block{x, x + 1, k.at[i], k.at[j-1] + 1, k.of[i]}
			found := -1
			for _, b := range open {
				if o := all[b]; o.to == x && o.low == piece.low && o.high == piece.high && o.is == piece.is {
					found = b
				}
			}
			if found >= 0 {
				all[found].to = piece.to
			} else {
				found = len(all)
				all = append(all, piece)
			}
			next = append(next, found)
			i = j
		}
		open = next
	}
	return all
}

// Plot draws all solved hours in the colour of those that no limit binds, then one
// path a state on top: pieces of one path show no seam where they meet.
func (k calendar) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	var paths [states]vg.Path
	for _, b := range k.blocks() {
		for _, is := range []state{free, b.is} {
			path := &paths[is]
			path.Move(vg.Point{X: tx(b.from), Y: ty(float64(b.low))})
			path.Line(vg.Point{X: tx(b.to), Y: ty(float64(b.low))})
			path.Line(vg.Point{X: tx(b.to), Y: ty(float64(b.high))})
			path.Line(vg.Point{X: tx(b.from), Y: ty(float64(b.high))})
			path.Close()
			if b.is == free {
				break
			}
		}
	}
	for is, path := range paths {
		if path != nil {
			c.SetColor(stateColors[is])
			c.Fill(path)
		}
	}
}

// ruledOver draws the bounds of a time axis over the cells.
type ruledOver []float64

func (r ruledOver) Plot(c draw.Canvas, p *plot.Plot) {
	tx, _ := p.Transforms(&c)
	for _, x := range r {
		c.StrokeLine2(draw.LineStyle{Color: color.White, Width: vg.Points(0.7)}, tx(x), c.Min.Y, tx(x), c.Max.Y)
	}
}

// bindingFigure is a calendar of which limit binds.
func bindingFigure(c *fleet.Case, hours []solve.Hour, o Options) figure {
	k := calendar{of: make([]state, len(hours)), at: make([]int, len(hours))}
	var n [states]int
	for i := range hours {
		k.of[i] = stateOf(&hours[i])
		k.at[i] = hours[i].Time.UTC().Hour()
		n[k.of[i]]++
	}
	k.days = splitDays(hours, measure{of: make([]float64, len(hours))})
	from, to := k.days[0].start, k.days[len(k.days)-1].start.AddDate(0, 0, 1)

	p := newPlot()
	// A calendar of one or two days is still divided into days.
	axis := stripesOfDays(from, to)
	axis.apply(p, from, to)
	p.X.Label.Text = axis.label
	p.Y.Min, p.Y.Max = 0, 24
	p.Y.Tick.Marker = hoursOfDay
	p.Y.Label.Text = "hour of the day (UTC)"
	p.Add(k, ruledOver(axis.bounds))

	var key []entry
	for is := free; is < states; is++ {
		key = append(key, entry{name: stateNames[is] + " " + count(n[is]) + " h", color: stateColors[is]})
	}
	below := span(hours)
	if o.WithoutLimits {
		below += "; solved without limits"
	}
	if len(hours) < 24*len(k.days) {
		below += "; blank: not in this run"
	}
	return figure{width: 10 * vg.Inch, height: 4 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "Which frequency limit binds, hour by hour: "+c.Name, below)
		drawKeyRow(area, key)
		p.Draw(draw.Crop(area, 0, -vg.Points(8), 0, -entryHeight-vg.Points(8)))
	}}
}

var hoursOfDay = plot.ConstantTicks([]plot.Tick{
	{Value: 0, Label: "0"}, {Value: 6, Label: "6"}, {Value: 12, Label: "12"}, {Value: 18, Label: "18"}, {Value: 24, Label: "24"},
})

func stripesOfDays(from, to time.Time) timeAxis {
	if to.Sub(from) > 48*time.Hour {
		return newTimeAxis(from, to, 16)
	}
	return dayAxis(from, to, 1)
}
