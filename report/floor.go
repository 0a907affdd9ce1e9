package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"evenkeel/limits"
	"evenkeel/study/floor"
)

// WriteFloor writes the files of a study of inertia floors into dir, which must exist, each whole:
// floor.csv, the charts and, where hours were looked at, floor-hours.csv, floor-when.csv, policy.csv
// and their plots; summary.json last.
func WriteFloor(dir string, r *floor.Result) error {
	type file struct {
		name string
		fill func(io.Writer) error
	}
	files := []file{{"floor.csv", func(w io.Writer) error { return floorCSV(w, r) }}}
	draw := func(name string, f figure) {
		files = append(files, file{name + ".svg", f.svg}, file{name + ".png", f.png})
	}
	used := map[string]bool{}
	for i := range r.Charts {
		name := "chart-" + fileName(r.Case.Shapes[r.Charts[i].Shape].Name)
		if used[name] { // two names can differ in what no file name takes
			name += "-" + strconv.Itoa(i+1)
		}
		used[name] = true
		draw(name, floorChart(r, i))
	}
	if r.Year != nil {
		files = append(files, file{"floor-hours.csv", func(w io.Writer) error { return floorHoursCSV(w, r) }},
			file{"floor-when.csv", func(w io.Writer) error { return floorWhenCSV(w, r) }},
			file{"policy.csv", func(w io.Writer) error { return policyCSV(w, r) }})
		draw("when", floorWhen(r))
		draw("duration", floorDuration(r))
	}
	files = append(files, file{Finished, func(w io.Writer) error { return writeJSON(w, floorSummary(r)) }})
	for _, f := range files {
		if err := WriteFile(dir, f.name, f.fill); err != nil {
			return err
		}
	}
	return nil
}

// fileName makes a name of the case fit for a file.
func fileName(name string) string {
	return strings.Map(func(c rune) rune {
		switch {
		case c >= 'a' && c <= 'z', c >= 'A' && c <= 'Z', c >= '0' && c <= '9', c == '_', c == '-':
			return c
		}
		return '_'
	}, name)
}

// floorTable writes rows of a CSV file.
func floorTable(w io.Writer, head []string, rows func(row func(fields ...string) error) error) error {
	out := csv.NewWriter(w)
	if err := out.Write(head); err != nil {
		return err
	}
	if err := rows(func(fields ...string) error { return out.Write(fields) }); err != nil {
		return err
	}
	out.Flush()
	return out.Error()
}

// setter names what sets a floor; of none, nothing does.
func setter(mws float64, by limits.Kind) string {
	if mws == 0 {
		return ""
	}
	return by.String()
}

func floorCSV(w io.Writer, r *floor.Result) error {
	head := []string{"response", "loss_mw", "held_mw", "floor_mws", "set_by", "at_s", "why", "rows_mws", "rows_set_by", "rows_at_s", "rows_rocof_mws", "rows_nadir_mws", "rows_steady_mws",
		"closed_mws", "closed_set_by", "closed_at_s"}
	return floorTable(w, head, func(row func(...string) error) error {
		for i := range r.Charts {
			k := &r.Charts[i]
			for j := range k.Cells {
				c := &k.Cells[j]
				why := ""
				if math.IsInf(c.FloorMWs, 1) {
					why = noInertia(c)
				}
				if err := row(r.Case.Shapes[k.Shape].Name, fixed(c.LossMW, decMW), fixed(c.HeldMW, decMW), fixed(c.FloorMWs, decMW), setter(c.FloorMWs, c.By), fixed(c.AtS, decS), why,
					fixed(c.Rows.MWs, decMW), setter(c.Rows.MWs, c.Rows.By), fixed(c.Rows.At.ToS, decS),
					fixed(c.Rows.Of[limits.RoCoF], decMW), fixed(c.Rows.Of[limits.Nadir], decMW), fixed(c.Rows.Of[limits.Steady], decMW),
					fixed(c.Closed, decMW), setter(c.Closed, c.ClosedBy), fixed(c.ClosedAtS, decS)); err != nil {
					return err
				}
			}
		}
		return nil
	})
}

// noInertia says why no kinetic energy is enough.
func noInertia(c *floor.Cell) string {
	if math.IsInf(c.Rows.MWs, 1) {
		return "response and damping do not carry the loss within the steady band"
	}
	return fmt.Sprintf("in closed loop the %s limit fails whatever is online", c.By.Word())
}

func floorHoursCSV(w io.Writer, r *floor.Result) error {
	head := []string{"hour", "time", "status", "floor_mws", "set_by", "side", "loss", "loss_mw", "taken_mws", "online_mws", "gap_mws",
		"mix_floor_mws", "mix_set_by", "mix_side", "mix_loss", "mix_loss_mw", "mix_largest_loss_mw", "mix_online_mws", "free_online_mws", "cost", "mix_cost", "mix_mended_cost"}
	for _, name := range floor.WayNames {
		head = append(head, name+"_cost")
	}
	side := func(n *floor.Need) string {
		if n.Over {
			return "above"
		}
		return "below"
	}
	return floorTable(w, head, func(row func(...string) error) error {
		for _, h := range r.Year.Hours {
			status := "enough"
			switch {
			case h.Short:
				status = "short"
			case h.Gap():
				status = "lacking"
			}
			fields := []string{strconv.Itoa(h.Index), stamp(h.Time), status}
			b, m := &h.Bare, &h.Mix
			fields = append(fields, fixed(b.FloorMWs, decMW), setter(b.FloorMWs, b.By), side(b), b.Loss, fixed(b.LossMW, decMW), fixed(b.TakesMWs, decMW), fixed(b.OnlineMWs, decMW), fixed(b.GapMWs(), decMW),
				fixed(m.FloorMWs, decMW), setter(m.FloorMWs, m.By), side(m), m.Loss, fixed(m.LossMW, decMW), fixed(m.LargestMW, decMW), fixed(m.OnlineMWs, decMW), fixed(h.FreeMWs, decMW),
				fixed(h.BareCost.Cost, decMoney), fixed(h.MixCost.Cost, decMoney), fixed(h.MendCost, decMoney))
			for _, k := range h.Ways {
				cost := ""
				if k.Met {
					cost = fixed(k.Cost, decMoney)
				}
				fields = append(fields, cost)
			}
			if err := row(fields...); err != nil {
				return err
			}
		}
		return nil
	})
}

func floorWhenCSV(w io.Writer, r *floor.Result) error {
	return floorTable(w, []string{"month", "hour_of_day", "hours", "lacking", "mean_gap_mws", "largest_gap_mws"}, func(row func(...string) error) error {
		for m := range r.Year.When {
			for h := range r.Year.When[m] {
				at := &r.Year.When[m][h]
				if at.Hours == 0 {
					continue
				}
				if err := row(strconv.Itoa(m+1), strconv.Itoa(h), strconv.Itoa(at.Hours), strconv.Itoa(at.Lacking), fixed(at.MeanGapMWs(), decMW), fixed(at.MostGapMWs, decMW)); err != nil {
					return err
				}
			}
		}
		return nil
	})
}

func policyCSV(w io.Writer, r *floor.Result) error {
	head := []string{"policy", "loss_above_mw", "loss_up_to_mw", "floor_mws", "hours", "hours_covered", "hours_kept", "hours_as_they_were", "hours_not_kept", "largest_lack_mws",
		"mean_online_mws", "mix_mean_online_mws", "added_cost", "at_least", "at_most"}
	return floorTable(w, head, func(row func(...string) error) error {
		for i := range r.Year.Rules {
			k := &r.Year.Rules[i]
			for j, st := range k.Rule.Steps {
				fields := []string{k.Rule.Name, fixed(st.FromMW, decMW), fixed(st.ToMW, decMW), fixed(st.MWs, decMW), strconv.Itoa(st.Hours)}
				if j == 0 {
					fields = append(fields, strconv.Itoa(k.Covers), strconv.Itoa(k.Kept), strconv.Itoa(k.Same), strconv.Itoa(k.NotKept), fixed(k.LackMWs, decMW), fixed(k.OnlineMWs, decMW), fixed(k.MixMWs, decMW),
						fixed(k.Cost, decMoney), fixed(k.AtLeast, decMoney), fixed(k.AtMost, decMoney))
				} else {
					fields = append(fields, make([]string, 10)...)
				}
				if err := row(fields...); err != nil {
					return err
				}
			}
		}
		return nil
	})
}

type floorJSON struct {
	Caution string       `json:"caution"`
	Case    string       `json:"case"`
	Hash    string       `json:"case_sha256"`
	Charts  []chartJSON  `json:"charts"`
	Year    *floorInYear `json:"year"`
}

type chartJSON struct {
	Response     string            `json:"response"`
	LoadMW       number            `json:"load_mw"`
	OthersMW     map[string]number `json:"other_response_mw"`
	LossMW       [2]number         `json:"loss_mw_from_to"`
	HeldMW       [2]number         `json:"held_mw_from_to"`
	Cells        int               `json:"cells"`
	NoInertia    int               `json:"cells_without_a_floor"`
	SetBy        map[string]int    `json:"cells_set_by"`
	Instructions []instructionJSON `json:"operating_instruction"`
}

type instructionJSON struct {
	LossMW number `json:"loss_up_to_mw"`
	HeldMW number `json:"held_at_least_mw"`
	MWs    number `json:"keep_after_the_loss_mws"`
	By     string `json:"set_by"`
}

type floorInYear struct {
	Hours      int              `json:"hours"`
	First      string           `json:"from"`
	Last       string           `json:"last_hour_from"`
	Scale      number           `json:"hours_of_a_year_for_each"`
	Short      int              `json:"hours_short"`
	Lacking    int              `json:"hours_lacking"`
	NoInertia  int              `json:"hours_in_which_no_inertia_is_enough"`
	By         map[string]int   `json:"hours_lacking_by_limit"`
	Over       int              `json:"hours_lacking_for_a_loss_of_load"`
	MeanGapMWs number           `json:"mean_gap_mws"`
	MostGap    *valueAtHour     `json:"largest_gap_mws"`
	Ways       map[string]wayJS `json:"ways_to_close_the_gap"`
	MendCost   number           `json:"closed_loop_adds_to_the_mix"`
	Policies   []policyJSON     `json:"policies"`
}

type wayJS struct {
	Hours   int    `json:"hours_closed"`
	Cost    number `json:"added_cost_in_them"`
	MixCost number `json:"added_cost_of_the_mix_in_them"`
	Within  number `json:"known_within"`
}

type policyJSON struct {
	Name    string     `json:"policy"`
	Steps   []stepJSON `json:"floor"`
	Covers  int        `json:"hours_covered"`
	Kept    int        `json:"hours_kept"`
	Same    int        `json:"hours_as_they_were"`
	NotKept int        `json:"hours_not_kept"`
	LackMWs number     `json:"largest_lack_mws"`
	Cost    number     `json:"added_cost"`
	AtLeast number     `json:"at_least"`
	AtMost  number     `json:"at_most"`
	Online  number     `json:"mean_online_mws"`
	Mix     number     `json:"mix_mean_online_mws"`
}

type stepJSON struct {
	From  number `json:"loss_above_mw"`
	To    number `json:"loss_up_to_mw"`
	MWs   number `json:"mws"`
	Hours int    `json:"hours"`
}

func floorSummary(r *floor.Result) floorJSON {
	out := floorJSON{Caution: Caution, Case: r.Case.Name, Hash: r.Case.Hash}
	for i := range r.Charts {
		k := &r.Charts[i]
		c := chartJSON{Response: r.Case.Shapes[k.Shape].Name, LoadMW: mw(k.LoadMW), OthersMW: map[string]number{}, LossMW: [2]number{mw(k.Loss.At(0)), mw(k.Loss.To)},
			HeldMW: [2]number{mw(k.Held.At(0)), mw(k.Held.To)}, Cells: len(k.Cells), SetBy: map[string]int{}}
		for s, held := range k.Others {
			if s != k.Shape {
				c.OthersMW[r.Case.Shapes[s].Name] = mw(held)
			}
		}
		for j := range k.Cells {
			if math.IsInf(k.Cells[j].FloorMWs, 1) {
				c.NoInertia++
			} else {
				c.SetBy[k.Cells[j].By.String()]++
			}
		}
		for _, n := range r.Instructions(i) {
			c.Instructions = append(c.Instructions, instructionJSON{mw(n.LossMW), mw(n.HeldMW), mw(n.FloorMWs), n.By.String()})
		}
		out.Charts = append(out.Charts, c)
	}
	if y := r.Year; y != nil {
		out.Year = floorYearJSON(y)
	}
	return out
}

func floorYearJSON(y *floor.Year) *floorInYear {
	money := func(v float64) number { return number{v, decMoney} }
	first, last := y.Hours[0], y.Hours[len(y.Hours)-1]
	out := &floorInYear{Hours: len(y.Hours), First: stamp(first.Time), Last: stamp(last.Time), Scale: number{y.Scale, decShare}, Short: y.Short, Lacking: y.Lacking, NoInertia: y.NoInertia,
		By: map[string]int{}, Over: y.LackOver, MeanGapMWs: mw(y.MeanGapMWs), Ways: map[string]wayJS{}, MendCost: money(y.MendCost)}
	for k, n := range y.LackBy {
		out.By[limits.Kind(k).String()] = n
	}
	if y.MostGapAt >= 0 {
		out.MostGap = &valueAtHour{mw(y.MostGapMWs), y.Hours[y.MostGapAt].Index}
	}
	way := func(w *floor.WayCost) wayJS {
		return wayJS{w.Hours, money(w.Cost), money(w.MixCost), money(w.Within)}
	}
	for w, name := range floor.WayNames {
		out.Ways[name] = way(&y.Ways[w])
	}
	out.Ways["mix"] = way(&y.Mix)
	for i := range y.Rules {
		k := &y.Rules[i]
		p := policyJSON{Name: k.Rule.Name, Covers: k.Covers, Kept: k.Kept, Same: k.Same, NotKept: k.NotKept, LackMWs: mw(k.LackMWs), Cost: money(k.Cost), AtLeast: money(k.AtLeast), AtMost: money(k.AtMost),
			Online: mw(k.OnlineMWs), Mix: mw(k.MixMWs)}
		for _, st := range k.Rule.Steps {
			p.Steps = append(p.Steps, stepJSON{mw(st.FromMW), mw(st.ToMW), mw(st.MWs), st.Hours})
		}
		out.Policies = append(out.Policies, p)
	}
	return out
}
