package report

import (
	"io"

	"evenkeel/study/ranges"
	"evenkeel/study/size"
)

type sizeSummary struct {
	Caution      string   `json:"caution"`
	Case         string   `json:"case"`
	CaseHash     string   `json:"case_hash"`
	Project      string   `json:"project"`
	ProjectNote  string   `json:"project_note,omitempty"`
	ProjectHash  string   `json:"project_hash"`
	Kind         string   `json:"kind"`
	Promised     bool     `json:"response_is_a_promise"`
	Currency     string   `json:"currency"`
	SizeUnit     string   `json:"size_unit"`
	HoursLooked  int      `json:"hours_looked_at"`
	HoursOfCase  int      `json:"hours_of_case"`
	FirstHour    int      `json:"first_hour"`
	LastHour     int      `json:"last_hour"`
	HoursAYear   int      `json:"hours_a_year"`
	AskedGap     number   `json:"asked_gap"`
	StartSpreadH number   `json:"start_cost_spread_h"`
	Pay          string   `json:"pay"`
	Designs      int      `json:"designs"`
	Cases        int      `json:"cases"`
	CostBare     number   `json:"system_cost_without"`
	ShortBare    number   `json:"hours_short_without"`
	Best         sizeBest `json:"best"`

	Paces       []paceJSON   `json:"by_activation"`
	WhatMatters []swingJSON  `json:"what_matters_most"`
	OtherPay    otherPayJSON `json:"other_pay"`
}

type sizeBest struct {
	Owner  designJSON `json:"owner"`
	System designJSON `json:"system"`
}

type designJSON struct {
	Pays          bool   `json:"pays"`
	Size          number `json:"size"`
	EnergyMWh     number `json:"energy_mwh"`
	ActivationS   number `json:"activation_s"`
	ResponseMW    number `json:"response_mw"`
	Capital       number `json:"capital"`
	YearlyCost    number `json:"yearly_cost"`
	Saving        number `json:"saving"`
	SavingAtLeast number `json:"saving_at_least"`
	SavingAtMost  number `json:"saving_at_most"`
	Income        number `json:"income"`
	TakerIncome   number `json:"income_as_price_taker"`
	NetOwner      number `json:"net_owner"`
	NetSystem     number `json:"net_system"`
	BreakEven     number `json:"break_even_capital_per_mw"`
	HoursPaid     number `json:"hours_paid"`
	HoursSure     number `json:"hours_sure_to_save"`
	Utilisation   number `json:"utilisation"`
}

func designOf(s *size.Study, side size.Side) designJSON {
	r := &s.Results[s.Best[side]]
	y := r.Year
	return designJSON{
		Pays: s.Pays(side), Size: mw(r.MW), EnergyMWh: mw(r.EnergyMWh), ActivationS: number{r.ActivationS, decS}, ResponseMW: mw(r.ResponseMW),
		Capital: money(size.Capital(s.Plan.Project.Money, r.Design)), YearlyCost: money(r.Cost),
		Saving: money(y.Saving), SavingAtLeast: money(y.SavingAtLeast), SavingAtMost: money(y.SavingAtMost),
		Income: money(y.Paid[s.Rule].Net()), TakerIncome: money(y.Taker[s.Rule]), NetOwner: money(r.Net[size.Owner]), NetSystem: money(r.Net[size.System]),
		BreakEven: money(r.BreakEven[side]), HoursPaid: number{y.PaidH[s.Rule], 1}, HoursSure: number{y.SureH, 1}, Utilisation: number{r.Utilisation, decShare},
	}
}

type paceJSON struct {
	ActivationS number     `json:"activation_s"`
	EnergyPerMW energyJSON `json:"energy_mwh_per_mw"`
	StopOwner   stopJSON   `json:"next_mw_stops_paying_owner"`
	StopSystem  stopJSON   `json:"next_mw_stops_paying_system"`
	NetOwner    number     `json:"best_net_owner"`
	NetSystem   number     `json:"best_net_system"`
}

type energyJSON struct {
	Total    number `json:"total"`
	Events   number `json:"events"`
	Recharge number `json:"recharge"`
	Down     number `json:"downwards"`
	HoldS    number `json:"hold_s"`
}

type stopJSON struct {
	MW     number `json:"size"`
	Beyond bool   `json:"beyond_the_sweep"`
}

type swingJSON struct {
	Input    string `json:"input"`
	Value    number `json:"value"`
	NetLow   number `json:"net_owner_low"`
	NetHigh  number `json:"net_owner_high"`
	SysLow   number `json:"net_system_low"`
	SysHigh  number `json:"net_system_high"`
	Interval number `json:"changed_by_share"`
}

type otherPayJSON struct {
	Pay       string     `json:"pay"`
	Best      designJSON `json:"best_owner"`
	StopOwner stopJSON   `json:"next_mw_stops_paying_owner"`
}

// sizeJSON writes the study in numbers.
func sizeJSON(w io.Writer, s *Sized) error {
	plan, project := s.Plan, s.Plan.Project
	out := sizeSummary{
		Caution: Caution, Case: plan.Case.Name, CaseHash: plan.Case.Hash, Project: project.Name, ProjectNote: project.Note, ProjectHash: project.Hash,
		Kind: project.Kind.String(), Promised: project.Promised(), Currency: plan.Case.Currency, SizeUnit: project.Kind.SizeUnit(),
		HoursLooked: len(s.Hours), HoursOfCase: plan.Case.Hours(), FirstHour: s.Hours[0], LastHour: s.Hours[len(s.Hours)-1], HoursAYear: ranges.HoursAYear,
		AskedGap: number{s.Gap, decShare}, StartSpreadH: number{s.StartSpreadH, decS}, Pay: s.Rule.String(), Designs: len(plan.Points), Cases: plan.Cases(),
		CostBare: money(s.Years[0][0].Cost), ShortBare: number{s.Years[0][0].ShortH, 1},
		Best: sizeBest{designOf(s.Study, size.Owner), designOf(s.Study, size.System)},
		OtherPay: otherPayJSON{s.Other.Rule.String(), designOf(s.Other, size.Owner),
			stopOf(s.Other.Pace(&s.Other.Results[s.Other.Best[size.Owner]]).Stop[size.Owner])},
	}
	for i := range s.Paces {
		p := &s.Paces[i]
		e := p.Energy
		out.Paces = append(out.Paces, paceJSON{
			ActivationS: number{p.ActivationS, decS},
			EnergyPerMW: energyJSON{number{e.TotalMWh, decShare}, number{e.EventsMWh, decShare}, number{e.RechargeMWh, decShare}, number{e.DownMWh, decShare}, number{e.HoldS, decS}},
			StopOwner:   stopOf(p.Stop[size.Owner]), StopSystem: stopOf(p.Stop[size.System]),
			NetOwner: money(peak(s.Study, p, size.Owner).Net[size.Owner]), NetSystem: money(peak(s.Study, p, size.System).Net[size.System]),
		})
	}
	swings := s.Sensitivity(&s.Results[s.Best[size.Owner]])
	for i := range swings[:min(swingsListed, len(swings))] {
		x := &swings[i]
		out.WhatMatters = append(out.WhatMatters, swingJSON{x.Input, number{x.At, decPrice}, money(x.NetLow[size.Owner]), money(x.NetHigh[size.Owner]),
			money(x.NetLow[size.System]), money(x.NetHigh[size.System]), number{size.SwingShare, 2}})
	}
	return writeJSON(w, out)
}

func stopOf(s size.Stop) stopJSON { return stopJSON{mw(s.MW), s.Beyond} }
