package fleet

import (
	"fmt"
	"time"
)

const hour = time.Hour

const timeForm = "a time such as 2026-01-31 13:00 (UTC) or 2026-01-31T13:00:00+01:00"

// parseTime reads RFC 3339 or a time without an offset, which counts as UTC; local
// tells which.
func parseTime(s string) (at time.Time, local, ok bool) {
	if len(s) > 40 {
		return time.Time{}, false, false
	}
	for _, form := range []string{"2006-01-02 15:04", "2006-01-02 15:04:05", "2006-01-02T15:04", "2006-01-02T15:04:05"} {
		if len(s) == len(form) {
			if at, err := time.Parse(form, s); err == nil {
				return at, true, true
			}
		}
	}
	for _, form := range []string{time.RFC3339, "2006-01-02T15:04Z07:00", "2006-01-02 15:04Z07:00", "2006-01-02 15:04:05Z07:00"} {
		if at, err := time.Parse(form, s); err == nil {
			return at.UTC(), false, true
		}
	}
	return time.Time{}, false, false
}

func show(t time.Time) string { return t.Format("2006-01-02 15:04") }

// step is one kind of fault between two neighbouring rows.
type step struct {
	repeat
	found, want string
}

// contiguous reports rows that are not one hour after the row before, one finding a
// kind, and tells whether there were none.
func (r *reader) contiguous(t *table) bool {
	var gap, again, back, other step
	var spring, autumn step
	for i := 1; i < len(t.times); i++ {
		a, b := t.times[i-1], t.times[i]
		if a.IsZero() || b.IsZero() {
			continue // reported as no time
		}
		d := b.Sub(a)
		var s *step
		want := show(a.Add(time.Hour))
		switch {
		case d == time.Hour:
			continue
		case d == 2*time.Hour && t.local && clocksForward(b):
			s = &spring
			want += "; this looks like daylight saving: times must be in UTC or carry an offset (" + b.Format("2006-01-02T15:04") + "+02:00)"
		case d == 0 && t.local && clocksBack(b):
			s = &autumn
			want += "; this looks like daylight saving: times must be in UTC or carry an offset (" + b.Format("2006-01-02T15:04") + "+01:00)"
		case d == 0:
			s = &again
		case d < 0:
			s = &back
			want += " (rows in order of time)"
		case d%time.Hour == 0:
			s = &gap
		default:
			s = &other
			want += " (one row an hour)"
		}
		if s.add(t.lines[i]) {
			s.found, s.want = show(b)+" after "+show(a), want
			switch s {
			case &again, &autumn:
				s.found = show(b) + " a second time"
			case &gap, &spring:
				s.found += fmt.Sprintf(" (%d skipped)", int(d/time.Hour)-1)
			}
		}
	}
	sound := true
	for _, s := range []*step{&spring, &autumn, &gap, &again, &back, &other} {
		if s.count > 0 {
			r.faultIn(t.name, s.line, "time", s.found+more(s.count, s.last), s.want)
			sound = false
		}
	}
	return sound
}

// clocksForward tells whether local clocks somewhere jump forward to t: a Sunday before
// four in the morning, in March or April in the north, in September or October in the
// south.
func clocksForward(t time.Time) bool {
	switch t.Month() {
	case time.March, time.April, time.September, time.October:
		return t.Weekday() == time.Sunday && t.Hour() <= 4
	}
	return false
}

// clocksBack tells whether local clocks somewhere show t twice: a Sunday before four in
// the morning, in October or November in the north, in March or April in the south.
func clocksBack(t time.Time) bool {
	switch t.Month() {
	case time.October, time.November, time.March, time.April:
		return t.Weekday() == time.Sunday && t.Hour() <= 3
	}
	return false
}

// tick takes the hours of the case from its first series, or compares another file with
// them, once a file. It tells whether the series of t can be used.
func (r *reader) tick(t *table) bool {
	if !t.ticked {
		t.ticked, t.fits = true, r.compare(t)
	}
	return t.fits
}

func (r *reader) compare(t *table) bool {
	if !t.sound {
		r.clockLost = r.clockLost || r.times == nil
		return false
	}
	if r.times == nil {
		if r.clockLost {
			return false
		}
		r.times, r.clock = t.times, t.name
		return true
	}
	last := len(t.lines) - 1
	if !t.times[0].Equal(r.times[0]) {
		r.faultIn(t.name, t.lines[0], "time", show(t.times[0])+" in the first row", fmt.Sprintf("%s as in %s", show(r.times[0]), r.clock))
		return false
	}
	if len(t.times) != len(r.times) {
		r.faultIn(t.name, t.lines[last], "time", fmt.Sprintf("%d hours, the last %s", len(t.times), show(t.times[last])),
			fmt.Sprintf("%d hours, the last %s, as in %s", len(r.times), show(r.times[len(r.times)-1]), r.clock))
		return false
	}
	return true
}
