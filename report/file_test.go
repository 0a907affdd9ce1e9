package report

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"evenkeel/solve"
)

func onlyFiles(t *testing.T, dir string, want ...string) {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, e := range entries {
		got = append(got, e.Name())
	}
	if len(got) != len(want) {
		t.Fatalf("the folder holds %q, want %q", got, want)
	}
	for i := range want {
		if got[i] != want[i] {
			t.Fatalf("the folder holds %q, want %q", got, want)
		}
	}
}

func TestWriteFileLeavesNothingBehindOnFailure(t *testing.T) {
	dir := t.TempDir()
	broken := errors.New("the disk is on fire")
	err := WriteFile(dir, "a.csv", func(w io.Writer) error {
		if _, err := w.Write(make([]byte, 1<<20)); err != nil {
			t.Fatal(err)
		}
		return broken
	})
	if !errors.Is(err, broken) {
		t.Errorf("error %v does not say why", err)
	}
	onlyFiles(t, dir)

	func() {
		defer func() { _ = recover() }()
		_ = WriteFile(dir, "a.csv", func(io.Writer) error { panic("no") })
	}()
	onlyFiles(t, dir)
}

func TestWriteFileKeepsTheOldFileUntilTheNewOneIsWhole(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "a.csv")
	say := func(s string, fail error) error {
		return WriteFile(dir, "a.csv", func(w io.Writer) error {
			_, err := io.WriteString(w, s)
			return errors.Join(err, fail)
		})
	}
	read := func() string {
		b, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		return string(b)
	}
	if err := say("old", nil); err != nil {
		t.Fatal(err)
	}
	if err := say("half of the ne", errors.New("stop")); err == nil || read() != "old" {
		t.Errorf("after a failure (%v) the file says %q", err, read())
	}
	if err := say("new", nil); err != nil || read() != "new" {
		t.Errorf("error %v, the file says %q", err, read())
	}
	onlyFiles(t, dir, "a.csv")
	if err := WriteFile(filepath.Join(dir, "none"), "a.csv", func(io.Writer) error { return nil }); err == nil {
		t.Error("a folder that is not there takes a file")
	}
}

// A rename onto a folder fails after the content is written; that leaves nothing either.
func TestWriteFileOverAFolder(t *testing.T) {
	dir := t.TempDir()
	if err := os.MkdirAll(filepath.Join(dir, "a.csv", "full"), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := WriteFile(dir, "a.csv", func(io.Writer) error { return nil }); err == nil {
		t.Error("a folder was replaced")
	}
	onlyFiles(t, dir, "a.csv")
}

func TestWriteMakesTheWholeFolder(t *testing.T) {
	dir := t.TempDir()
	c, hours, without := smallRun()
	if err := Write(dir, c, hours, without, Options{}); err != nil {
		t.Fatal(err)
	}
	if err := WriteAbout(dir, About{Program: "evenkeel"}); err != nil {
		t.Fatal(err)
	}
	onlyFiles(t, dir, "about.json", "binding.png", "binding.svg", "hours.csv", "inertia.png", "inertia.svg",
		"mix.png", "mix.svg", "schedule.csv", "summary.json")
}

func TestWriteRefuses(t *testing.T) {
	c, hours, without := smallRun()
	cut := slices.Clone(hours)
	cut[3].Dispatch = cut[3].Dispatch[:3]
	cutWithout := slices.Clone(without)
	cutWithout[0].Dispatch = nil
	backwards := []solve.Hour{hours[1], hours[0]}
	for _, k := range []struct {
		name           string
		hours, without []solve.Hour
	}{
		{"no hours", nil, nil},
		{"a dispatch of three resources", cut, without},
		{"no dispatch without limits", hours, cutWithout},
		{"time running backwards", backwards, nil},
	} {
		dir := t.TempDir()
		if err := Write(dir, c, k.hours, k.without, Options{}); err == nil {
			t.Errorf("%s: accepted", k.name)
		}
		onlyFiles(t, dir)
		if err := Summary(io.Discard, c, k.hours, k.without, Options{}); err == nil {
			t.Errorf("%s: accepted for the terminal", k.name)
		}
	}
}
