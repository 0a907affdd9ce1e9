package report

import (
	"encoding/csv"
	"fmt"
	"io"

	"evenkeel/study/size"
)

// Sized is a sizing study as it is reported.
type Sized struct {
	*size.Study
	Other        *size.Study // the same, the owner paid by the other rule
	Gap          float64
	StartSpreadH float64
}

// WriteSize writes every file of a sizing study but about.json: size.csv, size-hours.csv,
// sensitivity.csv, the figures and, last, summary.json.
func WriteSize(dir string, s *Sized) error {
	files := []struct {
		name string
		fill func(io.Writer) error
	}{
		{"size.csv", func(w io.Writer) error { return sizeCSV(w, s) }},
		{"size-hours.csv", func(w io.Writer) error { return sizeHoursCSV(w, s) }},
		{"sensitivity.csv", func(w io.Writer) error { return sensitivityCSV(w, s) }},
	}
	for _, f := range sizeFigures(s.Study) {
		files = append(files, struct {
			name string
			fill func(io.Writer) error
		}{f.name + ".svg", f.fig.svg}, struct {
			name string
			fill func(io.Writer) error
		}{f.name + ".png", f.fig.png})
	}
	files = append(files, struct {
		name string
		fill func(io.Writer) error
	}{Finished, func(w io.Writer) error { return sizeJSON(w, s) }})
	for _, f := range files {
		if err := WriteFile(dir, f.name, f.fill); err != nil {
			return err
		}
	}
	return nil
}

var sizeHeader = []string{"activation_s", "size_mw", "energy_mwh", "energy_h", "response_mw", "system_cost", "saving", "saving_at_least", "saving_at_most",
	"income_response", "income_down", "income_inertia", "income_energy", "own_cost", "income_net", "price_taker_net",
	"capital", "yearly_cost", "net_owner", "net_system", "net_price_taker", "break_even_per_mw_owner", "break_even_per_mw_system",
	"hours_held", "hours_paid", "hours_sure_to_save", "hours_short", "mean_held_mw", "utilisation", "net_owner:marginal", "net_owner:hull"}

// sizeCSV has a row a design.
func sizeCSV(w io.Writer, s *Sized) error {
	out := csv.NewWriter(w)
	if err := out.Write(sizeHeader); err != nil {
		return err
	}
	for i := range s.Results {
		r := &s.Results[i]
		y := r.Year
		paid := y.Paid[s.Rule]
		row := []string{fixed(r.ActivationS, decS), fixed(r.MW, decMW), fixed(r.EnergyMWh, decMW), fixed(r.HoursOfEnergy, decMW), fixed(r.ResponseMW, decMW)}
		for _, v := range []float64{y.Cost, y.Saving, y.SavingAtLeast, y.SavingAtMost, paid.Response, paid.Down, paid.Inertia, paid.Energy, paid.Own, paid.Net(), y.Taker[s.Rule],
			size.Capital(s.Plan.Project.Money, r.Design), r.Cost, r.Net[size.Owner], r.Net[size.System], r.TakerNet, r.BreakEven[size.Owner], r.BreakEven[size.System]} {
			row = append(row, fixed(v, decMoney))
		}
		for _, v := range []float64{y.HeldH, y.PaidH[s.Rule], y.SureH, y.ShortH} {
			row = append(row, fixed(v, 1))
		}
		row = append(row, fixed(y.MeanMW, decMW), fixed(r.Utilisation, decShare))
		for rule := range size.Rule(size.Rules) {
			row = append(row, fixed(y.Paid[rule].Net()-r.Cost, decMoney))
		}
		if err := out.Write(row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// sizeHoursCSV has a row for each hour of the day of each month: the owner's best design there.
func sizeHoursCSV(w io.Writer, s *Sized) error {
	out := csv.NewWriter(w)
	if err := out.Write([]string{"month", "hour_of_day", "hours_looked_at", "hours_paid", "mean_held_mw", "mean_income", "mean_saving"}); err != nil {
		return err
	}
	for _, c := range s.Cells {
		if c.Hours == 0 {
			continue
		}
		row := []string{fmt.Sprint(c.Month), fmt.Sprint(c.HourOfDay), fmt.Sprint(c.Hours), fmt.Sprint(c.Paid), fixed(c.MeanMW, decMW), fixed(c.MeanIncome, decMoney), fixed(c.MeanSaving, decMoney)}
		if err := out.Write(row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

func sensitivityCSV(w io.Writer, s *Sized) error {
	out := csv.NewWriter(w)
	if err := out.Write([]string{"input", "unit", "value", "low", "high", "net_owner_low", "net_owner_high", "net_system_low", "net_system_high", "swing_owner", "swing_system"}); err != nil {
		return err
	}
	swings := s.Sensitivity(&s.Results[s.Best[size.Owner]])
	for i := range swings {
		x := &swings[i]
		row := []string{x.Input, x.Unit, fixed(x.At, decMoney), fixed(x.Low, decMoney), fixed(x.High, decMoney)}
		for _, v := range []float64{x.NetLow[size.Owner], x.NetHigh[size.Owner], x.NetLow[size.System], x.NetHigh[size.System], x.Span(size.Owner), x.Span(size.System)} {
			row = append(row, fixed(v, decMoney))
		}
		if err := out.Write(row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}
