package report

import (
	"image/color"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// bins are stretches along x, in order, that each carry a value.
type bins struct {
	from, to []float64
}

// runs calls f for each stretch of bins without a hole between them.
func (b bins) runs(f func(first, last int)) {
	for first := 0; first < len(b.from); {
		last := first
		for last+1 < len(b.from) && b.from[last+1] <= b.to[last] {
			last++
		}
		f(first, last)
		first = last + 1
	}
}

// layer is one band of a stack: a value a bin, parts above and below zero apart.
type layer struct {
	name   string
	color  color.Color
	up     []float64 // ≥ 0
	down   []float64 // ≤ 0
	listed bool      // it is not zero everywhere
}

// newLayer makes an empty layer for n bins.
func newLayer(name string, clr color.Color, n int) layer {
	return layer{name: name, color: clr, up: make([]float64, n), down: make([]float64, n)}
}

// add adds v, positive or negative, to bin i.
func (l *layer) add(i int, v float64) {
	v = finite(v)
	l.listed = l.listed || !printsZero(v, decMW)
	if v > 0 {
		l.up[i] += v
	} else {
		l.down[i] += v
	}
}

// stack draws layers on top of each other as steps, values below zero downwards.
type stack struct {
	bins   bins
	layers []layer
}

// extent is the lowest and the highest value the stack reaches.
func (s stack) extent() (lo, hi float64) {
	for i := range s.bins.from {
		var up, down float64
		for k := range s.layers {
			up += s.layers[k].up[i]
			down += s.layers[k].down[i]
		}
		lo, hi = min(lo, down), max(hi, up)
	}
	return lo, hi
}

// Plot fills each layer from zero to its top, the outermost first: neighbours share
// their edges and no seam shows between them.
func (s stack) Plot(c draw.Canvas, p *plot.Plot) {
	n := len(s.bins.from)
	ups, downs := make([][]float64, len(s.layers)), make([][]float64, len(s.layers))
	up, down := make([]float64, n), make([]float64, n)
	for k := range s.layers {
		for i := range up {
			up[i] += s.layers[k].up[i]
			down[i] += s.layers[k].down[i]
		}
		ups[k], downs[k] = slices.Clone(up), slices.Clone(down)
	}
	for k := len(s.layers) - 1; k >= 0; k-- {
		if l := &s.layers[k]; l.listed {
			s.fill(c, p, l.color, ups[k])
			s.fill(c, p, l.color, downs[k])
		}
	}
}

// fill fills between zero and the steps of top, where top is not zero everywhere.
func (s stack) fill(c draw.Canvas, p *plot.Plot, clr color.Color, top []float64) {
	tx, ty := p.Transforms(&c)
	s.bins.runs(func(first, last int) {
		line := []vg.Point{{X: tx(s.bins.from[first]), Y: ty(0)}}
		flat := true
		for i := first; i <= last; i++ {
			y := ty(top[i])
			flat = flat && y == ty(0)
			if i == first || line[len(line)-1].Y != y {
				line = append(line, vg.Point{X: tx(s.bins.from[i]), Y: y})
			} else {
				line = line[:len(line)-1]
			}
			line = append(line, vg.Point{X: tx(s.bins.to[i]), Y: y})
		}
		if flat {
			return
		}
		line = append(line, vg.Point{X: tx(s.bins.to[last]), Y: ty(0)})
		c.FillPolygon(clr, c.ClipPolygonXY(line))
	})
}

// stepLine draws one value a bin as steps.
type stepLine struct {
	bins  bins
	y     []float64
	style draw.LineStyle
}

func (s stepLine) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	s.bins.runs(func(first, last int) {
		var line []vg.Point
		for i := first; i <= last; i++ {
			y := ty(finite(s.y[i]))
			if i > first && line[len(line)-1].Y == y {
				line = line[:len(line)-1]
			} else {
				line = append(line, vg.Point{X: tx(s.bins.from[i]), Y: y})
			}
			line = append(line, vg.Point{X: tx(s.bins.to[i]), Y: y})
		}
		c.StrokeLines(s.style, c.ClipLinesXY(line)...)
	})
}
