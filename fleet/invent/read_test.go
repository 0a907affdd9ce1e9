package invent

import (
	"fmt"
	"path/filepath"
	"testing"

	"evenkeel/fleet"
)

// The reader takes what is written without a word.
func TestReaderAccepts(t *testing.T) {
	for _, machines := range []int{MinMachines, 10, 30, 100, 300} {
		for seed := uint64(1); seed <= 4; seed++ {
			t.Run(fmt.Sprintf("machines=%d/seed=%d", machines, seed), func(t *testing.T) {
				// Past the winter: heat-led plant goes out of service in that time.
				o := Options{Machines: machines, Seed: seed, Hours: 168 * 20, Name: `Isle: "A" #1`}
				if machines > 30 {
					o.Hours = 24
				}
				dir := filepath.Join(t.TempDir(), "case")
				if err := Write(dir, o); err != nil {
					t.Fatal(err)
				}
				c, findings := fleet.Read(filepath.Join(dir, "case.yaml"))
				if len(findings) > 0 {
					t.Fatalf("findings:\n%s", findings)
				}
				if c.Hours() != o.Hours || c.Name != o.Name {
					t.Errorf("%d hours of %q, want %d of %q", c.Hours(), c.Name, o.Hours, o.Name)
				}
				units := 0
				for _, r := range c.Resources {
					if r.Kind.Machine() {
						units += r.Count
					}
				}
				if units != machines {
					t.Errorf("%d synchronised units, want %d", units, machines)
				}
			})
		}
	}
}
