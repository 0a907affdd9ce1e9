package fleet

import (
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

const tinyProduct = `product: Quick
activation_s: 0.6
delay_s: 0.2
hold_s: 20
withdraw_s: 5
cap_mw: load.csv:free
price_steps: [{to_mw: 10, per_mw: 1}, {to_mw: 25, per_mw: 2.5}]
`

const productCSV = "time,demand,river,free\n2031-03-03T00:00:00Z,180,0.5,25\n2031-03-03T01:00:00Z,170,0.6,4\n2031-03-03T02:00:00Z,165,1,18\n"

// tinyWith reads the tiny case and a product for it.
func tinyWith(t *testing.T, caseText, product string) (*Case, *Product, Findings) {
	t.Helper()
	dir := t.TempDir()
	for name, text := range map[string]string{"case.yaml": caseText, "load.csv": productCSV, "product.yaml": product} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	c, found := Read(filepath.Join(dir, "case.yaml"))
	if c == nil {
		t.Fatal(found)
	}
	p, found := ReadProduct(filepath.Join(dir, "product.yaml"), c)
	for i := range found {
		found[i].File = strings.TrimPrefix(found[i].File, dir+string(os.PathSeparator))
	}
	return c, p, found
}

// The volume goes to the steps in order of price, hour by hour within the cap.
func TestProductFillsStepsInOrder(t *testing.T) {
	c, p, found := tinyWith(t, tiny, tinyProduct)
	if len(found) > 0 {
		t.Fatal(found)
	}
	resources, shapes := len(c.Resources), len(c.Shapes)
	for _, volume := range []float64{0, 7, 15, 25} {
		with, err := p.In(c, volume, 0)
		if err != nil {
			t.Fatal(err)
		}
		for h, cap := range []float64{25, 4, 18} {
			hour := with.Hour(h, HourOptions{})
			first, second := hour.Units[resources], hour.Units[resources+1]
			most := math.Min(volume, cap)
			if want := math.Min(most, 10); first.ResponseCapMW != want || first.ResponsePerMW != 1 || first.Shape != shapes {
				t.Errorf("%g MW, hour %d: first step %+v, want %g MW", volume, h, first, want)
			}
			if want := math.Max(most-10, 0); second.ResponseCapMW != want || second.ResponsePerMW != 2.5 || second.Shape != shapes {
				t.Errorf("%g MW, hour %d: second step %+v, want %g MW", volume, h, second, want)
			}
			if most > 0 && first.HeadMW-first.MinMW != first.ResponseCapMW {
				t.Errorf("%g MW, hour %d: room of %g MW", volume, h, first.HeadMW-first.MinMW)
			}
		}
	}
	if len(c.Resources) != resources || len(c.Shapes) != shapes {
		t.Error("the case itself has changed")
	}
	if got := p.Holders(c); !slices.Equal(got, []int{resources, resources + 1}) {
		t.Errorf("held by %v", got)
	}
}

// Two copies do not share what was appended.
func TestProductCopiesStandAlone(t *testing.T) {
	c, p, _ := tinyWith(t, tiny, tinyProduct)
	a, _ := p.In(c, 10, 0)
	b, _ := p.In(c, 25, 3)
	if a.Resources[len(c.Resources)].Response.CapMW.Series[0] != 10 || b.Resources[len(c.Resources)+1].Response.CapMW.Series[0] != 15 {
		t.Error("volumes of one copy show in the other")
	}
	if a.Shapes[len(c.Shapes)].Shape.At(0.6) != 1 || b.Shapes[len(c.Shapes)].Shape.At(0.6) == 1 {
		t.Error("activation times of one copy show in the other")
	}
}

// A tested activation time keeps the delay's share of it; with a level the qualification's fall
// passes it first: 0.4 Hz at 0.45 Hz/s, half of the largest rate (computed).
func TestProductActivation(t *testing.T) {
	c, p, _ := tinyWith(t, tiny, tinyProduct)
	for _, at := range []struct{ asked, delay, out float64 }{{0, 0.2, 0.6}, {0.3, 0.1, 0.3}, {3, 1, 3}} {
		s, err := p.Shape(c, at.asked)
		if err != nil {
			t.Fatal(err)
		}
		if s.Shape.At(at.delay) != 0 || s.Shape.At(at.delay+0.01) <= 0 || s.Shape.At(at.out) != 1 || math.Abs(s.Shape.At((at.delay+at.out)/2)-0.5) > 1e-12 {
			t.Errorf("activation %g s: knots %v", at.asked, s.Shape.Knots())
		}
	}
	_, level, found := tinyWith(t, tiny, tinyProduct+"level_hz: 0.4\n")
	if level == nil {
		t.Fatal(found)
	}
	with, err := level.In(c, 25, 0)
	if err != nil {
		t.Fatal(err)
	}
	m := with.Models[len(with.Models)-1]
	passed := 0.4 / 0.45
	if s := with.Shapes[m.Shape].Shape; m.Shape != len(c.Shapes) || math.Abs(s.FullActivationS()-0.6-passed) > 1e-12 || !with.Shapes[m.Shape].Model {
		t.Errorf("out at %g s with model %+v", s.FullActivationS(), m)
	}
}

// Every fault of a product is found, all of them at once.
func TestProductFaults(t *testing.T) {
	for _, f := range []struct{ old, with, want string }{
		{"product: Quick\n", "", "product.yaml:1: product: found nothing, want a name"},
		{"product: Quick", "product: Battery", `product.yaml:1: product: found "Battery", a name that the case has`},
		{"activation_s: 0.6", "activation_s: 0", "product.yaml:2: activation_s: found 0, want a number above 0"},
		{"delay_s: 0.2", "delay_s: 2", "product.yaml:3: delay_s: found 2, want at most activation_s (0.6)"},
		{"hold_s: 20\n", "", "product.yaml:1: found times that make no response, want the response is held for ever"},
		{"load.csv:free", "load.csv:fee", `product.yaml:6: cap_mw: found the unknown column "fee", want a column of`},
		{"load.csv:free", "0", "product.yaml:6: cap_mw: found 0 in every hour"},
		{"load.csv:free", "30", "product.yaml:7: price_steps: found steps that end at 25 MW, want steps up to cap_mw (30)"},
		{"per_mw: 2.5", "per_mw: 0.5", "product.yaml:7: price_steps[2].per_mw: found 0.5, want at least the step before (1)"},
		{"to_mw: 25", "to_mw: 5", "product.yaml:7: price_steps[2].to_mw: found 5, want more than the step before (10)"},
		{"price_steps: [{to_mw: 10, per_mw: 1}, {to_mw: 25, per_mw: 2.5}]", "price_steps: 3", "product.yaml:7: price_steps: found 3, want a list of steps"},
		{"hold_s: 20", "hold_s: 20\nlevel_hz: 0.6", "product.yaml:5: level_hz: found 0.6, want at most frequency.steady.max_deviation_hz of the case (0.5)"},
		{"hold_s: 20", "hold: 20", "product.yaml:4: hold: found an unknown key, want hold_s?"},
		{tinyProduct, "\n", "product.yaml: found an empty file, want a product"},
	} {
		_, p, found := tinyWith(t, tiny, strings.Replace(tinyProduct, f.old, f.with, 1))
		if p != nil || !strings.Contains(found.String(), f.want) {
			t.Errorf("%s → %s: found\n%v\nwant %s", f.old, f.with, found, f.want)
		}
	}
	_, _, found := tinyWith(t, tiny, strings.NewReplacer("0.6", "-1", "per_mw: 1}", "per_mw: x}", "hold_s", "hould_s").Replace(tinyProduct))
	if len(found.Errors()) != 3 {
		t.Errorf("want three faults at once, found\n%v", found)
	}
}

// The demo's product is read without a finding.
func TestSkerraProductIsClean(t *testing.T) {
	c, _ := Read("../testdata/skerra/case.yaml")
	p, found := ReadProduct("../testdata/skerra/product.yaml", c)
	if p == nil || len(found) > 0 || p.MostMW() != 40 {
		t.Errorf("%+v, found %v", p, found)
	}
}

// Whatever a product file holds, reading ends without a panic, with a product that every volume of
// can be put into the case or with at least one error, and each finding is one line.
func FuzzReadProduct(f *testing.F) {
	c, _ := readText(tiny, tinyCSV)
	for _, text := range []string{tinyProduct, strings.ReplaceAll(tinyProduct, "load.csv:free", "20"), tinyProduct + "level_hz: 0.2\n", strings.Replace(tinyProduct, "0.2", "0.6", 1),
		strings.Replace(tinyProduct, "hold_s: 20", "hold_s: 0", 1), "product: [", "product: &a {<<: *a}"} {
		f.Add(text, productCSV)
	}
	f.Fuzz(func(t *testing.T, text, csv string) {
		p, found := readProduct("product.yaml", c, func(path string, _ int64) ([]byte, error) {
			if path == "product.yaml" {
				return []byte(text), nil
			}
			return []byte(csv), nil
		})
		for _, x := range found {
			if strings.ContainsAny(x.String(), "\n\r") {
				t.Errorf("a finding of two lines: %q", x)
			}
		}
		if (p == nil) != (len(found.Errors()) > 0) {
			t.Fatalf("product %v, %d errors", p != nil, len(found.Errors()))
		}
		if p == nil {
			return
		}
		for _, volume := range []float64{0, p.MostMW() / 3, p.MostMW()} {
			with, err := p.In(c, volume, 0)
			if err != nil {
				t.Fatal(err)
			}
			for h := range c.Hours() {
				held := 0.0
				for _, i := range p.Holders(c) {
					held += with.Hour(h, HourOptions{}).Units[i].ResponseCapMW
				}
				if want := math.Min(volume, p.CapMW.At(h)); !(math.Abs(held-want) <= 1e-9*(1+want)) {
					t.Errorf("volume %g, hour %d: %g MW can be held, want %g", volume, h, held, want)
				}
			}
		}
	})
}
