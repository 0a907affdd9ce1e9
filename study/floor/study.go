package floor

import (
	"context"
	"math"
	"slices"
	"sync"

	"evenkeel/fleet"
	"evenkeel/study/ranges"
	"evenkeel/study/work"
)

// Item is one piece of the study's work: an hour, a row of a chart, or an hour under the rules.
type Item struct {
	Hour  *Hour
	Cells []Cell
	Kept  []Kept
}

// Study is a study under way. Its items are first the hours, then the rows of the charts, then the
// hours once more, under the rules. Those after the first wait for them, as what they do follows
// from all hours.
type Study struct {
	c   *fleet.Case
	ask *Ask
	all *solvers

	once   sync.Once
	mutex  sync.Mutex
	hours  []*Hour
	left   int
	ready  chan struct{}
	charts []Chart
	rules  []Rule
	plants []plant
}

// New prepares a study.
func New(c *fleet.Case, ask *Ask) *Study {
	s := &Study{c: c, ask: ask, all: newSolvers(c, ask.Options), hours: make([]*Hour, len(ask.Hours)), left: len(ask.Hours), ready: make(chan struct{})}
	s.plants = plants(c, s.lookedAt())
	return s
}

// losses is how many losses a chart has.
func (s *Study) losses() int {
	if s.ask.Loss.N > 0 {
		return s.ask.Loss.N
	}
	return DefaultCells
}

// Items is how many pieces of work there are.
func (s *Study) Items() int {
	return 2*len(s.hours) + max(len(s.ask.Axes), 1)*s.losses()
}

// Start gives a worker what does one item; items are those of the run, as far as they are done.
func (s *Study) Start(items *work.Items[Item]) func() func(context.Context, int) (Item, error) {
	return func() func(context.Context, int) (Item, error) {
		s.once.Do(func() {
			for i := range s.hours {
				if items.Done[i] {
					s.hours[i], s.left = items.Out[i].Hour, s.left-1
				}
			}
			if s.left == 0 {
				s.settle()
			}
		})
		n := newNeeds(s.c)
		var chart *charter
		hours := len(s.hours)
		rows := s.losses() * max(len(s.ask.Axes), 1)
		return func(ctx context.Context, i int) (Item, error) {
			if i < hours {
				h, err := s.all.hour(ctx, n, s.ask.Hours[i])
				if err != nil {
					return Item{}, err
				}
				s.put(i, h)
				return Item{Hour: h}, nil
			}
			select {
			case <-s.ready:
			case <-ctx.Done():
				return Item{}, ctx.Err()
			}
			if i < hours+rows {
				if chart == nil {
					chart = newCharter(s.c, s.all.secure, s.plants)
				}
				i -= hours
				return Item{Cells: chart.row(&s.charts[i/s.losses()], i%s.losses())}, ctx.Err()
			}
			kept, err := s.keep(ctx, i-hours-rows)
			return Item{Kept: kept}, err
		}
	}
}

// put keeps an hour for those that wait for all.
func (s *Study) put(i int, h *Hour) {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	s.hours[i] = h
	if s.left--; s.left == 0 {
		s.settle()
	}
}

// settle decides what hangs on all hours: the ranges of the charts, and the rules.
func (s *Study) settle() {
	axes := s.ask.Axes
	if len(axes) == 0 {
		axes = []Axis{{Shape: s.mostHeld()}}
	}
	loss := s.ask.Loss
	if loss.N == 0 {
		step := niceStep(1.1 * s.largestMW() / DefaultCells)
		loss = ranges.Range{From: step, To: step * DefaultCells, N: DefaultCells}
	}
	load := s.ask.LoadMW
	if math.IsNaN(load) {
		load = math.Inf(1) // the least load damps least: what holds with it holds with more
		for _, h := range s.lookedAt() {
			load = min(load, s.c.Load.DemandMW.At(h))
		}
	}
	others := slices.Clone(s.ask.HeldMW)
	for i, mw := range others {
		if math.IsNaN(mw) {
			others[i] = s.usualMW(i)
		}
	}
	for _, a := range axes {
		held := a.Held
		if held.N == 0 {
			top := 0.0
			for _, h := range s.hours {
				top = max(top, h.Held[a.Shape])
			}
			if len(s.hours) == 0 || top < 1 {
				top = s.plants[a.Shape].capMW
			}
			held = ranges.Range{To: niceStep(max(top, 1)/(DefaultCells-1)) * (DefaultCells - 1), N: DefaultCells}
		}
		s.charts = append(s.charts, Chart{Shape: a.Shape, Loss: loss, Held: held, Others: others, LoadMW: load})
	}
	if len(s.hours) > 0 {
		s.rules = s.makeRules()
	}
	close(s.ready)
}

// niceStep rounds up to a step that reads well.
func niceStep(mw float64) float64 {
	p := math.Pow(10, math.Floor(math.Log10(mw)))
	for _, m := range []float64{1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 8} {
		if mw <= m*p*(1+1e-9) {
			return m * p
		}
	}
	return 10 * p
}

// mostHeld is the shape of which most is held over the hours, or could be.
func (s *Study) mostHeld() int {
	best, most := 0, math.Inf(-1)
	for i := range s.c.Shapes {
		mw := s.plants[i].capMW
		if len(s.hours) > 0 {
			mw = 0
			for _, h := range s.hours {
				mw += h.Held[i]
			}
		}
		if mw > most {
			best, most = i, mw
		}
	}
	return best
}

// usualMW is the median of what is held of a shape in the tenth of the hours with the largest
// losses: the mixes that floors are asked of. It is nothing without hours.
func (s *Study) usualMW(shape int) float64 {
	var lost, held []float64
	for _, h := range s.hours {
		lost = append(lost, h.Mix.LargestMW)
	}
	from := ranges.Quantile(lost, 0.9)
	for _, h := range s.hours {
		if h.Mix.LargestMW >= from {
			held = append(held, h.Held[shape])
		}
	}
	return ranges.Quantile(held, 0.5)
}

// largestMW is the largest loss of infeed of the hours' mixes; without hours the largest there can be.
func (s *Study) largestMW() float64 {
	most := 0.0
	for _, h := range s.hours {
		most = max(most, h.Mix.LargestMW)
	}
	if len(s.hours) > 0 && most > 0 {
		return most
	}
	for i := range s.c.Times {
		h := s.c.Hour(i, fleet.HourOptions{})
		for _, l := range h.Losses {
			mw := l.FixedMW
			for _, m := range l.Members {
				n := 1
				if !l.Single {
					n = h.Units[m].Count
				}
				mw += float64(min(n, h.Units[m].Count)) * h.Units[m].MaxMW
			}
			if !l.Over {
				most = max(most, mw)
			}
		}
	}
	return max(most, 1)
}

// lookedAt are the hours asked for; for charts alone all of the case, whose means and extremes count.
func (s *Study) lookedAt() []int {
	if len(s.ask.Hours) > 0 {
		return s.ask.Hours
	}
	list := make([]int, s.c.Hours())
	for i := range list {
		list[i] = i
	}
	return list
}
