package report

import (
	"image/color"
	"unicode/utf8"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

func rgb(hex uint32) color.Color {
	return color.RGBA{R: uint8(hex >> 16), G: uint8(hex >> 8), B: uint8(hex), A: 255}
}

// Colours of text and lines.
var (
	ink   = rgb(0x222222)
	faded = rgb(0x666666)
	grid  = rgb(0xDDDDDD)
)

// sans is the text style of every figure.
func sans(points float64, clr color.Color, x draw.XAlignment, y draw.YAlignment) text.Style {
	return text.Style{
		Color: clr, XAlign: x, YAlign: y,
		Font:    font.Font{Typeface: "Liberation", Variant: "Sans", Size: vg.Points(points)},
		Handler: plot.DefaultTextHandler,
	}
}

// boldWeight is the bold of OpenType's nine weights, counted from normal.
const boldWeight = 3

func bold(s text.Style) text.Style {
	s.Font.Weight = boldWeight
	return s
}

// newPlot is an empty plot in the style of every figure: a frame of two axes without
// padding, small sans text, short ticks.
func newPlot() *plot.Plot {
	p := plot.New()
	for _, a := range []*plot.Axis{&p.X, &p.Y} {
		a.Padding = 0
		a.LineStyle = draw.LineStyle{Color: faded, Width: vg.Points(0.6)}
		a.Tick.LineStyle = a.LineStyle
		a.Tick.Length = vg.Points(3)
		a.Label.Padding = vg.Points(3)
	}
	p.X.Tick.Label = sans(9, ink, draw.XCenter, draw.YTop)
	p.Y.Tick.Label = sans(9, ink, draw.XRight, draw.YCenter)
	p.X.Label.TextStyle = sans(9.5, ink, draw.XCenter, draw.YBottom)
	p.Y.Label.TextStyle = sans(9.5, ink, draw.XCenter, draw.YBottom)
	p.Title.TextStyle = sans(9.5, ink, draw.XCenter, draw.YTop)
	p.Title.Padding = vg.Points(3)
	return p
}

// fit shortens s until it is no wider than width in the style.
func fit(s string, style text.Style, width vg.Length) string {
	for n := utf8.RuneCountInString(s); n > 1 && style.Width(s) > width; n-- {
		s = clip(s, n-1)
	}
	return s
}

// heading writes a bold title and a faded line below it at the top left of c and
// gives what is left of c.
func heading(c draw.Canvas, title, below string) draw.Canvas {
	style := bold(sans(12.5, ink, draw.XLeft, draw.YTop))
	c.FillText(style, vg.Point{X: c.Min.X, Y: c.Max.Y}, fit(title, style, c.Max.X-c.Min.X))
	c.Max.Y -= vg.Points(18)
	if below != "" {
		style = sans(9.5, faded, draw.XLeft, draw.YTop)
		c.FillText(style, vg.Point{X: c.Min.X, Y: c.Max.Y}, fit(below, style, c.Max.X-c.Min.X))
		c.Max.Y -= vg.Points(14)
	}
	c.Max.Y -= vg.Points(6)
	return c
}

// blank is a white canvas less a margin.
func blank(c draw.Canvas) draw.Canvas {
	c.SetColor(color.White)
	c.Fill(c.Rectangle.Path())
	m := vg.Points(12)
	return draw.Crop(c, m, -m, m, -m)
}

// entry is one line of a key: a patch or a line and its name.
type entry struct {
	name  string
	color color.Color
	line  *draw.LineStyle // nil: a patch of color
}

const entryHeight = vg.Length(13)

// drawKey lists entries from the top left of c downwards.
func drawKey(c draw.Canvas, entries []entry) {
	style := sans(9, ink, draw.XLeft, draw.YCenter)
	y := c.Max.Y - entryHeight/2
	for _, e := range entries {
		drawEntry(c, e, c.Min.X, y)
		x := c.Min.X + vg.Points(18)
		c.FillText(style, vg.Point{X: x, Y: y}, fit(e.name, style, c.Max.X-x))
		y -= entryHeight
	}
}

// drawKeyRow lists entries from left to right, wrapping to the next row where they
// would leave c.
func drawKeyRow(c draw.Canvas, entries []entry) (height vg.Length) {
	style := sans(9, ink, draw.XLeft, draw.YCenter)
	x, y := c.Min.X, c.Max.Y-entryHeight/2
	for _, e := range entries {
		wide := vg.Points(18) + style.Width(e.name)
		if x > c.Min.X && x+wide > c.Max.X {
			x, y = c.Min.X, y-entryHeight
		}
		drawEntry(c, e, x, y)
		c.FillText(style, vg.Point{X: x + vg.Points(18), Y: y}, e.name)
		x += wide + vg.Points(14)
	}
	return c.Max.Y - y + entryHeight/2
}

func drawEntry(c draw.Canvas, e entry, x, y vg.Length) {
	if e.line != nil {
		c.StrokeLine2(*e.line, x, y, x+vg.Points(14), y)
		return
	}
	h := vg.Points(4)
	c.FillPolygon(e.color, []vg.Point{{X: x, Y: y - h}, {X: x + vg.Points(14), Y: y - h},
		{X: x + vg.Points(14), Y: y + h}, {X: x, Y: y + h}})
}
