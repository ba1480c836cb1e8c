package cli

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"sync"
)

// This file puts outputs in place whole or not at all. What a command writes goes to a temporary file beside its place; when
// all is written and on the disk, the file is renamed. A failure or interrupt removes the temporary file, and what was at the
// place before stays.

// output is one file that a command writes; "-" is standard output, spooled so that it comes whole as well.
type output struct {
	role   string // the option that names it: "--output"
	name   string // as on the command line
	place  string // where the file goes, links followed; "" for standard output
	stdout io.Writer
	fresh  bool        // nothing was at the place, and nothing that comes up there may be replaced
	before fs.FileInfo // what was there; nil also for a link to nothing
	ctx    context.Context

	mu     sync.Mutex // a stage that outlives an interrupt may still write
	temp   *os.File
	closed bool
	err    error // first failure, sticks
}

// named is a path of the command line with the option that it belongs to.
type named struct{ role, path string }

// planOutput checks where an output is to go, before any work. Nothing is made yet. Inputs are never overwritten, neither
// under another name; an existing file only with force.
func planOutput(role, path string, force bool, inputs []named, stdout io.Writer) (*output, error) {
	o := &output{role: role, name: path, stdout: stdout}
	if path == "-" {
		return o, nil
	}
	if strings.HasSuffix(path, "/") || strings.HasSuffix(path, string(filepath.Separator)) {
		return nil, usagef("%s %s: names a folder; give a file", role, path)
	}
	o.place = filepath.Clean(path)
	if _, err := os.Lstat(o.place); err != nil {
		o.fresh = !force // whether the folder is fit shows in begin
		return o, nil
	}
	if o.before, _ = os.Stat(o.place); o.before != nil {
		for _, in := range inputs {
			if info, err := os.Stat(in.path); err == nil && os.SameFile(info, o.before) {
				return nil, usagef("%s %s: is the same file as %s %s, which is never overwritten; give another", role, path, in.role, in.path)
			}
		}
		if o.before.IsDir() {
			return nil, usagef("%s %s: is a folder; give a file", role, path)
		}
		if !o.before.Mode().IsRegular() {
			return nil, usagef("%s %s: is no regular file; give another, or - for standard output", role, path)
		}
	}
	if !force {
		return nil, usagef("%s %s: exists; give --force to replace it, or another name", role, path)
	}
	if real, err := filepath.EvalSymlinks(o.place); err == nil {
		o.place = real
	}
	return o, nil
}

// clash tells whether two outputs go to the same place.
func clash(a, b *output) bool {
	switch {
	case a.place == "" || b.place == "":
		return a.place == b.place
	case a.before != nil && b.before != nil:
		return os.SameFile(a.before, b.before)
	case filepath.Base(a.place) != filepath.Base(b.place):
		return false
	}
	x, err1 := os.Stat(filepath.Dir(a.place))
	y, err2 := os.Stat(filepath.Dir(b.place))
	return err1 == nil && err2 == nil && os.SameFile(x, y)
}

// begin makes the temporary file. When ctx ends, writing fails.
func (o *output) begin(ctx context.Context) error {
	o.ctx = ctx
	dir := filepath.Dir(o.place)
	mode := fs.FileMode(0o666)
	if o.place == "" {
		dir, mode = os.TempDir(), 0o600
	}
	for range 100 {
		var random [8]byte
		rand.Read(random[:]) // never fails, see its documentation
		name := filepath.Join(dir, "."+program+"-"+hex.EncodeToString(random[:])+".part")
		f, err := os.OpenFile(name, os.O_RDWR|os.O_CREATE|os.O_EXCL, mode)
		if errors.Is(err, fs.ErrExist) {
			continue
		}
		switch {
		case errors.Is(err, fs.ErrNotExist):
			return o.fail(fmt.Errorf("the folder %s does not exist; make it first", dir))
		case errors.Is(err, fs.ErrPermission):
			return o.fail(fmt.Errorf("the folder %s is not writable; choose another", dir))
		case err != nil:
			return o.fail(err)
		}
		o.temp = f
		return nil
	}
	return o.fail(fs.ErrExist)
}

// fail keeps the first failure.
func (o *output) fail(err error) error {
	if o.err == nil {
		o.err = &writeError{o.name, reason(err)}
		if o.place == "" {
			o.err = &writeError{"standard output", reason(err)}
		}
	}
	return o.err
}

// failure gives the first failure, or nil.
func (o *output) failure() error {
	o.mu.Lock()
	defer o.mu.Unlock()
	return o.err
}

// Write writes to the temporary file. An error is a *writeError, or that of the context.
func (o *output) Write(p []byte) (int, error) {
	o.mu.Lock()
	defer o.mu.Unlock()
	if o.err != nil {
		return 0, o.err
	}
	if o.closed {
		return 0, fs.ErrClosed
	}
	if err := o.ctx.Err(); err != nil {
		return 0, err
	}
	n, err := o.temp.Write(p)
	if err != nil {
		return n, o.fail(err)
	}
	return n, nil
}

// finish brings the temporary file to the disk.
func (o *output) finish() error {
	o.mu.Lock()
	defer o.mu.Unlock()
	if o.err != nil || o.place == "" {
		return o.err
	}
	if o.before != nil {
		o.temp.Chmod(o.before.Mode().Perm()) // a wish: some file systems have no modes
	}
	if err := o.temp.Sync(); err != nil {
		return o.fail(err)
	}
	if err := o.temp.Close(); err != nil {
		return o.fail(err)
	}
	return nil
}

// settle puts the finished file in place, or copies it to standard output.
func (o *output) settle() error {
	o.mu.Lock()
	defer o.mu.Unlock()
	if o.place == "" {
		return o.spill()
	}
	if o.fresh {
		// A link, other than a rename, does not replace a file that has come up in the meantime. Some file systems have none.
		err := os.Link(o.temp.Name(), o.place)
		if errors.Is(err, fs.ErrExist) {
			return usagef("%s %s: has come into being meanwhile; give --force to replace it, or another name", o.role, o.name)
		}
		if err == nil {
			os.Remove(o.temp.Name())
			o.closed = true
			syncFolder(filepath.Dir(o.place))
			return nil
		}
	}
	if err := os.Rename(o.temp.Name(), o.place); err != nil {
		return o.fail(err)
	}
	o.closed = true
	syncFolder(filepath.Dir(o.place))
	return nil
}

// spill copies the spooled output to standard output.
func (o *output) spill() error {
	if _, err := o.temp.Seek(0, io.SeekStart); err != nil {
		return o.fail(err)
	}
	if _, err := io.Copy(o.stdout, o.temp); err != nil {
		return o.fail(err)
	}
	return nil
}

// discard removes the temporary file, if it is still there.
func (o *output) discard() {
	if !o.mu.TryLock() {
		// A write, a sync or a copy to standard output hangs. The name is removed all the same; the system frees the rest.
		os.Remove(o.temp.Name())
		return
	}
	defer o.mu.Unlock()
	if o.temp != nil && !o.closed {
		o.closed = true
		o.temp.Close()
		os.Remove(o.temp.Name())
	}
}

// withdraw removes a file that was put in place, where nothing was before.
func (o *output) withdraw() {
	if o.place != "" && o.fresh && o.closed {
		os.Remove(o.place)
	}
}

// syncFolder brings a rename to the disk, where the system can.
func syncFolder(dir string) {
	if d, err := os.Open(dir); err == nil {
		d.Sync()
		d.Close()
	}
}

// reason gives what the system said, without the operation and the path, which a message words by itself.
func reason(err error) error {
	var path *fs.PathError
	var link *os.LinkError
	switch {
	case errors.As(err, &path):
		return path.Err
	case errors.As(err, &link):
		return link.Err
	}
	return err
}
