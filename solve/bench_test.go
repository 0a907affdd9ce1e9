package solve

import (
	"context"
	"fmt"
	"path/filepath"
	"runtime"
	"slices"
	"testing"
	"time"

	"evenkeel/fleet"
	"evenkeel/fleet/invent"
)

// invented is an invented system of a year of hours.
func invented(b *testing.B, machines int) *fleet.Case {
	b.Helper()
	dir := filepath.Join(b.TempDir(), "case")
	if err := invent.Write(dir, invent.Options{Machines: machines, Seed: 1}); err != nil {
		b.Fatal(err)
	}
	c, findings := fleet.Read(filepath.Join(dir, "case.yaml"))
	if c == nil {
		b.Fatal(findings)
	}
	return c
}

var sizes = []int{30, 100, 300}

func median(x []float64) float64 {
	slices.Sort(x)
	return x[len(x)/2]
}

// A sample of the year's hours, one after the other on one core: mean, median, slowest.
func BenchmarkHour(b *testing.B) {
	for _, machines := range sizes {
		b.Run(fmt.Sprintf("machines=%d", machines), func(b *testing.B) {
			c := invented(b, machines)
			s := New(c, Options{})
			var ms []float64
			for i := 0; b.Loop(); i++ {
				h := c.Hour(i*97%c.Hours(), fleet.HourOptions{})
				started := time.Now()
				if _, err := s.Hour(context.Background(), h); err != nil {
					b.Fatal(err)
				}
				ms = append(ms, time.Since(started).Seconds()*1e3)
			}
			b.ReportMetric(median(ms), "median_ms")
			b.ReportMetric(ms[len(ms)-1], "slowest_ms")
		})
	}
}

// The whole year over all cores, and the memory the program has taken by its end.
func BenchmarkYear(b *testing.B) {
	for _, machines := range sizes {
		b.Run(fmt.Sprintf("machines=%d", machines), func(b *testing.B) {
			c := invented(b, machines)
			for b.Loop() {
				y := NewYear(0, c.Hours(), false)
				if err := y.Run(context.Background(), c, Options{}, runtime.NumCPU(), func() {}); err != nil {
					b.Fatal(err)
				}
				largest := 0.0
				for i := range y.Hours {
					largest = max(largest, y.Hours[i].Gap)
				}
				b.ReportMetric(1e2*largest, "largest_gap_%")
			}
			var m runtime.MemStats
			runtime.ReadMemStats(&m)
			b.ReportMetric(float64(m.Sys)/1e6, "taken_MB")
		})
	}
}

// The same hours at the same gap by us and by cbc. Ours is everything from the hour to
// its replayed mix; cbc's is its own count from the model read to the solution, so that
// neither its start nor its reading is held against it.
func BenchmarkAgainstCBC(b *testing.B) {
	cbc := cbcPath(b)
	for _, machines := range sizes {
		b.Run(fmt.Sprintf("machines=%d", machines), func(b *testing.B) {
			c := invented(b, machines)
			s := New(c, Options{})
			dir := b.TempDir()
			var ours, theirs, ratio []float64
			b.ResetTimer()
			for range b.N {
				for i := range 40 {
					h := c.Hour(i*219, fleet.HourOptions{})
					started := time.Now()
					out, err := s.Hour(context.Background(), h)
					if err != nil {
						b.Fatal(err)
					}
					took := time.Since(started).Seconds()
					a := runCBC(b, cbc, writeModel(b, s, h, dir), DefaultGap)
					if a.bound > out.Cost*(1+2e-6) || out.Bound > a.cost*(1+2e-6) {
						b.Errorf("hour %d: ours %.4f to %.4f, cbc %.4f to %.4f", h.Index, out.Bound, out.Cost, a.bound, a.cost)
					}
					ours = append(ours, 1e3*took)
					theirs = append(theirs, 1e3*a.solving.Seconds())
					ratio = append(ratio, a.solving.Seconds()/took)
				}
			}
			b.ReportMetric(median(ours), "ours_median_ms")
			b.ReportMetric(ours[len(ours)-1], "ours_slowest_ms")
			b.ReportMetric(median(theirs), "cbc_median_ms")
			b.ReportMetric(theirs[len(theirs)-1], "cbc_slowest_ms")
			b.ReportMetric(median(ratio), "times_median")
			b.ReportMetric(ratio[0], "times_least")
		})
	}
}
