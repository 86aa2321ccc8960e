// Package atomicfile writes a file so that its name never stands for half of it:
// the bytes go to a temporary file in the same folder, which is then renamed.
package atomicfile

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// WriteError reports a file that could not be written; the old file, if there was
// one, is as it was.
type WriteError struct {
	Name string
	Err  error
}

func (e *WriteError) Error() string { return fmt.Sprintf("writing %s: %v", e.Name, e.Err) }

// Unwrap returns the cause.
func (e *WriteError) Unwrap() error { return e.Err }

// Write calls fill with a buffered writer and puts what it wrote under name.
// Permissions are those of the old file, or 0644.
//
// Errors: *WriteError; an error of fill itself comes back as it is.
func Write(name string, fill func(w io.Writer) error) (err error) {
	fail := func(err error) error { return &WriteError{name, cause(err)} }
	mode := fs.FileMode(0o644)
	switch info, err := os.Stat(name); {
	case err == nil && info.IsDir():
		return fail(errors.New("it is a folder"))
	case err == nil && !info.Mode().IsRegular():
		return writeThrough(name, fill) // a pipe or a device cannot be replaced
	case err == nil:
		mode = info.Mode().Perm()
	}
	target := name
	if resolved, err := filepath.EvalSymlinks(name); err == nil {
		target = resolved // replace what a link points to, not the link
	}
	tmp, err := os.CreateTemp(filepath.Dir(target), "."+filepath.Base(target)+".*.part")
	if err != nil {
		return fail(err)
	}
	defer func() {
		if err != nil {
			tmp.Close()
			os.Remove(tmp.Name())
		}
	}()
	disk := &recorder{w: tmp}
	b := bufio.NewWriter(disk)
	if err := fill(b); err != nil {
		if disk.err != nil { // however fill puts it
			return fail(disk.err)
		}
		return err
	}
	for _, step := range []func() error{b.Flush, func() error { return tmp.Chmod(mode) }, tmp.Sync, tmp.Close} {
		if err := step(); err != nil {
			return fail(err)
		}
	}
	if err := os.Rename(tmp.Name(), target); err != nil {
		return fail(err)
	}
	return nil
}

// recorder keeps the first error of a writer.
type recorder struct {
	w   io.Writer
	err error
}

func (r *recorder) Write(b []byte) (int, error) {
	n, err := r.w.Write(b)
	if err != nil && r.err == nil {
		r.err = err
	}
	return n, err
}

// cause leaves out the name of the temporary file, which says nothing to a user and
// differs from call to call.
func cause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	var l *os.LinkError
	if errors.As(err, &l) {
		return l.Err
	}
	return err
}

func writeThrough(name string, fill func(w io.Writer) error) error {
	f, err := os.OpenFile(name, os.O_WRONLY, 0)
	if err != nil {
		return &WriteError{name, cause(err)}
	}
	disk := &recorder{w: f}
	if err := fill(disk); err != nil {
		f.Close()
		if disk.err != nil {
			return &WriteError{name, cause(disk.err)}
		}
		return err
	}
	if err := f.Close(); err != nil {
		return &WriteError{name, cause(err)}
	}
	return nil
}
