package main

import (
	"os"
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
		Dir: "testdata",
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
			// pause DURATION
			"pause": func(ts *testscript.TestScript, neg bool, args []string) {
				d, err := time.ParseDuration(args[0])
				ts.Check(err)
				time.Sleep(d)
			},
		},
	})
}
