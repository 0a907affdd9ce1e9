package fleet

import (
	"fmt"
	"strings"
	"testing"
	"time"
)

// localYear is an hourly series over the change of clocks, in local time without offsets
// (Europe/Berlin) or with them.
func localYear(t *testing.T, from, to time.Time, form string) string {
	zone, err := time.LoadLocation("Europe/Berlin")
	if err != nil {
		t.Skip("no time zones here")
	}
	var b strings.Builder
	b.WriteString("time,demand,river\n")
	for at := from; at.Before(to); at = at.Add(time.Hour) {
		fmt.Fprintf(&b, "%s,100,0.5\n", at.In(zone).Format(form))
	}
	return b.String()
}

// Summer time begins on 30 March 2031 and ends on 26 October 2031 in Central Europe.
func TestDaylightSaving(t *testing.T) {
	spring := time.Date(2031, 3, 30, 0, 0, 0, 0, time.UTC).Add(-6 * time.Hour)
	autumn := time.Date(2031, 10, 26, 0, 0, 0, 0, time.UTC).Add(-6 * time.Hour)
	for _, x := range []struct {
		from time.Time
		want string
	}{
		{spring, "found 2031-03-30 03:00 after 2031-03-30 01:00 (1 skipped), want 2031-03-30 02:00; this looks like daylight saving: times must be in UTC or carry an offset"},
		{autumn, "found 2031-10-26 02:00 a second time, want 2031-10-26 03:00; this looks like daylight saving: times must be in UTC or carry an offset"},
	} {
		_, found := readText(tiny, localYear(t, x.from, x.from.Add(12*time.Hour), "2006-01-02 15:04"))
		if !strings.Contains(found.String(), x.want) {
			t.Errorf("without offsets:\n%s\nwant %s", found, x.want)
		}
		c, found := readText(tiny, localYear(t, x.from, x.from.Add(12*time.Hour), time.RFC3339))
		if len(found) > 0 {
			t.Errorf("with offsets:\n%s", found)
		} else if !c.Times[0].Equal(x.from) || c.Hours() != 12 {
			t.Errorf("%d hours from %s", c.Hours(), c.Times[0])
		}
	}
}

// Files come out of spreadsheets: a byte order mark, carriage returns, blanks, quotes,
// empty lines and a missing last line feed are no faults.
func TestMessyButGood(t *testing.T) {
	messy := "\uFEFF" + `"time", demand ,river` + "\r\n" + ` 2031-03-03 00:00 , 180,"0.5"` + "\r\n\r\n" + `2031-03-03 01:00:00, +1.7e2 ,.6` + "\r\n,,\r\n" + `2031-03-03T02:00Z,165.0,1`
	c, found := readText(tiny, messy)
	if len(found) > 0 {
		t.Fatal(found)
	}
	if got := c.Load.DemandMW.Series; got[0] != 180 || got[1] != 170 || got[2] != 165 {
		t.Errorf("demand %v", got)
	}
}

// Many faults come out at once, the case file's first, each with its place.
func TestAllFaultsAtOnce(t *testing.T) {
	yaml := strings.NewReplacer("inertia_s: 5", "inertia_s: -5", "to_mw: 100", "to_mw: 90", "by_s: 30", "by_s: soon", "kind: link", "kind: rope").Replace(tiny)
	csv := strings.NewReplacer("170", "", "0.6", "6").Replace(tinyCSV)
	_, found := readText(yaml, csv)
	want := []string{
		"case.yaml:6: frequency.steady.by_s: found \"soon\", want a number above 0 and at most 3600",
		"case.yaml:15: machines[Steam].inertia_s: found -5, want a number of at least 0",
		"case.yaml:16: machines[Steam].cost_steps: found steps that end at 90 MW, want steps up to max_output_mw (100)",
		"case.yaml:22: converters[Cable].kind: found \"rope\", want battery, wind, solar, demand, link",
		"load.csv:3: demand: found an empty cell, want a number in every hour",
		"load.csv:3: river: found 6, want a number from 0 to 1 (for machines[River].availability)",
	}
	if got := found.String(); got != strings.Join(want, "\n") {
		t.Errorf("got\n%s\nwant\n%s", got, strings.Join(want, "\n"))
	}
}

func TestHash(t *testing.T) {
	a, _ := readText(tiny, tinyCSV)
	b, _ := readText(tiny, tinyCSV)
	c, _ := readText(tiny+"# a comment\n", tinyCSV)
	d, _ := readText(tiny, strings.Replace(tinyCSV, "180", "181", 1))
	if a.Hash != b.Hash || a.Hash == c.Hash || a.Hash == d.Hash || len(a.Hash) != 64 {
		t.Error(a.Hash, b.Hash, c.Hash, d.Hash)
	}
}
