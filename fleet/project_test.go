package fleet

import (
	"math"
	"path/filepath"
	"strings"
	"testing"
)

func skerra(t *testing.T) *Case {
	t.Helper()
	c, found := Read(filepath.Join("..", "testdata", "skerra", "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	return c
}

// projectOf reads a project from a text.
func projectOf(c *Case, text string) (*Project, Findings) {
	return readProject("project.yaml", c, func(string, int64) ([]byte, error) { return []byte(text), nil })
}

func mustProject(t *testing.T, c *Case, text string) *Project {
	t.Helper()
	p, found := projectOf(c, text)
	if p == nil {
		t.Fatal(found)
	}
	return p
}

const projectMoney = "\nmoney: {capital_per_mw: 1000, capital_per_mwh: 500, lifetime_years: 10, discount_pct: 7}\n"

func TestSkerraProject(t *testing.T) {
	c := skerra(t)
	p, found := ReadProject(filepath.Join("..", "testdata", "skerra", "project.yaml"), c)
	if p == nil || len(found) > 0 {
		t.Fatal(found)
	}
	before := len(c.Resources)
	none, err := p.In(c, 0, 0, p.ActivationS)
	if err != nil {
		t.Fatal(err)
	}
	built, err := p.In(c, 20, 15, p.ActivationS)
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Resources) != before || len(c.Shapes) != p.Shape(c) {
		t.Fatal("the case itself was changed")
	}
	for _, x := range []*Case{none, built} {
		if len(x.Resources) != before+1 || p.Resource(c) != before || len(x.Shapes) != len(c.Shapes)+1 || len(x.Models) != len(c.Models)+1 {
			t.Fatalf("%d resources, %d shapes, %d models", len(x.Resources), len(x.Shapes), len(x.Models))
		}
	}
	for cap, x := range map[float64]*Case{0: none, 15: built} {
		u := x.Hour(100, HourOptions{}).Units[before]
		if u.ResponseCapMW != cap || u.Shape != len(c.Shapes) {
			t.Errorf("it holds at most %g MW with shape %d, want %g with %d", u.ResponseCapMW, u.Shape, cap, len(c.Shapes))
		}
	}
}

// 900 s at full power, no ramp worth counting, 81 % there and back: 1 MW draws 900/0.9 = 1,000 MW·s
// from the store. At half of its power it takes 1,000/(0.9·0.5) = 2,222 s to be charged again
// (computed).
func TestEnergyOfAProject(t *testing.T) {
	c := skerra(t)
	base := "project: P\nkind: battery\nactivation_s: 0.000001\nhold_s: 900\nefficiency_pct: 81\nrecharge_mw_share: 0.5\n"
	for _, q := range []struct {
		name, more              string
		events, recharge, total float64 // MW·s for each MW
	}{
		{"in time", "ready_again_s: 3000", 1000, 0, 1000},
		{"not in time", "ready_again_s: 1000", 1000, 1000 - 0.9*0.5*1000, 1550},
		{"three events", "ready_again_s: 3000\nevents_before_recharge: 3", 3000, 0, 3000},
		{"downwards", "ready_again_s: 3000\ndown_price_per_mw: 1", 1000, 0, 1000 + 0.9*900},
	} {
		p := mustProject(t, c, base+q.more+projectMoney)
		e, err := p.Energy(c, p.ActivationS)
		if err != nil {
			t.Fatal(err)
		}
		for _, v := range [][2]float64{{e.EventsMWh, q.events}, {e.RechargeMWh, q.recharge}, {e.TotalMWh, q.total}} {
			if math.Abs(v[0]*3600-v[1]) > 1e-3 {
				t.Errorf("%s: %g MW·s, want %g (%+v)", q.name, v[0]*3600, v[1], e)
			}
		}
		if math.Abs(e.RechargeS-1000/0.45) > 1e-3 {
			t.Errorf("%s: charged after %g s, want %g", q.name, e.RechargeS, 1000/0.45)
		}
		// Half of the energy carries half of the response, more than all of it no more than all.
		for share, want := range map[float64]float64{0.5: 5, 1: 10, 2: 10} {
			if mw, err := p.ResponseMW(c, Design{MW: 10, EnergyMWh: share * 10 * e.TotalMWh, ActivationS: p.ActivationS}); err != nil || math.Abs(mw-want) > 1e-6 {
				t.Errorf("%s: %g of the energy carries %g MW, want %g (%v)", q.name, share, mw, want, err)
			}
		}
	}
}

// A trapezium of 2 s up, 10 s held, 4 s down is 13 s at full power (computed).
func TestHoldOfAProjectCountsItsRamps(t *testing.T) {
	c := skerra(t)
	p := mustProject(t, c, "project: P\nkind: flywheel\ndelay_s: 1\nactivation_s: 3\nhold_s: 10\nwithdraw_s: 4"+projectMoney)
	if e, err := p.Energy(c, 3); err != nil || math.Abs(e.HoldS-13) > 1e-9 {
		t.Errorf("%g s, want 13 (%v)", e.HoldS, err)
	}
	if _, err := p.Energy(c, 0.5); err == nil {
		t.Error("an activation shorter than its own delay is taken")
	}
}

func TestKindsOfProject(t *testing.T) {
	c := skerra(t)
	money := "\nmoney: {capital_per_mw: 1000, lifetime_years: 10, discount_pct: 7}\n"
	condenser := mustProject(t, c, "project: C\nkind: condenser\ninertia_s: 12\nunit_mva: 15\nlosses_share: 0.02\non_cost_per_mva_h: 0.5"+money)
	x, err := condenser.In(c, 45, 45, 0)
	if err != nil {
		t.Fatal(err)
	}
	if u := x.Hour(0, HourOptions{}).Units[condenser.Resource(c)]; u.Count != 3 || u.InertiaMWs != 180 || u.OnCost != 7.5 || math.Abs(u.MinMW+0.3) > 1e-12 {
		t.Errorf("%+v, want 3 machines of 180 MW·s, 7.5 an hour, drawing 0.3 MW", u)
	}
	if x, err = condenser.In(c, 0, 0, 0); err != nil || x.Hour(0, HourOptions{}).Units[condenser.Resource(c)].Count != 0 {
		t.Errorf("none built is in service (%v)", err)
	}
	wind := mustProject(t, c, "project: W\nkind: wind_recovery\nhost: Skell offshore\nactivation_s: 0.5\nhold_s: 8\nwithdraw_s: 2\nrecovery_share: 0.3\nrecovery_s: 10"+money)
	if x, err = wind.In(c, 3, 3, 0.5); err != nil {
		t.Fatal(err)
	}
	host := x.Resources[wind.Resource(c)]
	if host.Name != "Skell offshore" || host.Response.CapMW.Const != 3 || !x.Shapes[host.Response.Shape].Shape.Recovery() {
		t.Errorf("%+v", host)
	}
	droop := mustProject(t, c, "project: D\nkind: battery\ndroop_pct: 0.9\ndelay_s: 0.1\nactivation_s: 0.7\nhold_s: 900"+projectMoney)
	if x, err = droop.In(c, 10, 10, 0.7); err != nil {
		t.Fatal(err)
	}
	m := x.Models[len(x.Models)-1]
	if m.Model.LagS < 0.2-1e-9 || m.Model.LagS > 0.2+1e-9 || m.Shape != droop.Shape(c) || !x.Shapes[m.Shape].Model {
		t.Errorf("a lag of %g s, want a third of 0.6 s", m.Model.LagS)
	}
}

func TestBadProjects(t *testing.T) {
	c := skerra(t)
	for _, q := range []struct{ text, want string }{
		{"project: P\nkind: battery\nactivation_s: 1\nhold_s: 900\nmoney: {capital_per_mw: -1, lifetime_years: 0}",
			"money.capital_per_mw: found -1, want a number of at least 0|money.lifetime_years: found 0, want a number above 0|money.discount_pct: found nothing|money.capital_per_mwh: found nothing"},
		{"project: Holm battery\nkind: battery\nactivation_s: 1\nhold_s: 900" + projectMoney, `"Holm battery", a name that the case has`},
		{"project: P\nkind: batery\nactivation_s: 1\nhold_s: 900" + projectMoney, "kind: found \"batery\", want battery, flywheel, condenser, wind_recovery"},
		{"project: P\nkind: condenser\ninertia_s: 5\nunit_mva: 10\nhold_s: 9\nmoney: {capital_per_mw: 1, lifetime_years: 1, discount_pct: 0}", "hold_s: found the key for a condenser"},
		{"project: P\nkind: battery\nmodel: fsat" + projectMoney, `model: found the unknown model "fsat", want the name of a model of the case (fast?)`},
		{"project: P\nkind: battery\nmodel: gas_governor" + projectMoney, "a gas model, want a droop or step model"},
		{"project: P\nkind: battery\ndelay_s: 2\nactivation_s: 1\nhold_s: 900" + projectMoney, "delay_s: found 2, want at most activation_s (1)"},
		{"project: P\nkind: battery\ndroop_pct: 1\nactivation_s: 1\nhold_s: 60" + projectMoney, "hold_s: found 60, want at least the 600 s"},
		{"project: P\nkind: battery\ndroop_pct: 1\nlevel_hz: 0.1\nactivation_s: 1\nhold_s: 900" + projectMoney, "a second way to come in"},
		{"project: P\nkind: wind_recovery\nhost: Vestan wind\nactivation_s: 1\nhold_s: 8\nrecovery_share: 0.2\nrecovery_s: 5\nmoney: {capital_per_mw: 1, lifetime_years: 1, discount_pct: 0}", "which has a response in the case"},
		{"project: P\nkind: wind_recovery\nhost: Sundby solar\nactivation_s: 1\nhold_s: 8\nrecovery_share: 0.2\nrecovery_s: 5\nmoney: {capital_per_mw: 1, lifetime_years: 1, discount_pct: 0}", "which is solar"},
		{"project: P\nkind: battery\nactivation: 1\nhold_s: 900" + projectMoney, "activation: found an unknown key, want activation_s?|activation_s: found nothing"},
		{"", "an empty file, want a project"},
	} {
		p, found := projectOf(c, q.text)
		if p != nil {
			t.Errorf("taken, want %s:\n%s", q.want, q.text)
			continue
		}
		for _, want := range strings.Split(q.want, "|") {
			if !strings.Contains(found.String(), want) {
				t.Errorf("want %s, got\n%s", want, found)
			}
		}
	}
}

// With part of the energy that all of its MW need, a store offers that part of its response and of its
// synthetic inertia: a fall to the nadir takes no more out of it than is in it.
func TestEnergyLimitsSyntheticInertia(t *testing.T) {
	c := skerra(t)
	p := mustProject(t, c, "project: wheel\nkind: flywheel\nactivation_s: 0.2\nhold_s: 2\nsynthetic_inertia: {mws_per_mw: 20, filter_s: 0.1}"+projectMoney)
	need, err := p.Energy(c, p.ActivationS)
	if err != nil {
		t.Fatal(err)
	}
	for _, share := range []float64{0.01, 0.5, 1, 2} {
		d := Design{MW: 10, EnergyMWh: share * 10 * need.TotalMWh, ActivationS: p.ActivationS}
		mw, err := p.ResponseMW(c, d)
		if err != nil {
			t.Fatal(err)
		}
		built, err := p.In(c, d.MW, mw, d.ActivationS)
		if err != nil {
			t.Fatal(err)
		}
		r := &built.Resources[p.Resource(c)]
		if want := 20 * 10 * min(share, 1); math.Abs(r.SyntheticMWs.Const-want) > 1e-4 {
			t.Errorf("with %g of the energy %g MW·s are on offer, want %g", share, r.SyntheticMWs.Const, want)
		}
		left := 1 - c.Limits.NadirHz/c.Limits.NominalHz
		takes := (r.SyntheticMWs.Const*(1-left*left) + mw*(2+0.1)) / 3600 / math.Sqrt(p.EfficiencyPct/100)
		if takes > d.EnergyMWh*(1+1e-6) {
			t.Errorf("an event takes %g MWh of %g", takes, d.EnergyMWh)
		}
	}
}
