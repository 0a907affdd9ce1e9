package report

import (
	"io"
	"math"

	"evenkeel/study/worth"
)

type worthSummary struct {
	Caution       string `json:"caution"`
	Study         string `json:"study"`
	Case          string `json:"case"`
	CaseNote      string `json:"case_note,omitempty"`
	CaseHash      string `json:"case_hash"`
	Currency      string `json:"currency"`
	Hours         int    `json:"hours"`
	From          string `json:"from"`
	LastHourFrom  string `json:"last_hour_from"`
	Sample        bool   `json:"sample"`
	CountedUpBy   number `json:"sums_counted_up_by"`
	AskedGap      number `json:"asked_gap"`
	StartSpreadH  number `json:"start_cost_spread_h"`
	HoursNote     string `json:"hours_note"`
	HullLossNote  string `json:"largest_loss_under_hull_prices"`
	HoursShort    int    `json:"hours_short_without_product"`
	DemandMWhYear number `json:"demand_mwh"`

	Prices   []worthPriceJSON  `json:"prices"`
	Uplift   []upliftJSON      `json:"uplift"`
	Exchange exchangeJSON      `json:"exchange"`
	Product  *productJSON      `json:"product"`
	Units    map[string]string `json:"units"`
}

type worthPriceJSON struct {
	Of      string        `json:"of"`
	Shape   string        `json:"shape,omitempty"`
	Per     string        `json:"per"`
	Without worthWaysJSON `json:"without_product"`
	With    worthWaysJSON `json:"with_product"`
}

type worthWaysJSON map[string]worthStatJSON

type worthStatJSON struct {
	Mean  number `json:"mean"`
	Most  number `json:"most"`
	Hours int    `json:"hours_not_zero"`
}

type upliftJSON struct {
	Product    string `json:"product"`
	Prices     string `json:"prices"`
	MakeWhole  number `json:"make_whole"`
	Lost       number `json:"lost_opportunity"`
	Total      number `json:"total"`
	SlackValue number `json:"value_of_rows_beyond_need"`
	LoadPays   number `json:"load_pays_for_energy"`
}

type exchangeJSON struct {
	Primary string     `json:"primary"`
	Cells   []cellJSON `json:"cells"`
}

type cellJSON struct {
	InertiaMWs number     `json:"inertia_left_mws"`
	LossMW     number     `json:"loss_mw"`
	Governs    string     `json:"governs"`
	ToS        number     `json:"to_s"`
	PrimaryMW  number     `json:"primary_mw"`
	Rates      []rateJSON `json:"one_mw_replaces"`
}

type rateJSON struct {
	Response   string `json:"response"`
	PrimaryMW  number `json:"primary_mw"`
	InertiaMWs number `json:"inertia_mws"`
}

type productJSON struct {
	Name        string      `json:"name"`
	Hash        string      `json:"hash"`
	ActivationS number      `json:"activation_s"`
	LevelHz     number      `json:"level_hz"`
	CapMW       number      `json:"cap_mw"`
	Points      []pointJSON `json:"points"`
	AtPrice     *number     `json:"asked_price_per_mw_year"`
	BuyMW       number      `json:"buy_mw"`
}

type pointJSON struct {
	VolumeMW    number `json:"volume_mw"`
	ActivationS number `json:"activation_s"`
	Net         number `json:"saving_net"`
	Gross       number `json:"saving_gross"`
	AtLeast     number `json:"saving_net_at_least"`
	AtMost      number `json:"saving_net_at_most"`
	NextMW      number `json:"next_mw_saves"`
	MeanMW      number `json:"held_mean_mw"`
	CO2T        number `json:"co2_t"`
}

var worthUnits = map[string]string{
	"_mw": units["_mw"], "_mwh": units["_mwh"], "_mws": units["_mws"], "_s": units["_s"], "_t": "tonnes a year", "_h": units["_h"],
	"prices": "currency of the case for one unit held or delivered for one hour", "saving": "currency of the case a year", "uplift": "currency of the case a year",
}

func worthJSON(w io.Writer, r *worth.Result, x *worth.Exchange, cells []worth.Cell, o WorthOptions) error {
	c := r.Full()
	first, last := &r.Records[0], &r.Records[len(r.Records)-1]
	s := worthSummary{
		Caution: Caution, Study: "worth", Case: c.Name, CaseNote: c.Note, CaseHash: c.Hash, Currency: c.Currency,
		Hours: len(r.Records), From: stamp(first.Time), LastHourFrom: stamp(last.Time), Sample: o.Sample, CountedUpBy: number{r.PerYear, decShare},
		AskedGap: number{o.Gap, decShare}, StartSpreadH: number{o.StartSpreadH, decS}, HoursNote: hoursNote(Options{StartSpreadH: o.StartSpreadH}), HullLossNote: WorthLoss,
		HoursShort: r.Short(0), Exchange: exchangeJSON{Primary: x.Names[x.Primary], Cells: []cellJSON{}}, Units: worthUnits,
	}
	demand := 0.0
	for i := range r.Records {
		demand += r.Records[i].DemandMW * r.PerYear
	}
	s.DemandMWhYear = mw(demand)
	for i := range r.Prices {
		q := &r.Prices[i]
		of := func(mix int) worthWaysJSON {
			if mix == 1 && r.Product == nil {
				return nil
			}
			dec := decPrice
			if q.Of == "inertia" {
				dec = decInertia
			}
			j := worthWaysJSON{}
			for way, name := range worth.WayNames {
				j[name] = worthStatJSON{number{q.Mean[mix][way], dec}, number{q.Most[mix][way], dec}, q.Hours[mix][way]}
			}
			return j
		}
		s.Prices = append(s.Prices, worthPriceJSON{q.Of, q.Shape, q.Per, of(0), of(1)})
	}
	for i := range r.Uplifts {
		u := &r.Uplifts[i]
		s.Uplift = append(s.Uplift, upliftJSON{mixName(u.With), worth.WayNames[u.Way], money(u.MakeWhole), money(u.Lost), money(u.MakeWhole + u.Lost), money(u.SlackValue), money(u.Served)})
	}
	for i := range cells {
		cell := &cells[i]
		j := cellJSON{mw(cell.InertiaMWs), mw(cell.LossMW), governsWord(cell), number{cell.ToS, decS}, mw(cell.PrimaryMW), []rateJSON{}}
		if cell.Rated() {
			for k := range x.Shapes {
				inertia := math.NaN()
				if cell.InertiaPerPrimary > 0 {
					inertia = cell.Rates[k].InertiaMWs
				}
				j.Rates = append(j.Rates, rateJSON{x.Names[k], number{cell.Rates[k].PrimaryMW, decPrice}, mw(inertia)})
			}
		}
		s.Exchange.Cells = append(s.Exchange.Cells, j)
	}
	if q := r.Product; q != nil {
		j := &productJSON{Name: q.Name, Hash: q.Hash, ActivationS: number{q.ActivationS, decS}, LevelHz: hz(q.LevelHz), CapMW: mw(q.MostMW())}
		for i := range r.Points {
			p := &r.Points[i]
			j.Points = append(j.Points, pointJSON{mw(p.VolumeMW), number{p.ActivationS, decS}, money(p.Net), money(p.Gross), money(p.AtLeast), money(p.AtMost), money(p.NextPerMW), mw(p.MeanMW), mw(p.CO2T)})
		}
		if o.AtGiven {
			j.AtPrice = &number{o.At, decMoney}
		}
		j.BuyMW = mw(r.VolumesMW[r.Choice(o.AtGiven, o.At)])
		s.Product = j
	}
	return writeJSON(w, s)
}
