package ranges

import (
	"slices"
	"testing"
)

func TestParse(t *testing.T) {
	for text, want := range map[string][]float64{"0:40:5": {0, 10, 20, 30, 40}, "3:3:1": {3}, "1:2:1": {2}, "0.1:0.3:3": {0.1, 0.2, 0.3}} {
		r, ok := Parse(text, 5)
		if v := r.Values(); !ok || !slices.Equal(v, want) {
			t.Errorf("%s: %v, %t", text, v, ok)
		}
	}
	for _, text := range []string{"", "1:2", "2:1:3", "1:2:0", "1:2:6", "1:inf:2", "-inf:1:2", "nan:1:2", "a:1:2", "1:2:3:4"} {
		if _, ok := Parse(text, 5); ok {
			t.Errorf("%q is taken", text)
		}
	}
}

func TestQuantile(t *testing.T) {
	v := []float64{5, 1, 4, 2, 3}
	for share, want := range map[float64]float64{0: 1, 0.1: 1, 0.2: 1, 0.5: 3, 0.9: 5, 1: 5} {
		if got := Quantile(v, share); got != want {
			t.Errorf("%g: %g, want %g", share, got, want)
		}
	}
	if Quantile(nil, 0.5) != 0 || v[0] != 5 {
		t.Error("of none it is 0, and the values stay as they are")
	}
}
