package report

import (
	"bytes"
	"io"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// pngDPI makes a figure of 10 inches 1,500 pixels wide.
const pngDPI = 150

// figure is a drawing of a given size that can go to any canvas.
type figure struct {
	width, height vg.Length
	draw          func(draw.Canvas)
}

// drawStacked draws two plots one above the other, their data starting at the same left edge.
func drawStacked(upper *plot.Plot, above draw.Canvas, lower *plot.Plot, below draw.Canvas) {
	a, b := upper.DataCanvas(above).Min.X, lower.DataCanvas(below).Min.X
	if a > b {
		below = draw.Crop(below, a-b, 0, 0, 0)
	} else {
		above = draw.Crop(above, b-a, 0, 0, 0)
	}
	upper.Draw(above)
	lower.Draw(below)
}

// svg writes the figure as SVG. Text stays text: where Liberation Sans is not
// installed, a font of the same widths takes its place.
func (f figure) svg(w io.Writer) error {
	c := vgsvg.NewWith(vgsvg.UseWH(f.width, f.height))
	f.draw(draw.New(c))
	var buf bytes.Buffer
	if _, err := c.WriteTo(&buf); err != nil {
		return err
	}
	_, err := w.Write(bytes.ReplaceAll(buf.Bytes(),
		[]byte("font-family:Liberation Sans;"),
		[]byte("font-family:'Liberation Sans',Arial,Helvetica,sans-serif;")))
	return err
}

// png writes the figure as PNG.
func (f figure) png(w io.Writer) error {
	c := vgimg.PngCanvas{Canvas: vgimg.NewWith(vgimg.UseWH(f.width, f.height), vgimg.UseDPI(pngDPI))}
	f.draw(draw.New(c))
	_, err := c.WriteTo(w)
	return err
}
