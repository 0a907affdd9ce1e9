package fleet

import (
	"slices"
	"strings"
)

func contains(known []string, s string) bool { return slices.Contains(known, s) }

func list(words []string) string { return strings.Join(words, ", ") }

// suggest says what could have been meant: the nearest known word, or all of them.
func suggest(word string, known []string) string {
	if near := nearest(word, known); near != "" {
		return near + "?"
	}
	return "one of " + list(known)
}

// nearest gives the known word that word most likely stands for, or nothing. A word
// that lacks only its unit (inertia for inertia_s) or has another one
// (max_output_gw) counts as near.
func nearest(word string, known []string) string {
	word = strings.ToLower(strings.NewReplacer("-", "_", " ", "_").Replace(word))
	if word == "" || len(word) > maxName {
		return ""
	}
	best, least := "", len(word)/3+1
	for _, k := range known {
		d := distance(word, k)
		if strings.HasPrefix(k, word+"_") || strings.HasPrefix(word, k+"_") {
			d = min(d, 1)
		}
		if d < least {
			best, least = k, d
		}
	}
	return best
}

// distance counts the letters to insert, delete, replace or swap with a neighbour to
// turn a into b.
func distance(a, b string) int {
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last, row = last, row, before
	}
	return last[len(b)]
}
