package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"evenkeel/study"
)

// WriteMatch writes match.csv, match.svg, match.png and fitted.yaml, a fragment of a case, each whole.
func WriteMatch(dir string, f *study.Fit, event string) error {
	fig := matchFigure(f, event)
	for _, file := range []struct {
		name string
		fill func(io.Writer) error
	}{
		{"match.csv", func(w io.Writer) error { return matchCSV(w, f) }},
		{"match.svg", fig.svg}, {"match.png", fig.png},
		{"fitted.yaml", func(w io.Writer) error { return fragment(w, f, event) }},
	} {
		if err := WriteFile(dir, file.name, file.fill); err != nil {
			return err
		}
	}
	return nil
}

func matchCSV(w io.Writer, f *study.Fit) error {
	out := csv.NewWriter(w)
	if err := out.Write([]string{"time_s", "recorded_hz", "fitted_hz"}); err != nil {
		return err
	}
	for i, s := range f.Used.S {
		if err := out.Write([]string{fixed(s, 4), fixed(f.Used.Hz[i], 6), fixed(f.Model[i], 6)}); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// fragment writes the fitted values as a part of a case.
func fragment(w io.Writer, f *study.Fit, event string) error {
	e := f.Estimates
	inertia, damping, gain, lag := e[0], e[1], e[2], e[3]
	note := func(v study.Estimate) string {
		if !v.Identified {
			return "NOT IDENTIFIED: " + v.Why
		}
		return fmt.Sprintf("%.4g to %.4g", v.Low, v.High)
	}
	deepest := 0.0
	for _, hz := range f.Model {
		deepest = math.Max(deepest, math.Abs(f.NominalHz+f.OffsetHz-hz))
	}
	_, err := fmt.Fprintf(w, `# Fitted to %s: %.6g MW lost, %.6g MW of load. A part of a case, to be looked at and copied.
# In brackets: 95 %% confidence. Kinetic energy online at the event, the load's own included:
# %.6g MW·s (%s).
load:
  damping_pct_per_hz: %.4g # (%s MW/Hz)
models:
  # The response of the whole system as one converter of %.4g MW, all out at 1 Hz.
  - {name: fitted, kind: droop, droop_pct: %.4g, deadband_hz: 0, delay_s: 0, lag_s: %.4g} # gain (%s MW/Hz), lag (%s s)
converters:
  - {name: Fitted response, kind: demand, power_mw: %.4g, response: {model: fitted, cap_mw: %.4g}}
`, event, f.LostMW, f.LoadMW, inertia.Value, note(inertia), 100*damping.Value/f.LoadMW, note(damping), gain.Value, 100/f.NominalHz, math.Max(lag.Value, 0.005), note(gain), note(lag), gain.Value, gain.Value*deepest)
	return err
}

// MatchText writes the fit for people.
func MatchText(w io.Writer, f *study.Fit, event string, dropped int) error {
	p := &page{}
	p.text("Fit of "+event, "")
	p.line("")
	p.fact("Lost", fmt.Sprintf("%s MW of %s MW of load, at %s s of the record", grouped(f.LostMW, 1), grouped(f.LoadMW, 1), fixed(f.StartS, 2)))
	p.fact("Record", fmt.Sprintf("%s of noise a sample; %s left by the fit; offset %s Hz before the loss", mHz(f.NoiseHz), mHz(f.Residual), fixed(f.OffsetHz, 4)))
	if dropped > 0 {
		p.fact("", fmt.Sprintf("lines without a time or a frequency left out: %s", count(dropped)))
	}
	p.section("What the record says (95 % confidence)")
	for _, e := range f.Estimates[:4] {
		if !e.Identified {
			p.line("  %s not identified", padRight(e.Name, 20))
			p.text(e.Why, "    ")
			continue
		}
		p.line("  %s %s %s  between %s and %s", padRight(e.Name, 20), padLeft(figures(e.Value), 10), padRight(e.Unit, 6), figures(e.Low), figures(e.High))
		switch e.Name {
		case "load damping":
			p.line("  %s %s %% per Hz of the load", padRight("", 20), padLeft(figures(100*e.Value/f.LoadMW), 10))
		case "kinetic energy":
			p.line("  %s %s Hz/s at the first instant", padRight("", 20), padLeft(figures(f.NominalHz*math.Abs(f.LostMW)/(2*e.Value)), 10))
		}
	}
	p.line("")
	p.text("One response of first order stands for all governors and converters. Check it against a second event before it is used.", "")
	p.text(Caution, "")
	_, err := w.Write(p.out.Bytes())
	return err
}

func mHz(hz float64) string { return fixed(1000*hz, 2) + " mHz" }

// figures prints a number with four figures.
func figures(v float64) string {
	switch a := math.Abs(v); {
	case a >= 1000:
		return grouped(v, 0)
	case a >= 100:
		return fixed(v, 1)
	case a >= 10:
		return fixed(v, 2)
	}
	return fixed(v, 3)
}

// matchFigure draws record and fit above, what is left below.
func matchFigure(f *study.Fit, event string) figure {
	upper, lower := newPlot(), newPlot()
	from, to := f.Used.S[0]-f.StartS, f.Used.S[len(f.Used.S)-1]-f.StartS
	low, high := math.Inf(1), math.Inf(-1)
	var rec, fit, left [][2]float64
	most := 1e-6
	for i, s := range f.Used.S {
		t := s - f.StartS
		rec, fit = append(rec, [2]float64{t, f.Used.Hz[i]}), append(fit, [2]float64{t, f.Model[i]})
		d := 1000 * (f.Used.Hz[i] - f.Model[i])
		left = append(left, [2]float64{t, d})
		most = max(most, math.Abs(d))
		low, high = min(low, f.Used.Hz[i], f.Model[i]), max(high, f.Used.Hz[i], f.Model[i])
	}
	pad := 0.05 * (high - low)
	upper.X.Min, upper.X.Max, upper.Y.Min, upper.Y.Max = from, to, low-pad, high+pad
	lower.X.Min, lower.X.Max, lower.Y.Min, lower.Y.Max = from, to, -1.1*most, 1.1*most
	upper.X.Tick.Marker, upper.Y.Tick.Marker = niceTicks(8), niceTicks(6)
	lower.X.Tick.Marker, lower.Y.Tick.Marker = niceTicks(8), niceTicks(4)
	upper.Y.Label.Text, lower.Y.Label.Text, lower.X.Label.Text = "frequency, Hz", "left over, mHz", "time since the loss, s"
	dark := draw.LineStyle{Color: rgb(0x999999), Width: vg.Points(1)}
	blue := draw.LineStyle{Color: rgb(0xD55E00), Width: vg.Points(1.6)}
	upper.Add(path{rec, dark}, path{fit, blue})
	lower.Add(path{left, dark}, zeroLine{})
	return figure{width: 9 * vg.Inch, height: 5.6 * vg.Inch, draw: func(canvas draw.Canvas) {
		area := heading(blank(canvas), "Fit of "+event, fmt.Sprintf("kinetic energy %s MW·s (%s to %s)", figures(f.Estimates[0].Value), figures(f.Estimates[0].Low), figures(f.Estimates[0].High)))
		used := drawKeyRow(area, []entry{{name: "recorded", line: &dark}, {name: "fitted", line: &blue}})
		area = draw.Crop(area, 0, 0, 0, -used-vg.Points(4))
		cut := (area.Max.Y - area.Min.Y) * 0.32
		drawStacked(upper, draw.Crop(area, 0, 0, cut, 0), lower, draw.Crop(area, 0, 0, 0, cut-(area.Max.Y-area.Min.Y)-vg.Points(6)))
	}}
}
