package report

import (
	"bytes"
	"flag"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	"evenkeel/fleet"
	"evenkeel/solve"
)

var update = flag.Bool("update", false, "write the golden files anew")

// smallRun is a winter morning and a spring noon of the invented year: hours in which
// different limits bind and some in which one cannot be met.
func smallRun() (c *fleet.Case, hours, without []solve.Hour) {
	c = synthCase(25, time.Date(2031, 1, 1, 0, 0, 0, 0, time.UTC), 8760)
	pick := func(kept bool) []solve.Hour {
		return append(synthHours(c, 412, 416, kept), synthHours(c, 2958, 2964, kept)...)
	}
	return c, pick(true), pick(false)
}

func TestGolden(t *testing.T) {
	c, hours, without := smallRun()
	o := Options{Gap: 0.001, StartSpreadH: 8}
	short := 0
	for i := range hours {
		if hours[i].Status == solve.Short {
			short++
		}
	}
	if short == 0 || short == len(hours) {
		t.Fatalf("%d of %d hours are short; the golden run should show both", short, len(hours))
	}
	for _, g := range []struct {
		name string
		fill func(io.Writer) error
	}{
		{"hours.csv", func(w io.Writer) error { return WriteHours(w, c, hours) }},
		{"schedule.csv", func(w io.Writer) error { return WriteSchedule(w, c, hours) }},
		{"summary.json", func(w io.Writer) error { return WriteSummary(w, c, hours, without, o) }},
		{"summary_alone.json", func(w io.Writer) error { return WriteSummary(w, c, hours[:1], nil, Options{}) }},
		{"terminal.txt", func(w io.Writer) error { return Summary(w, c, hours, without, o) }},
		{"terminal_alone.txt", func(w io.Writer) error { return Summary(w, c, hours[:1], nil, Options{}) }},
		{"terminal_without_limits.txt", func(w io.Writer) error {
			return Summary(w, c, without, nil, Options{WithoutLimits: true})
		}},
	} {
		t.Run(g.name, func(t *testing.T) {
			var got bytes.Buffer
			if err := g.fill(&got); err != nil {
				t.Fatal(err)
			}
			path := filepath.Join("testdata", g.name)
			if *update {
				if err := os.WriteFile(path, got.Bytes(), 0o644); err != nil {
					t.Fatal(err)
				}
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if !bytes.Equal(got.Bytes(), want) {
				t.Errorf("%s differs from the golden file; if that is meant, run the test with -update\n%s",
					g.name, firstDifference(got.String(), string(want)))
			}
		})
	}
}

func firstDifference(got, want string) string {
	g, w := strings.Split(got, "\n"), strings.Split(want, "\n")
	for i := range g {
		if i >= len(w) || g[i] != w[i] {
			return "got:  " + g[i] + "\nwant: " + strings.Join(w[min(i, len(w)):min(i+1, len(w))], "")
		}
	}
	return "the golden file goes on after the last line"
}

// No line is wider than a mail or a terminal, whatever the names and the amounts.
func TestTerminalWidth(t *testing.T) {
	for _, n := range []int{9, 40} {
		c, hours, without := synthYear(n, 2032)
		c.Name = "An island of " + strings.Repeat("long names and ", 9) + strings.Repeat("x", 100)
		c.Currency = "thousand crowns"
		for r := range c.Resources {
			c.Resources[r].Name += strings.Repeat(" und so weiter", r%7)
		}
		for s := range c.Shapes {
			c.Shapes[s].Name += strings.Repeat(" and so on", 4*s)
		}
		for i := range hours {
			hours[i].Cost *= 1e4
			hours[i].Limits[0].Price *= 1e4
			hours[i].WorstLoss += " und so weiter und so weiter"
		}
		var out bytes.Buffer
		if err := Summary(&out, c, hours, without, Options{Gap: 0.0001}); err != nil {
			t.Fatal(err)
		}
		for _, l := range strings.Split(out.String(), "\n") {
			if utf8.RuneCountInString(l) > 80 {
				t.Errorf("%d characters: %s", utf8.RuneCountInString(l), l)
			}
			if strings.HasSuffix(l, " ") {
				t.Errorf("a space ends the line %q", l)
			}
		}
		if strings.Count(out.String(), "A planning aid") != 1 {
			t.Error("the caution does not stand there once")
		}
	}
}
