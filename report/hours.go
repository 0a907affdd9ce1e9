package report

import (
	"encoding/csv"
	"io"
	"strconv"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// limitUnit is what a limit is measured in, as it appears in column names.
var limitUnit = [limits.Kinds]string{limits.RoCoF: "hz_per_s", limits.Nadir: "hz", limits.Steady: "hz"}

// hoursHeader lists the columns of hours.csv for a case: response prices come one a shape.
func hoursHeader(c *fleet.Case) []string {
	h := []string{
		"hour", "time", "status", "why", "cost", "bound", "gap",
		"demand_mw", "unserved_mw", "excess_mw", "curtailed_mw", "co2_t",
		"inertia_mws", "worst_loss", "worst_loss_mw", "inertia_left_mws", "primary_mw", "fast_mw",
		"rocof_hz_per_s", "nadir_hz", "nadir_s", "steady_hz",
	}
	for k := limits.Kind(0); k < limits.Kinds; k++ {
		h = append(h, k.String()+"_margin_"+limitUnit[k], k.String()+"_binds",
			k.String()+"_price_per_"+limitUnit[k], k.String()+"_loss", k.String()+"_short_mw")
	}
	h = append(h, closedHeader...)
	h = append(h, aboveHeader(c)...)
	h = append(h, "energy_price_per_mwh", "inertia_price_per_mws")
	for _, s := range c.Shapes {
		h = append(h, "response_price_per_mw:"+s.Name)
	}
	return append(h, "loss_price_per_mw")
}

// WriteHours writes hours.csv: a header and one row an hour, in the order given.
// COLUMNS.md says what each column means; it needs no dispatch.
func WriteHours(w io.Writer, c *fleet.Case, hours []solve.Hour) error {
	out := csv.NewWriter(w)
	if err := out.Write(hoursHeader(c)); err != nil {
		return err
	}
	var row []string
	for i := range hours {
		row = hoursRow(row[:0], c, &hours[i])
		if err := out.Write(row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

func hoursRow(row []string, c *fleet.Case, h *solve.Hour) []string {
	row = append(row,
		strconv.Itoa(h.Index), stamp(h.Time), h.Status.String(), h.Why,
		fixed(h.Cost, decMoney), fixed(h.Bound, decMoney), fixed(h.Gap, decShare),
		fixed(h.DemandMW, decMW), fixed(h.UnservedMW, decMW), fixed(h.ExcessMW, decMW),
		fixed(h.CurtailedMW, decMW), fixed(h.CO2T, decMW),
		fixed(h.InertiaMWs, decMW), h.WorstLoss, fixed(h.WorstLossMW, decMW), fixed(h.InertiaLeftMWs, decMW),
		fixed(h.PrimaryMW, decMW), fixed(h.FastMW, decMW),
		fixed(h.RoCoFHzPerS, decHz), fixed(h.NadirHz, decHz), fixed(h.NadirS, decS), fixed(h.SteadyHz, decHz),
	)
	for _, l := range h.Limits {
		binds := "0"
		if l.Binds {
			binds = "1"
		}
		row = append(row, fixed(l.Margin, decHz), binds, fixed(l.Price, decPrice), l.Loss, fixed(l.ShortMW, decMW))
	}
	row = aboveRow(closedRow(row, h), c, h)
	row = append(row, fixed(h.Prices.EnergyPerMWh, decPrice), fixed(h.Prices.InertiaPerMWs, decInertia))
	for s := range c.Shapes {
		row = append(row, fixed(responsePrice(h, s), decPrice))
	}
	return append(row, fixed(h.Prices.LossPerMW, decPrice))
}

// responsePrice is the price of 1 MW of shape s in an hour; an hour solved without
// rows carries no response prices, which makes them 0.
func responsePrice(h *solve.Hour, s int) float64 {
	if s < 0 || s >= len(h.Prices.ResponsePerMW) {
		return 0
	}
	return h.Prices.ResponsePerMW[s]
}
