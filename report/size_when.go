package report

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/study/size"
)

// neededFigure shows when the owner's best design earns what it earns.
func neededFigure(s *size.Study) figure {
	r := &s.Results[s.Best[size.Owner]]
	most, blanks, cells := 0.0, "", 0
	for _, c := range s.Cells {
		most = max(most, c.MeanIncome)
		if c.Hours == 0 {
			blanks = "; blank: not looked at"
			continue
		}
		cells++
	}
	sample := ""
	if n := len(s.Hours); n < s.Plan.Case.Hours() {
		sample = ", about " + hoursOf(int(math.Round(float64(n)/float64(cells)))) + " a cell"
	}
	p := newPlot()
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = 0, 24, 0, 12
	p.X.Tick.Marker, p.Y.Tick.Marker = hoursOfDay, monthRows()
	p.Y.Tick.Length = 0
	p.X.Label.Text = "hour of the day (UTC)"
	var all tiles
	for _, c := range s.Cells {
		if c.Hours == 0 {
			continue
		}
		share := 0.0
		if most > 0 {
			share = max(c.MeanIncome, 0) / most
		}
		x, y := float64(c.HourOfDay), float64(12-c.Month)
		all = append(all, tile{x, x + 1, y, y + 1, tint(sideColors[size.Owner], 0.06+0.9*share), grouped(c.MeanIncome, decimals(most))})
	}
	p.Add(all)
	below := "mean income, " + s.Plan.Case.Currency + " an hour, own cost paid; " + designWords(s, r) + "; " + conditions(s) + sample + blanks
	return figure{width: 10 * vg.Inch, height: 4.4 * vg.Inch, draw: func(canvas draw.Canvas) {
		p.Draw(heading(blank(canvas), sizeTitle(s, "When it is needed"), below))
	}}
}
