package fleet

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"
)

// table is one series file: a column of times and columns of numbers.
type table struct {
	name    string // as shown in findings
	raw     []byte
	columns map[string]int // index into data
	header  []string       // names of the columns of data
	times   []time.Time    // UTC
	local   bool           // some times carry no offset
	lines   []int          // line of each row in the file
	data    [][]float64    // one slice a column; NaN where a cell is bad
	faults  [][]cellFault  // one slice a column
	used    []bool         // one a column
	sound   bool           // the times can be used
	ticked  bool           // compared with the hours of the case,
	fits    bool           // and found the same
}

// cellFault is one kind of bad cell in one column, with its first place.
type cellFault struct {
	want  string
	found string
	line  int
	last  int
	count int
}

// repeat counts how often one kind of fault came up.
type repeat struct {
	line, last, count int
}

func (c *repeat) add(line int) bool {
	c.count++
	c.last = line
	if c.count == 1 {
		c.line = line
	}
	return c.count == 1
}

// more is the tail of a finding that stands for several.
func more(count, last int) string {
	if count < 2 {
		return ""
	}
	return fmt.Sprintf(" (and %d more, the last on line %d)", count-1, last)
}

// parseTable reads a series file and reports what is wrong with its form and its times.
// Bad cells are only kept: they are reported for columns that the case uses.
func (r *reader) parseTable(name string, raw []byte) *table {
	t := &table{name: name, raw: raw, columns: map[string]int{}}
	text := bytes.TrimPrefix(raw, []byte("\uFEFF"))
	if line, ok := badUTF8(text); !ok {
		r.faultIn(name, line, "", "bytes that are not UTF-8", "a text file in UTF-8")
		return t
	}
	if len(bytes.TrimSpace(text)) == 0 {
		r.faultIn(name, 0, "", "an empty file", "a header and one row an hour")
		return t
	}
	if !bytes.Contains(text, []byte("\n")) && bytes.Contains(text, []byte("\r")) {
		r.faultIn(name, 1, "", "lines that end in a carriage return only", "lines that end in a line feed")
		return t
	}
	rows := csv.NewReader(bytes.NewReader(text))
	rows.FieldsPerRecord = -1
	rows.ReuseRecord = true
	rows.TrimLeadingSpace = true
	first, err := rows.Read()
	if err != nil {
		r.csvFault(name, err)
		return t
	}
	if !r.header(t, first, firstLine(text)) {
		return t
	}
	r.rows(t, rows)
	return t
}

func firstLine(text []byte) string {
	line, _, _ := bytes.Cut(text, []byte("\n"))
	return strings.TrimSpace(string(line))
}

// header reads the names of the columns; it reports and gives false if the rest of the
// file makes no sense without them.
func (r *reader) header(t *table, first []string, line string) bool {
	for _, sep := range []struct{ mark, name string }{{";", "semicolons"}, {"\t", "tabs"}} {
		if len(first) == 1 && strings.Contains(line, sep.mark) {
			r.faultIn(t.name, 1, "", "columns separated by "+sep.name,
				"columns separated by commas, numbers with a decimal point")
			return false
		}
	}
	if len(first) > maxColumns {
		r.faultIn(t.name, 1, "", fmt.Sprintf("%d columns", len(first)), fmt.Sprintf("at most %d", maxColumns))
		return false
	}
	if got := strings.TrimSpace(first[0]); !strings.EqualFold(got, "time") {
		r.faultIn(t.name, 1, "time", quoted(got)+" as the first column", "time, then the columns of numbers")
		return false
	}
	for i, f := range first[1:] {
		f = strings.TrimSpace(f)
		t.header = append(t.header, f)
		if fault := nameFault(f); fault != "" {
			r.faultIn(t.name, 1, fmt.Sprintf("column %d", i+2), fault, "a name for each column")
			continue
		}
		if at, twice := t.columns[f]; twice || f == "time" {
			r.faultIn(t.name, 1, printable(f), fmt.Sprintf("the column a second time (first as column %d)", at+2), "each column once")
			continue
		}
		t.columns[f] = i
	}
	n := len(t.header)
	t.data, t.faults, t.used = make([][]float64, n), make([][]cellFault, n), make([]bool, n)
	return true
}

func (r *reader) rows(t *table, rows *csv.Reader) {
	var short, long, clockless repeat
	var shortFound, longFound, timeFound string
	width := len(t.header) + 1
	complete := true
	for {
		rec, err := rows.Read()
		if err == io.EOF {
			break
		}
		if err != nil {
			r.csvFault(t.name, err)
			complete = false
			break
		}
		if blank(rec) {
			continue
		}
		line, _ := rows.FieldPos(0)
		if len(t.times) == maxHours || len(t.times)*width > maxCells {
			r.faultIn(t.name, line, "", "more rows than a case can have", fmt.Sprintf("at most %d hours and %d numbers", maxHours, maxCells))
			complete = false
			break
		}
		if len(rec) < width && short.add(line) {
			shortFound = fmt.Sprintf("%d columns", len(rec))
		}
		if len(rec) > width && long.add(line) {
			longFound = fmt.Sprintf("%d columns", len(rec))
		}
		at, local, ok := parseTime(strings.TrimSpace(rec[0]))
		if !ok {
			if clockless.add(line) {
				timeFound = quoted(rec[0])
			}
		}
		t.local = t.local || local
		t.times = append(t.times, at)
		t.lines = append(t.lines, line)
		for i := range t.header {
			if i+1 >= len(rec) {
				t.data[i] = append(t.data[i], math.NaN()) // the short row is reported as such
				continue
			}
			t.data[i] = append(t.data[i], t.cell(i, rec[i+1], line))
		}
	}
	same := fmt.Sprintf("%d as in the header", width)
	if short.count > 0 {
		r.faultIn(t.name, short.line, "", shortFound+more(short.count, short.last), same)
	}
	if long.count > 0 {
		r.faultIn(t.name, long.line, "", longFound+more(long.count, long.last), same+" (a decimal comma? numbers need a decimal point)")
	}
	if clockless.count > 0 {
		r.faultIn(t.name, clockless.line, "time", timeFound+more(clockless.count, clockless.last), timeForm)
	}
	if len(t.times) == 0 {
		if complete {
			r.faultIn(t.name, 0, "", "a header but no rows", "one row an hour")
		}
		return
	}
	t.sound = r.contiguous(t) && complete && clockless.count == 0
}

// cell reads one number and keeps what is wrong with it.
func (t *table) cell(col int, s string, line int) float64 {
	x, err := strconv.ParseFloat(s, 64)
	if err == nil && !math.IsNaN(x) && !math.IsInf(x, 0) && numberBytes(s) {
		return x
	}
	s = strings.TrimSpace(s)
	if x, ok := plainNumber(s); ok {
		return x
	}
	found, want := quoted(s), "a number"
	switch low := strings.ToLower(strings.TrimLeft(s, "+-")); {
	case s == "":
		found, want = "an empty cell", "a number in every hour"
	case low == "nan" || low == "na" || low == "n/a" || low == "null" || low == "-":
		want = "a number in every hour"
	case low == "inf" || low == "infinity" || low == ".inf" || errors.Is(err, strconv.ErrRange):
		want = "a finite number"
	default:
		want += commaHint(s)
	}
	for i := range t.faults[col] {
		f := &t.faults[col][i]
		if f.want == want && (f.found == "an empty cell") == (s == "") {
			f.count++
			f.last = line
			return math.NaN()
		}
	}
	t.faults[col] = append(t.faults[col], cellFault{want: want, found: found, line: line, last: line, count: 1})
	return math.NaN()
}

// numberBytes tells whether s has only the characters of a decimal number: Go would
// also take 0x1p4 and 1_000.
func numberBytes(s string) bool {
	for i := 0; i < len(s); i++ {
		switch c := s[i]; {
		case c >= '0' && c <= '9', c == '.', c == '-', c == '+', c == 'e', c == 'E':
		default:
			return false
		}
	}
	return true
}

func blank(rec []string) bool {
	for _, f := range rec {
		if strings.TrimSpace(f) != "" {
			return false
		}
	}
	return true
}

func (r *reader) csvFault(name string, err error) {
	var p *csv.ParseError
	if errors.As(err, &p) {
		r.faultIn(name, p.Line, "", p.Err.Error(), "plain comma-separated values")
		return
	}
	r.faultIn(name, 0, "", err.Error(), "plain comma-separated values")
}

// badUTF8 gives the line of the first bytes that are not UTF-8.
func badUTF8(text []byte) (line int, ok bool) {
	if utf8.Valid(text) {
		return 0, true
	}
	line = 1
	for len(text) > 0 {
		c, n := utf8.DecodeRune(text)
		if c == utf8.RuneError && n == 1 {
			return line, false
		}
		if c == '\n' {
			line++
		}
		text = text[n:]
	}
	return 0, true
}
