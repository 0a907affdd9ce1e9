package report

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// WriteFile writes dir/name whole or not at all. The content goes to a temporary file
// in dir (its name starts with a dot and ends in .tmp) that takes the final name only
// when fill has succeeded and the bytes are on disk; a file already there stays until
// then. On an error, or a panic in fill, the temporary file is removed.
func WriteFile(dir, name string, fill func(io.Writer) error) (err error) {
	f, err := openTemp(dir, name)
	if err != nil {
		return err
	}
	done := false
	defer func() {
		if !done {
			f.Close()
			err = errors.Join(err, os.Remove(f.Name()))
		}
	}()
	buf := bufio.NewWriterSize(f, 1<<16)
	if err := fill(buf); err != nil {
		return fmt.Errorf("writing %s: %w", filepath.Join(dir, name), err)
	}
	if err := buf.Flush(); err != nil {
		return err
	}
	if err := f.Sync(); err != nil {
		return err
	}
	if err := f.Close(); err != nil {
		return err
	}
	if err := os.Rename(f.Name(), filepath.Join(dir, name)); err != nil {
		return err
	}
	done = true
	return nil
}

// openTemp creates a new temporary file for name. os.CreateTemp would give it the
// rights 0600; here the user's umask decides, as it does for any other file.
func openTemp(dir, name string) (*os.File, error) {
	for n := 0; ; n++ {
		temp := filepath.Join(dir, fmt.Sprintf(".%s.%d-%d.tmp", name, os.Getpid(), n))
		f, err := os.OpenFile(temp, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
		if errors.Is(err, fs.ErrExist) && n < 1000 {
			continue
		}
		return f, err
	}
}
