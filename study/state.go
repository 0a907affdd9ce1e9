package study

import (
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"gopkg.in/yaml.v3"

	"evenkeel/fleet"
	"evenkeel/solve"
)

// Mix is one hour of a case with who is on in it.
type Mix struct {
	Case     *fleet.Case
	Hour     *fleet.Hour
	Dispatch []solve.Dispatch
	Unserved float64 // MW
	From     string  // where it comes from, in words
}

// RunHour takes an hour of a finished run. It refuses a run of another case.
func RunHour(c *fleet.Case, dir string, hour int) (*Mix, error) {
	raw, err := os.ReadFile(filepath.Join(dir, "summary.json"))
	if errors.Is(err, os.ErrNotExist) {
		return nil, fmt.Errorf("%s holds no finished run", dir)
	} else if err != nil {
		return nil, err
	}
	var summary struct {
		Hash  string `json:"case_hash"`
		First int    `json:"first_hour"`
		Last  int    `json:"last_hour"`
	}
	if err := json.Unmarshal(raw, &summary); err != nil {
		return nil, fmt.Errorf("%s: %w", filepath.Join(dir, "summary.json"), err)
	}
	if summary.Hash != c.Hash {
		return nil, fmt.Errorf("the run in %s is of another case, or the case has changed since", dir)
	}
	if hour < summary.First || hour > summary.Last {
		return nil, fmt.Errorf("--hour is %d, the run in %s holds %d to %d", hour, dir, summary.First, summary.Last)
	}
	m := &Mix{Case: c, Hour: c.Hour(hour, fleet.HourOptions{}), Dispatch: make([]solve.Dispatch, len(c.Resources)), From: fmt.Sprintf("hour %d of the run in %s", hour, dir)}
	place := map[string]int{}
	for i := range c.Resources {
		place[c.Resources[i].Name] = i
	}
	err = rowsOf(filepath.Join(dir, "schedule.csv"), hour, func(get func(string) string, number func(string) float64) error {
		i, ok := place[get("resource")]
		if !ok {
			return fmt.Errorf("unknown resource %q", get("resource"))
		}
		m.Dispatch[i] = solve.Dispatch{On: int(number("on")), OutputMW: number("output_mw"), ResponseMW: number("response_mw"), DownMW: number("down_mw"), InertiaMWs: number("inertia_mws"), Cost: number("cost")}
		return nil
	})
	if err != nil {
		return nil, err
	}
	err = rowsOf(filepath.Join(dir, "hours.csv"), hour, func(_ func(string) string, number func(string) float64) error {
		m.Unserved = number("unserved_mw")
		return nil
	})
	return m, err
}

// rowsOf visits the rows of one hour of a file of a run.
func rowsOf(path string, hour int, visit func(get func(string) string, number func(string) float64) error) error {
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	rows := csv.NewReader(f)
	rows.ReuseRecord = true
	head, err := rows.Read()
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	at := map[string]int{}
	for i, h := range head {
		at[h] = i
	}
	want := strconv.Itoa(hour)
	for {
		rec, err := rows.Read()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return fmt.Errorf("%s: %w", path, err)
		}
		if rec[0] != want {
			continue
		}
		var bad error
		get := func(name string) string {
			i, ok := at[name]
			if !ok {
				bad = fmt.Errorf("%s has no column %s", path, name)
				return ""
			}
			return rec[i]
		}
		number := func(name string) float64 {
			x, err := strconv.ParseFloat(get(name), 64)
			if err != nil && bad == nil {
				line, _ := rows.FieldPos(0)
				bad = fmt.Errorf("%s:%d: %s: found %q, want a number", path, line, name, get(name))
			}
			return x
		}
		err = visit(get, number)
		if bad != nil {
			return bad
		}
		if err != nil {
			line, _ := rows.FieldPos(0)
			return fmt.Errorf("%s:%d: %w", path, line, err)
		}
	}
}

// stateFile is a hand-set state: who is on, at what output, with what response.
type stateFile struct {
	Hour      int      `yaml:"hour"`
	DemandMW  *float64 `yaml:"demand_mw"`
	Resources []struct {
		Name       string  `yaml:"name"`
		On         *int    `yaml:"on"`
		OutputMW   float64 `yaml:"output_mw"`
		ResponseMW float64 `yaml:"response_mw"`
		DownMW     float64 `yaml:"down_mw"`
		Synthetic  float64 `yaml:"synthetic_mws"`
	} `yaml:"resources"`
}

// StateFile reads a hand-set state of a case from a YAML file:
//
//	hour: 0            # of the case, for its series; 0 if left out
//	demand_mw: 340     # that hour's if left out
//	resources:
//	  - {name: Ness A, on: 1, output_mw: 40, response_mw: 9}
//
// Numbers are those of all units of a resource; resources that are not named are off. Output
// that does not add up to the load is a warning.
func StateFile(c *fleet.Case, path string) (m *Mix, warnings []string, err error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, nil, err
	}
	defer f.Close()
	var s stateFile
	d := yaml.NewDecoder(f)
	d.KnownFields(true)
	if err := d.Decode(&s); err != nil {
		return nil, nil, fmt.Errorf("%s: %s", path, strings.TrimPrefix(err.Error(), "yaml: "))
	}
	if s.Hour < 0 || s.Hour >= c.Hours() {
		return nil, nil, fmt.Errorf("%s: hour: found %d, want 0 to %d", path, s.Hour, c.Hours()-1)
	}
	m = &Mix{Case: c, Hour: c.Hour(s.Hour, fleet.HourOptions{}), Dispatch: make([]solve.Dispatch, len(c.Resources)), From: "the state in " + path}
	h := m.Hour
	if s.DemandMW != nil {
		if *s.DemandMW < 0 {
			return nil, nil, fmt.Errorf("%s: demand_mw: found %g, want at least 0", path, *s.DemandMW)
		}
		if h.DemandMW > 0 {
			h.DampingMWPerHz *= *s.DemandMW / h.DemandMW
			h.LoadInertiaMWs *= *s.DemandMW / h.DemandMW
		}
		h.DemandMW = *s.DemandMW
	}
	var faults []string
	seen := map[string]bool{}
	sum := 0.0
	for _, r := range s.Resources {
		at := -1
		for i := range c.Resources {
			if c.Resources[i].Name == r.Name {
				at = i
			}
		}
		fault := func(key, found, want string) {
			faults = append(faults, fmt.Sprintf("%s: resources[%s].%s: found %s, want %s", path, r.Name, key, found, want))
		}
		if at < 0 || seen[r.Name] {
			fault("name", strconv.Quote(r.Name), "each resource of the case at most once")
			continue
		}
		seen[r.Name] = true
		res := &c.Resources[at]
		on := res.Count
		if r.On != nil {
			on = *r.On
		}
		if on < 0 || on > res.Count {
			fault("on", strconv.Itoa(on), fmt.Sprintf("0 to %d", res.Count))
			continue
		}
		if r.ResponseMW < 0 {
			fault("response_mw", fmt.Sprint(r.ResponseMW), "at least 0")
		}
		if r.DownMW < 0 || r.DownMW > 0 && res.Down.Shape < 0 {
			fault("down_mw", fmt.Sprint(r.DownMW), "at least 0, and 0 without a response downwards in the case")
		}
		if r.ResponseMW > 0 && res.Response.Shape < 0 {
			fault("response_mw", fmt.Sprint(r.ResponseMW), "0: it has no response in the case")
			continue
		}
		if h.Units[at].Shape < 0 {
			h.Units[at].Shape = res.Response.Shape
		}
		if r.Synthetic < 0 || r.Synthetic > 0 && res.Kind.Machine() {
			fault("synthetic_mws", fmt.Sprint(r.Synthetic), "at least 0, of converters alone")
		}
		inertia := float64(on) * res.InertiaS * res.RatingMVA
		if !res.Kind.Machine() {
			inertia = r.Synthetic
		}
		m.Dispatch[at] = solve.Dispatch{On: on, OutputMW: r.OutputMW, ResponseMW: r.ResponseMW, DownMW: r.DownMW, InertiaMWs: inertia}
		sum += r.OutputMW
	}
	if len(faults) > 0 {
		return nil, nil, errors.New(strings.Join(faults, "\n"))
	}
	if d := sum - h.DemandMW; d > 0.005*h.DemandMW+0.1 || d < -0.005*h.DemandMW-0.1 {
		warnings = append(warnings, fmt.Sprintf("%s: the output adds up to %.1f MW, the load is %.1f MW; the trip starts from balance all the same", path, sum, h.DemandMW))
	}
	return m, warnings, nil
}
