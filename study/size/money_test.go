package size

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"evenkeel/fleet"
)

// Capital recovery factors of any handbook of engineering economics (from memory), to their last
// figure: 10 % over 10 years 0.16275, so 162.75 a year for 1,000; 5 % over 20 years 0.08024; 8 %
// over 25 years 0.09368; 12 % over 5 years 0.27741.
func TestRecoveryOfHandbooks(t *testing.T) {
	for _, q := range []struct{ pct, years, want float64 }{{10, 10, 0.16275}, {5, 20, 0.08024}, {8, 25, 0.09368}, {12, 5, 0.27741}, {0, 8, 0.125}} {
		if got := Recovery(q.pct, q.years); math.Abs(got-q.want) > 5e-6 {
			t.Errorf("%g %% over %g years: %.6f, want %.5f", q.pct, q.years, got, q.want)
		}
	}
	if got := 1000 * Recovery(10, 10); math.Abs(got-162.75) > 0.005 {
		t.Errorf("1,000 costs %.2f a year, want 162.75", got)
	}
}

// The annuity's payments, each discounted to today, are the capital: which is what it means.
func TestAnnuityPaysTheCapitalBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		years := rapid.IntRange(1, 60).Draw(t, "years")
		pct := rapid.Float64Range(0, 30).Draw(t, "pct")
		worth := 0.0
		for y := 1; y <= years; y++ {
			worth += Recovery(pct, float64(years)) / math.Pow(1+pct/100, float64(y))
		}
		if math.Abs(worth-1) > 1e-9 {
			t.Errorf("payments are worth %g today, want 1", worth)
		}
	})
}

// At its break-even capital cost a design nets nothing.
func TestBreakEvenNetsNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		f := rapid.Float64Range(0, 1e6)
		m := fleet.Money{CapitalPerMWh: f.Draw(t, "mwh"), FixedPerMWYear: f.Draw(t, "fixed"), LifetimeYears: rapid.Float64Range(1, 40).Draw(t, "years"), DiscountPct: rapid.Float64Range(0, 20).Draw(t, "pct")}
		d := fleet.Design{MW: rapid.Float64Range(0.1, 500).Draw(t, "mw"), EnergyMWh: rapid.Float64Range(0, 500).Draw(t, "energy")}
		value := rapid.Float64Range(0, 1e8).Draw(t, "value")
		m.CapitalPerMW = BreakEvenPerMW(m, d, value)
		if net := value - YearlyCost(m, d); math.Abs(net) > 1e-6*(1+value) {
			t.Errorf("nets %g of %g", net, value)
		}
	})
}

// A net value a·S − b·S² is at its peak at a/(2b), and its slopes between points are exact at
// their middles: so is the size at which they pass zero (computed).
func TestStopOfAParabola(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b := rapid.Float64Range(0.1, 10).Draw(t, "b")
		peak := rapid.Float64Range(6, 54).Draw(t, "peak")
		var mw, net []float64
		for s := 0.0; s <= 60; s += 5 {
			mw, net = append(mw, s), append(net, 2*b*peak*s-b*s*s)
		}
		if got := stop(mw, net); got.Beyond || math.Abs(got.MW-peak) > 1e-6 {
			t.Errorf("%+v, want %g", got, peak)
		}
	})
	if got := stop([]float64{0, 10, 20}, []float64{0, 1, 2}); !got.Beyond || got.MW != 20 {
		t.Errorf("%+v, want beyond 20", got)
	}
	if got := stop([]float64{0, 10, 20}, []float64{0, -1, -2}); got.Beyond || got.MW != 0 {
		t.Errorf("%+v, want none", got)
	}
}
