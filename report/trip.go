package report

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strings"

	"evenkeel/limits"
	"evenkeel/study"
)

// WriteTrip writes trip.csv, trip.svg and trip.png into dir, each whole.
func WriteTrip(dir string, t *study.Trip) error {
	f := tripFigure(t)
	for _, file := range []struct {
		name string
		fill func(io.Writer) error
	}{
		{"trip.csv", func(w io.Writer) error { return tripCSV(w, t) }},
		{"trip.svg", f.svg}, {"trip.png", f.png},
	} {
		if err := WriteFile(dir, file.name, file.fill); err != nil {
			return err
		}
	}
	return nil
}

// tripCSV writes the trajectories: a row an instant of the simulation.
func tripCSV(w io.Writer, t *study.Trip) error {
	out := csv.NewWriter(w)
	head := []string{"time_s", "frequency_hz", "deviation_hz"}
	for _, s := range t.Sources {
		head = append(head, "delivered_mw:"+s)
	}
	if err := out.Write(head); err != nil {
		return err
	}
	for i, at := range t.Times {
		row := []string{fixed(at, 4), fixed(t.Sys.NominalHz-t.Deviation[i], 5), fixed(t.Deviation[i], 5)}
		for s := range t.Sources {
			row = append(row, fixed(t.MW[s][i], decMW))
		}
		if err := out.Write(row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// TripText writes what a trip does, for people: at most 80 columns.
func TripText(w io.Writer, t *study.Trip) error {
	p := &page{c: t.Mix.Case}
	p.text(t.Mix.Case.Name+", "+t.Mix.From, "")
	p.line("%s", minute(t.Mix.Hour.Time)+" UTC, in closed loop")
	p.line("")
	for _, l := range t.Losses {
		what := "lost"
		if l.MW < 0 {
			what = "gained (load or export lost)"
		}
		p.line("  at %s s  %s  %s MW %s, %s MW·s with it", padLeft(fixed(l.AtS, 2), 6), padRight(l.Name, 24), padLeft(grouped(math.Abs(l.MW), 1), 7), what, grouped(l.InertiaMWs, 0))
	}
	p.fact("Before", fmt.Sprintf("%s MW of load, %s GW·s, %s MW of response held", grouped(t.Sys.LoadMW, 1), grouped(t.Sys.InertiaMWs/1000, 3), grouped(sum(t.Held), 1)))
	p.section("What frequency does")
	l, f0 := t.Limits, t.Sys.NominalHz
	row := func(name, got, limit string, ok bool) {
		mark := "within"
		if !ok {
			mark = "PASSED"
		}
		p.line("  %s %s  limit %s  %s", padRight(name, 28), padRight(got, 24), padRight(limit, 10), mark)
	}
	window := "at once"
	if l.WindowS > 0 {
		window = "over " + plain(l.WindowS) + " s"
	}
	const tol = 1e-3
	row("RoCoF "+window, fixed(t.RoCoFHzPerS, 3)+" Hz/s", plain(l.MaxHzPerS), t.RoCoFHzPerS <= l.MaxHzPerS+tol)
	p.line("  %s %s", padRight("RoCoF at its steepest", 28), fixed(t.InstantHzPerS, 3)+" Hz/s")
	row("nadir", fmt.Sprintf("%s Hz at %s s", fixed(f0-t.NadirHz, 3), fixed(t.NadirS, 2)), plain(f0-l.NadirHz), t.NadirHz <= l.NadirHz+tol)
	row("steady, "+plain(l.SteadyByS)+" s after the last", fixed(f0-t.SteadyHz, 3)+" Hz", plain(f0-l.SteadyHz), t.SteadyHz <= l.SteadyHz+tol)
	switch a := t.Above; {
	case a != nil && t.PeakHz > 0.01:
		row("RoCoF upwards", fixed(t.RiseHzPerS, 3)+" Hz/s", plain(a.MaxHzPerS), t.RiseHzPerS <= a.MaxHzPerS+tol)
		row("peak", fmt.Sprintf("%s Hz at %s s", fixed(f0+t.PeakHz, 3), fixed(t.PeakS, 2)), plain(f0+a.NadirHz), t.PeakHz <= a.NadirHz+tol)
		row("steady above, as long after", fixed(f0+t.SteadyOverHz, 3)+" Hz", plain(f0+a.SteadyHz), t.SteadyOverHz <= a.SteadyHz+tol)
	case t.PeakHz > 0.01:
		p.line("  %s %s Hz at %s s", padRight("highest", 28), fixed(f0+t.PeakHz, 3), fixed(t.PeakS, 2))
	}
	if name, margin, ok := t.FirstStage(); ok {
		if margin > 0 {
			p.line("  %s %s Hz above %s", padRight("margin to shedding", 28), fixed(margin, 3), name)
		} else {
			p.line("  %s %s Hz below %s", padRight("margin to shedding", 28), fixed(-margin, 3), name)
		}
	}
	p.section("What happens")
	for _, h := range t.Happenings {
		p.line("  %s s  %s %s %s MW", padLeft(fixed(h.AtS, 2), 7), padRight(h.Name, 34), padRight(h.What, 9), padLeft(fixed(h.MW, 1), 8))
	}
	if len(t.Sources) > 0 {
		p.section("What each delivers")
		p.line("  %s %s %s %s %s", padRight("", 34), padLeft("held MW", 9), padLeft("most MW", 9), padLeft("at nadir", 9), padLeft("MW·s", 10))
		for s, name := range t.Sources {
			most, nadir := 0.0, 0.0
			for i, v := range t.MW[s] {
				if math.Abs(v) > math.Abs(most) {
					most = v
				}
				if t.Times[i] <= t.NadirS {
					nadir = v
				}
			}
			held := fixed(t.Held[s], 2)
			if math.IsInf(t.Held[s], 0) {
				held = "any"
			}
			p.line("  %s %s %s %s %s", padRight(name, 34), padLeft(held, 9), padLeft(fixed(most, 2), 9), padLeft(fixed(nadir, 2), 9), padLeft(grouped(t.EnergyMWs[s], 1), 10))
		}
	}
	p.section("Frequency, Hz, over seconds")
	p.curve(t)
	p.line("")
	p.text(Caution, "")
	_, err := w.Write(p.out.Bytes())
	return err
}

func sum(v []float64) float64 {
	s := 0.0
	for _, x := range v {
		if x > 0 && !math.IsInf(x, 0) { // what is promised downwards is below zero
			s += x
		}
	}
	return s
}

// at reads the deviation at an instant.
func deviationAt(t *study.Trip, s float64) float64 {
	for i := 1; i < len(t.Times); i++ {
		if t.Times[i] >= s && t.Times[i] > t.Times[i-1] {
			x := (s - t.Times[i-1]) / (t.Times[i] - t.Times[i-1])
			return t.Deviation[i-1] + x*(t.Deviation[i]-t.Deviation[i-1])
		}
	}
	return t.Deviation[len(t.Deviation)-1]
}

// tripSpan is the time that is worth showing.
func tripSpan(t *study.Trip) float64 {
	last := 0.0
	for _, l := range t.Losses {
		last = max(last, l.AtS)
	}
	return min(t.Times[len(t.Times)-1], last+max(40, t.Limits.SteadyByS+10))
}

// curve draws frequency with characters, the limits as dashes.
func (p *page) curve(t *study.Trip) {
	const wide, high = 66, 14
	span, f0 := tripSpan(t), t.Sys.NominalHz
	low, top := max(t.NadirHz, t.Limits.NadirHz)*1.05, max(t.PeakHz*1.1, 0.02)
	if low > 10 {
		low = 10
	}
	row := func(dev float64) int {
		return min(max(int(math.Round((dev+top)/(low+top)*(high-1))), 0), high-1)
	}
	lines := make([][]rune, high)
	for i := range lines {
		lines[i] = []rune(strings.Repeat(" ", wide))
	}
	for x := range wide {
		at := span * float64(x) / (wide - 1)
		lines[row(t.Limits.NadirHz)][x] = '-'
		if at >= t.Limits.SteadyByS {
			lines[row(t.Limits.SteadyHz)][x] = '-'
		}
	}
	last := row(0)
	for x := range wide {
		r := row(deviationAt(t, span*float64(x)/(wide-1)))
		for y := min(last, r); y <= max(last, r); y++ {
			if y == r || x > 0 {
				lines[y][x] = '*'
			}
		}
		last = r
	}
	for i, l := range lines {
		label := ""
		if i%3 == 1 || i == high-1 {
			label = fixed(f0+top-(low+top)*float64(i)/(high-1), 2)
		}
		p.line("  %s |%s", padLeft(label, 6), strings.TrimRight(string(l), " "))
	}
	p.line("  %s +%s", padLeft("", 6), strings.Repeat("-", wide))
	marks := []byte(strings.Repeat(" ", wide+8))
	step := niceStep(span / 5)
	for s := 0.0; s <= span; s += step {
		x := int(math.Round(s / span * (wide - 1)))
		copy(marks[x:], fmt.Appendf(nil, "%g", s))
	}
	p.line("  %s  %s", padLeft("s", 6), string(bytes.TrimRight(marks, " ")))
}

// limitsAt are the deviations that the corridor allows, as lines of a plot: pairs of
// (seconds, deviation).
func limitsAt(l limits.Limits, from, to float64) (nadir, steady [][2]float64) {
	nadir = [][2]float64{{from, l.NadirHz}, {to, l.NadirHz}}
	if from+l.SteadyByS < to {
		steady = [][2]float64{{from + l.SteadyByS, l.SteadyHz}, {to, l.SteadyHz}}
	}
	return nadir, steady
}
