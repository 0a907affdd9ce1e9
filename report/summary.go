package report

import (
	"io"
	"math"

	"evenkeel/fleet"
	"evenkeel/limits"
	"evenkeel/solve"
)

// number is a JSON number with a fixed count of decimals; what JSON cannot hold
// (an infinite bound, a share of nothing) becomes null.
type number struct {
	v   float64
	dec int
}

func (n number) MarshalJSON() ([]byte, error) {
	if math.IsNaN(n.v) || math.IsInf(n.v, 0) {
		return []byte("null"), nil
	}
	return []byte(fixed(n.v, n.dec)), nil
}

func mw(v float64) number    { return number{v, decMW} }
func hz(v float64) number    { return number{v, decHz} }
func money(v float64) number { return number{v, decMoney} }

// valueAtHour is an extreme and the hour it falls in.
type valueAtHour struct {
	Value number `json:"value"`
	Hour  int    `json:"hour"`
}

type summaryJSON struct {
	Caution string `json:"caution"`

	Case          string `json:"case"`
	CaseNote      string `json:"case_note,omitempty"`
	CaseHash      string `json:"case_hash"`
	Currency      string `json:"currency"`
	Hours         int    `json:"hours"`
	FirstHour     int    `json:"first_hour"`
	LastHour      int    `json:"last_hour"`
	From          string `json:"from"`
	LastHourFrom  string `json:"last_hour_from"`
	LimitsLeftOut bool   `json:"limits_left_out"`
	HoursJoined   bool   `json:"hours_joined"`
	HoursNote     string `json:"hours_note"`
	StartSpreadH  number `json:"start_cost_spread_h"`
	AskedGap      number `json:"asked_gap"`

	Totals       totalsJSON         `json:"totals"`
	LargestGap   valueAtHour        `json:"largest_gap"`
	HoursOverGap int                `json:"hours_over_asked_gap"`
	HoursBy      hoursByJSON        `json:"hours_by_what_binds"`
	Limits       []limitJSON        `json:"limits"`
	Security     *securityJSON      `json:"cost_of_security"`
	Prices       []priceJSON        `json:"prices"`
	Inertia      inertiaJSON        `json:"inertia"`
	Worst        worstJSON          `json:"worst_replayed"`
	Above        *aboveJSON         `json:"above_nominal"`
	Closed       *closedJSON        `json:"closed_loop"`
	Frequency    []frequencyRunJSON `json:"machines_run_for_frequency"`
	Short        []shortJSON        `json:"short_hours"`
	Effort       effortJSON         `json:"effort"`
	Units        map[string]string  `json:"units"`
}

type totalsJSON struct {
	Cost         number `json:"cost"`
	Bound        number `json:"bound"`
	DemandMWh    number `json:"demand_mwh"`
	OutputMWh    number `json:"output_mwh"`
	UnservedMWh  number `json:"unserved_mwh"`
	ExcessMWh    number `json:"excess_mwh"`
	CurtailedMWh number `json:"curtailed_mwh"`
	CO2T         number `json:"co2_t"`
}

type hoursByJSON struct {
	None    int `json:"none"`
	RoCoF   int `json:"rocof_alone"`
	Nadir   int `json:"nadir_alone"`
	Steady  int `json:"steady_alone"`
	Several int `json:"several"`
	Short   int `json:"short"`
}

type limitJSON struct {
	Limit          string      `json:"limit"`
	Value          number      `json:"value"`
	Unit           string      `json:"unit"`
	HoursBinding   int         `json:"hours_binding"`
	PercentBinding number      `json:"percent_binding"`
	HoursShort     int         `json:"hours_short"`
	MeanPrice      number      `json:"mean_price_when_binding"`
	HighestPrice   number      `json:"highest_price"`
	LeastMargin    valueAtHour `json:"least_margin"`
	ByHourOfDay    [24]int     `json:"binding_by_hour_of_day_utc"`
	ByMonth        [12]int     `json:"binding_by_month"`
}

type securityJSON struct {
	HoursCompared     int    `json:"hours_compared"`
	CostWithout       number `json:"cost_without_limits"`
	Absolute          number `json:"absolute"`
	AtLeast           number `json:"at_least"`
	AtMost            number `json:"at_most"`
	Percent           number `json:"percent"`
	PerMWh            number `json:"per_mwh_of_demand"`
	InSecureHours     number `json:"in_secure_hours"`
	InShortHours      number `json:"in_short_hours"`
	AddedCO2T         number `json:"added_co2_t"`
	AddedCurtailedMWh number `json:"added_curtailed_mwh"`
}

type priceJSON struct {
	Of      string `json:"of"`
	Shape   string `json:"shape,omitempty"`
	Per     string `json:"per"`
	Hours   int    `json:"hours_not_zero"`
	Mean    number `json:"mean_when_not_zero"`
	Highest number `json:"highest"`
}

type inertiaJSON struct {
	Least       valueAtHour `json:"least_mws"`
	Mean        number      `json:"mean_mws"`
	LeastLeft   valueAtHour `json:"least_left_after_worst_loss_mws"`
	MeanLeft    number      `json:"mean_left_after_worst_loss_mws"`
	LeastFreely *number     `json:"least_without_limits_mws"`
	MeanFreely  *number     `json:"mean_without_limits_mws"`
}

type worstJSON struct {
	RoCoF  valueAtHour `json:"rocof_hz_per_s"`
	Nadir  valueAtHour `json:"nadir_hz"`
	Steady valueAtHour `json:"steady_hz"`
}

type frequencyRunJSON struct {
	Resource  string `json:"resource"`
	Kind      string `json:"kind"`
	UnitHours int    `json:"unit_hours_beyond_without_limits"`
	Hours     int    `json:"hours"`
	UnitMWs   number `json:"mws_per_unit"`
	OutputMWh number `json:"added_output_mwh"`
}

type shortJSON struct {
	Hour       int    `json:"hour"`
	Time       string `json:"time"`
	Why        string `json:"why"`
	UnservedMW number `json:"unserved_mw"`
	ExcessMW   number `json:"excess_mw"`
	RoCoFMW    number `json:"rocof_short_mw"`
	NadirMW    number `json:"nadir_short_mw"`
	SteadyMW   number `json:"steady_short_mw"`
}

type effortJSON struct {
	Nodes  int `json:"relaxations"`
	Pivots int `json:"pivots"`
	Rows   int `json:"frequency_rows"`
}

// units explains the endings of names in hours.csv, schedule.csv and summary.json.
var units = map[string]string{
	"_mw":       "megawatt; mean over the hour",
	"_mwh":      "megawatt-hour",
	"_mws":      "megawatt-second, kinetic energy",
	"_hz":       "hertz; nadir and steady are deviations below nominal, above 0",
	"_hz_per_s": "hertz per second",
	"_s":        "second",
	"_t":        "tonne",
	"_h":        "hour",
	"cost":      "currency of the case; per hour in hours.csv and schedule.csv",
	"price":     "currency of the case for one unit of what the name ends in, held for one hour",
}

// hoursNote says what solving hour by hour leaves out.
func hoursNote(o Options) string {
	s := "Each hour is solved on its own: start costs, minimum up and down times, ramps and stored energy " +
		"do not join one hour to the next. "
	if o.StartSpreadH > 0 {
		h := "hours"
		if o.StartSpreadH == 1 {
			h = "hour"
		}
		return s + "Start costs were spread over an assumed run of " + plain(o.StartSpreadH) + " " + h + "."
	}
	return s + "Start costs are left out."
}

// WriteSummary writes summary.json: the totals of a run and what it shows. without are
// the same hours solved without frequency limits, matched by index; nil leaves out the
// cost of security and the machines run for frequency.
func WriteSummary(w io.Writer, c *fleet.Case, hours, without []solve.Hour, o Options) error {
	if err := checkRun(c, hours, without); err != nil {
		return err
	}
	partner := pair(hours, without)
	sec := compare(hours, partner)
	t := tallyHours(c, hours, o.Gap)
	first, last := &hours[0], &hours[len(hours)-1]
	s := summaryJSON{
		Caution: Caution,
		Case:    c.Name, CaseNote: c.Note, CaseHash: c.Hash, Currency: c.Currency,
		Hours: len(hours), FirstHour: first.Index, LastHour: last.Index,
		From: stamp(first.Time), LastHourFrom: stamp(last.Time),
		LimitsLeftOut: o.WithoutLimits,
		HoursJoined:   false, HoursNote: hoursNote(o),
		StartSpreadH: number{o.StartSpreadH, decS}, AskedGap: number{o.Gap, decShare},
		Totals: totalsJSON{
			Cost: money(t.cost), Bound: money(t.bound), DemandMWh: mw(t.demandMWh), OutputMWh: mw(t.outputMWh),
			UnservedMWh: mw(t.unservedMWh), ExcessMWh: mw(t.excessMWh), CurtailedMWh: mw(t.curtailedMWh), CO2T: mw(t.co2T),
		},
		LargestGap:   valueAtHour{number{t.gap, decShare}, t.gapAtHour},
		HoursOverGap: t.overGap,
		HoursBy: hoursByJSON{
			t.states[free], t.states[byRoCoF], t.states[byNadir], t.states[bySteady], t.states[bySeveral], t.states[isShort],
		},
		Limits:   limitsJSON(c, t, len(hours)),
		Security: securityOf(sec),
		Prices:   pricesJSON(c, t),
		Inertia:  inertiaOf(t, sec),
		Worst: worstJSON{
			RoCoF:  valueAtHour{hz(t.rocofHzPerS), t.rocofAtHour},
			Nadir:  valueAtHour{hz(t.nadirHz), t.nadirAtHour},
			Steady: valueAtHour{hz(t.steadyHz), t.steadyAt},
		},
		Above:     aboveOf(c, hours),
		Closed:    closedOf(c, hours),
		Frequency: []frequencyRunJSON{},
		Short:     []shortJSON{},
		Effort:    effortJSON{t.nodes, t.pivots, t.rows},
		Units:     units,
	}
	for _, r := range frequencyRuns(c, hours, partner) {
		res := &c.Resources[r.resource]
		s.Frequency = append(s.Frequency, frequencyRunJSON{
			res.Name, res.Kind.String(), r.unitHours, r.hours, mw(r.unitMWs), mw(r.outputMWh),
		})
	}
	for _, h := range t.short {
		s.Short = append(s.Short, shortJSON{
			h.Index, stamp(h.Time), h.Why, mw(h.UnservedMW), mw(h.ExcessMW),
			mw(h.Limits[limits.RoCoF].ShortMW), mw(h.Limits[limits.Nadir].ShortMW), mw(h.Limits[limits.Steady].ShortMW),
		})
	}
	return writeJSON(w, s)
}

// limitValue is the limit itself, in the unit of limitUnit.
func limitValue(l limits.Limits, k limits.Kind) float64 {
	return [limits.Kinds]float64{l.MaxHzPerS, l.NadirHz, l.SteadyHz}[k]
}

func limitsJSON(c *fleet.Case, t *tally, n int) []limitJSON {
	list := make([]limitJSON, limits.Kinds)
	for k := range list {
		b := &t.binding[k]
		list[k] = limitJSON{
			Limit: limits.Kind(k).String(), Value: hz(limitValue(c.Limits, limits.Kind(k))), Unit: limitUnit[k],
			HoursBinding: b.binding, PercentBinding: number{100 * float64(b.binding) / float64(n), decPercent},
			HoursShort: b.short,
			MeanPrice:  number{b.price.mean(), decPrice}, HighestPrice: number{b.price.max, decPrice},
			LeastMargin: valueAtHour{hz(b.margin.min), b.margin.minAtHour},
			ByHourOfDay: b.byHour, ByMonth: b.byMonth,
		}
	}
	return list
}

func securityOf(s *security) *securityJSON {
	if s == nil {
		return nil
	}
	return &securityJSON{
		HoursCompared: s.hours, CostWithout: money(s.without), Absolute: money(s.cost()),
		AtLeast: money(s.least), AtMost: money(s.most),
		Percent: number{s.percent(), decPercent}, PerMWh: number{s.perMWh(), decPrice},
		InSecureHours: money(s.inSecure), InShortHours: money(s.inShort),
		AddedCO2T: mw(s.co2T), AddedCurtailedMWh: mw(s.curtailedMWh),
	}
}

func pricesJSON(c *fleet.Case, t *tally) []priceJSON {
	price := func(of, shape, per string, p pricing, dec int) priceJSON {
		return priceJSON{of, shape, per, p.hours, number{p.mean(), dec}, number{p.max, dec}}
	}
	list := []priceJSON{
		price("energy", "", "mwh", t.energyPrice, decPrice),
		price("inertia", "", "mws", t.inertiaPrice, decInertia),
	}
	for s := range c.Shapes {
		list = append(list, price("response", c.Shapes[s].Name, "mw", t.response[s], decPrice))
	}
	return append(list, price("smaller loss", "", "mw", t.lossMW, decPrice))
}

func inertiaOf(t *tally, s *security) inertiaJSON {
	j := inertiaJSON{
		Least: valueAtHour{mw(t.inertia.min), t.inertia.minAtHour}, Mean: mw(t.inertia.mean()),
		LeastLeft: valueAtHour{mw(t.left.min), t.left.minAtHour}, MeanLeft: mw(t.left.mean()),
	}
	if s != nil {
		least, mean := mw(s.inertia.min), mw(s.inertia.mean())
		j.LeastFreely, j.MeanFreely = &least, &mean
	}
	return j
}
