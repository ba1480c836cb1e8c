package gds

import (
	"bufio"
	"compress/gzip"
	"crypto/sha256"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"
)

// This file opens what a user names as input: a file or standard input, plain or packed with gzip. What cannot be read
// twice is spooled, unpacked, to a temporary file during the first pass. The SHA-256 of the file as given is taken on
// another core meanwhile.

// ErrSpool says that the temporary file of an input could not be written.
var ErrSpool = errors.New("cannot keep the unpacked input in a temporary file")

// Input is an opened input. It is for one goroutine.
type Input struct {
	name   string
	file   *os.File    // nil: standard input
	info   fs.FileInfo // of file, when it was opened
	plain  bool        // a regular file that is not packed: both passes read it
	packed bool
	given  int64 // size of the file as given, -1 where it is not known

	source *pump     // of the file as given; nil: it is read straight away
	unpack *pump     // of the unpacked stream; the same as source where nothing is packed
	stream io.Reader // unpacked, for the first pass
	spool  *os.File
	stale  string // name of the spool file where it must be removed by Close

	hash   hash.Hash // nil: none is taken
	sum    [sha256.Size]byte
	length int64 // of the file as given, once it is read
}

// Open opens an input. The path "-" is stdin; gzip is recognised by its content. With spool, an input that cannot be read
// twice (stdin, a pipe, gzip) is kept unpacked in a temporary file, for ReaderAt; that file is gone after Close.
//
// Errors of Open, Index and Changed begin with the name of the input.
func Open(path string, spool bool, stdin io.Reader) (*Input, error) {
	return open(&Input{name: path, given: -1, hash: sha256.New()}, spool, stdin)
}

// OpenUnsummed opens an input that is only indexed: neither a SHA-256 of it nor checksums of its structures are taken, and it is not
// spooled.
func OpenUnsummed(path string) (*Input, error) {
	return open(&Input{name: path, given: -1}, false, nil)
}

func open(in *Input, spool bool, stdin io.Reader) (*Input, error) {
	path := in.name
	var src io.Reader = stdin
	if path == "-" {
		in.name = "standard input"
		if stdin == nil {
			return nil, errors.New("standard input is closed")
		}
	} else {
		f, err := os.Open(path)
		if err != nil {
			return nil, fmt.Errorf("%s: %w; give a layout that can be read", path, errors.Unwrap(err)) // of an *fs.PathError
		}
		in.file, src = f, f
		if in.info, err = f.Stat(); err != nil {
			f.Close()
			return nil, err
		}
		if in.info.IsDir() {
			f.Close()
			return nil, fmt.Errorf("%s: is a folder, not a file", path)
		}
		if in.info.Mode().IsRegular() {
			in.given = in.info.Size()
		}
	}
	if err := in.start(src, spool); err != nil {
		in.Close()
		return nil, fmt.Errorf("%s: %w", in.name, err)
	}
	return in, nil
}

// start sets up the way from the source to the first pass.
func (in *Input) start(src io.Reader, spool bool) error {
	// Looking at the first bytes must not take them from the stream.
	head := make([]byte, 3)
	n, err := io.ReadFull(src, head)
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF {
		return err
	}
	src = &headed{head: head[:n], r: src}
	in.packed = isGzip(head[:n])
	in.plain = in.given >= 0 && !in.packed

	var sides []side
	if in.hash != nil {
		sides = []side{func(data []byte) error {
			in.hash.Write(data)
			return nil
		}}
	}
	var keep []side
	if spool && !in.plain {
		if err := in.openSpool(); err != nil {
			return err
		}
		keep = []side{in.keep}
	}
	switch {
	case in.packed:
		in.source = newPump(src, sides...)
		in.unpack = newPump(&gunzip{r: bufio.NewReaderSize(in.source, 1<<16)}, keep...)
		in.stream = in.unpack
	case sides == nil && keep == nil:
		in.stream = src // nothing is done beside, so reading ahead would only copy
	default:
		in.source = newPump(src, append(sides, keep...)...)
		in.unpack, in.stream = in.source, in.source
	}
	return nil
}

// isGzip says whether a stream begins as RFC 1952 has it: two magic bytes, and 8 for deflate.
func isGzip(head []byte) bool {
	return len(head) >= 3 && head[0] == 0x1F && head[1] == 0x8B && head[2] == 8
}

// openSpool makes the temporary file. Where the system allows it the file has no name from now on, so that it is gone
// whatever happens to the program.
func (in *Input) openSpool() error {
	f, err := os.CreateTemp("", "maskpair-*.gds")
	if err != nil {
		return fmt.Errorf("%w: %w", ErrSpool, err)
	}
	in.spool = f
	if os.Remove(f.Name()) != nil {
		in.stale = f.Name()
	}
	return nil
}

// keep writes to the spool file.
func (in *Input) keep(data []byte) error {
	if _, err := in.spool.Write(data); err != nil {
		return fmt.Errorf("%w: %w", ErrSpool, err)
	}
	return nil
}

// Name is what the input is called in messages.
func (in *Input) Name() string { return in.name }

// Given is the size in bytes of the file as given, -1 where it is not known before it is read.
func (in *Input) Given() int64 { return in.given }

// Packed says whether the input is compressed.
func (in *Input) Packed() bool { return in.packed }

// Index is pass 1 over the input; it can be run once. progress, where not nil, is told how many bytes of the file as given
// were read.
func (in *Input) Index(want Interest, progress func(bytes int64)) (*Library, error) {
	size := int64(-1)
	if in.plain {
		size = in.given
	}
	var tell func(int64)
	if progress != nil {
		tell = func(bytes int64) {
			if in.packed {
				bytes = in.source.read.Load()
			}
			progress(bytes)
		}
	}
	lib, err := index(in.stream, size, want, tell, in.hash != nil)
	if err == nil {
		err = in.finish()
	}
	if err != nil {
		return nil, fmt.Errorf("%s: %w", in.name, err)
	}
	return lib, nil
}

// finish waits for what ran beside pass 1.
func (in *Input) finish() error {
	if in.source != nil {
		if err := in.source.wait(); err != nil {
			return err
		}
		if err := in.unpack.wait(); err != nil {
			return err
		}
		in.length = in.source.read.Load()
	}
	if in.hash != nil {
		in.hash.Sum(in.sum[:0])
	}
	return in.changed()
}

// Sum gives the SHA-256 and the length in bytes of the file as given, once Index is done.
func (in *Input) Sum() (sum [sha256.Size]byte, bytes int64) { return in.sum, in.length }

// ReaderAt gives the unpacked stream for pass 2, once Index is done; nil where it cannot be read twice and was not spooled.
func (in *Input) ReaderAt() io.ReaderAt {
	switch {
	case in.plain:
		return in.file
	case in.spool != nil:
		return in.spool
	}
	return nil
}

// Changed is an error of the kind ErrChanged where size or time of the file are not what they were when it was opened. Index
// asks this by itself at its end; ask again when the second pass is through.
func (in *Input) Changed() error {
	if err := in.changed(); err != nil {
		return fmt.Errorf("%s: %w", in.name, err)
	}
	return nil
}

func (in *Input) changed() error {
	if in.file == nil || in.given < 0 {
		return nil
	}
	now, err := in.file.Stat()
	if err != nil {
		return err
	}
	if now.Size() != in.info.Size() || !now.ModTime().Equal(in.info.ModTime()) {
		return ErrChanged
	}
	return nil
}

// Close gives back all that the input holds, and removes the spool file.
func (in *Input) Close() error {
	if in.source != nil {
		in.source.close()
	}
	if in.unpack != nil {
		in.unpack.close()
	}
	var err error
	if in.file != nil {
		err = in.file.Close()
	}
	if in.spool != nil {
		err = errors.Join(err, in.spool.Close())
		if in.stale != "" {
			err = errors.Join(err, os.Remove(in.stale))
		}
	}
	return err
}

// headed reads a few bytes that were read before, then the rest.
type headed struct {
	head []byte
	r    io.Reader
}

func (h *headed) Read(buf []byte) (int, error) {
	if len(h.head) > 0 {
		n := copy(buf, h.head)
		h.head = h.head[n:]
		return n, nil
	}
	return h.r.Read(buf)
}

// gunzip unpacks one or more gzip members in a row, and refuses anything behind them.
type gunzip struct {
	r   *bufio.Reader
	z   *gzip.Reader
	err error
}

func (g *gunzip) Read(buf []byte) (int, error) {
	for g.err == nil {
		if g.z == nil {
			g.err = g.begin()
			continue
		}
		n, err := g.z.Read(buf)
		switch {
		case err == io.EOF:
			g.err = g.next()
		case err != nil:
			g.err = packedFault(err)
		}
		if n > 0 || len(buf) == 0 {
			return n, nil
		}
	}
	return 0, g.err
}

// begin begins the first member.
func (g *gunzip) begin() error {
	z, err := gzip.NewReader(g.r)
	if err != nil {
		return packedFault(err)
	}
	g.z = z
	z.Multistream(false)
	return nil
}

// next goes to the next member, or says io.EOF.
func (g *gunzip) next() error {
	head, err := g.r.Peek(3)
	if len(head) == 0 {
		return err
	}
	if !isGzip(head) {
		return faultf(ErrTrailing, "the compressed data is followed by something else")
	}
	if err := g.z.Reset(g.r); err != nil {
		return packedFault(err)
	}
	g.z.Multistream(false)
	return nil
}

// packedFault puts a fault of the packed data in words.
func packedFault(err error) error {
	if err == io.EOF || errors.Is(err, io.ErrUnexpectedEOF) {
		return faultf(io.ErrUnexpectedEOF, "the compressed file is cut off")
	}
	if errors.Is(err, gzip.ErrHeader) || errors.Is(err, gzip.ErrChecksum) {
		return faultf(err, "the compressed file is damaged: %v", err)
	}
	return fmt.Errorf("the compressed file cannot be unpacked: %w", err)
}
