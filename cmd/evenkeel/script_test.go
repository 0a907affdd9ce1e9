package main

import (
	"os"
	"regexp"
	"strings"
	"testing"
	"time"

	"github.com/rogpeppe/go-internal/testscript"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){
		"evenkeel": func() { os.Exit(run()) },
		// The same, slowed down so that an interrupt meets it at work.
		"slowkeel": func() {
			afterHour = func() { time.Sleep(20 * time.Millisecond) }
			os.Exit(run())
		},
	})
}

// The command line as a user sees it, one script a matter in testdata.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:             "testdata",
		ContinueOnError: true,
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			// exits CODE PROGRAM ARGS...: the program must end with exactly that code.
			"exits": func(ts *testscript.TestScript, neg bool, args []string) {
				if neg || len(args) < 2 {
					ts.Fatalf("usage: exits CODE PROGRAM ARGS...")
				}
				err := ts.Exec(args[1], args[2:]...)
				code := "0"
				if e, ok := err.(interface{ ExitCode() int }); ok {
					code = string(rune('0' + e.ExitCode()))
				} else if err != nil {
					ts.Fatalf("%v", err)
				}
				if code != args[0] {
					ts.Fatalf("exit code %s, want %s", code, args[0])
				}
			},
			// refuses FILE OLD NEW PATTERN: with OLD replaced by NEW in a FILE of the case in good/,
			// vet must end with exit code 2 and one error, which the pattern matches.
			// A pattern of two lines stands for two errors.
			"refuses": func(ts *testscript.TestScript, neg bool, args []string) {
				found := findings(ts, args, 2)
				if len(found) != 1+strings.Count(args[3], `\n`) || strings.Contains(found[0], ": warning: ") {
					ts.Fatalf("want one error, got\n%s", strings.Join(found, "\n"))
				}
			},
			// doubts FILE OLD NEW PATTERN: the same, but with one warning and exit code 0.
			"doubts": func(ts *testscript.TestScript, neg bool, args []string) {
				found := findings(ts, args, 0)
				if len(found) != 1 || !strings.Contains(found[0], ": warning: ") {
					ts.Fatalf("want one warning, got\n%s", strings.Join(found, "\n"))
				}
			},
			// lastrow FILE: keep the last line of FILE as FILE.last.
			"lastrow": func(ts *testscript.TestScript, neg bool, args []string) {
				lines := strings.Split(strings.TrimSpace(ts.ReadFile(args[0])), "\n")
				ts.Check(os.WriteFile(ts.MkAbs(args[0]+".last"), []byte(lines[len(lines)-1]), 0o666))
			},
			// pause DURATION
			"pause": func(ts *testscript.TestScript, neg bool, args []string) {
				d, err := time.ParseDuration(args[0])
				ts.Check(err)
				time.Sleep(d)
			},
		},
	})
}

// findings vets a changed copy of the case in good/ and gives the findings, one of which
// must match the pattern.
func findings(ts *testscript.TestScript, args []string, code int) []string {
	if len(args) != 4 {
		ts.Fatalf("usage: FILE OLD NEW PATTERN")
	}
	file, old, with, pattern := args[0], args[1], args[2], args[3]
	for _, r := range []*string{&old, &with} {
		*r = strings.NewReplacer(`\n`, "\n", `\t`, "\t").Replace(*r)
	}
	ts.Check(os.MkdirAll(ts.MkAbs("changed"), 0o777))
	entries, err := os.ReadDir(ts.MkAbs("good"))
	ts.Check(err)
	for _, e := range entries {
		text := ts.ReadFile("good/" + e.Name())
		if e.Name() == file {
			if strings.Count(text, old) != 1 {
				ts.Fatalf("%s holds %q %d times, want once", file, old, strings.Count(text, old))
			}
			text = strings.Replace(text, old, with, 1)
		}
		ts.Check(os.WriteFile(ts.MkAbs("changed/"+e.Name()), []byte(text), 0o666))
	}
	var out strings.Builder
	cmd := root()
	cmd.SetArgs([]string{"vet", ts.MkAbs("changed/case.yaml")})
	cmd.SetOut(&out)
	got := 0
	if err := cmd.Execute(); err != nil {
		got = err.(exit).code
	}
	text := strings.ReplaceAll(out.String(), ts.MkAbs(".")+string(os.PathSeparator), "")
	var lines []string
	for line := range strings.Lines(text) {
		if strings.Contains(line, "found ") { // the others sum up
			lines = append(lines, strings.TrimSpace(line))
		}
	}
	if got != code {
		ts.Fatalf("exit code %d, want %d:\n%s", got, code, text)
	}
	if !regexp.MustCompile(pattern).MatchString(strings.Join(lines, "\n")) {
		ts.Fatalf("nothing matches %q in\n%s", pattern, strings.Join(lines, "\n"))
	}
	return lines
}
