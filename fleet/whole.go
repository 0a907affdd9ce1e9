package fleet

import (
	"fmt"
	"math"
	"strings"
	"time"

	"gopkg.in/yaml.v3"

	"evenkeel/limits"
)

var (
	wholeKeys     = []string{"case", "note", "currency", "frequency", "prices", "load", "hours", "shapes", "models", "machines", "converters", "connections", "losses", "relays"}
	frequencyKeys = []string{"nominal_hz", "rocof", "nadir", "steady", "above"}
	aboveKeys     = []string{"rocof_hz_per_s", "peak_hz", "steady_hz"}
	rocofKeys     = []string{"max_hz_per_s", "window_s"}
	nadirKeys     = []string{"max_deviation_hz"}
	steadyKeys    = []string{"max_deviation_hz", "by_s", "until_s"}
	priceKeys     = []string{"unserved_per_mwh", "shortfall_per_mw"}
	loadKeys      = []string{"demand_mw", "damping_pct_per_hz", "inertia_mws_per_mw"}
	hourKeys      = []string{"start", "count"}
	groupKeys     = []string{"name", "resources"}
	lossKeys      = []string{"name", "mw", "resources", "over"}
)

// whole reads all sections, in an order in which each finds what it refers to, then
// judges the case as a whole.
func (r *reader) whole(root *yaml.Node) {
	s := r.section(root, "", root.Line, wholeKeys)
	if s == nil {
		return
	}
	c := r.c
	c.Name, _ = s.text("case")
	c.Note = s.note("note")
	c.Currency, _ = s.textOr("currency", "EUR")
	r.frequency(s.required("frequency", frequencyKeys))
	if p := s.required("prices", priceKeys); p != nil {
		c.UnservedPerMWh = p.number("unserved_per_mwh", positive)
		c.ShortPerMW = p.number("shortfall_per_mw", positive)
	}
	demand := r.load(s.required("load", loadKeys), s.part("hours", hourKeys))
	r.shapes(s)
	r.resources(s)
	r.qualify()
	r.connections(s)
	r.losses(s)
	r.relays(s)
	if r.times == nil && !r.clockLost {
		s.missing("hours", "start and count, as no value of the case is a series")
	}
	c.Times = r.times
	if len(r.found.Errors()) == 0 { // else a name mistyped would look like a column left over
		r.unused()
		r.judge(s, demand)
	}
}

func (r *reader) frequency(s *section) {
	if s == nil {
		return
	}
	l := &r.c.Limits
	l.NominalHz = s.number("nominal_hz", rule{lo: 1, hi: 1000})
	if f := l.NominalHz; f != 50 && f != 60 && !math.IsNaN(f) {
		s.warn("nominal_hz", num(f), "50 or 60 (common practice)")
	}
	rocof, nadir, steady := s.required("rocof", rocofKeys), s.required("nadir", nadirKeys), s.required("steady", steadyKeys)
	if rocof != nil {
		l.MaxHzPerS = rocof.number("max_hz_per_s", positive)
		l.WindowS = rocof.numberOr("window_s", rule{lo: 0, hi: maxSeconds}, 0)
		if l.MaxHzPerS > 3 {
			rocof.warn("max_hz_per_s", num(l.MaxHzPerS), "at most 3, the most that distributed plant must ride through (IEEE 1547-2018, category III, from memory)")
		}
	}
	if nadir != nil {
		l.NadirHz = nadir.number("max_deviation_hz", positive)
		if l.NadirHz >= l.NominalHz {
			nadir.fault("max_deviation_hz", num(l.NadirHz), "less than nominal_hz ("+num(l.NominalHz)+")")
		} else if l.NadirHz > 1 {
			nadir.warn("max_deviation_hz", num(l.NadirHz), "at most 1, the largest in Regulation (EU) 2017/1485, annex III (from memory)")
		}
	}
	if steady == nil {
		return
	}
	l.SteadyHz = steady.number("max_deviation_hz", positive)
	l.SteadyByS = steady.number("by_s", rule{lo: 0, hi: maxSeconds, above: true})
	l.SteadyUntilS = steady.numberOr("until_s", rule{lo: 0, hi: maxSeconds, above: true}, math.Max(l.SteadyByS, 60))
	if nadir != nil && l.SteadyHz > l.NadirHz {
		steady.fault("max_deviation_hz", num(l.SteadyHz), "at most nadir.max_deviation_hz ("+num(l.NadirHz)+")")
	}
	if a := s.part("above", aboveKeys); a != nil {
		r.above(a)
	}
	if l.SteadyByS > l.SteadyUntilS {
		steady.fault("until_s", num(l.SteadyUntilS), "at least by_s ("+num(l.SteadyByS)+")")
	}
	if rocof != nil && l.WindowS >= l.SteadyByS {
		rocof.fault("window_s", num(l.WindowS), "less than steady.by_s ("+num(l.SteadyByS)+")")
	}
	if rocof != nil && nadir != nil && l.WindowS > 0 && l.MaxHzPerS*l.WindowS > l.NadirHz {
		rocof.warn("max_hz_per_s", fmt.Sprintf("%s over %s s, a drop of %s Hz", num(l.MaxHzPerS), num(l.WindowS), num(l.MaxHzPerS*l.WindowS)),
			"a drop below nadir.max_deviation_hz ("+num(l.NadirHz)+"): else this limit never binds")
	}
}

// above reads the limits above nominal, whose window and times are those below.
func (r *reader) above(s *section) {
	a := r.c.Limits
	a.MaxHzPerS, a.NadirHz, a.SteadyHz = s.number("rocof_hz_per_s", positive), s.number("peak_hz", positive), s.number("steady_hz", positive)
	if a.SteadyHz > a.NadirHz {
		s.fault("steady_hz", num(a.SteadyHz), "at most peak_hz ("+num(a.NadirHz)+")")
	}
	r.c.Above = &a
}

// load reads the load, whose series sets the hours of the case; with a constant load the
// section hours does, or else the first series of the case.
func (r *reader) load(s, hours *section) given {
	if s == nil {
		r.clockLost = true
		return given{Value: Value{Const: math.NaN()}}
	}
	demand := s.value("demand_mw", notBelow0)
	r.c.Load.DemandMW = demand.Value
	r.c.Load.DampingPctPerHz = s.numberOr("damping_pct_per_hz", rule{lo: 0, hi: 100}, 0)
	r.c.Load.InertiaMWsPerMW = s.numberOr("inertia_mws_per_mw", notBelow0, 0)
	if r.c.Load.DampingPctPerHz > 4 {
		s.warn("damping_pct_per_hz", num(r.c.Load.DampingPctPerHz),
			"about 1 (UCTE Operation Handbook, appendix 1, from memory) to 3 (Kundur 1994, example 11.1, from memory)")
	}
	if e, ok := s.get("demand_mw"); ok && demand.Series == nil {
		if _, _, isRef := splitReference(e.node); isRef || math.IsNaN(demand.Const) {
			r.clockLost = true // the other series have nothing to be compared with
		}
	}
	switch {
	case hours == nil:
	case demand.Series != nil:
		r.fault(hours.line, hours.path, "hours beside a series of the load", "nothing: load.demand_mw sets the hours")
	default:
		r.constantClock(hours)
	}
	return demand
}

func (r *reader) constantClock(s *section) {
	count := s.number("count", hourCount)
	e, ok := s.get("start")
	if !ok {
		s.missing("start", timeForm)
		r.clockLost = true
		return
	}
	start, _, ok := parseTime(e.node.Value)
	if !ok || e.node.Kind != yaml.ScalarNode {
		r.fault(e.node.Line, s.key("start"), describe(e.node), timeForm)
	}
	if !ok || math.IsNaN(count) || r.clockLost {
		r.clockLost = true
		return
	}
	r.clock = r.path + " (hours)"
	r.times = make([]time.Time, int(count))
	for h := range r.times {
		r.times[h] = start.Add(time.Duration(h) * time.Hour)
	}
}

// name reads the name of a list entry and gives the entry's path: machines[Hollin 1], or
// machines[#3] for the third without a usable name.
func entryPath(node *yaml.Node, list string, i int) string {
	node = target(node)
	if node.Kind == yaml.MappingNode {
		for j := 0; j+1 < len(node.Content); j += 2 {
			if v := target(node.Content[j+1]); node.Content[j].Value == "name" && v.Kind == yaml.ScalarNode && nameFault(v.Value) == "" {
				return list + "[" + v.Value + "]"
			}
		}
	}
	return fmt.Sprintf("%s[#%d]", list, i+1)
}

// claim reads a name that must be the only one of its kind.
func (r *reader) claim(s *section, taken map[string]int, what string) string {
	name, ok := s.text("name")
	if !ok {
		return ""
	}
	if first, twice := taken[name]; twice {
		s.fault("name", fmt.Sprintf("%s a second time (first on line %d)", quoted(name), first), "a name of its own for every "+what)
		return name
	}
	taken[name] = s.lineOf("name")
	return name
}

func (r *reader) connections(s *section) {
	for i, n := range s.items("connections", "a list of connections") {
		g := r.section(n, entryPath(n, "connections", i), n.Line, groupKeys)
		if g == nil {
			continue
		}
		c := Connection{Name: r.claim(g, r.names, "resource, connection and loss")}
		if !g.has("resources") {
			g.missing("resources", "a list of resources")
		}
		c.Resources = r.members(g)
		r.c.Connections = append(r.c.Connections, c)
	}
}

func (r *reader) losses(s *section) {
	for i, n := range s.items("losses", "a list of losses") {
		g := r.section(n, entryPath(n, "losses", i), n.Line, lossKeys)
		if g == nil {
			continue
		}
		l := Loss{Name: r.claim(g, r.names, "resource, connection and loss"), Resources: r.members(g), Over: g.flag("over", false)}
		if l.Over && r.c.Above == nil {
			g.fault("over", "a loss of load", "limits above nominal (frequency.above) for it")
		}
		if g.has("resources") {
			l.MW = g.valueOr("mw", notBelow0, 0).Value
		} else {
			l.MW = g.value("mw", notBelow0).Value
			if l.MW.most() == 0 {
				g.warn("mw", "0 in every hour", "a loss above 0 in some hour")
			}
		}
		r.c.Losses = append(r.c.Losses, l)
	}
}

// members reads the resources that a connection or a loss takes with it.
func (r *reader) members(s *section) []int {
	var out []int
	names := s.items("resources", "a list of resources")
	if s.has("resources") && names != nil && len(names) == 0 {
		s.fault("resources", "an empty list", "at least one resource")
	}
	seen := map[int]bool{}
	for _, n := range names {
		n = target(n)
		key := s.key("resources")
		if n.Kind != yaml.ScalarNode {
			r.fault(n.Line, key, describe(n), "the name of a resource")
			continue
		}
		i, ok := r.resource(n.Value)
		switch {
		case !ok && r.partial:
		case !ok:
			r.fault(n.Line, key, "the unknown resource "+quoted(n.Value), r.likelyResource(n.Value))
		case seen[i]:
			r.fault(n.Line, key, quoted(n.Value)+" a second time", "each resource once")
		default:
			seen[i] = true
			out = append(out, i)
		}
	}
	return out
}

func (r *reader) resource(name string) (int, bool) {
	i, ok := r.index[name]
	return i, ok
}

func (r *reader) likelyResource(name string) string {
	want := "the name of a machine or converter"
	if near := nearestName(name, len(r.c.Resources), func(i int) string { return r.c.Resources[i].Name }); near != "" {
		want += " (" + near + "?)"
	}
	return want
}

// nearestName is nearest for names, which keep their letters as they are.
func nearestName(name string, n int, at func(int) string) string {
	if n > 1000 || len(name) > maxName {
		return ""
	}
	best, least := "", len(name)/3+1
	for i := range n {
		if d := distance(strings.ToLower(name), strings.ToLower(at(i))); d < least {
			best, least = at(i), d
		}
	}
	return best
}

// shapeKeys are the keys of a shape given by its times; points gives any other.
var timingKeys = []string{"delay_s", "ramp_s", "hold_s", "withdraw_s", "recovery_share", "recovery_s", "return_s"}

func (r *reader) shapes(s *section) {
	r.shapeIndex = map[string]int{}
	taken := map[string]int{}
	known := append([]string{"name", "points"}, timingKeys...)
	for i, n := range s.items("shapes", "a list of response shapes") {
		g := r.section(n, entryPath(n, "shapes", i), n.Line, known)
		if g == nil {
			continue
		}
		sh := NamedShape{Name: r.claim(g, taken, "shape and model")}
		made := false
		if g.has("points") {
			sh.Shape, made = r.points(g)
		} else {
			sh.Shape, made = r.timing(g)
		}
		at := len(r.c.Shapes)
		r.c.Shapes = append(r.c.Shapes, sh)
		r.shapeInputs = append(r.shapeInputs, shapeInput{section: g, made: made})
		if _, twice := r.shapeIndex[sh.Name]; !twice {
			r.shapeIndex[sh.Name] = at
		}
		if until := r.c.Limits.SteadyUntilS; made && until > 0 && !delivers(sh.Shape, until) {
			r.fault(g.line, g.path, fmt.Sprintf("a shape that delivers nothing in the first %s s", num(until)),
				"some response before frequency.steady.until_s")
		}
	}
	r.models(s, taken)
}

// delivers tells whether a shape is above zero anywhere before an instant.
func delivers(s limits.Shape, until float64) bool {
	if s.At(until) > 0 {
		return true
	}
	for _, k := range s.Knots() {
		if k.S < until && k.Share > 0 {
			return true
		}
	}
	return false
}

func (r *reader) timing(s *section) (limits.Shape, bool) {
	q := rule{lo: 0, hi: maxSeconds}
	t := limits.Timing{
		DelayS: s.numberOr("delay_s", q, 0), RampS: s.numberOr("ramp_s", q, 0), HoldS: s.numberOr("hold_s", q, 0),
		WithdrawS: s.numberOr("withdraw_s", q, 0), RecoveryShare: s.numberOr("recovery_share", share, 0),
		RecoveryS: s.numberOr("recovery_s", q, 0), ReturnS: s.numberOr("return_s", q, 0),
	}
	if !s.has("delay_s") && !s.has("ramp_s") {
		s.missing("ramp_s", "delay_s and ramp_s, or points")
		return limits.Shape{}, false
	}
	for _, x := range []float64{t.DelayS, t.RampS, t.HoldS, t.WithdrawS, t.RecoveryShare, t.RecoveryS, t.ReturnS} {
		if math.IsNaN(x) {
			return limits.Shape{}, false
		}
	}
	shape, err := t.Shape()
	if err != nil {
		r.fault(s.line, s.path, "times that make no shape", err.Error())
		return shape, false
	}
	return shape, true
}

func (r *reader) points(s *section) (limits.Shape, bool) {
	for _, k := range timingKeys {
		if s.has(k) {
			s.fault(k, "a time beside points", "either times or points")
		}
	}
	var knots []limits.Knot
	bad := false
	for _, n := range s.items("points", "a list of points [seconds, share]") {
		n = target(n)
		if n.Kind == yaml.SequenceNode && len(n.Content) == 2 {
			at, ok1 := scalarNumber(target(n.Content[0]))
			part, ok2 := scalarNumber(target(n.Content[1]))
			if ok1 && ok2 {
				knots = append(knots, limits.Knot{S: at, Share: part})
				continue
			}
		}
		bad = true
		r.fault(n.Line, s.key("points"), describe(n), "points such as [1.5, 0.8]: seconds after the loss, share delivered")
	}
	if bad {
		return limits.Shape{}, false
	}
	if len(knots) > maxKnots {
		s.fault("points", fmt.Sprintf("%d points", len(knots)), fmt.Sprintf("at most %d", maxKnots))
		return limits.Shape{}, false
	}
	shape, err := limits.NewShape(knots)
	if err != nil {
		s.fault("points", "points that make no shape", err.Error())
		return shape, false
	}
	return shape, true
}
