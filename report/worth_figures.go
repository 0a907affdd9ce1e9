package report

import (
	"cmp"
	"fmt"
	"image/color"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/solve"
	"evenkeel/study/ranges"
	"evenkeel/study/worth"
)

func solid(hex uint32, points float64) draw.LineStyle {
	return draw.LineStyle{Color: rgb(hex), Width: vg.Points(points)}
}

func dashes(hex uint32, points float64) draw.LineStyle {
	s := solid(hex, points)
	s.Dashes = []vg.Length{vg.Points(5), vg.Points(3)}
	return s
}

// wayStyles are the lines of marginal and of hull prices.
var wayStyles = [worth.Ways]draw.LineStyle{solid(0x0072B2, 1.7), dashes(0xD55E00, 1.7)}

// hoursShown says which hours a figure shows.
func hoursShown(r *worth.Result, o WorthOptions) string {
	const date = "2 January 2006"
	s := fmt.Sprintf("%s, %s to %s", hoursOf(len(r.Records)), r.Records[0].Time.UTC().Format(date), r.Records[len(r.Records)-1].Time.UTC().Format(date))
	if o.Sample {
		s += ", a sample"
	}
	return s
}

// pricesShown is the share of hours that a price axis must reach.
const pricesShown = 0.995

// worthPricesFigure shows the prices of four services as duration curves, both ways.
func worthPricesFigure(r *worth.Result, o WorthOptions) figure {
	shape, best := -1, -1.0
	for _, q := range r.Prices {
		if q.Of == "response" {
			shape++
			if v := q.Mean[0][worth.Marginal]; v > best {
				best = v
			}
		}
	}
	shapes := r.Full().Shapes
	if r.Product == nil {
		shape = -1
		for i := range shapes {
			if r.Prices[2+i].Mean[0][worth.Marginal] == best {
				shape = i
			}
		}
	}
	type panel struct {
		title, axis string
		of          func(p *solve.Prices) float64
	}
	panels := []panel{
		{"Energy", "per MWh", func(p *solve.Prices) float64 { return p.EnergyPerMWh }},
		{"Inertia", "per MW·s and hour", func(p *solve.Prices) float64 { return p.InertiaPerMWs }},
	}
	if shape >= 0 {
		panels = append(panels, panel{"Response: " + shapes[shape].Name, "per MW and hour", func(p *solve.Prices) float64 { return p.ResponsePerMW[shape] }})
	}
	panels = append(panels, panel{"A smaller loss", "per MW and hour", func(p *solve.Prices) float64 { return p.LossPerMW }})
	plots := make([]*plot.Plot, len(panels))
	for i, q := range panels {
		p := newPlot()
		p.Title.Text = q.title
		p.X.Min, p.X.Max = 0, 100
		p.X.Tick.Marker = niceTicks(5)
		p.X.Label.Text = "share of hours with at least this price, %"
		p.Y.Label.Text = r.Case.Currency + " " + q.axis
		top, low := 0.0, 0.0
		var curves []curve
		for way := range worth.Ways {
			v := make([]float64, len(r.Records))
			for k := range r.Records {
				v[k] = finite(q.of(&r.Records[k].Without.Way(way).Prices))
			}
			top, low = max(top, ranges.Quantile(v, pricesShown)), min(low, ranges.Quantile(v, 1-pricesShown))
			slices.Sort(v)
			slices.Reverse(v)
			curves = append(curves, curve{values: v, style: wayStyles[way]})
		}
		p.Y.Max = roundUp(top)
		if low < 0 {
			p.Y.Min = -roundUp(-low)
		} else {
			p.Y.Min = 0
		}
		p.Y.Tick.Marker = niceTicks(5)
		p.Add(rules{}, zeroLine{})
		for _, c := range curves {
			p.Add(clipped{c})
		}
		plots[i] = p
	}
	below := hoursShown(r, o) + "; the dearest 0.5 % of them may leave the axes"
	if r.Product != nil {
		below = "without the product; " + below
	}
	key := []entry{{name: "marginal: commitment held", line: &wayStyles[worth.Marginal]}, {name: "convex hull: least uplift", line: &wayStyles[worth.Hull]}}
	return figure{width: 10 * vg.Inch, height: 6.4 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "What an hour's services are worth, two ways of pricing: "+r.Case.Name, below)
		used := drawKeyRow(area, key)
		area = draw.Crop(area, 0, 0, 0, -used-vg.Points(6))
		wide, high := area.Max.X-area.Min.X, area.Max.Y-area.Min.Y
		for i, p := range plots {
			x, y := vg.Length(i%2)*wide/2, vg.Length(i/2)*high/2
			p.Draw(draw.Crop(area, x+vg.Points(4), x+wide/2-wide-vg.Points(8), high/2-y+vg.Points(4), -y-vg.Points(4)))
		}
	}}
}

// clipped draws a duration curve within its axes.
type clipped struct{ curve }

func (d clipped) Plot(c draw.Canvas, p *plot.Plot) {
	c.StrokeLines(d.style, c.ClipLinesXY(d.line(p.Transforms(&c)))...)
}

// governColors are those of the limits in the calendar of what binds.
func governColor(c *worth.Cell) color.Color {
	switch c.Governs {
	case worth.ByRoCoF:
		return cellColors[rocofBit]
	case worth.ByNadir:
		return cellColors[nadirBit]
	case worth.ByReturn, worth.BySteady:
		return cellColors[steadyBit]
	case worth.Beyond:
		return rgb(0x000000)
	}
	return cellColors[0]
}

// strip colours the x axis of a plot by what governs.
type strip struct{ cells []worth.Cell }

func (s strip) Plot(c draw.Canvas, p *plot.Plot) {
	tx, _ := p.Transforms(&c)
	for i := 0; i < len(s.cells); {
		j := i
		for j+1 < len(s.cells) && governColor(&s.cells[j+1]) == governColor(&s.cells[i]) {
			j++
		}
		lo, hi := s.cells[i].InertiaMWs, s.cells[j].InertiaMWs
		if i > 0 {
			lo = (lo + s.cells[i-1].InertiaMWs) / 2
		}
		if j+1 < len(s.cells) {
			hi = (hi + s.cells[j+1].InertiaMWs) / 2
		}
		x0, x1, y0 := tx(lo/1000), tx(hi/1000), c.Min.Y
		c.FillPolygon(governColor(&s.cells[i]), []vg.Point{{X: x0, Y: y0}, {X: x1, Y: y0}, {X: x1, Y: y0 + vg.Points(6)}, {X: x0, Y: y0 + vg.Points(6)}})
		i = j + 1
	}
}

// rateColors are none of those of the limits.
var rateColors = []uint32{0xCC79A7, 0x56B4E9, 0xD55E00, 0x332288, 0x117733, 0xDDCC77, 0x882255, 0x44AA99, 0x999933, 0x88CCEE}

// rateStyles gives the lines of an exchange: the product and its other activation times black.
func rateStyles(r *worth.Result, x *worth.Exchange) []draw.LineStyle {
	var styles []draw.LineStyle
	dash := []vg.Length{vg.Points(7), vg.Points(2)}
	others, variants := 0, 0
	for s := range x.Shapes {
		switch {
		case s == x.Primary:
			styles = append(styles, dashes(0x888888, 1.6))
		case r.Product != nil && strings.HasPrefix(x.Names[s], r.Product.Name):
			style := solid(0x000000, 1.8)
			if variants > 0 {
				style.Width = vg.Points(1.2)
				style.Dashes = []vg.Length{dash[0] / vg.Length(variants), dash[1]}
			}
			variants++
			styles = append(styles, style)
		default:
			styles = append(styles, solid(rateColors[others%len(rateColors)], 1.8))
			others++
		}
	}
	return styles
}

const (
	courseCells = 161
	stripShare  = 0.07 // of the height
)

// byEnd orders a key by the value of its lines at their right ends, the highest first.
func byEnd(key []entry, ends []float64) []entry {
	order := make([]int, len(key))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(ends[b], ends[a]) })
	out := make([]entry, len(key))
	for i, k := range order {
		out[i] = key[k]
	}
	return out
}

// exchangeFigure shows what one MW of each response replaces after the largest loss, over the kinetic
// energy left.
func exchangeFigure(r *worth.Result, x *worth.Exchange) figure {
	loss := x.Middle()
	cells := x.Course(loss, r.Records, courseCells)
	upper, lower := newPlot(), newPlot()
	upper.Add(rules{})
	lower.Add(rules{})
	var key []entry
	styles := rateStyles(r, x)
	top, low := [2]float64{1, 0}, [2]float64{}
	var ends []float64
	for s := range x.Shapes {
		style := styles[s]
		key = append(key, entry{name: x.Names[s], line: ptr(style)})
		end := math.Inf(-1) // at the right of the lower plot
		for of, p := range []*plot.Plot{upper, lower} {
			var line [][2]float64
			for i := range cells {
				c := &cells[i]
				// Within the window of RoCoF primary reserve hardly acts: its rates there mean nothing.
				if !c.Rated() || of == 1 && c.InertiaPerPrimary == 0 || of == 0 && c.Governs == worth.ByRoCoF {
					p.Add(path{line, style})
					line = nil
					continue
				}
				v := c.Rates[s].PrimaryMW
				if of == 1 {
					v = c.Rates[s].InertiaMWs
				}
				top[of], low[of] = max(top[of], v), min(low[of], v)
				if of == 1 {
					end = v
				}
				line = append(line, [2]float64{c.InertiaMWs / 1000, v})
			}
			p.Add(path{line, style})
		}
		ends = append(ends, end)
	}
	key = byEnd(key, ends)
	seen := map[string]bool{}
	for i := range cells {
		name := governsText(&cells[i])
		if cells[i].Governs == worth.ByRoCoF {
			name += " (primary reserve comes too late)"
		}
		if !seen[name] {
			seen[name] = true
			key = append(key, entry{name: "governs: " + name, color: governColor(&cells[i])})
		}
	}
	for of, p := range []*plot.Plot{upper, lower} {
		p.X.Min, p.X.Max = cells[0].InertiaMWs/1000, max(cells[len(cells)-1].InertiaMWs/1000, cells[0].InertiaMWs/1000+0.001)
		p.Y.Min, p.Y.Max = 0, roundUp(top[of])
		if low[of] < 0 {
			p.Y.Min = -roundUp(-low[of])
		}
		p.Y.Min -= stripShare * (p.Y.Max - p.Y.Min) // room for the strip, below every line
		p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(8), niceTicks(5)
		p.Add(zeroLine{}, strip{cells})
	}
	upper.Y.Label.Text = "MW of " + clip(x.Names[x.Primary], 24)
	lower.Y.Label.Text = "MW·s of inertia"
	lower.X.Label.Text = "kinetic energy left after the loss, GW·s"
	held := "nothing else held"
	for s, mw := range x.HeldMW {
		if mw > 0 {
			held = "with " + plain(mw) + " MW of " + x.Names[s] + " held"
		}
	}
	return figure{width: 9 * vg.Inch, height: 6.2 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "What one more MW of each response replaces: "+r.Case.Name,
			fmt.Sprintf("after a loss of %s MW, %s; least %s that keeps all limits", grouped(loss, 1), held, x.Names[x.Primary]))
		used := drawKeyRow(area, key)
		area = draw.Crop(area, 0, -vg.Points(6), 0, -used-vg.Points(6))
		half := (area.Max.Y - area.Min.Y) / 2
		upper.Title.Text, lower.Title.Text = "MW of primary reserve for 1 MW", "MW·s of inertia for 1 MW"
		drawStacked(upper, draw.Crop(area, 0, 0, half+vg.Points(4), 0), lower, draw.Crop(area, 0, 0, 0, -half))
	}}
}

// productFigure shows what volumes of the product save, and what the next MW of each saves.
func productFigure(r *worth.Result, o WorthOptions) figure {
	points := r.Points[:len(r.VolumesMW)]
	scale, unit := 1.0, r.Case.Currency
	most, least := 0.0, 0.0
	for _, p := range points {
		most, least = max(most, p.Gross, p.AtMost), min(least, p.Net, p.AtLeast)
	}
	if max(most, -least) >= 2e6 {
		scale, unit = 1e6, "million "+unit
	} else if max(most, -least) >= 2e3 {
		scale, unit = 1e3, "thousand "+unit
	}
	upper, lower := newPlot(), newPlot()
	var at, low, high []float64
	var net, gross [][2]float64
	for _, p := range points {
		at, low, high = append(at, p.VolumeMW), append(low, p.AtLeast/scale), append(high, p.AtMost/scale)
		net, gross = append(net, [2]float64{p.VolumeMW, p.Net / scale}), append(gross, [2]float64{p.VolumeMW, p.Gross / scale})
	}
	last := points[len(points)-1].VolumeMW
	upper.X.Min, upper.X.Max, lower.X.Min, lower.X.Max = 0, last, 0, last
	upper.Y.Max = roundUp(most / scale)
	if upper.Y.Min = 0; least < 0 {
		upper.Y.Min = -roundUp(-least / scale)
	}
	netStyle, grossStyle := solid(0x0072B2, 2), dashes(0x009E73, 1.6)
	upper.Y.Label.Text = unit + " a year"
	upper.Add(band{at, low, high, rgb(0xD6E6F2)}, rules{}, zeroLine{}, path{gross, grossStyle}, path{net, netStyle}, dots{net, rgb(0x0072B2)})
	var steps [][2]float64
	top, bottom := o.At/1e3, 0.0
	for k, p := range points {
		if math.IsNaN(p.NextPerMW) {
			continue
		}
		v := p.NextPerMW / 1e3
		top, bottom = max(top, v), min(bottom, v)
		steps = append(steps, [2]float64{p.VolumeMW, v}, [2]float64{points[k+1].VolumeMW, v})
	}
	lower.Y.Max = roundUp(top)
	if lower.Y.Min = 0; bottom < 0 {
		lower.Y.Min = -roundUp(-bottom)
	}
	lower.Y.Label.Text = "thousand " + r.Case.Currency + " a MW and year"
	lower.X.Label.Text = "volume of the product, MW"
	lower.Add(rules{}, zeroLine{}, path{steps, netStyle})
	key := []entry{{name: "saved, net of what it is paid", line: &netStyle}, {name: "range of the gaps", color: rgb(0xD6E6F2)}, {name: "before its own pay", line: &grossStyle}}
	price, buy := dashes(0xD55E00, 1.4), solid(0xCC79A7, 1.4)
	if o.AtGiven {
		lower.Add(path{[][2]float64{{0, o.At / 1e3}, {last, o.At / 1e3}}, price})
		key = append(key, entry{name: "price asked about", line: &price})
	}
	k := r.Choice(o.AtGiven, o.At)
	v := points[k].VolumeMW
	for _, p := range []*plot.Plot{upper, lower} {
		p.X.Tick.Marker, p.Y.Tick.Marker = niceTicks(8), niceTicks(5)
		p.Add(path{[][2]float64{{v, p.Y.Min}, {v, p.Y.Max}}, buy})
	}
	why := "volume to buy"
	if !o.AtGiven {
		why = "volume that brings 90 %"
	}
	key = append(key, entry{name: fmt.Sprintf("%s: %s MW", why, plain(roundMW(v))), line: &buy})
	below := fmt.Sprintf("all out %s, %s; %s", activationWords(r.Product, r.Product.ActivationS), holdWords(r.Product), hoursShown(r, o))
	return figure{width: 9 * vg.Inch, height: 6.2 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "What "+r.Product.Name+" saves: "+r.Case.Name, below)
		used := drawKeyRow(area, key)
		area = draw.Crop(area, 0, -vg.Points(8), 0, -used-vg.Points(6))
		half := (area.Max.Y - area.Min.Y) / 2
		upper.Title.Text, lower.Title.Text = "Saved by the whole volume", "Saved by the next MW"
		drawStacked(upper, draw.Crop(area, 0, 0, half+vg.Points(4), 0), lower, draw.Crop(area, 0, 0, 0, -half))
	}}
}

// dots marks points.
type dots struct {
	points [][2]float64
	color  color.Color
}

func (d dots) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	style := draw.GlyphStyle{Color: d.color, Radius: vg.Points(2.4), Shape: draw.CircleGlyph{}}
	for _, q := range d.points {
		c.DrawGlyph(style, vg.Point{X: tx(q[0]), Y: ty(q[1])})
	}
}
