package fleet

import "testing"

// The demo must be read without a single finding.
func TestSkerraIsClean(t *testing.T) {
	c, found := Read("../testdata/skerra/case.yaml")
	for _, f := range found {
		t.Error(f)
	}
	if c == nil || c.Hours() != 8760 {
		t.Fatal("no year of hours")
	}
}
