package report

import (
	"strings"
	"testing"

	"evenkeel/fleet"
	"evenkeel/study/size"
)

// sized is a study of one activation time with net values as given, for both sides.
func sized(p *fleet.Project, mw, net []float64, stop size.Stop) (*size.Study, *size.Pace) {
	s := &size.Study{Plan: &size.Plan{Case: &fleet.Case{Currency: "EUR"}, Project: p}}
	pace := size.Pace{Stop: [size.Sides]size.Stop{stop, stop}}
	for i := range mw {
		r := size.Result{Point: size.Point{Design: fleet.Design{MW: mw[i]}}, Net: [size.Sides]float64{net[i], net[i]}}
		s.Results = append(s.Results, r)
		pace.Full = append(pace.Full, i)
		for side := range size.Sides {
			pace.Curve[side] = append(pace.Curve[side], i)
		}
	}
	s.Paces = []size.Pace{pace}
	return s, &s.Paces[0]
}

// What is interpolated is never a size that cannot be built, nor one that was tried and is worse.
// The sizes to try next hold the best one and go no further than its neighbours.
func TestSizesBetweenThoseTried(t *testing.T) {
	condenser, battery := &fleet.Project{Kind: fleet.CondenserProject, UnitMVA: 40}, &fleet.Project{Kind: fleet.BatteryProject}
	for _, q := range []struct {
		p          *fleet.Project
		mw, net    []float64
		stop       size.Stop
		want, next string
	}{
		{condenser, []float64{40, 80}, []float64{5, 4}, size.Stop{MW: 45}, "1 unit of 40 MVA", "One unit more nets 1.00 EUR a year less"},
		{condenser, []float64{40, 80, 160}, []float64{3, 5, 4}, size.Stop{MW: 100}, "2 or 3 units of 40 MVA", "the best is 2 or 3 units of 40 MVA: --mw 40:160:4 looks closer"},
		{condenser, []float64{40, 80, 160}, []float64{3, 5, 1}, size.Stop{MW: 75}, "2 units of 40 MVA", "Not all sizes next to it were tried: --mw 40:160:4 looks closer"},
		{condenser, []float64{40, 80}, []float64{3, 5}, size.Stop{MW: 80, Beyond: true}, "beyond the 2 units of 40 MVA tried", "the largest size tried, and up to it more has paid: --mw 80:320:7 looks further"},
		{battery, []float64{3, 6, 9}, []float64{3, 5, 4}, size.Stop{MW: 7.02}, "about 7 MW", "stops paying at about 7 MW (interpolated): --mw 3:9:7 looks closer"},
		{battery, []float64{3, 6, 9}, []float64{5, 4, 3}, size.Stop{MW: 4}, "about 4 MW", "--mw 0.75:6:8 looks closer"},
		{battery, []float64{6, 6.5, 7}, []float64{4, 5, 4}, size.Stop{MW: 6.5}, "about 6.5 MW", "about 6.5 MW (interpolated)"},
		{battery, []float64{6}, []float64{4}, size.Stop{MW: 6, Beyond: true}, "beyond the 6 MW tried", "It is the only size tried: --mw 6:12:7 looks further"},
	} {
		s, pace := sized(q.p, q.mw, q.net, q.stop)
		if got := stopWords(s, pace, size.Owner); got != q.want {
			t.Errorf("%v, %v: %s, want %s", q.mw, q.stop, got, q.want)
		}
		if got := nextWords(s, pace, size.Owner) + closer(s, pace, size.Owner); !strings.HasSuffix(got, q.next) {
			t.Errorf("%v, %v: %s, want %s", q.mw, q.stop, got, q.next)
		}
	}
}
