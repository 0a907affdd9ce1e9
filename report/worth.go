package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"

	"evenkeel/limits"
	"evenkeel/study/worth"
)

// WorthOptions say how a study of worth was made and what was asked of it.
type WorthOptions struct {
	Gap, StartSpreadH float64
	Sample            bool // not every hour of the case was looked at
	AtGiven           bool
	At                float64 // a yearly price per MW, on top of what holding asks for by the hour
}

// WorthLoss says how the largest loss is treated in convex hull prices.
const WorthLoss = "The largest loss under hull prices: every possible loss has rows of its own, in which what is lost " +
	"counts by its output and is paid nothing for what goes with it. In the hull a fraction of a machine is a fraction of a " +
	"loss, so that where machines are the largest loss its hull price is low. At both prices the unit whose loss binds pays for it."

// WriteWorth writes all files of a study of worth but about.json, summary.json last.
func WriteWorth(dir string, r *worth.Result, x *worth.Exchange, o WorthOptions) error {
	cells := x.Cells()
	files := []struct {
		name string
		fill func(io.Writer) error
	}{
		{"worth-prices.csv", func(w io.Writer) error { return worthPricesCSV(w, r, 0) }},
		{"earnings.csv", func(w io.Writer) error { return earningsCSV(w, r) }},
		{"exchange.csv", func(w io.Writer) error { return exchangeCSV(w, x, cells) }},
	}
	figures := []struct {
		name string
		fig  figure
	}{
		{"worth-prices", worthPricesFigure(r, o)},
	}
	if len(cells) > 0 {
		figures = append(figures, struct {
			name string
			fig  figure
		}{"exchange", exchangeFigure(r, x)})
	}
	if r.Product != nil {
		files = append(files, []struct {
			name string
			fill func(io.Writer) error
		}{
			{"worth-prices-with.csv", func(w io.Writer) error { return worthPricesCSV(w, r, 1) }},
			{"product.csv", func(w io.Writer) error { return productCSV(w, r) }},
			{"demand.csv", func(w io.Writer) error { return demandCSV(w, r) }},
			{"product-hours.csv", func(w io.Writer) error { return productHoursCSV(w, r) }},
			{"displaced.csv", func(w io.Writer) error { return displacedCSV(w, r) }},
		}...)
		figures = append(figures, struct {
			name string
			fig  figure
		}{"product", productFigure(r, o)})
	}
	for _, f := range figures {
		files = append(files, []struct {
			name string
			fill func(io.Writer) error
		}{{f.name + ".svg", f.fig.svg}, {f.name + ".png", f.fig.png}}...)
	}
	for _, f := range files {
		if err := WriteFile(dir, f.name, f.fill); err != nil {
			return err
		}
	}
	return WriteFile(dir, Finished, func(w io.Writer) error { return worthJSON(w, r, x, cells, o) })
}

// rows writes a CSV file row by row.
func rows(w io.Writer, header []string, n int, row func(i int) []string) error {
	out := csv.NewWriter(w)
	if err := out.Write(header); err != nil {
		return err
	}
	for i := range n {
		if err := out.Write(row(i)); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// undefined prints as nothing what there is none of.
func undefined(v float64, dec int) string {
	if math.IsNaN(v) {
		return ""
	}
	return fixed(v, dec)
}

// worthPricesCSV writes the prices of every hour both ways: mix 0 without the product, 1 with it.
func worthPricesCSV(w io.Writer, r *worth.Result, mix int) error {
	c := r.Full()
	header := []string{"hour", "time"}
	for _, way := range worth.WayNames {
		header = append(header, way+"_energy_per_mwh", way+"_inertia_per_mws")
		for _, s := range c.Shapes {
			header = append(header, way+"_response_per_mw:"+s.Name)
		}
		header = append(header, way+"_loss_per_mw")
		if c.Above != nil {
			for _, s := range c.Shapes {
				header = append(header, way+"_down_per_mw:"+s.Name)
			}
			header = append(header, way+"_over_loss_per_mw")
		}
		header = append(header, way+"_uplift")
	}
	return rows(w, header, len(r.Records), func(i int) []string {
		rec := &r.Records[i]
		row := []string{strconv.Itoa(rec.Index), stamp(rec.Time)}
		for way := range worth.Ways {
			p := rec.Mix(mix).Way(way)
			row = append(row, fixed(p.Prices.EnergyPerMWh, decPrice), fixed(p.Prices.InertiaPerMWs, decInertia))
			for s := range c.Shapes {
				row = append(row, fixed(p.Prices.ResponsePerMW[s], decPrice))
			}
			row = append(row, fixed(p.Prices.LossPerMW, decPrice))
			if c.Above != nil {
				for s := range c.Shapes {
					row = append(row, fixed(p.Down(s), decPrice))
				}
				row = append(row, fixed(p.OverPerMW, decPrice))
			}
			row = append(row, fixed(p.Uplift, decMoney))
		}
		return row
	})
}

// mixNames name the two mixes in files.
var mixNames = [2]string{"without", "with"}

func mixName(with bool) string {
	if with {
		return mixNames[1]
	}
	return mixNames[0]
}

func earningsCSV(w io.Writer, r *worth.Result) error {
	c := r.Full()
	header := []string{"product", "prices", "resource", "kind", "energy", "inertia", "response", "down", "loss_paid", "cost", "profit", "make_whole", "lost_opportunity", "uplift"}
	return rows(w, header, len(r.Earnings), func(i int) []string {
		e := &r.Earnings[i]
		res := &c.Resources[e.Resource]
		row := []string{mixName(e.With), worth.WayNames[e.Way], res.Name, res.Kind.String()}
		for _, v := range []float64{e.Energy, e.Inertia, e.Response, e.Down, e.Loss, e.Cost, e.Profit(), e.MakeWhole, e.Lost, e.MakeWhole + e.Lost} {
			row = append(row, fixed(v, decMoney))
		}
		return row
	})
}

func exchangeCSV(w io.Writer, x *worth.Exchange, cells []worth.Cell) error {
	header := []string{"inertia_left_mws", "loss_mw", "governs", "from_s", "to_s", "primary", "primary_mw", "response", "held_mw",
		"primary_mw_per_mw", "primary_mw_per_mw_by_step", "inertia_mws_per_mw"}
	n := len(x.Shapes)
	return rows(w, header, len(cells)*n, func(i int) []string {
		c, s := &cells[i/n], i%n
		row := []string{fixed(c.InertiaMWs, decMW), fixed(c.LossMW, decMW), governsWord(c), "", "", x.Names[x.Primary], fixed(c.PrimaryMW, decMW),
			x.Names[s], fixed(x.HeldMW[s], decMW), "", "", ""}
		if c.Governs != worth.Nothing {
			row[3], row[4] = fixed(c.FromS, decS), fixed(c.ToS, decS)
		}
		if c.Rated() {
			t := &c.Rates[s]
			row[9], row[10] = fixed(t.PrimaryMW, decPrice), fixed(t.PrimaryMWByStep, decPrice)
			if c.InertiaPerPrimary > 0 {
				row[11] = fixed(t.InertiaMWs, decMW)
			}
		}
		return row
	})
}

func governsWord(c *worth.Cell) string {
	if c.Governs == worth.Beyond {
		return c.Broken.String() + "_beyond"
	}
	return c.Governs.String()
}

func productCSV(w io.Writer, r *worth.Result) error {
	header := []string{"volume_mw", "activation_s", "cost", "bound", "saving_gross", "paid", "saving_net", "saving_net_at_least", "saving_net_at_most", "saving_net_in_short_hours",
		"saving_net_per_mw", "next_mw_saves", "held_mean_mw", "held_most_mw", "co2_t", "hours_short", "hours_mended"}
	return rows(w, header, len(r.Points), func(i int) []string {
		p := &r.Points[i]
		return []string{fixed(p.VolumeMW, decMW), fixed(p.ActivationS, decS), fixed(p.Cost, decMoney), fixed(p.Bound, decMoney),
			fixed(p.Gross, decMoney), fixed(p.Paid, decMoney), fixed(p.Net, decMoney), fixed(p.AtLeast, decMoney), fixed(p.AtMost, decMoney), fixed(p.InShort, decMoney),
			fixed(p.PerMW, decMoney), undefined(p.NextPerMW, decMoney), fixed(p.MeanMW, decMW), fixed(p.MostMW, decMW), fixed(p.CO2T, decMW),
			fixed(p.HoursShort, 1), fixed(p.HoursMended, 1)}
	})
}

func productHoursCSV(w io.Writer, r *worth.Result) error {
	header := []string{"hour_of_day_utc", "hours", "held_mean_mw", "saving_net", "first_mw_marginal_per_mw", "first_mw_hull_per_mw"}
	return rows(w, header, len(r.ByHour), func(i int) []string {
		h := &r.ByHour[i]
		return []string{strconv.Itoa(i), strconv.Itoa(h.Hours), fixed(h.MeanMW, decMW), fixed(h.Net, decMoney), fixed(h.FirstPerMW, decPrice), fixed(h.FirstHullMW, decPrice)}
	})
}

func displacedCSV(w io.Writer, r *worth.Result) error {
	c := r.Full()
	header := []string{"resource", "kind"}
	for _, m := range mixNames {
		header = append(header, "response_mw_h_"+m, "on_h_"+m, "output_mwh_"+m)
	}
	return rows(w, header, len(r.Displaced), func(i int) []string {
		d := &r.Displaced[i]
		res := &c.Resources[d.Resource]
		row := []string{res.Name, res.Kind.String()}
		for m := range mixNames {
			row = append(row, fixed(d.ResponseMWh[m], decMW), fixed(d.OnH[m], 1), fixed(d.OutputMWh[m], decMW))
		}
		return row
	})
}

// governsText says in words what asks for the primary reserve of a cell.
func governsText(c *worth.Cell) string {
	switch c.Governs {
	case worth.Nothing:
		return "nothing"
	case worth.Beyond:
		return fmt.Sprintf("%s, out of reach", c.Broken.Word())
	case worth.ByRoCoF:
		return limits.RoCoF.Word()
	case worth.ByNadir:
		return limits.Nadir.Word()
	}
	return limits.Steady.Word()
}
