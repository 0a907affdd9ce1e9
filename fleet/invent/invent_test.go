package invent

import (
	"bytes"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// files reads a written case.
func files(t *testing.T, dir string) map[string][]byte {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	out := map[string][]byte{}
	for _, e := range entries {
		b, err := os.ReadFile(filepath.Join(dir, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		out[e.Name()] = b
	}
	return out
}

func write(t *testing.T, o Options) map[string][]byte {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "case")
	if err := Write(dir, o); err != nil {
		t.Fatal(err)
	}
	return files(t, dir)
}

func TestSameOptionsSameBytes(t *testing.T) {
	o := Options{Machines: 30, Seed: 7, Hours: 200}
	a, b := write(t, o), write(t, o)
	if len(a) != len(b) || len(a) < 6 {
		t.Fatalf("%d and %d files", len(a), len(b))
	}
	for name := range a {
		if !bytes.Equal(a[name], b[name]) {
			t.Errorf("%s differs between two runs", name)
		}
	}
	o.Seed = 8
	if c := write(t, o); bytes.Equal(a["case.yaml"], c["case.yaml"]) || bytes.Equal(a["load.csv"], c["load.csv"]) {
		t.Error("another seed gives the same system")
	}
}

func TestShorterIsBeginning(t *testing.T) {
	long, short := write(t, Options{Machines: 12, Seed: 3, Hours: 300}), write(t, Options{Machines: 12, Seed: 3, Hours: 48})
	for name, b := range short {
		if strings.HasSuffix(name, ".csv") && !bytes.HasPrefix(long[name], b) {
			t.Errorf("%s: 48 hours are not the beginning of 300", name)
		}
	}
}

func TestStart(t *testing.T) {
	start := time.Date(2031, 7, 4, 13, 0, 0, 0, time.FixedZone("", 3600))
	out := write(t, Options{Machines: 10, Hours: 30, Start: start, Name: `Isle: "A" #1`})
	lines := strings.Split(strings.TrimSpace(string(out["load.csv"])), "\n")
	if len(lines) != 31 || !strings.HasPrefix(lines[1], "2031-07-04T12:00:00Z,") || !strings.HasPrefix(lines[30], "2031-07-05T17:00:00Z,") {
		t.Errorf("load.csv has %d lines, from %q to %q", len(lines), lines[1], lines[len(lines)-1])
	}
}

func TestBadOptions(t *testing.T) {
	for _, o := range []Options{
		{Machines: MinMachines - 1},
		{Machines: -3},
		{Machines: MaxMachines + 1},
		{Machines: 10, Hours: -1},
		{Machines: 10, Hours: 5_000_000},
		{Machines: 10, Name: "two\nlines"},
		{Machines: 10, Name: strings.Repeat("x", 81)},
		{Machines: 10, Start: time.Date(2030, 1, 1, 0, 30, 0, 0, time.UTC)},
	} {
		dir := filepath.Join(t.TempDir(), "case")
		if err := Write(dir, o); err == nil {
			t.Errorf("%+v: no error", o)
		}
		if _, err := os.Stat(dir); !errors.Is(err, fs.ErrNotExist) {
			t.Errorf("%+v: something was written", o)
		}
	}
}

func TestWholeOrNotAtAll(t *testing.T) {
	top := t.TempDir()
	o := Options{Machines: 10, Hours: 24}

	full := filepath.Join(top, "full")
	if err := os.Mkdir(full, 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(full, "mine.txt"), nil, 0o644); err != nil {
		t.Fatal(err)
	}
	if err := Write(full, o); !errors.Is(err, fs.ErrExist) {
		t.Errorf("a folder in use: error %v, want fs.ErrExist", err)
	}
	if got := files(t, full); len(got) != 1 {
		t.Errorf("a folder in use was changed: %d files", len(got))
	}

	file := filepath.Join(top, "file")
	if err := os.WriteFile(file, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	if err := Write(file, o); err == nil {
		t.Error("a file in the way: no error")
	}

	empty := filepath.Join(top, "empty")
	if err := os.Mkdir(empty, 0o755); err != nil {
		t.Fatal(err)
	}
	for _, dir := range []string{empty, filepath.Join(top, "new", "below")} {
		if err := Write(dir, o); err != nil {
			t.Errorf("%s: %v", dir, err)
		} else if _, ok := files(t, dir)["case.yaml"]; !ok {
			t.Errorf("%s: no case.yaml", dir)
		}
	}
	entries, err := os.ReadDir(top)
	if err != nil {
		t.Fatal(err)
	}
	if len(entries) != 4 {
		t.Errorf("%d entries left, want full, file, empty and new: %v", len(entries), entries)
	}
}
