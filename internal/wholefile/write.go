// Package wholefile writes files whole or not at all: into a temporary file in
// the same folder, flushed to disk, then renamed over the target.
package wholefile

import (
	"errors"
	"io"
	"os"
	"path/filepath"
)

// Write creates or replaces the file at path with what fill writes. When fill or
// the disk fails, the old file stays as it was and no temporary file is left. A
// path that is not a regular file (a pipe, a terminal, /dev/stdout) is written to directly.
func Write(path string, fill func(io.Writer) error) (err error) {
	mode := os.FileMode(0o644)
	if info, statErr := os.Stat(path); statErr == nil {
		if !info.Mode().IsRegular() && !info.IsDir() {
			return direct(path, fill)
		}
		mode = info.Mode().Perm()
	}
	if target, linkErr := filepath.EvalSymlinks(path); linkErr == nil {
		path = target // replace what a link points at, not the link
	}
	tmp, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".*")
	if err != nil {
		return plain(err)
	}
	defer func() {
		if err != nil {
			tmp.Close()
			os.Remove(tmp.Name())
		}
	}()
	if err = fill(tmp); err != nil {
		return err
	}
	if err = tmp.Chmod(mode); err != nil {
		return err
	}
	if err = tmp.Sync(); err != nil {
		return err
	}
	if err = tmp.Close(); err != nil {
		return err
	}
	if err = os.Rename(tmp.Name(), path); err != nil {
		err = plain(err)
	}
	return err
}

// plain is the cause of an error without the temporary name, which means nothing to a user.
func plain(err error) error {
	var p *os.PathError
	var l *os.LinkError
	switch {
	case errors.As(err, &p):
		return p.Err
	case errors.As(err, &l):
		return l.Err
	}
	return err
}

func direct(path string, fill func(io.Writer) error) error {
	f, err := os.OpenFile(path, os.O_WRONLY, 0)
	if err != nil {
		return err
	}
	if err := fill(f); err != nil {
		f.Close()
		return err
	}
	return f.Close()
}
