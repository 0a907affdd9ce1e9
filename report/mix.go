package report

import (
	"fmt"
	"image/color"
	"slices"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// A run of fewer days is drawn hour by hour instead of by daily means, and of so few
// that they are the hardest days anyway only once.
const (
	daysForMeans = 15
	hardDays     = 5
)

// panels are the three stacks of one stretch of hours.
type panels struct {
	bins                      bins
	output, response, inertia []layer
	demand                    []float64
}

// mixFigure shows who provides output, response by speed, and inertia: over the run
// and, below, hour by hour in the five hardest days.
func mixFigure(c *fleet.Case, hours, without []solve.Hour, o Options) figure {
	g := newGroups(c)
	m := measureHours(c, hours, pair(hours, without))
	days := splitDays(hours, m)
	from, to := hours[0].Time.UTC(), hours[len(hours)-1].Time.UTC().Add(time.Hour)
	perDay := len(days) >= daysForMeans
	var run panels
	if perDay {
		from, to = days[0].start, days[len(days)-1].start.AddDate(0, 0, 1)
		run = dailyPanels(g, hours, days)
	} else {
		run = hourlyPanels(g, hours)
	}
	var hard []day
	var hardest []panels
	if len(days) > hardDays {
		hard = hardestDays(days, hardDays)
		for _, d := range hard {
			hardest = append(hardest, hourlyPanels(g, hours[d.from:d.to]))
		}
	}
	s := newScales(append([]panels{run}, hardest...))
	over := runPlots(run, s, newTimeAxis(from, to, 12), from, to, hard)
	byDay := dayPlots(hardest, hard, s)
	keys := keysOf(append([]panels{run}, hardest...))

	const rowHeight = 1.55 * vg.Inch
	const dayBlock = 3*rowHeight + vg.Length(62)
	height := 3*rowHeight + vg.Points(90)
	if hard != nil {
		height += dayBlock + marksHeight
	}
	below := span(hours)
	switch {
	case perDay:
		below += "; means of each day"
	case len(hours) > 1:
		below += "; hour by hour"
	}
	if o.WithoutLimits {
		below += "; solved without limits"
	}
	return figure{width: 10 * vg.Inch, height: height, draw: func(canvas draw.Canvas) {
		area := blank(canvas)
		lower := area
		if hard != nil {
			lower.Max.Y = area.Min.Y + dayBlock
			area.Min.Y = lower.Max.Y + vg.Points(6)
		}
		area = heading(area, "Who provides output, response and inertia: "+c.Name, below)
		if hard != nil {
			area.Max.Y -= marksHeight
		}
		drawRows(area, over, keys, nil)
		if hard != nil {
			lower = heading(lower, "The five hardest days, hardest first", "by "+m.what+"; hour by hour (UTC)")
			lower.Max.Y -= vg.Points(14)
			drawRows(lower, byDay, keys, dayNames(hard))
		}
	}}
}

// hourlyPanels makes a bin of every hour.
func hourlyPanels(g groups, hours []solve.Hour) panels {
	p := newPanels(g, len(hours))
	for i := range hours {
		x := xOf(hours[i].Time)
		p.bins.from, p.bins.to = append(p.bins.from, x), append(p.bins.to, x+1./24)
		p.add(g, i, &hours[i], 1)
	}
	return p
}

// dailyPanels makes a bin of every day, with the means of its hours.
func dailyPanels(g groups, hours []solve.Hour, days []day) panels {
	p := newPanels(g, len(days))
	for i, d := range days {
		x := xOf(d.start)
		p.bins.from, p.bins.to = append(p.bins.from, x), append(p.bins.to, x+1)
		for h := d.from; h < d.to; h++ {
			p.add(g, i, &hours[h], 1/float64(d.to-d.from))
		}
	}
	return p
}

func newPanels(g groups, n int) panels {
	p := panels{demand: make([]float64, n)}
	for k := range g.names {
		p.output = append(p.output, newLayer(g.names[k], g.colors[k], n))
		p.inertia = append(p.inertia, newLayer(g.names[k], g.colors[k], n))
	}
	p.inertia = append(p.inertia, newLayer("load", rgb(0xBBBBBB), n))
	for s := range g.c.Shapes {
		p.response = append(p.response, newLayer(g.c.Shapes[s].Name, shapeColors[s%len(shapeColors)], n))
	}
	return p
}

// add adds an hour to bin i, its power in MW, its kinetic energy in GW·s.
func (p *panels) add(g groups, i int, h *solve.Hour, weight float64) {
	p.demand[i] += weight * finite(h.DemandMW)
	left := h.InertiaMWs
	for r := range h.Dispatch {
		d := &h.Dispatch[r]
		k := g.of[r]
		p.output[k].add(i, weight*d.OutputMW)
		p.inertia[k].add(i, weight*d.InertiaMWs/1000)
		left -= d.InertiaMWs
		if s := g.c.Resources[r].Response.Shape; s >= 0 && s < len(p.response) {
			p.response[s].add(i, weight*d.ResponseMW)
		}
	}
	// What no resource gives is the load's own; a rounding remainder is not.
	if left > 1e-9*h.InertiaMWs {
		p.inertia[len(p.inertia)-1].add(i, weight*left/1000)
	}
}

// scales are the y axes that all panels of a row share.
type scales struct {
	min, max [3]float64
	inGW     [3]bool
	none     [3]bool // nothing to show
}

func (p *panels) stacks() [3]stack {
	return [3]stack{{p.bins, p.output}, {p.bins, p.response}, {p.bins, p.inertia}}
}

func newScales(all []panels) scales {
	var s scales
	for _, p := range all {
		for row, st := range p.stacks() {
			lo, hi := st.extent()
			s.min[row], s.max[row] = min(s.min[row], lo), max(s.max[row], hi)
		}
		for _, d := range p.demand {
			s.max[0] = max(s.max[0], d)
		}
	}
	for row := range s.max {
		s.inGW[row] = row < 2 && s.max[row] >= 20_000
		s.none[row] = s.min[row] == 0 && s.max[row] == 0
		s.max[row] = roundUp(s.max[row])
		if s.min[row] < 0 {
			s.min[row] = -roundUp(-s.min[row])
		}
	}
	return s
}

func (s scales) apply(p *plot.Plot, row int) {
	p.Y.Min, p.Y.Max = s.min[row], s.max[row]
	p.Y.Tick.Marker = niceTicks(5)
	p.Y.Label.Text = [3]string{"output, MW", "response held, MW", "inertia, GW·s"}[row]
	if s.none[row] {
		p.Y.Tick.Marker = plot.ConstantTicks([]plot.Tick{{Value: 0, Label: "0"}})
	}
	if s.inGW[row] {
		p.Y.Tick.Marker = thousandths{niceTicks(5)}
		p.Y.Label.Text = [2]string{"output, GW", "response held, GW"}[row]
	}
}

// thousandths labels ticks with a thousandth of their value.
type thousandths struct{ plot.Ticker }

func (t thousandths) Ticks(lo, hi float64) []plot.Tick {
	ticks := t.Ticker.Ticks(lo/1000, hi/1000)
	for i := range ticks {
		ticks[i].Value *= 1000
	}
	return ticks
}

var demandLine = draw.LineStyle{Color: ink, Width: vg.Points(0.8)}

// fillPlot adds the stack of a row, and the demand over the output.
func fillPlot(p *plot.Plot, of *panels, row int, xs []float64) {
	p.Add(rules{xs: xs}, of.stacks()[row])
	if row == 0 {
		p.Add(stepLine{of.bins, of.demand, demandLine})
	}
	p.Add(zeroLine{})
	if lo, hi := of.stacks()[row].extent(); lo == 0 && hi == 0 {
		p.Add(note("none"))
	}
}

// note says something in the middle of a plot that shows nothing else.
type note string

func (n note) Plot(c draw.Canvas, _ *plot.Plot) {
	c.FillText(sans(9, faded, draw.XCenter, draw.YCenter), c.Center(), string(n))
}

func runPlots(run panels, s scales, axis timeAxis, from, to time.Time, hard []day) [][]*plot.Plot {
	rows := make([][]*plot.Plot, 3)
	for row := range rows {
		p := newPlot()
		s.apply(p, row)
		axis.apply(p, from, to)
		fillPlot(p, &run, row, axis.bounds)
		if row == 0 {
			p.Add(marks(hard))
		}
		if row == 2 {
			p.X.Label.Text = axis.label
		} else {
			hideTickLabels(p)
		}
		rows[row] = []*plot.Plot{p}
	}
	return rows
}

func hideTickLabels(p *plot.Plot) {
	ticks := p.X.Tick.Marker.Ticks(p.X.Min, p.X.Max)
	bare := make([]plot.Tick, len(ticks))
	for i, t := range ticks {
		bare[i] = plot.Tick{Value: t.Value}
	}
	p.X.Tick.Marker = plot.ConstantTicks(bare)
	p.X.Tick.Label.Font.Size = 1
}

func dayPlots(hardest []panels, hard []day, s scales) [][]*plot.Plot {
	rows := make([][]*plot.Plot, 3)
	for row := range rows {
		for i, d := range hard {
			p := newPlot()
			s.apply(p, row)
			if i > 0 {
				p.Y.Label.Text = ""
				p.Y.Tick.Marker = unlabelled{p.Y.Tick.Marker}
			}
			p.X.Min, p.X.Max = xOf(d.start), xOf(d.start)+1
			var ticks []plot.Tick
			var xs []float64
			for _, h := range []int{0, 6, 12, 18, 24} {
				x := xOf(d.start) + float64(h)/24
				ticks = append(ticks, plot.Tick{Value: x, Label: fmt.Sprint(h)})
				xs = append(xs, x)
			}
			p.X.Tick.Marker = plot.ConstantTicks(ticks)
			if row < 2 {
				hideTickLabels(p)
			}
			fillPlot(p, &hardest[i], row, xs[1:4])
			rows[row] = append(rows[row], p)
		}
	}
	return rows
}

// unlabelled keeps the ticks and drops their labels. An empty label would make a tick
// a minor one, so a blank stands for it.
type unlabelled struct{ plot.Ticker }

func (u unlabelled) Ticks(lo, hi float64) []plot.Tick {
	ticks := u.Ticker.Ticks(lo, hi)
	for i := range ticks {
		ticks[i].Label = " "
	}
	return ticks
}

// marks points at the hardest days from above, with their ranks; days too close
// together share one label.
type marks []day

const marksHeight = vg.Length(15)

func (m marks) Plot(c draw.Canvas, p *plot.Plot) {
	tx, _ := p.Transforms(&c)
	style := sans(8, ink, draw.XCenter, draw.YBottom)
	order := make([]int, len(m))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int { return m[a].start.Compare(m[b].start) })
	at := func(i int) vg.Length { return tx(xOf(m[order[i]].start) + 0.5) }
	const w = vg.Length(3)
	y := c.Max.Y + vg.Points(1)
	for i := 0; i < len(order); {
		j, label := i, fmt.Sprint(order[i]+1)
		for j+1 < len(order) && at(j+1)-at(j) < style.Width("0, 0") {
			j++
			label += ", " + fmt.Sprint(order[j]+1)
		}
		c.FillText(style, vg.Point{X: (at(i) + at(j)) / 2, Y: y + 1.7*w}, label)
		for ; i <= j; i++ {
			c.FillPolygon(ink, []vg.Point{{X: at(i), Y: y}, {X: at(i) - w, Y: y + 1.5*w}, {X: at(i) + w, Y: y + 1.5*w}})
		}
	}
}

// keysOf lists, for each row, what shows anywhere in it, the top of the stack first.
func keysOf(all []panels) [3][]entry {
	var keys [3][]entry
	for row, first := range all[0].stacks() {
		for k := len(first.layers) - 1; k >= 0; k-- {
			for i := range all {
				if l := all[i].stacks()[row].layers[k]; l.listed {
					keys[row] = append(keys[row], entry{name: l.name, color: l.color})
					break
				}
			}
		}
	}
	keys[0] = append([]entry{{name: "demand", line: &demandLine}}, keys[0]...)
	return keys
}

// dayNames are the titles of the columns, by rank.
func dayNames(hard []day) []string {
	var names []string
	for i, d := range hard {
		names = append(names, fmt.Sprintf("%d. %s", i+1, d.start.Format("Mon 2 Jan 2006")))
	}
	return names
}

// drawRows draws three rows of plots that line up, each with its key at the right, and
// a title over each column.
func drawRows(c draw.Canvas, rows [][]*plot.Plot, keys [3][]entry, titles []string) {
	const keyWidth = vg.Length(118)
	tiles := draw.Tiles{Rows: 3, Cols: len(rows[0]), PadX: vg.Points(5), PadY: vg.Points(6)}
	at := plot.Align(rows, tiles, draw.Crop(c, 0, -keyWidth-vg.Points(10), 0, 0))
	for row := range rows {
		for i, p := range rows[row] {
			p.Draw(at[row][i])
			if row == 0 && titles != nil {
				data := p.DataCanvas(at[row][i])
				c.FillText(sans(9.5, ink, draw.XCenter, draw.YBottom),
					vg.Point{X: data.Center().X, Y: data.Max.Y + vg.Points(3)}, titles[i])
			}
		}
		k := c
		k.Min.X = c.Max.X - keyWidth
		k.Max.Y = rows[row][0].DataCanvas(at[row][0]).Max.Y
		drawKey(k, keys[row])
	}
}

// groups says how resources are shown together: each by itself where there are few,
// else by kind.
type groups struct {
	c      *fleet.Case
	of     []int // group of each resource
	names  []string
	colors []color.Color
}

// shownAlone is how many resources still can be told apart by colour.
const shownAlone = 9

func newGroups(c *fleet.Case) groups {
	g := groups{c: c, of: make([]int, len(c.Resources))}
	if len(c.Resources) <= shownAlone {
		for r := range c.Resources {
			g.of[r] = r
			g.names = append(g.names, c.Resources[r].Name)
			g.colors = append(g.colors, resourceColors[r])
		}
		return g
	}
	index := map[fleet.Kind]int{}
	for k := fleet.Thermal; k <= fleet.Link; k++ {
		for r := range c.Resources {
			if c.Resources[r].Kind != k {
				continue
			}
			if _, ok := index[k]; !ok {
				index[k] = len(g.names)
				g.names = append(g.names, k.String())
				g.colors = append(g.colors, kindColors[k])
			}
			g.of[r] = index[k]
		}
	}
	return g
}

// Colours that stay apart with any common colour blindness.
var (
	kindColors = [...]color.Color{
		fleet.Thermal: rgb(0xCC6677), fleet.Hydro: rgb(0x332288), fleet.Condenser: rgb(0xAA4499), fleet.Battery: rgb(0x44AA99),
		fleet.Wind: rgb(0x88CCEE), fleet.Solar: rgb(0xDDCC77), fleet.Demand: rgb(0x117733), fleet.Link: rgb(0x882255),
	}
	resourceColors = [shownAlone]color.Color{
		rgb(0xCC6677), rgb(0x332288), rgb(0xDDCC77), rgb(0x117733), rgb(0x88CCEE),
		rgb(0x882255), rgb(0x44AA99), rgb(0x999933), rgb(0xAA4499),
	}
	shapeColors = []color.Color{
		rgb(0x0072B2), rgb(0xE69F00), rgb(0x009E73), rgb(0xCC79A7), rgb(0x56B4E9), rgb(0xD55E00), rgb(0xF0E442), rgb(0x999999),
	}
)
