package fleet

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"time"

	"gopkg.in/yaml.v3"
)

// What a case can hold at most. The bounds lie far beyond use; they keep a broken or
// hostile file from taking the machine with it.
const (
	maxUnits       = 10_000  // identical units of one resource
	maxItems       = 10_000  // entries of one list
	maxHours       = 100_000 // eleven years
	maxColumns     = 10_000
	maxCells       = 30_000_000 // numbers in one series file
	maxFiles       = 1_000
	maxName        = 80 // characters
	maxDepth       = 50 // levels of nesting
	maxMerges      = 8  // levels of <<
	maxNodes       = 2_000_000
	maxCaseBytes   = 4 << 20
	maxSeriesBytes = 256 << 20
	maxKnots       = 200  // points of one shape
	maxSeconds     = 3600 // after a loss
)

// Read reads and vets a case: the YAML file at path and the CSV files it names, whose
// paths count from its folder. It reports every fault it can find, not only the first.
// The case is nil if there is any error; with warnings alone it can be used. FORMAT.md
// lists the keys.
func Read(path string) (*Case, Findings) {
	return read(path, openFile)
}

// opener gives the content of a file of at most so many bytes.
type opener func(path string, most int64) ([]byte, error)

// reader carries what is known while one case is read.
type reader struct {
	path, dir string
	what      string // the file holds: case or product
	open      opener
	found     Findings
	elsewhere map[string]string // keys that belong in a section: where
	nodes     int               // visited so far
	spent     bool

	tables     map[string]*table
	references []reference
	tooMany    bool
	bounded    map[string]bool

	times     []time.Time // the hours of the case; nil until known
	clock     string      // what set them
	clockLost bool        // what should set them cannot be used

	index       map[string]int // resources by name
	partial     bool           // a list of resources seems to stand under a misspelt key
	shapeIndex  map[string]int // shapes by name
	shapeInputs []shapeInput   // one a shape

	names  map[string]int // of resources, connections and losses: the line of each
	c      *Case
	inputs []input // one a resource
}

func read(path string, open opener) (*Case, Findings) {
	r := &reader{
		path: path, dir: filepath.Dir(path), open: open, what: "case",
		tables: map[string]*table{}, bounded: map[string]bool{}, names: map[string]int{},
		c: &Case{Path: path},
	}
	raw, err := open(path, maxCaseBytes)
	if err != nil {
		r.fault(0, "", err.Error(), "a case file that can be read")
		return nil, r.found
	}
	if root := r.parse(raw); root != nil {
		r.whole(root)
	}
	r.found = r.found.sorted(path)
	if len(r.found.Errors()) > 0 {
		return nil, r.found
	}
	r.c.Hash, r.c.Files = r.hash(raw)
	return r.c, r.found
}

// hash is the sha256 over the file itself and its series files, which it names.
func (r *reader) hash(raw []byte) (sum string, files []string) {
	h := sha256.New()
	h.Write(raw)
	for _, t := range r.files() {
		h.Write(t.raw)
		files = append(files, t.name)
	}
	return hex.EncodeToString(h.Sum(nil)), files
}

// openFile reads a regular file: a pipe or a device could block or never end.
func openFile(path string, most int64) ([]byte, error) {
	info, err := os.Stat(path)
	if err != nil {
		return nil, cause(err)
	}
	if !info.Mode().IsRegular() {
		return nil, errors.New("no regular file")
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, cause(err)
	}
	defer f.Close()
	raw, err := io.ReadAll(io.LimitReader(f, most+1))
	if err != nil {
		return nil, cause(err)
	}
	if int64(len(raw)) > most {
		return nil, fmt.Errorf("more than %d bytes", most)
	}
	return raw, nil
}

// cause leaves out the operation and the path, which the finding gives anyway.
func cause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

var yamlLine = regexp.MustCompile(`line (\d+)`)

// parse makes one tree of the YAML text, or reports why there is none. A syntax fault is
// the one fault that hides all others.
func (r *reader) parse(raw []byte) *yaml.Node {
	if line, ok := badUTF8(raw); !ok {
		r.fault(line, "", "bytes that are not UTF-8", "a text file in UTF-8")
		return nil
	}
	d := yaml.NewDecoder(bytes.NewReader(raw))
	doc, err := decode(d)
	switch {
	case err == io.EOF, err == nil && (len(doc.Content) == 0 || isNull(doc.Content[0])):
		r.fault(0, "", "an empty file", "a "+r.what)
		return nil
	case err != nil:
		r.yamlFault(raw, err)
		return nil
	}
	if line := deep(doc); line > 0 {
		r.fault(line, "", fmt.Sprintf("more than %d levels of nesting", maxDepth), "the few levels that a "+r.what+" has")
		return nil
	}
	switch second, err := decode(d); {
	case err == nil:
		line := 0
		if len(second.Content) > 0 {
			line = second.Content[0].Line
		}
		r.fault(line, "", "a second document", "one "+r.what+" a file")
	case err != io.EOF:
		r.yamlFault(raw, err)
	}
	return doc.Content[0]
}

// decode guards against the faults of the YAML library: a panic there is bad input here.
func decode(d *yaml.Decoder) (doc *yaml.Node, err error) {
	defer func() {
		if p := recover(); p != nil {
			err = fmt.Errorf("yaml: %v", p)
		}
	}()
	doc = &yaml.Node{}
	err = d.Decode(doc)
	return doc, err
}

func (r *reader) yamlFault(raw []byte, err error) {
	text := strings.TrimPrefix(err.Error(), "yaml: ")
	line := 0
	if m := yamlLine.FindStringSubmatch(text); m != nil {
		line, _ = strconv.Atoi(m[1])
		text = strings.TrimPrefix(text, m[0]+": ")
	} else if m := regexp.MustCompile(`^unknown anchor '(.*)' referenced`).FindStringSubmatch(text); m != nil {
		before, _, _ := strings.Cut(string(raw), "*"+m[1])
		line = 1 + strings.Count(before, "\n")
	}
	want := "YAML; a fault of form hides all others"
	if strings.Contains(text, "cannot start any token") || strings.Contains(text, "tab character") {
		want = "YAML, indented by blanks, not tabs, with odd texts in quotes; a fault of form hides all others"
	}
	r.fault(line, "", "what is not YAML ("+printable(text)+")", want)
}

// deep gives the line of the first node below maxDepth, or 0. It follows no alias.
func deep(doc *yaml.Node) int {
	type at struct {
		n     *yaml.Node
		level int
	}
	stack := []at{{doc, 0}}
	for len(stack) > 0 {
		a := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		if a.level > maxDepth {
			return a.n.Line
		}
		for _, child := range a.n.Content {
			stack = append(stack, at{child, a.level + 1})
		}
	}
	return 0
}

// spend counts nodes as they are visited: aliases can make a small file a huge case.
func (r *reader) spend(n int) bool {
	if r.nodes += n; r.nodes <= maxNodes {
		return true
	}
	if !r.spent {
		r.fault(0, "", "more entries than a case can have (aliases of aliases?)", fmt.Sprintf("at most %d", maxNodes))
	}
	r.spent = true
	return false
}

func (r *reader) fault(line int, key, found, want string) {
	r.faultIn(r.path, line, key, found, want)
}

func (r *reader) faultIn(file string, line int, key, found, want string) {
	r.add(Finding{File: file, Line: line, Key: key, Found: found, Want: want})
}

func (r *reader) warn(line int, key, found, want string) {
	r.add(Finding{File: r.path, Line: line, Key: key, Found: found, Want: want, Warning: true})
}

// add keeps a finding; a flood that sorted would cut anyway is not even gathered.
func (r *reader) add(f Finding) {
	if len(r.found) < 20*maxFindings {
		r.found = append(r.found, f)
	}
}
