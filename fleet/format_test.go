package fleet

import (
	"os"
	"slices"
	"strings"
	"testing"
)

// FORMAT.md names every key there is.
func TestFormatListsEveryKey(t *testing.T) {
	raw, err := os.ReadFile("FORMAT.md")
	if err != nil {
		t.Fatal(err)
	}
	words := strings.FieldsFunc(string(raw), func(r rune) bool { return r != '_' && (r < 'a' || r > 'z') && (r < '0' || r > '9') })
	for _, keys := range [][]string{wholeKeys, frequencyKeys, rocofKeys, nadirKeys, steadyKeys, priceKeys, loadKeys, hourKeys, groupKeys, lossKeys,
		machineKeys, converterKeys, responseKeys, syntheticKeys, stepKeys, timingKeys, productKeys, productStepKeys, projectKeys, projectSyntheticKeys, moneyKeys} {
		for _, k := range keys {
			if !slices.Contains(words, k) {
				t.Errorf("FORMAT.md does not name %s", k)
			}
		}
	}
}
