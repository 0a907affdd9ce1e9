package solve

import (
	"bufio"
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	"evenkeel/fleet"
)

// cbcPath finds coinor-cbc (Debian package coinor-cbc), a general MILP solver. Where it
// isn't installed the caller is skipped, unless EVENKEEL_REQUIRE_CBC is set.
func cbcPath(t testing.TB) string {
	path, err := exec.LookPath("cbc")
	if err != nil {
		if os.Getenv("EVENKEEL_REQUIRE_CBC") != "" {
			t.Fatal("EVENKEEL_REQUIRE_CBC is set and cbc is not installed")
		}
		t.Skip("cbc is not installed (Debian package coinor-cbc): not compared with it")
	}
	return path
}

// cbcAnswer is what cbc makes of a model.
type cbcAnswer struct {
	cost, bound float64
	solving     time.Duration // its own count, to 10 ms
}

// runCBC solves an MPS file to a relative gap.
func runCBC(t testing.TB, cbc, mps string, gap float64) cbcAnswer {
	t.Helper()
	out, err := exec.Command(cbc, mps, "ratio", fmt.Sprint(gap), "sec", "300", "solve").CombinedOutput()
	a := cbcAnswer{cost: math.NaN(), bound: math.NaN()}
	if err != nil {
		t.Fatalf("cbc: %v\n%s", err, out)
	}
	solved := false
	lines := bufio.NewScanner(strings.NewReader(string(out)))
	for lines.Scan() {
		line := lines.Text()
		solved = solved || strings.HasPrefix(line, "Result - Optimal solution found")
		if v, ok := strings.CutPrefix(line, "Objective value:"); ok {
			a.cost, _ = strconv.ParseFloat(strings.TrimSpace(v), 64)
		}
		if v, ok := strings.CutPrefix(line, "Optimal objective "); ok { // of a model without whole numbers
			v, _, _ = strings.Cut(v, " ")
			a.cost, _ = strconv.ParseFloat(v, 64)
			solved = true
		}
		if v, ok := strings.CutPrefix(line, "Time (Wallclock seconds):"); ok {
			seconds, _ := strconv.ParseFloat(strings.TrimSpace(v), 64)
			a.solving = time.Duration(seconds * float64(time.Second))
		}
		if v, ok := strings.CutPrefix(line, "Lower bound:"); ok {
			a.bound, _ = strconv.ParseFloat(strings.TrimSpace(v), 64)
		}
	}
	if !solved || math.IsNaN(a.cost) {
		t.Fatalf("cbc found no optimum:\n%s", out)
	}
	if math.IsNaN(a.bound) { // printed only where a gap is left
		a.bound = a.cost
	}
	return a
}

// writeModel writes the MPS model of an hour into a folder of the test.
func writeModel(t testing.TB, s *Solver, h *fleet.Hour, dir string) string {
	t.Helper()
	path := filepath.Join(dir, "hour.mps")
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := s.Model(context.Background(), h, f); err != nil {
		t.Fatal(err)
	}
	return path
}

// Source of the reference: coinor-cbc, a general-purpose MILP solver, on the hour's whole
// problem written out unit by unit. The model shares no operating points with our columns,
// so this checks those, the rows and the search.
func TestAgainstCBC(t *testing.T) {
	cbc := cbcPath(t)
	hours := 200
	if testing.Short() {
		hours = 20
	}
	for part := range 2 {
		t.Run(fmt.Sprint("part", part), func(t *testing.T) {
			t.Parallel()
			dir := t.TempDir()
			for seed := part; seed < hours; seed += 2 {
				rng := rand.New(rand.NewPCG(uint64(seed), 21))
				c, h := randomHour(rng, 10+rng.IntN(31))
				if seed%3 == 0 { // what a third of them must have online besides
					h.LeastInertiaMWs = (2 + 10*rng.Float64()) * h.DemandMW
				}
				gap := DefaultGap
				if seed%4 < 2 { // half of the hours to optimality
					gap = 1e-7
				}
				s := New(c, Options{Gap: gap})
				ours, err := s.Hour(context.Background(), h)
				if err != nil {
					t.Fatal(err)
				}
				theirs := runCBC(t, cbc, writeModel(t, s, h, dir), gap)
				// Rows hold to roundingShare of a loss, cbc's to 1e-7 MW and its whole numbers to 1e-6.
				slack := 2e-6 * (1 + math.Abs(ours.Cost))
				if ours.Bound > theirs.cost+slack {
					t.Errorf("seed %d: bound %.6f above cbc's cost %.6f", seed, ours.Bound, theirs.cost)
				}
				if theirs.bound > ours.Cost+slack {
					t.Errorf("seed %d: cbc's bound %.6f above our cost %.6f", seed, theirs.bound, ours.Cost)
				}
			}
		})
	}
}
