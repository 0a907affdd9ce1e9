package invent

import (
	"bytes"
	"fmt"
	"strconv"
	"strings"

	"gopkg.in/yaml.v3"
)

// yaml is the case file. It is written line by line rather than marshalled so that it
// reads like one written by hand.
func (p *plan) yaml(o Options) []byte {
	w := &writer{}
	w.line("# An invented system: no real one is described. Change what you like.")
	w.line("# Made from: %d machines, seed %d, %d hours from %s.", o.Machines, o.Seed, o.Hours, o.Start.Format("2006-01-02 15:04"))
	w.line("case: %s", quote(p.name))
	w.line("note: Invented by a random generator; it describes no real power system.")
	w.line("currency: EUR")
	w.line("")
	w.line("frequency:")
	w.line("  nominal_hz: 50")
	w.line("  rocof: {max_hz_per_s: %s, window_s: 0.5}", number(p.rocofHzPerS))
	w.line("  nadir: {max_deviation_hz: %s}", number(p.nadirHz))
	w.line("  steady: {max_deviation_hz: 0.5, by_s: 30, until_s: 600}")
	w.line("")
	w.line("prices:")
	w.line("  unserved_per_mwh: 8000")
	w.line("  shortfall_per_mw: 4000")
	w.line("")
	w.line("load:")
	w.line("  demand_mw: load.csv:demand_mw")
	w.line("  damping_pct_per_hz: 1")
	w.line("  inertia_mws_per_mw: 0.05")
	w.line("")
	w.line("# How response comes in after a loss, seconds.")
	w.line("shapes:")
	for _, s := range shapes {
		w.line("  - %s", s)
	}
	w.line("")
	w.line("machines:")
	for i := range p.machines {
		w.machine(&p.machines[i])
	}
	w.line("")
	w.line("converters:")
	for i := range p.converters {
		w.converter(&p.converters[i])
	}
	if len(p.connections) > 0 {
		w.line("")
		w.line("# Units on one line are lost together.")
		w.line("connections:")
		for _, c := range p.connections {
			w.line("  - {name: %s, resources: [%s]}", c.name, strings.Join(c.members, ", "))
		}
	}
	w.line("")
	w.line("# Net feed-in of a busbar, already left out of the demand.")
	w.line("losses:")
	for _, l := range p.losses {
		w.line("  - {name: %s, mw: %s}", l.name, l.mw)
	}
	return w.out.Bytes()
}

type writer struct{ out bytes.Buffer }

func (w *writer) line(format string, args ...any) {
	fmt.Fprintf(&w.out, format+"\n", args...)
}

func (w *writer) machine(m *machine) {
	w.line("  - name: %s", m.name)
	w.line("    kind: %s", m.kind)
	if m.count > 1 {
		w.line("    count: %d", m.count)
	}
	w.line("    rating_mva: %s", number(m.ratingMVA))
	w.line("    inertia_s: %s", number(m.inertiaS))
	if m.kind == "condenser" {
		w.line("    losses_mw: %s", number(m.lossesMW))
	} else {
		w.line("    min_output_mw: %s", m.minMW)
		w.line("    max_output_mw: %s", number(m.maxMW))
	}
	w.some("on_cost_per_h", m.onCostPerH)
	w.some("start_cost", m.startCost)
	w.line("    min_up_h: %s", number(m.minUpH))
	w.line("    min_down_h: %s", number(m.minDownH))
	w.some("ramp_mw_per_h", m.rampMWPerH)
	if len(m.steps) > 0 {
		var steps []string
		for _, s := range m.steps {
			steps = append(steps, fmt.Sprintf("{to_mw: %s, per_mwh: %s}", number(s.toMW), number(s.perMWh)))
		}
		w.line("    cost_steps: [%s]", strings.Join(steps, ", "))
	}
	w.some("co2_t_per_mwh", m.co2TPerMWh)
	if m.availability.ref != "" {
		w.line("    availability: %s", m.availability)
	}
	if m.mustRun {
		w.line("    must_run: true")
	}
	w.response(m.response)
}

func (w *writer) converter(c *converter) {
	w.line("  - name: %s", c.name)
	w.line("    kind: %s", c.kind)
	w.line("    power_mw: %s", number(c.powerMW))
	w.some("energy_mwh", c.energyMWh)
	if c.hasAvailable {
		w.line("    available_mw: %s", c.availableMW)
	}
	if c.buy {
		w.line("    max_output_mw: %s", c.maxMW)
		w.line("    cost_per_mwh: %s", c.pricePerMWh)
	} else {
		w.some("cost_per_mwh", c.costPerMWh)
	}
	w.response(c.response)
	if c.syntheticMWs > 0 {
		w.line("    synthetic_inertia: {cap_mws: %s, price_per_mws: %s}", number(c.syntheticMWs), number(c.syntheticPerMWs))
	}
	if c.lostAsOne {
		w.line("    lost_as_one: true")
	}
}

func (w *writer) response(r response) {
	if r.shape == "" {
		return
	}
	share := ""
	if r.shareOfOutput > 0 {
		share = ", share_of_output: " + number(r.shareOfOutput)
	}
	w.line("    response: {shape: %s, cap_mw: %s, price_per_mw: %s%s}", r.shape, r.cap, number(r.pricePerMW), share)
}

// some writes a key unless its value is 0, the default.
func (w *writer) some(key string, x float64) {
	if x != 0 {
		w.line("    %s: %s", key, number(x))
	}
}

func (a amount) String() string {
	if a.ref != "" {
		return a.ref
	}
	return number(a.fixed)
}

// number states x without the dust of binary fractions.
func number(x float64) string {
	s := strconv.FormatFloat(x, 'f', 4, 64)
	return strings.TrimSuffix(strings.TrimRight(s, "0"), ".")
}

// quote makes any text a YAML scalar.
func quote(s string) string {
	out, err := yaml.Marshal(s)
	if err != nil { // a string always marshals
		panic(err)
	}
	return strings.TrimSuffix(string(out), "\n")
}
