package fleet

import (
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// tiny is a case with one of everything; its series are in tinyCSV.
const tiny = `case: Tiny
frequency:
  nominal_hz: 50
  rocof: {max_hz_per_s: 0.9, window_s: 0.5}
  nadir: {max_deviation_hz: 0.8}
  steady: {max_deviation_hz: 0.5, by_s: 30}
prices: {unserved_per_mwh: 8000, shortfall_per_mw: 4000}
load: {demand_mw: load.csv:demand, damping_pct_per_hz: 1, inertia_mws_per_mw: 0.2}
shapes:
  - &s {name: slow, delay_s: 0.5, ramp_s: 7}
  - {<<: *s, name: fast, ramp_s: 0.3, hold_s: 600, withdraw_s: 30}
  - {name: rotor, delay_s: 0.2, ramp_s: 0.6, hold_s: 8, withdraw_s: 2, recovery_share: 0.3, recovery_s: 15}
  - {name: drawn, points: [[0.4, 0], [0.4, 0.5], [2, 1]]}
machines:
  - {name: Steam, kind: thermal, count: 2, rating_mva: 120, inertia_s: 5, min_output_mw: 30, max_output_mw: 100,
     cost_steps: [{to_mw: 60, per_mwh: 40}, {to_mw: 100, per_mwh: 45}], response: {shape: slow, cap_mw: 15, price_per_mw: 2}}
  - {name: River, kind: hydro, rating_mva: 30, inertia_s: 3, max_output_mw: 25, cost_per_mwh: 5, availability: load.csv:river, must_run: true}
  - {name: Wheel, kind: condenser, rating_mva: 50, inertia_s: 6, losses_mw: 1}
converters:
  - {name: Wind, kind: wind, available_mw: 20, response: {shape: rotor, cap_mw: 8, share_of_output: 0.1}}
  - {name: Battery, kind: battery, power_mw: 20, energy_mwh: 20, response: {shape: fast, cap_mw: 20}, synthetic_inertia: {cap_mws: 100}}
  - {name: Cable, kind: link, min_output_mw: -40, max_output_mw: 60, cost_per_mwh: load.csv:demand}
connections:
  - {name: Valley, resources: [River, Wheel]}
losses:
  - {name: Busbar, mw: 12}
`

const tinyCSV = "time,demand,river\n2031-03-03T00:00:00Z,180,0.5\n2031-03-03T01:00:00Z,170,0.6\n2031-03-03T02:00:00Z,165,1\n"

// tinyModels is tiny with dynamic models, relays and the other side of nominal.
var tinyModels = strings.NewReplacer(
	"  steady: {max", "  above: {rocof_hz_per_s: 0.9, peak_hz: 0.8, steady_hz: 0.5}\n  steady: {max",
	"response: {shape: slow, cap_mw: 15, price_per_mw: 2}}", "response: {model: turbine, cap_mw: 10}, down: {model: turbine, cap_mw: 10}}",
	"{name: Busbar, mw: 12}", "{name: Feeder, mw: 9, over: true}",
	"synthetic_inertia: {cap_mws: 100}", "synthetic_inertia: {cap_mws: 100, filter_s: 0.1}, down: {shape: fast, cap_mw: 5}",
).Replace(tiny) + `models:
  - {name: turbine, kind: steam, droop_pct: 4, qualification: {hz_per_s: 0.3, to_hz: 0.5}}
  - {name: river, kind: hydro, water_s: 1.5}
  - {name: relay, kind: step, level_hz: 0.3, delay_s: 0.2, ramp_s: 0.1, hold_s: 30, withdraw_s: 5, rest_s: 60}
relays:
  - {name: Stage, level_hz: 1, delay_s: 0.2, shed_share: 0.1}
  - {name: Roofs, rocof_hz_per_s: 2, window_s: 0.5, lost_mw: load.csv:river}
`

// readText reads a case out of texts: every series file is the same.
func readText(yaml, csv string) (*Case, Findings) {
	return read("case.yaml", func(path string, most int64) ([]byte, error) {
		text := csv
		if path == "case.yaml" {
			text = yaml
		} else if !strings.HasSuffix(path, ".csv") {
			return nil, fs.ErrNotExist
		}
		if int64(len(text)) > most {
			return nil, fmt.Errorf("more than %d bytes", most)
		}
		return []byte(text), nil
	})
}

// Whatever the files hold, reading ends soon, without a panic, with a case that resolves
// into hours of finite numbers or with at least one error, and each finding is one line.
func FuzzRead(f *testing.F) {
	f.Add(tiny, tinyCSV)
	f.Add(tinyModels, tinyCSV)
	for _, r := range [][2]string{{"50", "5e1"}, {"0.5, by_s", "x, by_s"}, {"count: 2", "count: 10000"}, {"[River, Wheel]", "*s"}, {"- {name: drawn", "- &a {<<: *a, name: drawn"},
		{"points: [[0.4, 0], [0.4, 0.5], [2, 1]]", "points: [[1e308, 1]]"}, {"tiny", "\xff"}} {
		f.Add(strings.Replace(tiny, r[0], r[1], 1), tinyCSV)
	}
	for _, csv := range []string{"", "time", "time,demand,river\n", "\uFEFF" + strings.ReplaceAll(tinyCSV, "\n", "\r\n"), strings.ReplaceAll(tinyCSV, ",", ";"),
		strings.Replace(tinyCSV, "180", "1e400", 1), strings.Replace(tinyCSV, "T01", "T00", 1), "time,demand,river\n\"2031"} {
		f.Add(tiny, csv)
	}
	if raw, err := os.ReadFile(filepath.Join("..", "testdata", "skerra", "case.yaml")); err == nil {
		f.Add(string(raw), tinyCSV)
	}
	f.Fuzz(func(t *testing.T, yaml, csv string) {
		started := time.Now()
		c, found := readText(yaml, csv)
		if took := time.Since(started); took > 10*time.Second {
			t.Errorf("took %s for %d bytes", took, len(yaml)+len(csv))
		}
		for _, x := range found {
			if strings.ContainsAny(x.String(), "\n\r") {
				t.Errorf("a finding of two lines: %q", x)
			}
		}
		if (c == nil) != (len(found.Errors()) > 0) {
			t.Fatalf("case %v, %d errors", c != nil, len(found.Errors()))
		}
		if c == nil {
			return
		}
		for h := 0; h < c.Hours(); h += max(1, c.Hours()/5) {
			for i, u := range c.Hour(h, HourOptions{StartSpreadH: 10}).Units {
				for _, x := range []float64{u.OnCost, u.MinMW, u.MaxMW, u.HeadMW, u.HeadPerMWs, u.InertiaMWs, u.ResponseCapMW, u.ResponsePerMW, u.SyntheticCapMWs} {
					if math.IsNaN(x) || math.IsInf(x, 0) {
						t.Fatalf("hour %d, %s: %+v", h, c.Resources[i].Name, u)
					}
				}
				if u.Count > 0 && u.MaxMW < u.MinMW-1e-9 {
					t.Fatalf("hour %d, %s: minimum %g above %g", h, c.Resources[i].Name, u.MinMW, u.MaxMW)
				}
			}
		}
	})
}

// The seed must be a good case, or fuzzing starts nowhere.
func TestTinyIsGood(t *testing.T) {
	c, found := readText(tiny, tinyCSV)
	for _, f := range found {
		t.Error(f)
	}
	if c == nil || c.Hours() != 3 || len(c.Resources) != 6 || len(c.Shapes) != 4 {
		t.Errorf("%+v", c)
	}
	c, found = readText(tinyModels, tinyCSV)
	for _, f := range found {
		t.Error(f)
	}
	if c == nil || len(c.Models) != 3 || len(c.Shapes) != 7 || len(c.Relays) != 2 || c.Above == nil {
		t.Errorf("%+v", c)
	}
}
