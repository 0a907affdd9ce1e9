package replay

import (
	"go/parser"
	"go/token"
	"os"
	"strings"
	"testing"
)

// The replay is worth something as a check only as long as it stands on its own.
func TestImportsNothingOfTheProgram(t *testing.T) {
	entries, err := os.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	seen := 0
	for _, e := range entries {
		if !strings.HasSuffix(e.Name(), ".go") {
			continue
		}
		seen++
		f, err := parser.ParseFile(token.NewFileSet(), e.Name(), nil, parser.ImportsOnly)
		if err != nil {
			t.Fatal(err)
		}
		for _, imp := range f.Imports {
			path := strings.Trim(imp.Path.Value, `"`)
			if path == "evenkeel" || strings.HasPrefix(path, "evenkeel/") || strings.HasPrefix(path, ".") {
				t.Errorf("%s imports %s", e.Name(), path)
			}
			std := !strings.Contains(strings.SplitN(path, "/", 2)[0], ".")
			if !std && !strings.HasSuffix(e.Name(), "_test.go") {
				t.Errorf("%s imports %s, which is not of the standard library", e.Name(), path)
			}
		}
	}
	if seen < 5 {
		t.Fatalf("only %d files looked at", seen)
	}
}
