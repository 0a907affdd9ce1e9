package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"strconv"

	"evenkeel/fleet"
	"evenkeel/solve"
)

var scheduleHeader = []string{
	"hour", "time", "resource", "kind", "on", "output_mw", "response_mw", "down_mw", "inertia_mws", "curtailed_mw", "cost", "co2_t",
}

// WriteSchedule writes schedule.csv: one row for each hour and each resource that does
// something in it, in the order of the hours and of the case. A resource does something
// when it is a machine with a unit on, or when any number of its row prints as other
// than zero. It fails if an hour's dispatch does not match the case.
func WriteSchedule(w io.Writer, c *fleet.Case, hours []solve.Hour) error {
	out := csv.NewWriter(w)
	if err := out.Write(scheduleHeader); err != nil {
		return err
	}
	row := make([]string, 0, len(scheduleHeader))
	for i := range hours {
		h := &hours[i]
		if err := checkDispatch(c, h); err != nil {
			return err
		}
		index, at := strconv.Itoa(h.Index), stamp(h.Time)
		for r := range h.Dispatch {
			d, res := &h.Dispatch[r], &c.Resources[r]
			if idle(res.Kind, d) {
				continue
			}
			row = append(row[:0], index, at, res.Name, res.Kind.String(), strconv.Itoa(d.On),
				fixed(d.OutputMW, decMW), fixed(d.ResponseMW, decMW), fixed(d.DownMW, decMW), fixed(d.InertiaMWs, decMW),
				fixed(d.CurtailedMW, decMW), fixed(d.Cost, decMoney), fixed(d.CO2T, decMW))
			if err := out.Write(row); err != nil {
				return err
			}
		}
	}
	out.Flush()
	return out.Error()
}

func idle(k fleet.Kind, d *solve.Dispatch) bool {
	if k.Machine() && d.On > 0 {
		return false
	}
	for _, v := range [...]float64{d.OutputMW, d.ResponseMW, d.DownMW, d.InertiaMWs, d.CurtailedMW, d.CO2T} {
		if !printsZero(v, decMW) {
			return false
		}
	}
	return printsZero(d.Cost, decMoney)
}

// checkDispatch guards every table that walks resources and dispatch side by side.
func checkDispatch(c *fleet.Case, h *solve.Hour) error {
	if len(h.Dispatch) != len(c.Resources) {
		return fmt.Errorf("hour %d lists %d resources, the case has %d", h.Index, len(h.Dispatch), len(c.Resources))
	}
	return nil
}
