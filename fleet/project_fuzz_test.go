package fleet

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// Whatever a project file holds, it is read to errors, each of one line, or to a project that can
// be built in any size.
func FuzzProject(f *testing.F) {
	c, found := readText(tinyModels, tinyCSV)
	if c == nil {
		f.Fatal(found)
	}
	money := "\nmoney: {capital_per_mw: 1e3, capital_per_mwh: 0, lifetime_years: 10, discount_pct: 7}\n"
	for _, text := range []string{
		"project: P\nkind: battery\nactivation_s: 1\nhold_s: 900\ndown_price_per_mw: 1\nsynthetic_inertia: {mws_per_mw: 5, filter_s: 0.1}" + money,
		"project: P\nkind: flywheel\nlevel_hz: 0.2\nactivation_s: 1e-3\nhold_s: 20\nwithdraw_s: 2" + money,
		"project: P\nkind: battery\ndroop_pct: 0.5\ndelay_s: 0.1\nactivation_s: 0.4\nhold_s: 60" + money,
		"project: P\nkind: battery\nmodel: relay\nhold_s: 40" + money,
		"project: P\nkind: condenser\nunit_mva: 10\ninertia_s: 8\nlosses_share: 0" + money,
		"project: P\nkind: wind_recovery\nhost: Wind\nactivation_s: 1\nhold_s: 8\nrecovery_share: 0.1\nrecovery_s: 5" + money,
		"", "[]", "project: \xff",
	} {
		f.Add(text)
	}
	if raw, err := os.ReadFile(filepath.Join("..", "testdata", "skerra", "project.yaml")); err == nil {
		f.Add(string(raw))
	}
	f.Fuzz(func(t *testing.T, text string) {
		p, found := projectOf(c, text)
		for _, x := range found {
			if strings.ContainsAny(x.String(), "\n\r") {
				t.Errorf("a finding of two lines: %q", x)
			}
		}
		if (p == nil) != (len(found.Errors()) > 0) {
			t.Fatalf("project %v, %d errors", p != nil, len(found.Errors()))
		}
		if p == nil {
			return
		}
		e, err := p.Energy(c, p.ActivationS)
		if err != nil || p.Kind.Stores() && !(e.TotalMWh > 0 && !math.IsInf(e.TotalMWh, 1)) {
			t.Fatalf("%+v (%v)", e, err)
		}
		for _, mw := range []float64{0, 0.1, 50} {
			x, err := p.In(c, mw, mw, p.ActivationS)
			if err != nil {
				t.Fatal(err)
			}
			u := x.Hour(1, HourOptions{}).Units[p.Resource(c)]
			for _, v := range []float64{u.OnCost, u.MinMW, u.MaxMW, u.InertiaMWs, u.ResponseCapMW, u.DownCapMW, u.SyntheticCapMWs} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%g MW: %+v", mw, u)
				}
			}
			if u.ResponseCapMW > mw+1e-9 || u.DownCapMW > mw+1e-9 {
				t.Fatalf("%g MW hold %g and %g", mw, u.ResponseCapMW, u.DownCapMW)
			}
		}
	})
}
