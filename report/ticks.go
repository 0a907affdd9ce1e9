package report

import (
	"image/color"
	"math"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// niceTicks marks round numbers, about so many.
type niceTicks int

func (n niceTicks) Ticks(lo, hi float64) []plot.Tick {
	if !(hi > lo) {
		return []plot.Tick{{Value: lo, Label: grouped(lo, 0)}}
	}
	step := niceStep((hi - lo) / float64(n))
	dec := max(0, int(math.Ceil(-math.Log10(step)-1e-9)))
	var ticks []plot.Tick
	for i := math.Ceil(lo/step - 1e-9); i*step <= hi+1e-9*step; i++ {
		ticks = append(ticks, plot.Tick{Value: i * step, Label: grouped(i*step, dec)})
	}
	return ticks
}

// niceStep rounds up to 1, 2 or 5 times a power of ten.
func niceStep(v float64) float64 {
	p := math.Pow(10, math.Floor(math.Log10(v)))
	for _, m := range []float64{1, 2, 5} {
		if v <= m*p*(1+1e-9) {
			return m * p
		}
	}
	return 10 * p
}

// roundUp is the end of an axis that has to reach v and starts at 0.
func roundUp(v float64) float64 {
	if v <= 0 {
		return 1
	}
	step := niceStep(v / 10)
	return step * math.Ceil(v*1.02/step)
}

// xOf is a time as a plot sees it: days since 1970, UTC.
func xOf(t time.Time) float64 { return float64(t.Unix()) / 86400 }

// timeAxis divides a stretch of time for the eye: stripes with a label each, bounded
// by thin lines.
type timeAxis struct {
	ticks  []plot.Tick
	bounds []float64 // of the stripes
	label  string    // of the axis
}

// newTimeAxis divides from (inclusive) to to (exclusive) into hours, days, months or
// years, so that labels fit about atMost to the axis.
func newTimeAxis(from, to time.Time, atMost int) timeAxis {
	days := to.Sub(from).Hours() / 24
	switch {
	case days <= 2:
		return hourAxis(from, to, atMost)
	case days <= 45:
		return dayAxis(from, to, int(math.Ceil(days/float64(atMost))))
	case days <= 550:
		return stripes(from, to, "month, "+years(from, to), time.Date(from.Year(), from.Month(), 1, 0, 0, 0, 0, time.UTC),
			func(t time.Time) time.Time { return t.AddDate(0, 1, 0) },
			func(a, b time.Time) (time.Time, string) { return a.Add(b.Sub(a) / 2), a.Format("Jan") })
	}
	return stripes(from, to, "year", time.Date(from.Year(), 1, 1, 0, 0, 0, 0, time.UTC),
		func(t time.Time) time.Time { return t.AddDate(1, 0, 0) },
		func(a, b time.Time) (time.Time, string) { return a.Add(b.Sub(a) / 2), a.Format("2006") })
}

// years names the year, or the first and the last.
func years(from, to time.Time) string {
	first, last := from.Format("2006"), to.Add(-time.Second).Format("2006")
	if first == last {
		return first
	}
	return first + "–" + last
}

// stripes walks from start, at or before from, by next; label says where a stripe's
// label stands and what it says.
func stripes(from, to time.Time, axis string, start time.Time,
	next func(time.Time) time.Time, label func(a, b time.Time) (time.Time, string)) timeAxis {
	t := timeAxis{label: axis}
	for a := start; a.Before(to); a = next(a) {
		b := next(a)
		if a.After(from) {
			t.bounds = append(t.bounds, xOf(a))
		}
		// A stripe cut by the end of the run is named where it shows half or more of itself.
		if at, name := label(a, b); at.After(from) && at.Before(to) {
			t.ticks = append(t.ticks, plot.Tick{Value: xOf(at), Label: name})
		}
	}
	return t
}

// dayAxis names every so many days, in the middle of the first of them.
func dayAxis(from, to time.Time, every int) timeAxis {
	return stripes(from, to, "day (UTC), "+years(from, to), midnight(from),
		func(t time.Time) time.Time { return t.AddDate(0, 0, every) },
		func(a, _ time.Time) (time.Time, string) { return a.Add(12 * time.Hour), a.Format("2 Jan") })
}

// hourAxis names the start of hours.
func hourAxis(from, to time.Time, atMost int) timeAxis {
	hours := to.Sub(from).Hours()
	every := 1
	for _, every = range []int{1, 2, 3, 6, 12} {
		if hours/float64(every) <= float64(atMost) {
			break
		}
	}
	t := timeAxis{label: "hour (UTC), " + from.Format("2 January 2006")}
	if to.After(midnight(from).AddDate(0, 0, 1)) {
		t.label = "hour (UTC), from " + from.Format("2 January 2006")
	}
	for a := from; !a.After(to); a = a.Add(time.Hour) {
		if int(a.Sub(midnight(from)).Hours())%every != 0 {
			continue
		}
		name := a.Format("15:04")
		if a.Equal(to) && a.Hour() == 0 {
			name = "24:00"
		}
		t.ticks = append(t.ticks, plot.Tick{Value: xOf(a), Label: name})
	}
	return t
}

// apply puts the axis on the plot's x axis.
func (t timeAxis) apply(p *plot.Plot, from, to time.Time) {
	p.X.Min, p.X.Max = xOf(from), xOf(to)
	p.X.Tick.Marker = plot.ConstantTicks(t.ticks)
	if t.bounds != nil {
		// The labels stand between the bounds: no tick belongs to them, only its room.
		p.X.Tick.Color = color.White
	}
}

// rules draws thin lines across the plot: vertical at xs, horizontal at the y ticks.
type rules struct {
	xs []float64
}

func (r rules) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	style := draw.LineStyle{Color: grid, Width: vg.Points(0.5)}
	for _, x := range r.xs {
		c.StrokeLine2(style, tx(x), c.Min.Y, tx(x), c.Max.Y)
	}
	for _, t := range p.Y.Tick.Marker.Ticks(p.Y.Min, p.Y.Max) {
		c.StrokeLine2(style, c.Min.X, ty(t.Value), c.Max.X, ty(t.Value))
	}
}

// zeroLine draws the line at zero where the plot reaches below it.
type zeroLine struct{}

func (zeroLine) Plot(c draw.Canvas, p *plot.Plot) {
	if p.Y.Min >= 0 {
		return
	}
	_, ty := p.Transforms(&c)
	c.StrokeLine2(draw.LineStyle{Color: ink, Width: vg.Points(0.5)}, c.Min.X, ty(0), c.Max.X, ty(0))
}
