package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"slices"
	"strconv"
	"testing"
	"time"

	"pgregory.net/rapid"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// drawRun makes a case and hours of any numbers at all.
func drawRun(t *rapid.T) (*fleet.Case, []solve.Hour, []solve.Hour) {
	c := &fleet.Case{Name: "any", Currency: "EUR"}
	for i := range rapid.IntRange(0, 3).Draw(t, "shapes") {
		c.Shapes = append(c.Shapes, fleet.NamedShape{Name: fmt.Sprint("shape ", i)})
	}
	for i := range rapid.IntRange(1, 6).Draw(t, "resources") {
		c.Resources = append(c.Resources, fleet.Resource{
			Name: fmt.Sprint("resource, no. ", i), Kind: fleet.Kind(rapid.IntRange(0, 7).Draw(t, "kind")),
			Response: fleet.Response{Shape: rapid.IntRange(-1, len(c.Shapes)-1).Draw(t, "shape")},
		})
	}
	first := rapid.IntRange(0, 9000).Draw(t, "first")
	n := rapid.IntRange(1, 30).Draw(t, "hours")
	return c, drawHours(t, c, first, n), drawHours(t, c, first, n)
}

func drawHours(t *rapid.T, c *fleet.Case, first, n int) []solve.Hour {
	mw := rapid.Float64Range(-5000, 5000)
	start := time.Date(2031, 1, 1, 0, 0, 0, 0, time.UTC)
	hours := make([]solve.Hour, n)
	for i := range hours {
		h := &hours[i]
		h.Index = first + i
		h.Time = start.Add(time.Duration(h.Index) * time.Hour)
		h.Status = solve.Status(rapid.IntRange(0, 1).Draw(t, "status"))
		for _, v := range []*float64{&h.Cost, &h.DemandMW, &h.UnservedMW, &h.ExcessMW, &h.CurtailedMW, &h.CO2T, &h.InertiaMWs} {
			*v = mw.Draw(t, "v")
		}
		h.Bound = h.Cost - math.Abs(mw.Draw(t, "bound"))/1000
		for k := range h.Limits {
			h.Limits[k].Binds = rapid.Bool().Draw(t, "binds")
			h.Limits[k].Price = math.Abs(mw.Draw(t, "price"))
		}
		h.Prices.ResponsePerMW = make([]float64, len(c.Shapes))
		for range c.Resources {
			d := solve.Dispatch{}
			if rapid.Bool().Draw(t, "runs") {
				d = solve.Dispatch{On: rapid.IntRange(0, 3).Draw(t, "on"), OutputMW: mw.Draw(t, "output"),
					ResponseMW: mw.Draw(t, "response"), InertiaMWs: mw.Draw(t, "inertia"),
					CO2T: mw.Draw(t, "co2"), Cost: mw.Draw(t, "cost")}
			}
			h.Dispatch = append(h.Dispatch, d)
		}
	}
	return hours
}

type table struct {
	t    *rapid.T
	rows [][]string
}

func readTable(t *rapid.T, b []byte) table {
	rows, err := csv.NewReader(bytes.NewReader(b)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return table{t, rows}
}

func (x table) sum(column string) (sum float64) {
	at := slices.Index(x.rows[0], column)
	if at < 0 {
		x.t.Fatalf("no column %s in %v", column, x.rows[0])
	}
	for _, r := range x.rows[1:] {
		v, err := strconv.ParseFloat(r[at], 64)
		if err != nil {
			x.t.Fatal(err)
		}
		sum += v
	}
	return sum
}

// What hours.csv, schedule.csv and summary.json say about the same thing adds up to the
// last printed digit of each row.
func TestTotalsAddUp(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, hours, without := drawRun(t)
		var hoursCSV, scheduleCSV, summary bytes.Buffer
		for _, err := range []error{
			WriteHours(&hoursCSV, c, hours), WriteSchedule(&scheduleCSV, c, hours),
			WriteSummary(&summary, c, hours, without, Options{}),
		} {
			if err != nil {
				t.Fatal(err)
			}
		}
		var s struct {
			Totals map[string]float64
			Limits []struct {
				HoursBinding int   `json:"hours_binding"`
				ByHour       []int `json:"binding_by_hour_of_day_utc"`
				ByMonth      []int `json:"binding_by_month"`
			}
			By    map[string]int       `json:"hours_by_what_binds"`
			Short []struct{ Hour int } `json:"short_hours"`
			Cost  map[string]float64   `json:"cost_of_security"`
		}
		if err := json.Unmarshal(summary.Bytes(), &s); err != nil {
			t.Fatal(err)
		}
		h, sch := readTable(t, hoursCSV.Bytes()), readTable(t, scheduleCSV.Bytes())
		if len(h.rows) != len(hours)+1 {
			t.Fatalf("%d rows for %d hours", len(h.rows), len(hours))
		}
		near := func(what string, a, b, each float64, n int) {
			if math.Abs(a-b) > float64(n+1)*each/2+1e-6 {
				t.Fatalf("%s: %v against %v", what, a, b)
			}
		}
		for total, column := range map[string]string{"cost": "cost", "bound": "bound"} {
			near(total, s.Totals[total], h.sum(column), 1e-2, len(hours))
		}
		for total, column := range map[string]string{"demand_mwh": "demand_mw", "unserved_mwh": "unserved_mw",
			"excess_mwh": "excess_mw", "curtailed_mwh": "curtailed_mw", "co2_t": "co2_t"} {
			near(total, s.Totals[total], h.sum(column), 1e-3, len(hours))
		}
		// A resource left out of the schedule prints zero in every column.
		near("output", s.Totals["output_mwh"], sch.sum("output_mw"), 1e-3, len(hours)*len(c.Resources))
		for k, l := range s.Limits {
			name := limits.Kind(k).String()
			if n := int(h.sum(name + "_binds")); l.HoursBinding != n || add(l.ByHour) != n || add(l.ByMonth) != n {
				t.Fatalf("%s binds in %d hours, by hour of day %v, by month %v, in hours.csv %d", name, l.HoursBinding, l.ByHour, l.ByMonth, n)
			}
		}
		all := 0
		for _, n := range s.By {
			all += n
		}
		if all != len(hours) || len(s.Short) != s.By["short"] {
			t.Fatalf("%v of %d hours, %d listed as short", s.By, len(hours), len(s.Short))
		}
		near("security", s.Cost["absolute"], s.Totals["cost"]-s.Cost["cost_without_limits"], 1e-2, 2)
		near("security by status", s.Cost["absolute"], s.Cost["in_secure_hours"]+s.Cost["in_short_hours"], 1e-2, 2)
		if s.Cost["at_least"] > s.Cost["absolute"] || s.Cost["absolute"] > s.Cost["at_most"] {
			t.Fatalf("security %+v", s.Cost)
		}
	})
}

func add(list []int) (n int) {
	for _, v := range list {
		n += v
	}
	return n
}

// Numbers that JSON does not know become null, and the file stays JSON.
func TestSummaryWithoutNumbers(t *testing.T) {
	c, hours, without := smallRun()
	hours[0].Bound, hours[0].Gap = math.Inf(-1), math.Inf(1)
	hours[1].Limits[0].Price = math.NaN()
	hours[1].Limits[0].Binds = true
	var out bytes.Buffer
	if err := WriteSummary(&out, c, hours, without, Options{}); err != nil {
		t.Fatal(err)
	}
	var s struct {
		Totals map[string]*float64
	}
	if err := json.Unmarshal(out.Bytes(), &s); err != nil {
		t.Fatal(err)
	}
	if s.Totals["bound"] != nil || s.Totals["cost"] == nil {
		t.Errorf("totals %v", s.Totals)
	}
}

func TestStateOf(t *testing.T) {
	hour := func(status solve.Status, binds ...limits.Kind) *solve.Hour {
		h := &solve.Hour{Status: status}
		for _, k := range binds {
			h.Limits[k].Binds = true
		}
		return h
	}
	for _, k := range []struct {
		h     *solve.Hour
		want  state
		words string
	}{
		{hour(solve.Secure), free, "none"},
		{hour(solve.Secure, limits.RoCoF), byRoCoF, "RoCoF"},
		{hour(solve.Secure, limits.Nadir), byNadir, "nadir"},
		{hour(solve.Secure, limits.Steady), bySteady, "steady"},
		{hour(solve.Secure, limits.RoCoF, limits.Steady), bySeveral, "RoCoF+steady"},
		{hour(solve.Secure, limits.RoCoF, limits.Nadir, limits.Steady), bySeveral, "all three"},
		{hour(solve.Short, limits.Nadir), isShort, "SHORT"},
	} {
		if got := stateOf(k.h); got != k.want || bindWords(k.h) != k.words {
			t.Errorf("%v in words %q, want %v, %q", got, bindWords(k.h), k.want, k.words)
		}
	}
}

func TestFrequencyRuns(t *testing.T) {
	c := &fleet.Case{Resources: []fleet.Resource{
		{Name: "steam", Kind: fleet.Thermal, InertiaS: 5, RatingMVA: 100},
		{Name: "condenser", Kind: fleet.Condenser, InertiaS: 8, RatingMVA: 50},
		{Name: "wind", Kind: fleet.Wind},
		{Name: "hydro", Kind: fleet.Hydro, InertiaS: 3, RatingMVA: 10},
	}}
	run := func(on ...[4]int) []solve.Hour {
		hours := make([]solve.Hour, len(on))
		for i := range hours {
			hours[i].Index = i
			for _, n := range on[i] {
				hours[i].Dispatch = append(hours[i].Dispatch, solve.Dispatch{On: n, OutputMW: float64(10 * n)})
			}
		}
		return hours
	}
	with := run([4]int{2, 1, 9, 0}, [4]int{3, 1, 9, 0}, [4]int{0, 1, 9, 1})
	without := run([4]int{1, 0, 1, 0}, [4]int{1, 0, 1, 0}, [4]int{2, 1, 1, 1})
	got := frequencyRuns(c, with, pair(with, without))
	want := []frequencyRun{{0, 3, 2, 500, 30}, {1, 2, 2, 400, 20}}
	if !slices.Equal(got, want) {
		t.Errorf("got %v, want %v", got, want)
	}
	// Hours are matched by index: without the partner of hour 0, only hour 1 counts.
	if got := frequencyRuns(c, with, pair(with, without[1:])); got[0].unitHours != 2 || got[1].unitHours != 1 {
		t.Errorf("got %v", got)
	}
}

func TestHardest(t *testing.T) {
	c := &fleet.Case{}
	start := time.Date(2031, 3, 1, 22, 0, 0, 0, time.UTC)
	make := func(costs ...float64) []solve.Hour {
		var hours []solve.Hour
		for i, v := range costs {
			hours = append(hours, solve.Hour{Index: i, Cost: v, Time: start.Add(time.Duration(i) * time.Hour)})
		}
		return hours
	}
	with, without := make(10, 50, 30, 30, 12), make(9, 20, 10, 10, 2)
	m := measureHours(c, with, pair(with, without))
	if got := m.top(3); !slices.Equal(got, []int{1, 2, 3}) {
		t.Errorf("hardest by extra cost: %v", got)
	}
	days := hardestDays(splitDays(with, m), 5)
	if len(days) != 2 || days[0].from != 2 || days[0].to != 5 || days[0].measure != 50 || days[1].measure != 31 {
		t.Errorf("days %+v", days)
	}
	// Without the other run, the value of what is held decides; without prices, what is left.
	with[4].Prices.InertiaPerMWs, with[4].InertiaMWs = 2, 100
	if m = measureHours(c, with, pair(with, nil)); m.top(1)[0] != 4 || m.of[4] != 200 {
		t.Errorf("by value: %v", m)
	}
	with[4].Prices.InertiaPerMWs = 0
	for i := range with {
		with[i].InertiaLeftMWs = float64(100 - i)
	}
	if m = measureHours(c, with, pair(with, nil)); m.top(1)[0] != 4 || m.head != "" {
		t.Errorf("by inertia left: %v", m)
	}
}
