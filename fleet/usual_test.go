package fleet

import (
	"strings"
	"testing"
)

// Numbers in another unit than asked for are warned of, or, where they cannot be meant, refused
// with what to write. The ranges are common practice.
func TestUnusualProjects(t *testing.T) {
	c := skerra(t)
	usual := "project: P\nkind: battery\nlevel_hz: 0.1\nactivation_s: 0.5\nhold_s: 900\nefficiency_pct: 86\n" +
		"money: {capital_per_mw: 260000, capital_per_mwh: 190000, fixed_per_mw_year: 9000, lifetime_years: 15, discount_pct: 7}\n"
	if p, found := projectOf(c, usual); p == nil || len(found) > 0 {
		t.Fatal(found)
	}
	for _, q := range []struct{ from, to, want string }{
		{"activation_s: 0.5", "activation_s: 500", "warning: activation_s: found 500, want 0.02 to 30, in seconds"},
		{"level_hz: 0.1", "droop_pct: 0.01", "warning: droop_pct: found 0.01, want 0.1 to 12"},
		{"level_hz: 0.1", "level_hz: 49.8", "level_hz: found 49.8, want it counted below nominal (for 49.8 Hz write 0.2), at most"},
		{"level_hz: 0.1", "level_hz: 50.2", "level_hz: found 50.2, want it counted below nominal, at most"},
		{"level_hz: 0.1", "level_hz: 2", "level_hz: found 2, want at most frequency.steady.max_deviation_hz of the case"},
		{"_pct: 86", "_pct: 1", "warning: efficiency_pct: found 1, want 70 to 95"},
		{"260000", "0.26", "warning: money.capital_per_mw: found 0.26, want 10,000 to 2,000,000 in EUR or USD"},
		{"190000", "190", "warning: money.capital_per_mwh: found 190, want 50,000 or more"},
		{"year: 9000", "year: 9", "warning: money.fixed_per_mw_year: found 9, want 0.5 to 10 % of capital_per_mw (260000)"},
		{"years: 15", "years: 180", "warning: money.lifetime_years: found 180, want 5 to 50"},
		{"discount_pct: 7", "discount_pct: 0.07", "warning: money.discount_pct: found 0.07, want 2 to 15"},
		{"money:", "capital_per_mw: 5\nmws_per_mw: 2\nmoney:", "capital_per_mw: found an unknown key, want money.capital_per_mw"},
		{"money:", "mws_per_mw: 2\nmoney:", "mws_per_mw: found an unknown key, want synthetic_inertia.mws_per_mw"},
	} {
		p, found := projectOf(c, strings.Replace(usual, q.from, q.to, 1))
		if !strings.Contains(found.String(), q.want) {
			t.Errorf("%s: want %s, got\n%s", q.to, q.want, found)
		}
		if warned := strings.HasPrefix(q.want, "warning"); warned != (p != nil) || warned && len(found) != 1 {
			t.Errorf("%s: project %v, %d findings:\n%s", q.to, p, len(found), found)
		}
	}
	// Nothing built for nothing is a question, not a slip.
	if p, found := projectOf(c, strings.NewReplacer("260000", "0", "190000", "0", "9000", "0", "pct: 7", "pct: 0").Replace(usual)); p == nil || len(found) > 0 {
		t.Errorf("no capital cost: %s", found)
	}
}

func TestUnusualProducts(t *testing.T) {
	for _, q := range []struct{ from, to, want string }{
		{"activation_s: 0.6", "activation_s: 600", "warning: activation_s: found 600, want 0.02 to 30"},
		{"load.csv:free\nprice_steps: [{to_mw: 10", "4000\nprice_steps: [{to_mw: 4000, per_mw: 0.1}, {to_mw: 5000", "warning: cap_mw: found 4000, want at most the highest demand of the case (180 MW)"},
		{"hold_s: 20", "hold_s: 20\nlevel_hz: 49.8", "level_hz: found 49.8, want it counted below nominal (for 49.8 Hz write 0.2)"},
	} {
		text := strings.Replace(tinyProduct, q.from, q.to, 1)
		text = strings.Replace(text, ", {to_mw: 25, per_mw: 2.5}", ", {to_mw: 6000, per_mw: 2.5}", 1)
		_, p, found := tinyWith(t, tiny, text)
		if !strings.Contains(found.String(), q.want) || strings.HasPrefix(q.want, "warning") != (p != nil) {
			t.Errorf("%s: want %s, got\n%s", q.to, q.want, found)
		}
	}
}

func TestPromisedProjects(t *testing.T) {
	c := skerra(t)
	times := "activation_s: 0.5\nhold_s: 900"
	for text, want := range map[string]bool{
		"project: P\nkind: battery\n" + times + projectMoney:                                                                           true,
		"project: P\nkind: battery\nlevel_hz: 0.1\n" + times + projectMoney:                                                            false,
		"project: P\nkind: battery\ndroop_pct: 1\n" + times + projectMoney:                                                             false,
		"project: P\nkind: battery\nmodel: fast" + projectMoney:                                                                        false,
		"project: P\nkind: condenser\ninertia_s: 2\nunit_mva: 10\nmoney: {capital_per_mw: 90000, lifetime_years: 30, discount_pct: 6}": false,
	} {
		if p := mustProject(t, c, text); p.Promised() != want {
			t.Errorf("%s: promised %v, want %v", text, p.Promised(), want)
		}
	}
}
