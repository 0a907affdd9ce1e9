package size

// Cell is one hour of the day of one month.
type Cell struct {
	Month, HourOfDay int // from 1, from 0; UTC
	Hours            int // looked at
	Paid             int // in which the project is paid more than its own cost
	MeanMW           float64
	MeanIncome       float64 // currency per hour, own cost paid
	MeanSaving       float64 // the system's
}

// calendar says when a design is needed: a cell for each hour of the day of each month.
func (s *Study) calendar(r *Result, of [][][]Rung) []Cell {
	const months, hours = 12, 24
	cells := make([]Cell, months*hours)
	for i := range cells {
		cells[i].Month, cells[i].HourOfDay = i/hours+1, i%hours
	}
	for i, h := range s.Hours {
		t := s.Plan.Case.Times[h].UTC()
		c := &cells[(int(t.Month())-1)*hours+t.Hour()]
		x, bare := &of[i][r.Ladder][r.Rung], &of[i][r.Ladder][0]
		c.Hours++
		income := x.Paid[s.Rule].Net()
		held := s.Plan.held(x)
		if held > leastMW && income > leastPay {
			c.Paid++
		}
		c.MeanMW += held
		c.MeanIncome += income
		c.MeanSaving += bare.Cost - x.Cost
	}
	for i := range cells {
		if n := float64(cells[i].Hours); n > 0 {
			cells[i].MeanMW /= n
			cells[i].MeanIncome /= n
			cells[i].MeanSaving /= n
		}
	}
	return cells
}
