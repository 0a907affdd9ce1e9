package report

import (
	"image/color"
	"strings"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// cell says which limits bind in an hour: one bit a limits.Kind; cellShort: it is short.
type cell uint8

const (
	cellShort cell = 1 << limits.Kinds
	cells          = cellShort + 1
)

func cellOf(h *solve.Hour) cell {
	if h.Status == solve.Short {
		return cellShort
	}
	var is cell
	for k, l := range h.Limits {
		if l.Binds {
			is |= 1 << k
		}
	}
	return is
}

const (
	rocofBit  = cell(1 << limits.RoCoF)
	nadirBit  = cell(1 << limits.Nadir)
	steadyBit = cell(1 << limits.Steady)
)

// cellColors can be told apart with any common colour blindness, and by lightness.
var cellColors = [cells]color.Color{
	0: rgb(0xE4E4E4), rocofBit: rgb(0x0072B2), nadirBit: rgb(0xE69F00), steadyBit: rgb(0x009E73),
	rocofBit | nadirBit: rgb(0xCC79A7), nadirBit | steadyBit: rgb(0xF0E442), rocofBit | steadyBit: rgb(0x56B4E9),
	rocofBit | nadirBit | steadyBit: rgb(0x7A3B12), cellShort: rgb(0x000000),
}

func (is cell) String() string {
	switch is {
	case 0:
		return "no limit binds"
	case cellShort:
		return "short"
	case cellShort - 1:
		return "all three"
	}
	var names []string
	for k := range limits.Kind(limits.Kinds) {
		if is>>k&1 == 1 {
			names = append(names, k.Word())
		}
	}
	return strings.Join(names, " and ")
}

// calendar shows each hour as a cell: days to the right, hours of the day upwards.
type calendar struct {
	days []day
	of   []cell // one an hour
	at   []int  // hour of the day of each hour
}

// block is a rectangle of cells of one kind: days [from, to), hours [low, high).
type block struct {
	from, to  float64
	low, high int
	is        cell
}

// blocks joins cells of one kind into rectangles: up each day, then over days whose
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
// path a kind of cell on top: pieces of one path show no seam where they meet.
func (k calendar) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	var paths [cells]vg.Path
	for _, b := range k.blocks() {
		for _, is := range []cell{0, b.is} {
			path := &paths[is]
			path.Move(vg.Point{X: tx(b.from), Y: ty(float64(b.low))})
			path.Line(vg.Point{X: tx(b.to), Y: ty(float64(b.low))})
			path.Line(vg.Point{X: tx(b.to), Y: ty(float64(b.high))})
			path.Line(vg.Point{X: tx(b.from), Y: ty(float64(b.high))})
			path.Close()
			if b.is == 0 {
				break
			}
		}
	}
	for is, path := range paths {
		if path != nil {
			c.SetColor(cellColors[is])
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
	k := calendar{of: make([]cell, len(hours)), at: make([]int, len(hours))}
	var n [cells]int
	for i := range hours {
		k.of[i] = cellOf(&hours[i])
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
	for is := range cells {
		if n[is] > 0 {
			key = append(key, entry{name: is.String() + " " + count(n[is]) + " h", color: cellColors[is]})
		}
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
		used := drawKeyRow(area, key)
		p.Draw(draw.Crop(area, 0, -vg.Points(8), 0, -used-vg.Points(8)))
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
