package formulate

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
)

// WriteMPS writes the model as free-form MPS, comments first; the word FREE on the NAME
// line keeps readers that guess from taking long names for fixed fields. Numbers carry 17
// significant digits, so that they are read back as they are.
func (m *Model) WriteMPS(w io.Writer, name string, comments []string) error {
	b := bufio.NewWriter(w)
	for _, c := range comments {
		fmt.Fprintf(b, "* %s\n", c)
	}
	fmt.Fprintf(b, "NAME %s FREE\nROWS\n N cost\n", name)
	for _, r := range m.Rows {
		fmt.Fprintf(b, " %s %s\n", map[string]string{"=": "E", ">=": "G", "<=": "L"}[r.Sense], r.Name)
	}
	b.WriteString("COLUMNS\n")
	whole, markers := false, 0
	marker := func(kind string) {
		fmt.Fprintf(b, " marker_%d 'MARKER' '%s'\n", markers, kind)
		markers++
	}
	for _, c := range m.Columns {
		if c.Whole != whole {
			whole = c.Whole
			marker(map[bool]string{true: "INTORG", false: "INTEND"}[whole])
		}
		if c.Cost != 0 || len(c.Entries) == 0 {
			fmt.Fprintf(b, " %s cost %s\n", c.Name, exact(c.Cost))
		}
		for _, e := range c.Entries {
			fmt.Fprintf(b, " %s %s %s\n", c.Name, m.Rows[e.Row].Name, exact(e.Value))
		}
	}
	if whole {
		marker("INTEND")
	}
	b.WriteString("RHS\n")
	for _, r := range m.Rows {
		if r.RHS != 0 {
			fmt.Fprintf(b, " rhs %s %s\n", r.Name, exact(r.RHS))
		}
	}
	b.WriteString("BOUNDS\n")
	for _, c := range m.Columns {
		switch {
		case math.IsInf(c.Lo, -1) && math.IsInf(c.Hi, 1):
			fmt.Fprintf(b, " FR bound %s\n", c.Name)
		case c.Lo == c.Hi:
			fmt.Fprintf(b, " FX bound %s %s\n", c.Name, exact(c.Lo))
		default:
			fmt.Fprintf(b, " LO bound %s %s\n", c.Name, exact(c.Lo))
			if !math.IsInf(c.Hi, 1) {
				fmt.Fprintf(b, " UP bound %s %s\n", c.Name, exact(c.Hi))
			}
		}
	}
	b.WriteString("ENDATA\n")
	return b.Flush()
}

func exact(x float64) string { return strconv.FormatFloat(x, 'g', 17, 64) }
