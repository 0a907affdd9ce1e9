package fleet

import (
	"math"
	"strings"
	"testing"
)

func unit(t *testing.T, c *Case, h *Hour, name string) *Unit {
	t.Helper()
	for i := range c.Resources {
		if c.Resources[i].Name == name {
			return &h.Units[i]
		}
	}
	t.Fatalf("no resource %s", name)
	return nil
}

// One of each kind in plain numbers, worked out by hand beside it.
func TestHourOfEachKind(t *testing.T) {
	c, found := readText(tiny, tinyCSV)
	if c == nil {
		t.Fatal(found)
	}
	h := c.Hour(1, HourOptions{StartSpreadH: 0})
	near := func(what string, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 1e-9*(1+math.Abs(want)) {
			t.Errorf("%s: %g, want %g", what, got, want)
		}
	}
	near("demand", h.DemandMW, 170)
	near("damping", h.DampingMWPerHz, 1.7)       // 1 % of 170 MW for each Hz
	near("load's inertia", h.LoadInertiaMWs, 34) // 0.2 MW·s for each MW

	steam := unit(t, c, h, "Steam")
	near("count", float64(steam.Count), 2)
	near("inertia", steam.InertiaMWs, 600) // 5 s · 120 MVA
	near("head", steam.HeadMW, 100)
	river := unit(t, c, h, "River")
	near("most", river.MaxMW, 15) // 0.6 of 25
	near("head", river.HeadMW, 15)
	near("price", river.Steps[0].CostPerMWh, 5)
	if !river.MustRun || river.Shape != -1 {
		t.Error("River must run and holds no response")
	}
	wheel := unit(t, c, h, "Wheel")
	near("output", wheel.MaxMW, -1)
	near("output", wheel.MinMW, -1)
	near("inertia", wheel.InertiaMWs, 300)

	wind := unit(t, c, h, "Wind")
	near("most", wind.MaxMW, 20)
	if wind.FromHead || wind.Commit || !wind.Renewable { // a recovery shape takes its energy from the rotor
		t.Errorf("wind %+v", wind)
	}
	near("share", wind.ShareOfOutput, 0.1)
	battery := unit(t, c, h, "Battery")
	near("head", battery.HeadMW, 20)
	near("cap", battery.ResponseCapMW, 20)           // 20 MWh last 600 s and more at 20 MW
	near("headroom", battery.HeadPerMWs, 2.0/50*0.9) // 2·E/f0·RoCoF
	near("synthetic", battery.SyntheticCapMWs, 100)
	cable := unit(t, c, h, "Cable")
	near("least", cable.MinMW, -40)
	near("price", cable.Steps[0].CostPerMWh, 170)

	want := map[string]bool{"Steam": true, "River": true, "Wheel": true, "Wind": true, "Battery": true, "Cable": true, "Valley": false, "Busbar": false}
	if len(h.Losses) != len(want) {
		t.Errorf("%d losses, want %d", len(h.Losses), len(want))
	}
	for _, l := range h.Losses {
		single, ok := want[l.Name]
		if !ok || single != l.Single {
			t.Errorf("loss %+v", l)
		}
	}
}

// The energy of a battery bounds what it can hold: 20 MWh last for an hour at 20 MW, and
// not for the ramp besides.
func TestEnergyBoundsTheHold(t *testing.T) {
	c, found := readText(replace(tiny, "hold_s: 600, withdraw_s: 30", "hold_s: 3600, withdraw_s: 0"), tinyCSV)
	if c == nil {
		t.Fatal(found)
	}
	// Delivered energy of 1 MW: ramp 0.3 s (0.15 MW·s) and 3,600 MW·s.
	want := 20 * 3600 / 3600.15
	if got := unit(t, c, c.Hour(0, HourOptions{}), "Battery").ResponseCapMW; math.Abs(got-want) > 1e-9 {
		t.Errorf("cap %g, want %g", got, want)
	}
	if len(found.Warnings()) != 1 {
		t.Errorf("findings\n%s", found)
	}
}

func TestOutOfService(t *testing.T) {
	c, found := readText(replace(tiny, "name: River, kind: hydro,", "name: River, kind: hydro, min_output_mw: 14,"), tinyCSV)
	if c == nil {
		t.Fatal(found)
	}
	for h, want := range []int{0, 1, 1} { // 12.5, 15 and 25 MW against a minimum of 14
		if got := unit(t, c, c.Hour(h, HourOptions{}), "River").Count; got != want {
			t.Errorf("hour %d: %d in service, want %d", h, got, want)
		}
	}
}

func TestStartSpread(t *testing.T) {
	c, _ := readText(replace(tiny, "count: 2,", "count: 2, start_cost: 1200, on_cost_per_h: 7,"), tinyCSV)
	if got := unit(t, c, c.Hour(0, HourOptions{StartSpreadH: 12}), "Steam").OnCost; got != 107 {
		t.Errorf("cost of being on %g, want 107", got)
	}
}

func replace(text, old, with string) string {
	before, after, ok := strings.Cut(text, old)
	if !ok {
		panic("nothing to replace: " + old)
	}
	return before + with + after
}
