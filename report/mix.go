package report

import (
	"fmt"
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
