package report

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"image/png"
	"io"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"pgregory.net/rapid"

	"evenkeel/fleet"
	"evenkeel/solve"
)

func figuresOf(c *fleet.Case, hours, without []solve.Hour, o Options) map[string]figure {
	return map[string]figure{
		"inertia": inertiaFigure(c, hours, without, o),
		"mix":     mixFigure(c, hours, without, o),
		"binding": bindingFigure(c, hours, o),
	}
}

// Every figure comes out well-formed, at its size, and the same bytes every time, for
// runs of any length, and of hours solved without limits.
func TestFigures(t *testing.T) {
	for _, k := range []struct {
		resources, year, first, last int
		o                            Options
	}{
		{25, 2031, 0, 8760, Options{}}, {9, 2032, 0, 8784, Options{}}, {9, 2031, 100, 101, Options{}},
		{40, 2031, 4010, 4300, Options{}}, {25, 2031, 4000, 4024, Options{WithoutLimits: true}},
	} {
		t.Run(fmt.Sprintf("%d resources, %d hours of %d", k.resources, k.last-k.first, k.year), func(t *testing.T) {
			t.Parallel() // figures of one process may be drawn at the same time
			c, hours, without := synthYear(k.resources, k.year)
			hours, without = hours[k.first:k.last], without[k.first:k.last]
			if k.o.WithoutLimits {
				hours, without = without, nil
			}
			again := figuresOf(c, slices.Clone(hours), slices.Clone(without), k.o)
			for name, f := range figuresOf(c, hours, without, k.o) {
				svg, png1 := render(t, f.svg), render(t, f.png)
				if !bytes.Equal(svg, render(t, again[name].svg)) || !bytes.Equal(png1, render(t, again[name].png)) {
					t.Errorf("%s differs between two renderings", name)
				}
				wellFormed(t, name, svg)
				if !bytes.Contains(svg, []byte(c.Name)) {
					t.Errorf("%s.svg does not name the case", name)
				}
				img, err := png.DecodeConfig(bytes.NewReader(png1))
				if err != nil {
					t.Fatalf("%s: %v", name, err)
				}
				if want := int(math.Round(float64(f.width / vg.Inch * pngDPI))); img.Width != want {
					t.Errorf("%s is %d pixels wide, want %d", name, img.Width, want)
				}
				if len(svg) > 1_000_000 {
					t.Errorf("%s.svg has %d bytes", name, len(svg))
				}
			}
		})
	}
}

func render(t *testing.T, to func(io.Writer) error) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := to(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func wellFormed(t *testing.T, name string, svg []byte) {
	t.Helper()
	d := xml.NewDecoder(bytes.NewReader(svg))
	for {
		_, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatalf("%s.svg: %v", name, err)
		}
	}
	for _, bad := range []string{"NaN", "Inf"} {
		if bytes.Contains(svg, []byte(bad)) {
			t.Errorf("%s.svg contains %s", name, bad)
		}
	}
}

// Odd numbers in the results do not stop a figure.
func TestFiguresSurviveOddNumbers(t *testing.T) {
	c, hours, without := smallRun()
	hours[0].InertiaMWs, hours[1].InertiaLeftMWs = math.NaN(), math.Inf(1)
	hours[2].Dispatch[0].OutputMW, hours[3].DemandMW = math.Inf(-1), math.NaN()
	hours[4].Cost = math.Inf(1)
	c.Name = `"<&>" ` + strings.Repeat("a very long name ", 30)
	for name, f := range figuresOf(c, hours, without, Options{}) {
		wellFormed(t, name, render(t, f.svg))
		render(t, f.png)
	}
}

// The calendar's rectangles cover every hour once, in its state, and nothing else.
func TestCalendarBlocksCoverTheHours(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		first := rapid.IntRange(0, 23).Draw(t, "first")
		of := rapid.SliceOfN(rapid.IntRange(0, int(cells)-1), 1, 200).Draw(t, "cells")
		start := time.Date(2032, 2, 27, first, 0, 0, 0, time.UTC)
		hours := make([]solve.Hour, len(of))
		k := calendar{at: make([]int, len(of))}
		for i := range of {
			hours[i].Time = start.Add(time.Duration(i) * time.Hour)
			k.of = append(k.of, cell(of[i]))
			k.at[i] = hours[i].Time.Hour()
		}
		k.days = splitDays(hours, measure{of: make([]float64, len(of))})
		type place struct{ day, hour int }
		seen := map[place]cell{}
		origin := xOf(k.days[0].start)
		for _, b := range k.blocks() {
			for d := int(b.from - origin); d < int(b.to-origin); d++ {
				for h := b.low; h < b.high; h++ {
					if _, twice := seen[place{d, h}]; twice {
						t.Fatalf("day %d, hour %d is covered twice", d, h)
					}
					seen[place{d, h}] = b.is
				}
			}
		}
		if len(seen) != len(of) {
			t.Fatalf("%d cells for %d hours", len(seen), len(of))
		}
		for i := range of {
			if got := seen[place{(first + i) / 24, (first + i) % 24}]; got != cell(of[i]) {
				t.Fatalf("hour %d is shown as %v, it is %v", i, got, cell(of[i]))
			}
		}
	})
}

// The thinned duration curve is nowhere further from the full one than can be seen.
func TestCurveStaysOnTheValues(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 3000).Draw(t, "n")
		seed := rapid.Float64Range(0.1, 9).Draw(t, "seed")
		values := make([]float64, n)
		for i := range values {
			values[i] = 150 * (1 + math.Sin(seed*float64(i*i)))
		}
		d := newCurve("", values, draw.LineStyle{})
		scale := func(v float64) vg.Length { return vg.Length(5 * v) }
		same := func(v float64) vg.Length { return vg.Length(v) }
		line := d.line(scale, same)
		if line[0].X != 0 || line[len(line)-1].X != 500 || line[len(line)-1].Y != vg.Length(d.values[n-1]) {
			t.Fatalf("the curve runs from %v to %v", line[0], line[len(line)-1])
		}
		at := 0
		for i, v := range d.values {
			x := scale(100 * (float64(i) + 0.5) / float64(n))
			for at+1 < len(line) && line[at+1].X < x {
				at++
			}
			lo, hi := line[at+1].Y, line[at].Y
			if y := vg.Length(v); y < lo-tiny || y > hi+tiny {
				t.Fatalf("value %d of %d is %v, the curve lies between %v and %v", i, n, y, lo, hi)
			}
		}
	})
}

// The stack reaches what its layers add up to, above and below zero.
func TestStackExtent(t *testing.T) {
	a, b := newLayer("a", ink, 2), newLayer("b", ink, 2)
	a.add(0, 3)
	a.add(0, -1)
	b.add(0, 4)
	b.add(1, -2)
	s := stack{bins{[]float64{0, 1}, []float64{1, 2}}, []layer{a, b}}
	if lo, hi := s.extent(); lo != -2 || hi != 7 {
		t.Errorf("from %v to %v, want -2 to 7", lo, hi)
	}
	if !a.listed || newLayer("c", ink, 1).listed {
		t.Error("a layer is listed when it shows something")
	}
}

// A run with a hole is drawn as two pieces.
func TestBinRuns(t *testing.T) {
	b := bins{[]float64{0, 1, 5, 6}, []float64{1, 2, 6, 7}}
	var got [][2]int
	b.runs(func(first, last int) { got = append(got, [2]int{first, last}) })
	if !slices.Equal(got, [][2]int{{0, 1}, {2, 3}}) {
		t.Errorf("pieces %v", got)
	}
}

func TestTimeAxis(t *testing.T) {
	from := time.Date(2032, 1, 1, 0, 0, 0, 0, time.UTC)
	for _, k := range []struct {
		to          time.Time
		first, last string
		n           int
		label       string
	}{
		{from.Add(time.Hour), "00:00", "01:00", 2, "hour (UTC), 1 January 2032"},
		{from.Add(24 * time.Hour), "00:00", "24:00", 13, "hour (UTC), 1 January 2032"},
		{from.AddDate(0, 0, 10), "1 Jan", "10 Jan", 10, "day (UTC), 2032"},
		{from.AddDate(0, 0, 40), "1 Jan", "6 Feb", 10, "day (UTC), 2032"},
		{from.AddDate(1, 0, 0), "Jan", "Dec", 12, "month, 2032"},
		{from.AddDate(3, 0, 0), "2032", "2034", 3, "year"},
	} {
		a := newTimeAxis(from, k.to, 12)
		first, last := a.ticks[0].Label, a.ticks[len(a.ticks)-1].Label
		if first != k.first || last != k.last || len(a.ticks) != k.n || a.label != k.label {
			t.Errorf("up to %v: %d ticks from %s to %s, %q; want %d from %s to %s, %q",
				k.to, len(a.ticks), first, last, a.label, k.n, k.first, k.last, k.label)
		}
	}
}
