package report

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestFixed(t *testing.T) {
	for _, k := range []struct {
		v    float64
		dec  int
		want string
	}{
		{-0.0004, 3, "0.000"}, {-0.0006, 3, "-0.001"}, {math.Copysign(0, -1), 2, "0.00"}, {-0.4, 0, "0"},
		{1234.5678, 2, "1234.57"}, {math.Inf(1), 2, "inf"}, {math.Inf(-1), 2, "-inf"}, {math.NaN(), 1, "nan"},
		{1e21, 0, "1000000000000000000000"},
	} {
		if got := fixed(k.v, k.dec); got != k.want {
			t.Errorf("fixed(%v, %d) = %s, want %s", k.v, k.dec, got, k.want)
		}
	}
}

func TestGrouped(t *testing.T) {
	for v, want := range map[float64]string{
		0: "0", 999: "999", 1000: "1,000", -1234567: "-1,234,567", 12345: "12,345", math.Inf(-1): "-inf",
	} {
		if got := grouped(v, 0); got != want {
			t.Errorf("grouped(%v) = %s, want %s", v, got, want)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		v, dec := rapid.Float64Range(-1e15, 1e15).Draw(t, "v"), rapid.IntRange(0, 4).Draw(t, "dec")
		if got := strings.ReplaceAll(grouped(v, dec), ",", ""); got != fixed(v, dec) {
			t.Fatalf("grouped(%v) without commas is %s", v, got)
		}
	})
}

func TestWrapKeepsTheWords(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		words := rapid.SliceOf(rapid.StringMatching(`[a-zä·]{1,12}`)).Draw(t, "words")
		lines := wrap(strings.Join(words, " "), 20)
		if got := strings.Join(lines, " "); got != strings.Join(words, " ") {
			t.Fatalf("%q became %q", words, lines)
		}
		for _, l := range lines {
			if len([]rune(l)) > 20 {
				t.Fatalf("%q is too long", l)
			}
		}
	})
}

func TestWindows(t *testing.T) {
	hours := func(at map[int]int) (c [24]int) {
		for h, n := range at {
			c[h] = n
		}
		return c
	}
	even := [24]int{}
	for i := range even {
		even[i] = 7
	}
	for want, c := range map[string][24]int{
		"03-04 h":  hours(map[int]int{3: 10}),
		"23-01 h":  hours(map[int]int{23: 5, 0: 5, 12: 5}),
		"00-03 h":  hours(map[int]int{0: 3, 1: 1, 2: 3, 12: 4, 20: 2}),
		"any hour": even,
	} {
		if got := hourWindow(c); got != want {
			t.Errorf("half of %v lies in %s, want %s", c, got, want)
		}
	}
	for want, c := range map[string][12]int{
		"Jul":      {6: 9, 7: 2},
		"Dec-Jan":  {0: 5, 11: 5, 5: 8},
		"any time": {1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1},
	} {
		if got := monthWindow(c); got != want {
			t.Errorf("half of %v lies in %s, want %s", c, got, want)
		}
	}
}

// No shorter stretch holds half, and the stretch found does.
func TestWindowIsShortest(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := rapid.SliceOfN(rapid.IntRange(0, 9), 1, 24).Draw(t, "counts")
		total := 0
		for _, n := range c {
			total += n
		}
		sum := func(start, length int) int {
			s := 0
			for i := range length {
				s += c[(start+i)%len(c)]
			}
			return s
		}
		start, length := window(c)
		if 2*sum(start, length) < total {
			t.Fatalf("%d from %d of %v holds less than half", length, start, c)
		}
		for s := range c {
			if length > 1 && 2*sum(s, length-1) >= total {
				t.Fatalf("%d from %d of %v holds half too", length-1, s, c)
			}
		}
	})
}

func TestTicks(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lo := rapid.Float64Range(-1e5, 0).Draw(t, "lo")
		hi := rapid.Float64Range(1e-3, 1e6).Draw(t, "hi")
		ticks := niceTicks(5).Ticks(lo, hi)
		if len(ticks) < 2 || len(ticks) > 7 {
			t.Fatalf("%d ticks between %v and %v", len(ticks), lo, hi)
		}
		for _, k := range ticks {
			v, err := strconv.ParseFloat(strings.ReplaceAll(k.Label, ",", ""), 64)
			if err != nil || math.Abs(v-k.Value) > 1e-9*(hi-lo) || v < lo-1e-9*(hi-lo) || v > hi+1e-9*(hi-lo) {
				t.Fatalf("tick %v says %s between %v and %v", k.Value, k.Label, lo, hi)
			}
		}
		if up := roundUp(hi); up < hi || up > 1.25*hi {
			t.Fatalf("an axis up to %v for %v", up, hi)
		}
	})
}
