package report

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf8"

	"evenkeel/fleet"
	"evenkeel/fleet/invent"
	"evenkeel/solve"
	"evenkeel/study/ranges"
	"evenkeel/study/worth"
)

// worthStudy is a study of a few hours of an invented case.
func worthStudy(t *testing.T, product bool) (*worth.Result, *worth.Exchange) {
	t.Helper()
	dir := t.TempDir()
	if err := invent.Write(dir, invent.Options{Machines: 12, Seed: 5, Hours: 200}); err != nil {
		t.Fatal(err)
	}
	c, found := fleet.Read(filepath.Join(dir, "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	plan := worth.Plan{Case: c, Options: solve.Options{Gap: 0.0002}, Hours: []int{2, 50, 99, 150}}
	if product {
		path := filepath.Join(dir, "product.yaml")
		text := "product: A product with quite a long name for a table\nactivation_s: 0.4\ncap_mw: 25\nprice_steps: [{to_mw: 25, per_mw: 1}]\n"
		if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
		if plan.Product, found = fleet.ReadProduct(path, c); plan.Product == nil {
			t.Fatal(found)
		}
		plan.VolumesMW, plan.ActivationsS = ranges.Range{To: 25, N: 3}.Values(), []float64{2}
	}
	s, err := plan.Prepare()
	if err != nil {
		t.Fatal(err)
	}
	x, err := s.Exchange(worth.Asked{})
	if err != nil {
		t.Fatal(err)
	}
	var records []worth.Record
	for i := range plan.Hours {
		r, err := s.Hour(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		records = append(records, r)
	}
	x.Levels(records)
	return s.Tally(records), x
}

// The summary fits a mail, every column is explained, every file can be read.
func TestWorthReport(t *testing.T) {
	explained, err := os.ReadFile("COLUMNS.md")
	if err != nil {
		t.Fatal(err)
	}
	for _, product := range []bool{false, true} {
		r, x := worthStudy(t, product)
		for _, o := range []WorthOptions{{Gap: 0.0002}, {Gap: 0.0002, Sample: true, AtGiven: true, At: 5000}, {AtGiven: true, At: 1e9}} {
			var out bytes.Buffer
			if err := WorthText(&out, r, x, o); err != nil {
				t.Fatal(err)
			}
			for line := range strings.Lines(out.String()) {
				if utf8.RuneCountInString(strings.TrimRight(line, "\n")) > columns {
					t.Errorf("more than %d columns: %s", columns, line)
				}
			}
			if strings.Contains(strings.ToLower(out.String()), "nan") {
				t.Errorf("an undefined number in\n%s", out.String())
			}
		}
		dir := t.TempDir()
		if err := WriteWorth(dir, r, x, WorthOptions{Gap: 0.0002}); err != nil {
			t.Fatal(err)
		}
		files, err := filepath.Glob(filepath.Join(dir, "*.csv"))
		if err != nil || len(files) < 3 {
			t.Fatalf("%d tables, %v", len(files), err)
		}
		for _, path := range files {
			raw, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			table, err := csv.NewReader(bytes.NewReader(raw)).ReadAll()
			if err != nil || len(table) < 2 {
				t.Fatalf("%s: %d rows, %v", path, len(table), err)
			}
			for _, column := range table[0] {
				name, _, _ := strings.Cut(column, ":")
				for _, part := range []string{"marginal_", "hull_"} {
					if rest, ok := strings.CutPrefix(name, part); ok {
						name = "X_" + rest
					}
				}
				for _, part := range []string{"_without", "_with"} {
					name = strings.TrimSuffix(name, part)
				}
				if strings.HasPrefix(name, "first_mw_") {
					name = "first_mw_…"
				}
				if !bytes.Contains(explained, []byte("`"+name)) {
					t.Errorf("%s: COLUMNS.md does not explain %s", filepath.Base(path), name)
				}
			}
		}
		raw, err := os.ReadFile(filepath.Join(dir, Finished))
		if err != nil || !json.Valid(raw) {
			t.Errorf("summary.json: %v", err)
		}
	}
}
