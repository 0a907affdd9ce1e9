package report

import (
	"fmt"
	"time"
)

// window finds the shortest stretch of a circle of counts that holds at least half of
// all; of stretches of that length the one with the highest sum, then the earliest.
func window(counts []int) (start, length int) {
	total := 0
	for _, n := range counts {
		total += n
	}
	for length = 1; length < len(counts); length++ {
		best := -1
		for s := range counts {
			sum := 0
			for i := range length {
				sum += counts[(s+i)%len(counts)]
			}
			if 2*sum >= total && sum > best {
				best, start = sum, s
			}
		}
		if best >= 0 {
			return start, length
		}
	}
	return 0, len(counts)
}

// hourWindow says in which hours of the day half of the counted hours lie. A stretch
// of ten hours or more says nothing: evenly spread counts need twelve.
func hourWindow(byHour [24]int) string {
	start, n := window(byHour[:])
	if n >= 10 {
		return "any hour"
	}
	return fmt.Sprintf("%02d-%02d h", start, (start+n-1)%24+1)
}

// monthWindow is hourWindow for months; evenly spread counts need six.
func monthWindow(byMonth [12]int) string {
	start, n := window(byMonth[:])
	if n >= 5 {
		return "any time"
	}
	first, last := time.Month(start+1), time.Month((start+n-1)%12+1)
	if n == 1 {
		return first.String()[:3]
	}
	return first.String()[:3] + "-" + last.String()[:3]
}
