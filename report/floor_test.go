package report

import (
	"bytes"
	"math"
	"slices"
	"strings"
	"testing"
	"unicode/utf8"

	"evenkeel/limits"
	"evenkeel/study/floor"
	"evenkeel/study/ranges"
)

// floorResult is a made-up study of so many hours.
func floorResult(hours int, scale float64) *floor.Result {
	c, _, _ := synthYear(9, 2031)
	r := &floor.Result{Case: c, Ask: &floor.Ask{HeldMW: []float64{math.NaN()}}}
	k := floor.Chart{Shape: 0, Loss: ranges.Range{From: 10, To: 40, N: 4}, Held: ranges.Range{From: 0, To: 30, N: 4}, Others: make([]float64, len(c.Shapes)), LoadMW: 12345.6}
	k.Others[len(k.Others)-1] = 1234.5
	for i := range k.Loss.N {
		for j := range k.Held.N {
			cell := floor.Cell{LossMW: k.Loss.At(i), HeldMW: k.Held.At(j), FloorMWs: 100 * k.Loss.At(i) / (1 + k.Held.At(j)), By: limits.Kind(j % limits.Kinds)}
			if j < i {
				cell.FloorMWs = math.Inf(1)
			}
			cell.Rows.MWs, cell.Closed = cell.FloorMWs, 1.25*cell.FloorMWs
			k.Cells = append(k.Cells, cell)
		}
	}
	r.Charts = []floor.Chart{k}
	if hours == 0 {
		return r
	}
	y := &floor.Year{Scale: scale, Lacking: hours, NoInertia: 1, MeanGapMWs: 1234, MostGapMWs: 45678, MendCost: 1e6, Short: 1}
	y.LackBy[limits.Nadir] = hours - 1
	for i := range hours {
		h := &floor.Hour{Index: i, Time: c.Times[i], Held: make([]float64, len(c.Shapes)), FreeMWs: 500}
		h.Mix = floor.Need{OnlineMWs: 2000, FloorMWs: 1900, By: limits.RoCoF, Loss: "a", LossMW: 30, LargestMW: 10 + 20*float64(i)/float64(hours)}
		h.Bare = floor.Need{OnlineMWs: 1000, FloorMWs: 3000 + 10*float64(i), By: limits.Nadir, Over: i%2 == 0, Loss: "b", LossMW: 40}
		if i == 0 {
			h.Bare.FloorMWs = math.Inf(1)
		}
		h.Short = i == hours-1
		at := &y.When[h.Time.Month()-1][h.Time.Hour()]
		at.Hours, at.Lacking, at.Known, at.GapMWs, at.MostGapMWs = at.Hours+1, at.Lacking+1, at.Known+1, at.GapMWs+2000, 2000
		y.Hours = append(y.Hours, h)
	}
	for w := range y.Ways {
		y.Ways[w] = floor.WayCost{Hours: hours * w, Cost: 1e9, MixCost: 1e8, Within: 1e7}
	}
	y.Mix = floor.WayCost{Hours: hours, Cost: 2e9, MixCost: 2e9, Within: 1e8}
	y.Rules = []floor.RuleCost{{Rule: floor.Rule{Name: "one number", Steps: []floor.RuleStep{{ToMW: 30, MWs: 123456}}}, Kept: 1, Cost: 1e10},
		{Rule: floor.Rule{Name: "table by loss", Steps: []floor.RuleStep{{ToMW: 20, MWs: 1}, {FromMW: 20, ToMW: 30, MWs: 1}}}, NotKept: 1, LackMWs: 3}}
	r.Year = y
	return r
}

// The text of a study fits 80 columns and says what a mail needs, whatever the numbers.
func TestFloorText(t *testing.T) {
	for _, r := range []*floor.Result{floorResult(0, 1), floorResult(300, 29.2), floorResult(3, 1)} {
		var out bytes.Buffer
		if err := FloorText(&out, r); err != nil {
			t.Fatal(err)
		}
		for line := range strings.Lines(out.String()) {
			if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > columns {
				t.Errorf("%d characters: %s", n, line)
			}
		}
		want := []string{r.Case.Name, "Operating instruction", Caution[:30]}
		if r.Year != nil {
			want = append(want, "Hours lacking", "45.7 GW·s", "constrain machines on", "cheapest mix of all", "one number for all hours", "Covers: hours whose own floor", "up to 20.0 MW", "Not kept")
		}
		for _, w := range want {
			if !strings.Contains(out.String(), w) {
				t.Errorf("nothing says %q in\n%s", w, out.String())
			}
		}
	}
}

// Lines of the instruction cover every smaller loss and all more response: 100·loss/(1+held), no
// response below the loss's own step being enough (computed).
func TestFloorInstructions(t *testing.T) {
	r := floorResult(0, 1)
	got := r.Instructions(0) // losses of 20, 30 and 40 MW
	want := []floor.Instruction{{LossMW: 20, HeldMW: 10, FloorMWs: 2000.0 / 11, By: limits.Nadir}, {LossMW: 20, HeldMW: 30, FloorMWs: 2000.0 / 31, By: limits.RoCoF},
		{LossMW: 30, HeldMW: 20, FloorMWs: 3000.0 / 21, By: limits.Steady}, {LossMW: 30, HeldMW: 30, FloorMWs: 3000.0 / 31, By: limits.RoCoF}, {LossMW: 40, HeldMW: 30, FloorMWs: 4000.0 / 31, By: limits.RoCoF}}
	if len(got) != len(want) {
		t.Fatalf("%+v", got)
	}
	for i := range got {
		if got[i] != want[i] {
			t.Errorf("line %d is %+v, want %+v", i, got[i], want[i])
		}
	}
}

// With a year there are lines for losses that are the largest in no hour too: a quarter of the largest,
// 29.9 MW, lies in the chart's first cell, half of it and the median in the second (computed).
func TestFloorInstructionsOfSmallLosses(t *testing.T) {
	var got []float64
	for _, n := range floorResult(300, 29.2).Instructions(0) {
		if len(got) == 0 || got[len(got)-1] != n.LossMW {
			got = append(got, n.LossMW)
		}
	}
	if !slices.Equal(got, []float64{10, 20, 30}) {
		t.Errorf("lines for losses up to %v", got)
	}
}

// An instruction does not start where the steady state is only just kept and a little more response
// saves much; where no kinetic energy is enough, it says with how much and what helps.
func TestFloorInstructionsAtTheBrink(t *testing.T) {
	r := floorResult(0, 1)
	k := &r.Charts[0]
	row := k.Cells[k.Held.N : 2*k.Held.N] // 20 MW
	row[1].FloorMWs, row[1].By = 1000, limits.Steady
	for _, n := range r.Instructions(0) {
		if n.LossMW == 20 && n.HeldMW < 20 {
			t.Errorf("a line with %g MW held and %g MW·s", n.HeldMW, n.FloorMWs)
		}
	}
	k.Cells[len(k.Cells)-1].FloorMWs = math.Inf(1)
	var out bytes.Buffer
	if err := FloorText(&out, r); err != nil {
		t.Fatal(err)
	}
	for _, w := range []string{"40.0 MW     none is enough with up to 30.0 MW", "Where none is enough: hold more"} {
		if !strings.Contains(out.String(), w) {
			t.Errorf("nothing says %q in\n%s", w, out.String())
		}
	}
}

// Every figure of a study is well-formed and the same each time, for a year, a sample and a chart alone.
func TestFloorFigures(t *testing.T) {
	for _, r := range []*floor.Result{floorResult(0, 1), floorResult(400, 21.9), floorResult(1, 1)} {
		figures := map[string]figure{"chart": floorChart(r, 0)}
		if r.Year != nil {
			figures["when"], figures["duration"] = floorWhen(r), floorDuration(r)
		}
		for name, f := range figures {
			svg := render(t, f.svg)
			wellFormed(t, name, svg)
			if !bytes.Equal(svg, render(t, f.svg)) || !bytes.Contains(svg, []byte(r.Case.Name)) {
				t.Errorf("%s differs between two renderings, or does not name the case", name)
			}
		}
		dir := t.TempDir()
		if err := WriteFloor(dir, r); err != nil {
			t.Fatal(err)
		}
	}
}
