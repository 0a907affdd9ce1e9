package report

import (
	"image/color"
	"math"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/study/size"
)

// incomeShades go from nothing to most, by lightness too.
var incomeShades = []color.Color{rgb(0xFDF1E7), rgb(0xFAD3B0), rgb(0xF3A66A), rgb(0xDB6B21), rgb(0x8C3A05)}

// monthHours shows a cell for each hour of the day of each month.
type monthHours struct {
	cells []size.Cell
	step  float64 // of income, from one shade to the next
}

func (m monthHours) shade(v float64) int {
	return int(math.Max(0, math.Min(float64(len(incomeShades)-1), math.Floor(v/m.step))))
}

func (m monthHours) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	for shade, clr := range incomeShades {
		path := vg.Path{}
		for _, q := range m.cells {
			if q.Hours == 0 || m.shade(q.MeanIncome) != shade {
				continue
			}
			x, y := float64(q.Month-1), float64(q.HourOfDay)
			path.Move(vg.Point{X: tx(x), Y: ty(y)})
			path.Line(vg.Point{X: tx(x + 1), Y: ty(y)})
			path.Line(vg.Point{X: tx(x + 1), Y: ty(y + 1)})
			path.Line(vg.Point{X: tx(x), Y: ty(y + 1)})
			path.Close()
		}
		if path != nil {
			c.SetColor(clr)
			c.Fill(path)
		}
	}
}

// neededFigure shows when the owner's best design earns what it earns.
func neededFigure(s *size.Study) figure {
	r := &s.Results[s.Best[size.Owner]]
	most, blanks := 0.0, false
	for _, c := range s.Cells {
		most = math.Max(most, c.MeanIncome)
		blanks = blanks || c.Hours == 0
	}
	m := monthHours{cells: s.Cells, step: 1}
	if most > 0 {
		m.step = niceStep(most / float64(len(incomeShades)))
	}
	p := newPlot()
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = 0, 12, 0, 24
	var months []plot.Tick
	for i := range 12 {
		months = append(months, plot.Tick{Value: float64(i) + 0.5, Label: time.Month(i + 1).String()[:3]})
	}
	p.X.Tick.Marker, p.Y.Tick.Marker = plot.ConstantTicks(months), hoursOfDay
	p.X.Tick.Color = color.White
	p.Y.Label.Text = "hour of the day (UTC)"
	p.Add(m, ruledOver{1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11})
	dec := max(0, int(math.Ceil(-math.Log10(m.step)-1e-9)))
	var key []entry
	for i, clr := range incomeShades {
		from, to := float64(i)*m.step, float64(i+1)*m.step
		switch {
		case i == 0:
			key = append(key, entry{name: "below " + grouped(to, dec), color: clr})
		case i == len(incomeShades)-1:
			key = append(key, entry{name: "from " + grouped(from, dec), color: clr})
		case from <= most:
			key = append(key, entry{name: grouped(from, dec) + " to " + grouped(to, dec), color: clr})
		}
		if from > most {
			key = key[:len(key)-1]
			break
		}
	}
	below := "mean income, " + s.Plan.Case.Currency + " an hour, own cost paid; " + designWords(s, r) + "; " + conditions(s)
	if blanks {
		below += "; white: not looked at"
	}
	return drawn(p, sizeTitle(s, "When it is needed"), below, key)
}
