package fleet

import (
	"cmp"
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"

	"gopkg.in/yaml.v3"
)

// given is a value with the place it was given at, so that a later judgement can point
// there.
type given struct {
	Value
	key  string // path in the case file
	line int    // in the case file
}

// reference is one series file with the first place that names it.
type reference struct {
	path         string
	line, column int
}

// value reads a required number or series.
func (s *section) value(name string, q rule) given {
	if s != nil && !s.has(name) {
		s.missing(name, q.String()+" or file.csv:column")
	}
	return s.valueOr(name, q, math.NaN())
}

// valueOr reads a number or series that has a default.
func (s *section) valueOr(name string, q rule, def float64) given {
	if s == nil {
		return given{Value: Value{Const: math.NaN()}}
	}
	g := given{Value: Value{Const: def}, key: s.key(name), line: s.lineOf(name)}
	e, ok := s.get(name)
	if !ok {
		return g
	}
	file, column, isRef := splitReference(e.node)
	if !isRef {
		if _, number := scalarNumber(e.node); !number {
			s.r.fault(e.node.Line, g.key, describe(e.node), q.String()+commaHint(e.node.Value)+" or file.csv:column")
			g.Const = math.NaN()
			return g
		}
		g.Const = s.numberOr(name, q, def)
		return g
	}
	g.Const = math.NaN()
	if file == "" || column == "" {
		s.r.fault(e.node.Line, g.key, describe(e.node), "file.csv:column, both named")
		return g
	}
	t := s.r.table(e.node, g.key, file)
	if t == nil || t.data == nil {
		return g
	}
	i, ok := t.columns[column]
	if !ok {
		want := "a column of " + t.name
		if near := nearest(column, t.header); near != "" {
			want += " (" + printable(near) + "?)"
		} else if len(t.header) > 0 && len(t.header) <= 12 {
			want += " (" + printable(list(t.header)) + ")"
		}
		s.r.fault(e.node.Line, g.key, "the unknown column "+quoted(column), want)
		return g
	}
	if !t.used[i] {
		t.used[i] = true
		for _, f := range t.faults[i] {
			s.r.faultIn(t.name, f.line, printable(column), f.found+more(f.count, f.last), f.want)
		}
	}
	s.r.bound(t, i, g.key, q)
	if s.r.tick(t) {
		g.Series = t.data[i]
	}
	return g
}

// bound reports the cells of a column that a rule does not allow, one finding.
func (r *reader) bound(t *table, col int, key string, q rule) {
	if once := fmt.Sprint(t.name, "\x00", col, "\x00", q); r.bounded[once] {
		return
	} else {
		r.bounded[once] = true
	}
	var bad repeat
	var found string
	for h, x := range t.data[col] {
		if !math.IsNaN(x) && !q.allows(x) && bad.add(t.lines[h]) {
			found = num(x)
		}
	}
	if bad.count > 0 {
		r.faultIn(t.name, bad.line, printable(t.header[col]), found+more(bad.count, bad.last), q.String()+" (for "+key+")")
	}
}

// splitReference takes file.csv:column apart. Only a text with a colon or a file name
// is a reference.
func splitReference(n *yaml.Node) (file, column string, ok bool) {
	if n.Kind != yaml.ScalarNode {
		return "", "", false
	}
	if i := strings.Index(strings.ToLower(n.Value), ".csv"); i >= 0 {
		file, rest := n.Value[:i+4], n.Value[i+4:]
		column, _ := strings.CutPrefix(rest, ":")
		if rest != "" && rest == column {
			return "", "", true // file.csvx
		}
		return strings.TrimSpace(file), strings.TrimSpace(column), true
	}
	return "", "", false
}

// table gives a series file, read and checked when first named; nil if it can't be read.
func (r *reader) table(n *yaml.Node, key, file string) *table {
	path := filepath.FromSlash(file)
	if !filepath.IsAbs(path) {
		path = filepath.Join(r.dir, path)
	}
	path = filepath.Clean(path)
	ref := reference{path, n.Line, n.Column}
	if t, ok := r.tables[path]; ok {
		for i := range r.references {
			if p := &r.references[i]; p.path == path && before(ref, *p) < 0 {
				*p = ref
			}
		}
		return t
	}
	if len(r.tables) == maxFiles {
		if !r.tooMany {
			r.fault(n.Line, key, "one series file too many", fmt.Sprintf("at most %d", maxFiles))
		}
		r.tooMany = true
		return nil
	}
	raw, err := r.open(path, maxSeriesBytes)
	if err != nil {
		r.fault(n.Line, key, quoted(file)+": "+err.Error(), "a series file, its path counted from the case file")
		r.tables[path] = nil
		return nil
	}
	t := r.parseTable(path, raw)
	r.tables[path] = t
	r.references = append(r.references, ref)
	return t
}

func before(a, b reference) int {
	return cmp.Or(cmp.Compare(a.line, b.line), cmp.Compare(a.column, b.column))
}

// files lists the series files in the order in which the case file names them.
func (r *reader) files() []*table {
	slices.SortStableFunc(r.references, before)
	out := make([]*table, len(r.references))
	for i, ref := range r.references {
		out[i] = r.tables[ref.path]
	}
	return out
}

// unused warns of columns that nothing in the case refers to.
func (r *reader) unused() {
	for _, t := range r.files() {
		var idle []string
		for i, used := range t.used {
			if !used {
				idle = append(idle, printable(t.header[i]))
			}
		}
		if len(idle) == 0 {
			continue
		}
		found := "a column that the case does not use: " + idle[0]
		if n := len(idle); n > 1 {
			found = fmt.Sprintf("%d columns that the case does not use: %s", n, list(idle[:min(n, 5)]))
			if n > 5 {
				found += ", …"
			}
		}
		r.found = append(r.found, Finding{File: t.name, Line: 1, Found: found, Warning: true})
	}
}

// most gives the largest value over all hours; NaN is passed over.
func (v Value) most() float64 {
	if v.Series == nil {
		return v.Const
	}
	x := math.Inf(-1)
	for _, y := range v.Series {
		if y > x {
			x = y
		}
	}
	return x
}
