package study

import (
	"bufio"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"
)

// ReadRecord reads a recorded frequency trace: two columns, time and Hz, separated by commas,
// semicolons, tabs or blanks; a header or none. Times are seconds or time stamps. Cells that
// are no number are dropped and counted; a file in which most are is refused.
func ReadRecord(r io.Reader, name string) (rec *Record, dropped int, err error) {
	rec = &Record{}
	lines := bufio.NewScanner(r)
	lines.Buffer(nil, 1<<20)
	var first time.Time
	headed := false
	for n := 1; lines.Scan(); n++ {
		text := strings.TrimSpace(strings.TrimPrefix(lines.Text(), "\uFEFF"))
		if text == "" || strings.HasPrefix(text, "#") {
			continue
		}
		fields := split(text)
		if len(fields) < 2 {
			return nil, 0, fmt.Errorf("%s:%d: found %q, want two columns: time and Hz", name, n, clipText(text))
		}
		s, stamp, okTime := readTime(fields[0], first)
		if okTime && first.IsZero() && !stamp.IsZero() {
			first, s = stamp, 0
		}
		hz, errHz := strconv.ParseFloat(strings.Replace(fields[1], ",", ".", 1), 64)
		if !okTime || errHz != nil || math.IsNaN(hz) || math.IsInf(hz, 0) {
			if headed || len(rec.S) > 0 { // the first line may be a header
				dropped++
			}
			headed = true
			continue
		}
		if hz < 0 || hz > 1000 {
			return nil, 0, fmt.Errorf("%s:%d: found %g Hz, want a frequency", name, n, hz)
		}
		rec.S, rec.Hz = append(rec.S, s), append(rec.Hz, hz)
	}
	if err := lines.Err(); err != nil {
		return nil, 0, fmt.Errorf("%s: %w", name, err)
	}
	if len(rec.S) == 0 || dropped > len(rec.S) {
		return nil, dropped, fmt.Errorf("%s: %d of %d lines are no time and frequency, want columns of seconds (or time stamps) and Hz", name, dropped, dropped+len(rec.S))
	}
	return rec, dropped, nil
}

func split(text string) []string {
	if strings.Contains(text, `"`) { // quoted, perhaps with decimal commas inside
		rows := csv.NewReader(strings.NewReader(text))
		rows.TrimLeadingSpace = true
		if strings.Contains(text, ";") {
			rows.Comma = ';'
		}
		if parts, err := rows.Read(); err == nil {
			return parts
		}
	}
	for _, sep := range []string{";", "\t", ","} {
		if strings.Contains(text, sep) {
			parts := strings.Split(text, sep)
			for i := range parts {
				parts[i] = strings.Trim(strings.TrimSpace(parts[i]), `"`)
			}
			return parts
		}
	}
	return strings.Fields(text)
}

// readTime reads seconds, or a time stamp counted from the first one.
func readTime(text string, first time.Time) (s float64, stamp time.Time, ok bool) {
	if x, err := strconv.ParseFloat(strings.Replace(text, ",", ".", 1), 64); err == nil && !math.IsNaN(x) && !math.IsInf(x, 0) {
		return x, time.Time{}, true
	}
	for _, form := range []string{time.RFC3339Nano, "2006-01-02T15:04:05.999999999", "2006-01-02 15:04:05.999999999", "2006-01-02 15:04:05.999999999Z07:00"} {
		if at, err := time.Parse(form, text); err == nil {
			return at.Sub(first).Seconds(), at, true
		}
	}
	return 0, time.Time{}, false
}

func clipText(s string) string {
	if len(s) > 40 {
		return s[:40] + "…"
	}
	return s
}
