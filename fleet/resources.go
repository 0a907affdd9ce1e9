package fleet

import (
	"fmt"
	"math"

	"gopkg.in/yaml.v3"
)

var (
	machineKeys = []string{"name", "kind", "count", "rating_mva", "inertia_s", "min_output_mw", "max_output_mw", "on_cost_per_h", "start_cost",
		"min_up_h", "min_down_h", "ramp_mw_per_h", "cost_steps", "cost_per_mwh", "co2_t_per_mwh", "availability", "must_run", "losses_mw", "response", "down", "lost_as_one"}
	converterKeys = []string{"name", "kind", "count", "power_mw", "energy_mwh", "schedule_mw", "available_mw", "min_output_mw", "max_output_mw",
		"cost_per_mwh", "co2_t_per_mwh", "response", "down", "synthetic_inertia", "lost_as_one", "inertia_s"}
	responseKeys  = []string{"shape", "model", "cap_mw", "price_per_mw", "share_of_output"}
	downKeys      = []string{"shape", "model", "cap_mw", "price_per_mw"}
	syntheticKeys = []string{"cap_mws", "price_per_mws", "filter_s"}
	stepKeys      = []string{"to_mw", "per_mwh"}
)

// kindKeys are the keys that only some kinds have, each with the kinds that have it and
// why others do not.
var kindKeys = map[string]struct {
	kinds []Kind
	why   string
}{
	"losses_mw":         {[]Kind{Condenser}, "nothing: only a condenser has losses_mw, others a cost"},
	"min_output_mw":     {[]Kind{Thermal, Hydro, Link}, "nothing: its output has no minimum of its own"},
	"max_output_mw":     {[]Kind{Thermal, Hydro, Link}, "nothing: a condenser puts out nothing; wind and solar give available_mw, a battery power_mw"},
	"cost_steps":        {[]Kind{Thermal, Hydro}, "nothing: it has no cost steps"},
	"cost_per_mwh":      {[]Kind{Thermal, Hydro, Wind, Solar, Link}, "nothing: it has no output to price"},
	"co2_t_per_mwh":     {[]Kind{Thermal, Hydro, Link}, "nothing: it emits nothing where it stands"},
	"energy_mwh":        {[]Kind{Battery}, "nothing: only a battery has energy_mwh"},
	"schedule_mw":       {[]Kind{Battery}, "nothing: only a battery has a schedule_mw"},
	"available_mw":      {[]Kind{Wind, Solar}, "nothing: only wind and solar have available_mw"},
	"synthetic_inertia": {[]Kind{Battery, Wind, Solar, Link}, "nothing: demand holds no synthetic inertia"},
}

// input remembers where the numbers of a resource came from.
type input struct {
	section            *section
	minMW, maxMW       given
	availability, caps given
}

// shapeInput remembers where a shape came from.
type shapeInput struct {
	section *section
	made    bool
}

func (r *reader) resources(s *section) {
	r.index = map[string]int{}
	for _, part := range []struct {
		name  string
		keys  []string
		kinds []Kind
	}{
		{"machines", machineKeys, []Kind{Thermal, Hydro, Condenser}},
		{"converters", converterKeys, []Kind{Battery, Wind, Solar, Demand, Link}},
	} {
		for i, n := range s.items(part.name, "a list of "+part.name) {
			g := r.section(n, entryPath(n, part.name, i), n.Line, part.keys)
			if g == nil {
				continue
			}
			res := Resource{
				Name: r.claim(g, r.names, "resource, connection and loss"), Line: g.line,
				Count: g.whole("count", unitCount, 1), LostAsOne: true,
				Response: Response{Shape: -1}, Down: Response{Shape: -1},
			}
			kind, ok := g.kind(part.kinds)
			if !ok {
				r.place(res, input{section: g})
				continue
			}
			res.Kind = kind
			g.foreign(kind)
			in := input{section: g}
			if kind.Machine() {
				r.machine(g, &res, &in)
			} else {
				r.converter(g, &res, &in)
			}
			res.LostAsOne = g.flag("lost_as_one", kind != Demand)
			if p := g.part("response", responseKeys); p != nil {
				r.response(p, &res, &in)
			}
			if p := g.part("down", downKeys); p != nil {
				r.down(p, &res)
			}
			r.place(res, in)
		}
	}
	for key := range s.entries {
		if near := nearestName(key, 2, func(i int) string { return [...]string{"machines", "converters"}[i] }); near != "" && near != key && !s.has(near) {
			r.partial = true // its fault is reported; all that names its resources is no fault of its own
		}
	}
	if len(r.c.Resources) == 0 && !r.partial {
		s.missing("machines", "machines, converters or both")
	}
}

func (r *reader) place(res Resource, in input) {
	if _, twice := r.index[res.Name]; !twice && res.Name != "" {
		r.index[res.Name] = len(r.c.Resources)
	}
	r.c.Resources = append(r.c.Resources, res)
	r.inputs = append(r.inputs, in)
}

func (s *section) kind(allowed []Kind) (Kind, bool) {
	var names []string
	for _, k := range allowed {
		names = append(names, k.String())
	}
	e, ok := s.get("kind")
	if !ok {
		s.missing("kind", list(names))
		return 0, false
	}
	for _, k := range allowed {
		if e.node.Kind == yaml.ScalarNode && e.node.Value == k.String() {
			return k, true
		}
	}
	s.r.fault(e.node.Line, s.key("kind"), describe(e.node), list(names))
	return 0, false
}

// foreign reports keys that the kind does not have.
func (s *section) foreign(kind Kind) {
	keys := machineKeys
	if !kind.Machine() {
		keys = converterKeys
	}
	for _, k := range keys {
		rule, bound := kindKeys[k]
		if !bound || !s.has(k) {
			continue
		}
		fits := false
		for _, have := range rule.kinds {
			fits = fits || have == kind
		}
		if !fits {
			s.fault(k, "the key for a "+kind.String(), rule.why)
		}
	}
}

func (r *reader) machine(s *section, res *Resource, in *input) {
	res.InertiaS = s.numberOr("inertia_s", notBelow0, 0)
	if s.has("rating_mva") {
		res.RatingMVA = s.number("rating_mva", positive)
	} else if res.InertiaS > 0 {
		s.missing("rating_mva", "the rating that inertia_s counts on, MVA")
	}
	r.commonInertia(s, res)
	defer r.commonRating(s, res)
	res.OnCostPerH = s.numberOr("on_cost_per_h", anyNumber, 0)
	res.StartCost = s.numberOr("start_cost", notBelow0, 0)
	res.MinUpH = s.numberOr("min_up_h", notBelow0, 0)
	res.MinDownH = s.numberOr("min_down_h", notBelow0, 0)
	res.RampMWPerH = s.numberOr("ramp_mw_per_h", rule{lo: 0, hi: math.Inf(1), above: true}, 0)
	res.MustRun = s.flag("must_run", false)
	in.availability = s.valueOr("availability", share, 1)
	res.Availability = in.availability.Value
	if res.Kind == Condenser {
		res.LossesMW = s.numberOr("losses_mw", notBelow0, 0)
		if s.has("response") {
			s.fault("response", "response of a condenser", "nothing: it has no prime mover to respond with")
		}
		return
	}
	res.CO2TPerMWh = s.numberOr("co2_t_per_mwh", notBelow0, 0)
	in.minMW = s.valueOr("min_output_mw", notBelow0, 0)
	in.maxMW = s.value("max_output_mw", positive)
	res.MinMW, res.MaxMW = in.minMW.Value, in.maxMW.Value
	if res.MaxMW.Series != nil {
		s.fault("max_output_mw", "a series", "a number; availability varies it hour by hour")
	}
	r.ordered(s, in)
	r.steps(s, res)
}

// commonInertia warns of inertia constants outside of what is published or usual.
func (r *reader) commonInertia(s *section, res *Resource) {
	if !s.has("inertia_s") || math.IsNaN(res.InertiaS) {
		return
	}
	lo, hi, source := 0.0, math.Inf(1), ""
	switch res.Kind {
	case Thermal:
		lo, hi, source = 2, 10, "2 s (gas, common practice) to 10 s (thermal at 1,800 r/min, Kundur 1994, table 3.2, from memory)"
	case Hydro:
		lo, hi, source = 2, 6, "2 to 4 s (hydro, Kundur 1994, table 3.2, from memory) or to 6 s (pumped hydro, common practice)"
	}
	if res.InertiaS < lo || res.InertiaS > hi {
		s.warn("inertia_s", num(res.InertiaS), source)
	}
}

// commonRating warns of a rating that does not go with the output: a slip of the decimal
// point there is one of the inertia.
func (r *reader) commonRating(s *section, res *Resource) {
	most := res.MaxMW.most()
	if res.Kind == Condenser || !(res.RatingMVA > 0) || !(most > 0) {
		return
	}
	if ratio := res.RatingMVA / most; ratio < 0.95 || ratio > 2.5 {
		s.warn("rating_mva", num(res.RatingMVA), fmt.Sprintf("1 to 1.5 times max_output_mw (%s), at most 2.5 (common practice)", num(most)))
	}
}

// ordered checks that the minimum does not exceed the maximum in any hour in which the
// unit is available.
func (r *reader) ordered(s *section, in *input) {
	n := max(len(in.minMW.Series), len(in.maxMW.Series), len(in.availability.Series), 1)
	var bad repeat
	found := ""
	for h := 0; h < n; h++ {
		at := func(g given) float64 {
			if g.Series != nil && h >= len(g.Series) {
				return math.NaN()
			}
			return g.At(h)
		}
		lo, hi := at(in.minMW), at(in.maxMW)
		if in.availability.key != "" && at(in.availability) == 0 {
			continue
		}
		if lo > hi && bad.add(h) {
			found = fmt.Sprintf("%s above max_output_mw (%s)", num(lo), num(hi))
			if n > 1 {
				found += fmt.Sprintf(" in hour %d", h)
			}
		}
	}
	if bad.count > 1 {
		found += fmt.Sprintf(" and %d more", bad.count-1)
	}
	if bad.count > 0 {
		s.fault("min_output_mw", found, "at most max_output_mw")
	}
}

// follows checks a step of a rising price against the one before it.
func (s *section) follows(priceKey string, toMW, lastMW, price, lastPrice float64, why string) {
	if toMW <= lastMW {
		s.fault("to_mw", num(toMW), "more than the step before ("+num(lastMW)+")")
	}
	if price < lastPrice {
		s.fault(priceKey, num(price), "at least the step before ("+num(lastPrice)+"): "+why)
	}
}

// steps reads the marginal cost: rising steps, or one price.
func (r *reader) steps(s *section, res *Resource) {
	if s.has("cost_per_mwh") {
		if s.has("cost_steps") {
			s.fault("cost_per_mwh", "a price beside cost_steps", "either of the two")
		}
		g := s.value("cost_per_mwh", anyNumber)
		res.PricePerMWh = g.Value
		return
	}
	nodes := s.items("cost_steps", "a list of steps such as {to_mw: 200, per_mwh: 42}")
	if len(nodes) == 0 {
		s.missing("cost_steps", "at least one step such as {to_mw: 200, per_mwh: 42}, or cost_per_mwh")
		return
	}
	for i, n := range nodes {
		key := fmt.Sprintf("%s[%d]", s.key("cost_steps"), i+1)
		g := r.section(n, key, n.Line, stepKeys)
		if g == nil {
			continue
		}
		st := Step{ToMW: g.number("to_mw", positive), CostPerMWh: g.number("per_mwh", anyNumber)}
		if len(res.Steps) > 0 {
			last := res.Steps[len(res.Steps)-1]
			g.follows("per_mwh", st.ToMW, last.ToMW, st.CostPerMWh, last.CostPerMWh, "marginal cost must not fall")
		}
		res.Steps = append(res.Steps, st)
	}
	if n := len(res.Steps); n > 0 && res.Steps[n-1].ToMW < res.MaxMW.Const {
		s.fault("cost_steps", "steps that end at "+num(res.Steps[n-1].ToMW)+" MW", "steps up to max_output_mw ("+num(res.MaxMW.Const)+")")
	}
}

func (r *reader) converter(s *section, res *Resource, in *input) {
	if s.has("inertia_s") {
		s.fault("inertia_s", "an inertia constant behind a converter", "nothing: it has no inertia of its own (common practice); synthetic_inertia offers an equivalent")
	}
	switch res.Kind {
	case Battery:
		res.PowerMW = s.number("power_mw", positive)
		res.EnergyMWh = s.number("energy_mwh", positive)
		in.maxMW = s.valueOr("schedule_mw", anyNumber, 0)
		res.MinMW, res.MaxMW = in.maxMW.Value, in.maxMW.Value
		s.within("schedule_mw", in.maxMW.Value, res.PowerMW)
	case Wind, Solar:
		res.PowerMW = s.numberOr("power_mw", positive, math.Inf(1))
		in.maxMW = s.value("available_mw", notBelow0)
		res.MaxMW = in.maxMW.Value
		for _, x := range valuesOf(in.maxMW.Value) {
			if x > res.PowerMW {
				s.fault("available_mw", num(x), "at most power_mw ("+num(res.PowerMW)+")")
				break
			}
		}
		if most := res.MaxMW.most(); !math.IsInf(res.PowerMW, 1) && res.PowerMW > 5 && most <= 1 && res.MaxMW.Series != nil {
			s.warn("available_mw", "at most "+num(most)+" in any hour", "MW (power_mw is "+num(res.PowerMW)+"); a share of it must be multiplied out")
		}
	case Demand:
		res.PowerMW = s.numberOr("power_mw", positive, 0)
	case Link:
		res.PowerMW = s.numberOr("power_mw", positive, 0)
		in.minMW = s.valueOr("min_output_mw", anyNumber, 0)
		in.maxMW = s.value("max_output_mw", anyNumber)
		res.MinMW, res.MaxMW = in.minMW.Value, in.maxMW.Value
		r.ordered(s, in)
		if res.PowerMW > 0 {
			s.within("min_output_mw", res.MinMW, res.PowerMW)
			s.within("max_output_mw", res.MaxMW, res.PowerMW)
		}
		res.CO2TPerMWh = s.numberOr("co2_t_per_mwh", notBelow0, 0)
	}
	if res.Kind != Battery && res.Kind != Demand {
		res.PricePerMWh = s.valueOr("cost_per_mwh", anyNumber, 0).Value
	}
	if p := s.part("synthetic_inertia", syntheticKeys); p != nil {
		res.SyntheticMWs = p.value("cap_mws", notBelow0).Value
		res.SyntheticPerMWs = p.numberOr("price_per_mws", notBelow0, 0)
		res.SyntheticS = p.numberOr("filter_s", rule{lo: 0.01, hi: 10}, 0)
	}
}

// within reports a value beyond the converter's power.
func (s *section) within(key string, v Value, power float64) {
	for _, x := range valuesOf(v) {
		if math.Abs(x) > power {
			s.fault(key, num(x), "within power_mw ("+num(power)+") either way")
			return
		}
	}
}

func valuesOf(v Value) []float64 {
	if v.Series != nil {
		return v.Series
	}
	return []float64{v.Const}
}

// down reads the response downwards, for losses of load.
func (r *reader) down(s *section, res *Resource) {
	if res.Kind == Condenser {
		s.r.fault(s.line, s.path, "response of a condenser", "nothing: it has no prime mover to respond with")
		return
	}
	res.Down.CapMW = s.value("cap_mw", notBelow0).Value
	res.Down.PricePerMW = s.numberOr("price_per_mw", notBelow0, 0)
	at, ok := r.delivery(s)
	if !ok {
		return
	}
	res.Down.Shape = at
	if r.shapeInputs[at].made && r.c.Shapes[at].Shape.Recovery() {
		s.fault("shape", "a shape that falls below zero", "one that stays at or above zero: downwards no rotor gives back")
	}
}

// delivery finds the shape or model that a response names.
func (r *reader) delivery(s *section) (int, bool) {
	key := "shape"
	if s.has("model") {
		key = "model"
		if s.has("shape") {
			s.fault("shape", "a shape beside a model", "either of the two")
		}
	}
	name, ok := s.text(key)
	if !ok {
		return 0, false
	}
	at, known := r.shapeIndex[name]
	if known && r.c.Shapes[at].Model != (key == "model") {
		known = false
	}
	if !known {
		want := "the name of a " + key
		if near := nearestName(name, len(r.c.Shapes), func(i int) string {
			if r.c.Shapes[i].Model != (key == "model") {
				return ""
			}
			return r.c.Shapes[i].Name
		}); near != "" {
			want += " (" + near + "?)"
		}
		s.fault(key, "the unknown "+key+" "+quoted(name), want)
		return 0, false
	}
	return at, true
}

func (r *reader) response(s *section, res *Resource, in *input) {
	in.caps = s.value("cap_mw", notBelow0)
	res.Response.CapMW = in.caps.Value
	res.Response.PricePerMW = s.numberOr("price_per_mw", notBelow0, 0)
	res.Response.ShareOfOutput = s.numberOr("share_of_output", share, 0)
	at, ok := r.delivery(s)
	if !ok {
		return
	}
	res.Response.Shape = at
	if !r.shapeInputs[at].made {
		return
	}
	shape := r.c.Shapes[at].Shape
	if shape.Recovery() && res.Kind != Wind {
		s.fault("shape", "a shape that falls below zero for a "+res.Kind.String(), "a shape that stays at or above zero: only a wind turbine's rotor takes energy back")
	}
	if res.Kind == Battery {
		hold := shape.HoldEnergyS()
		if r.c.Shapes[at].Model && math.IsInf(hold, 1) { // it follows frequency for as long as it must
			hold = r.c.Limits.SteadyUntilS
		}
		switch {
		case math.IsInf(hold, 1):
			s.fault("shape", quoted(r.c.Shapes[at].Name)+", held for ever, for a battery", "a shape with hold_s, so that its energy can be counted")
		case hold > 0 && res.EnergyMWh*3600/hold < in.caps.most()-1e-9:
			s.warn("cap_mw", num(in.caps.most()), fmt.Sprintf("at most %s: energy_mwh (%s) lasts no longer; the response is cut to that", num(res.EnergyMWh*3600/hold), num(res.EnergyMWh)))
		}
	}
}
