package fleet

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"gopkg.in/yaml.v3"
)

// section is one YAML mapping of the case, opened for reading by key. Every getter
// reports its own fault and gives back something harmless, so that reading goes on and
// all faults come out at once. A number that is missing or bad is NaN, which no later
// comparison complains about a second time.
type section struct {
	r       *reader
	path    string // such as machines[Hollin 1]; empty for the whole file
	line    int
	entries map[string]entry
}

type entry struct {
	line int // of the key
	node *yaml.Node
}

// rule bounds a number.
type rule struct {
	lo, hi  float64
	above   bool // lo itself is not allowed
	integer bool
}

var (
	anyNumber  = rule{lo: math.Inf(-1), hi: math.Inf(1)}
	positive   = rule{lo: 0, hi: math.Inf(1), above: true}
	notBelow0  = rule{lo: 0, hi: math.Inf(1)}
	share      = rule{lo: 0, hi: 1}
	unitCount  = rule{lo: 1, hi: maxUnits, integer: true}
	hourCount  = rule{lo: 1, hi: maxHours, integer: true}
	numberForm = regexp.MustCompile(`^[-+]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][-+]?[0-9]+)?$`)
)

func (q rule) allows(x float64) bool {
	if q.integer && x != math.Trunc(x) || x < q.lo || x > q.hi || q.above && x == q.lo {
		return false
	}
	return true
}

func (q rule) String() string {
	noun := "a number"
	if q.integer {
		noun = "a whole number"
	}
	switch lo, hi := !math.IsInf(q.lo, 0), !math.IsInf(q.hi, 0); {
	case lo && q.above && hi:
		return fmt.Sprintf("%s above %s and at most %s", noun, num(q.lo), num(q.hi))
	case lo && q.above:
		return fmt.Sprintf("%s above %s", noun, num(q.lo))
	case lo && hi:
		return fmt.Sprintf("%s from %s to %s", noun, num(q.lo), num(q.hi))
	case lo:
		return fmt.Sprintf("%s of at least %s", noun, num(q.lo))
	case hi:
		return fmt.Sprintf("%s of at most %s", noun, num(q.hi))
	}
	return noun
}

func num(x float64) string { return strconv.FormatFloat(x, 'g', 10, 64) }

// section opens the mapping at node. known lists the keys it may have.
func (r *reader) section(node *yaml.Node, path string, line int, known []string) *section {
	node = target(node)
	if node.Kind != yaml.MappingNode {
		r.fault(line, path, describe(node), "keys and values ("+list(known)+")")
		return nil
	}
	if !r.spend(len(node.Content)) {
		return nil
	}
	s := &section{r: r, path: path, line: line, entries: map[string]entry{}}
	var merges []*yaml.Node
	for i := 0; i+1 < len(node.Content); i += 2 {
		k, v := node.Content[i], node.Content[i+1]
		if k.Kind == yaml.ScalarNode && k.Tag == "!!merge" {
			merges = append(merges, v)
			continue
		}
		if k.Kind != yaml.ScalarNode {
			r.fault(k.Line, path, describe(target(k))+" as a key", "a plain key")
			continue
		}
		if first, twice := s.entries[k.Value]; twice {
			r.fault(k.Line, s.key(k.Value), fmt.Sprintf("the key a second time (first on line %d)", first.line), "each key once")
			continue
		}
		s.entries[k.Value] = entry{line: k.Line, node: v}
		if !contains(known, k.Value) {
			want := suggest(k.Value, known)
			if place, ok := r.elsewhere[k.Value]; ok && path == "" {
				want = place
			}
			r.fault(k.Line, s.key(k.Value), "an unknown key", want)
		}
	}
	for _, m := range merges {
		s.merge(m, known, 0)
	}
	return s
}

// merge takes over what << brings in: keys given in the section itself win.
func (s *section) merge(node *yaml.Node, known []string, depth int) {
	node = target(node)
	if depth > maxMerges || !s.r.spend(1+len(node.Content)) {
		s.r.fault(s.line, s.key("<<"), "merges nested too deeply", fmt.Sprintf("at most %d levels", maxMerges))
		return
	}
	switch node.Kind {
	case yaml.SequenceNode:
		for _, n := range node.Content {
			s.merge(n, known, depth+1)
		}
	case yaml.MappingNode:
		for i := 0; i+1 < len(node.Content); i += 2 {
			k, v := node.Content[i], node.Content[i+1]
			if k.Kind != yaml.ScalarNode {
				continue // reported where it stands
			}
			if k.Tag == "!!merge" {
				s.merge(v, known, depth+1)
				continue
			}
			if _, own := s.entries[k.Value]; !own && contains(known, k.Value) {
				s.entries[k.Value] = entry{line: k.Line, node: v}
			}
		}
	default:
		s.r.fault(s.line, s.key("<<"), describe(node), "an alias of a mapping, such as <<: *name")
	}
}

func (s *section) key(name string) string {
	name = printable(name)
	if s.path == "" {
		return name
	}
	return s.path + "." + name
}

// get gives the value of a key; a key without a value counts as missing.
func (s *section) get(name string) (entry, bool) {
	if s == nil {
		return entry{}, false
	}
	e, ok := s.entries[name]
	if !ok || isNull(e.node) {
		return entry{}, false
	}
	e.node = target(e.node)
	return e, true
}

func (s *section) has(name string) bool {
	_, ok := s.get(name)
	return ok
}

// lineOf is the line of a key, or of the section where the key is missing.
func (s *section) lineOf(name string) int {
	if s == nil {
		return 0
	}
	if e, ok := s.entries[name]; ok {
		return e.line
	}
	return s.line
}

func (s *section) missing(name, want string) {
	if s != nil {
		s.r.fault(s.lineOf(name), s.key(name), "nothing", want)
	}
}

func (s *section) fault(name, found, want string) {
	s.r.fault(s.lineOf(name), s.key(name), found, want)
}

func (s *section) warn(name, found, want string) {
	s.r.warn(s.lineOf(name), s.key(name), found, want)
}

// number reads a required number.
func (s *section) number(name string, q rule) float64 {
	if !s.has(name) {
		s.missing(name, q.String())
		return math.NaN()
	}
	return s.numberOr(name, q, 0)
}

// numberOr reads a number that has a default.
func (s *section) numberOr(name string, q rule, def float64) float64 {
	e, ok := s.get(name)
	if !ok {
		return def
	}
	x, ok := scalarNumber(e.node)
	if !ok || !q.allows(x) {
		s.r.fault(e.node.Line, s.key(name), describe(e.node), q.String()+commaHint(e.node.Value))
		return math.NaN()
	}
	return x
}

// whole reads a whole number that has a default.
func (s *section) whole(name string, q rule, def int) int {
	x := s.numberOr(name, q, float64(def))
	if math.IsNaN(x) {
		return def
	}
	return int(x)
}

// flag reads true or false.
func (s *section) flag(name string, def bool) bool {
	e, ok := s.get(name)
	if !ok {
		return def
	}
	if e.node.Kind == yaml.ScalarNode {
		switch e.node.Value {
		case "true":
			return true
		case "false":
			return false
		}
	}
	s.r.fault(e.node.Line, s.key(name), describe(e.node), "true or false")
	return def
}

// text reads a required text of one line.
func (s *section) text(name string) (string, bool) {
	if !s.has(name) {
		s.missing(name, "a name")
		return "", false
	}
	return s.textOr(name, "")
}

// textOr reads a text of one line that has a default.
func (s *section) textOr(name, def string) (string, bool) {
	e, ok := s.get(name)
	if !ok {
		return def, true
	}
	if e.node.Kind != yaml.ScalarNode {
		s.r.fault(e.node.Line, s.key(name), describe(e.node), "a text")
		return def, false
	}
	if fault := nameFault(e.node.Value); fault != "" {
		s.r.fault(e.node.Line, s.key(name), fault,
			fmt.Sprintf("a text of 1 to %d printable characters, no blank at either end", maxName))
		return def, false
	}
	return e.node.Value, true
}

// note reads free text of any number of lines.
func (s *section) note(name string) string {
	e, ok := s.get(name)
	if !ok {
		return ""
	}
	if e.node.Kind != yaml.ScalarNode {
		s.r.fault(e.node.Line, s.key(name), describe(e.node), "a text")
		return ""
	}
	return strings.TrimSpace(e.node.Value)
}

// part opens the section under a key; nil if it is missing or no mapping.
func (s *section) part(name string, known []string) *section {
	e, ok := s.get(name)
	if !ok {
		return nil
	}
	return s.r.section(e.node, s.key(name), e.line, known)
}

// required opens the section under a key that must be there.
func (s *section) required(name string, known []string) *section {
	if s != nil && !s.has(name) {
		s.missing(name, "keys and values ("+list(known)+")")
		return nil
	}
	if s == nil {
		return nil
	}
	return s.part(name, known)
}

// items lists the entries of a list; nil if it is missing or no list.
func (s *section) items(name, want string) []*yaml.Node {
	e, ok := s.get(name)
	if !ok {
		return nil
	}
	if e.node.Kind != yaml.SequenceNode {
		s.r.fault(e.node.Line, s.key(name), describe(e.node), want)
		return nil
	}
	if len(e.node.Content) > maxItems {
		s.fault(name, fmt.Sprintf("%d entries", len(e.node.Content)), fmt.Sprintf("at most %d", maxItems))
		return nil
	}
	if !s.r.spend(len(e.node.Content)) {
		return nil
	}
	return e.node.Content
}

func scalarNumber(n *yaml.Node) (float64, bool) {
	if n.Kind != yaml.ScalarNode || n.Style&(yaml.SingleQuotedStyle|yaml.DoubleQuotedStyle) != 0 {
		return 0, false
	}
	return plainNumber(n.Value)
}

// plainNumber reads a decimal number, finite. Unlike YAML and Go it knows no octal,
// hexadecimal, infinity or separators: 020 is twenty.
func plainNumber(s string) (float64, bool) {
	if !numberForm.MatchString(s) {
		return 0, false
	}
	x, err := strconv.ParseFloat(s, 64)
	return x, err == nil
}

func commaHint(s string) string {
	if strings.Contains(s, ",") {
		if _, ok := plainNumber(strings.ReplaceAll(s, ",", "")); ok {
			return " with a decimal point and no commas"
		}
	}
	return ""
}

// target follows an alias to what it stands for. An alias never stands for an alias.
func target(n *yaml.Node) *yaml.Node {
	if n.Kind == yaml.AliasNode && n.Alias != nil {
		return n.Alias
	}
	return n
}

func isNull(n *yaml.Node) bool {
	n = target(n)
	return n.Kind == yaml.ScalarNode && n.ShortTag() == "!!null"
}

// describe says what stands at a node, for Finding.Found.
func describe(n *yaml.Node) string {
	switch n.Kind {
	case yaml.MappingNode:
		return "keys and values"
	case yaml.SequenceNode:
		return "a list"
	}
	if isNull(n) {
		return "nothing"
	}
	if _, ok := scalarNumber(n); ok {
		return n.Value
	}
	switch n.ShortTag() {
	case "!!bool":
		return n.Value
	case "!!float", "!!int":
		return printable(n.Value)
	}
	return quoted(n.Value)
}

func quoted(s string) string { return `"` + printable(s) + `"` }

// printable makes a text safe to show on one line of a terminal.
func printable(s string) string {
	out, count := strings.Builder{}, 0
	for _, c := range s {
		if count++; count > maxName {
			out.WriteString("…")
			break
		}
		if !unicode.IsPrint(c) || c == utf8.RuneError {
			c = '·'
		}
		out.WriteRune(c)
	}
	return out.String()
}

// nameFault says what is wrong with a name, or nothing.
func nameFault(s string) string {
	switch {
	case strings.TrimSpace(s) == "":
		return "an empty text"
	case utf8.RuneCountInString(s) > maxName:
		return fmt.Sprintf("%d characters", utf8.RuneCountInString(s))
	case strings.TrimSpace(s) != s:
		return quoted(s) + " with a blank at its end"
	}
	for _, c := range s {
		if !unicode.IsPrint(c) || c == utf8.RuneError {
			return fmt.Sprintf("%s with the unprintable character %U", quoted(s), c)
		}
	}
	return ""
}
