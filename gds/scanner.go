package gds

import (
	"encoding/binary"
	"hash/crc32"
	"io"
)

// This file cuts a stream into records, in the manner of bufio.Scanner. It knows the four bytes at the head of a record
// and the end of a stream; the grammar is the matter of index.go.

// bufferSize is the size of the read buffer, once a stream has filled smaller ones: about a mebibyte reads fastest and stays
// in the cache.
const bufferSize = 1 << 20

// Record is one record of a stream.
type Record struct {
	Kind   Kind
	Type   DataType
	Offset int64  // of the first byte of the record's head
	Data   []byte // without the head; valid until the next call of Scan
}

// Scanner reads a stream record by record. Any kind, data type and length that has an even number of bytes is let through;
// the first fault ends the scan. The last record is ENDLIB; only zero bytes may follow.
type Scanner struct {
	r        io.Reader
	buf      []byte
	pos, end int   // buf[pos:end] is read and not yet scanned
	base     int64 // offset of buf[0] in the stream
	last     int   // buf[last:pos] is the last record; empty before the first, and at the end
	err      error
	over     bool  // ENDLIB was scanned
	fault    error // of the reader; io.EOF at its end

	// For the index: the running CRC-32C of all bytes before buf[from], since the last cut. sums is false for others.
	sums     bool
	sum      uint32
	from     int
	progress func(bytes int64)
}

// NewScanner gives a scanner over the stream that r reads.
func NewScanner(r io.Reader) *Scanner {
	return &Scanner{r: r, buf: make([]byte, 1<<13)}
}

// Record gives the record of the last Scan that said true.
func (s *Scanner) Record() Record {
	b := s.buf[s.last:s.pos]
	if len(b) < 4 {
		return Record{}
	}
	return Record{Kind: Kind(b[2]), Type: DataType(b[3]), Offset: s.base + int64(s.last), Data: b[4:len(b):len(b)]}
}

// data is the data of the last record.
func (s *Scanner) data() []byte { return s.buf[s.last+4 : s.pos] }

// Err gives the fault that ended the scan, nil where it ended with the stream. Faults of the stream are of type
// *SyntaxError.
func (s *Scanner) Err() error { return s.err }

// Scan goes to the next record. It says false behind ENDLIB, once all that follows is seen to be zero, and at the first
// fault.
func (s *Scanner) Scan() bool {
	b := s.buf[s.pos:s.end]
	if len(b) >= 4 && !s.over {
		length := int(binary.BigEndian.Uint16(b))
		if length <= len(b) && length >= 4 && length&1 == 0 {
			s.last = s.pos
			s.pos += length
			s.over = Kind(b[2]) == ENDLIB
			return true
		}
	}
	return s.scan()
}

// scan is Scan where the buffer ends, and where something is wrong.
func (s *Scanner) scan() bool {
	s.last = s.pos
	if s.err != nil {
		return false
	}
	if s.over {
		s.padding()
		return false
	}
	head, ok := s.head()
	if !ok {
		return false
	}
	length := int(head >> 16)
	for s.end-s.pos < length {
		if !s.fill() {
			s.cutOff(length)
			return false
		}
	}
	s.last = s.pos
	s.pos += length
	s.over = Kind(s.buf[s.last+2]) == ENDLIB
	return true
}

// head makes sure that the head of the next record is in the buffer, and gives it: length, kind, data type.
func (s *Scanner) head() (head uint32, ok bool) {
	for s.end-s.pos < 4 {
		if !s.fill() {
			s.cutOff(4)
			return 0, false
		}
	}
	head = binary.BigEndian.Uint32(s.buf[s.pos:s.end])
	if err := checkLength(int(head >> 16)); err != nil {
		s.fail(&SyntaxError{Offset: s.place(), Record: Kind(head >> 8), Err: err})
		return 0, false
	}
	return head, true
}

// checkLength says what is wrong with the length of a record.
func checkLength(length int) error {
	if length < 4 {
		return faultf(ErrLength, "record length %d is less than 4", length)
	}
	if length&1 != 0 {
		return faultf(ErrLength, "record length %d is odd", length)
	}
	return nil
}

// place is the offset of the next record.
func (s *Scanner) place() int64 { return s.base + int64(s.pos) }

// fill reads on; all from pos is kept. It says false where nothing is left, or reading fails.
func (s *Scanner) fill() bool {
	if s.fault != nil {
		return false
	}
	if s.sums {
		s.sum = crc32.Update(s.sum, castagnoli, s.buf[s.from:s.pos])
		s.from = 0
	}
	full := s.end == len(s.buf)
	to := s.buf
	if full && (s.pos == 0 || len(s.buf) < bufferSize) {
		to = make([]byte, 2*len(s.buf))
	}
	if full || s.pos > 0 {
		copy(to, s.buf[s.pos:s.end])
		s.buf = to
		s.base += int64(s.pos)
		s.end -= s.pos
		s.pos, s.last = 0, 0
	}
	for tries := 0; tries < 100; tries++ {
		n, err := s.r.Read(s.buf[s.end:])
		s.end += n
		if err != nil {
			s.fault = err
		}
		if n > 0 {
			if s.progress != nil {
				s.progress(s.base + int64(s.end))
			}
			return true
		}
		if err != nil {
			return false
		}
	}
	s.fault = io.ErrNoProgress
	return false
}

// cut gives the CRC-32C of the bytes from the last cut to the next record.
func (s *Scanner) cut() uint32 {
	if !s.sums {
		return 0
	}
	sum := crc32.Update(s.sum, castagnoli, s.buf[s.from:s.pos])
	s.sum, s.from = 0, s.pos
	return sum
}

// castagnoli is the polynomial of CRC-32C, the one that processors compute.
var castagnoli = crc32.MakeTable(crc32.Castagnoli)

// cutOff makes the fault of a stream that ends where at least need more bytes must stand.
func (s *Scanner) cutOff(need int) {
	if s.fault != io.EOF {
		s.fail(s.fault)
		return
	}
	e := &SyntaxError{Offset: s.place()}
	have := s.end - s.pos
	switch {
	case s.base == 0 && s.end == 0:
		e.Err = faultf(io.ErrUnexpectedEOF, "the file is empty")
	case have == 0:
		e.Err = faultf(io.ErrUnexpectedEOF, "the file is cut off: it ends here, without ENDLIB")
	case have < 4:
		e.Err = faultf(io.ErrUnexpectedEOF, "the file is cut off: %d of the 4 bytes of a record's head are there", have)
	default:
		e.Record = Kind(s.buf[s.pos+2])
		e.Err = faultf(io.ErrUnexpectedEOF, "the file is cut off: %d of the %d bytes of %v are there", have, need, e.Record)
	}
	s.fail(e)
}

// fail keeps the first fault.
func (s *Scanner) fail(err error) {
	if s.err == nil {
		s.err = err
	}
}

// padding reads to the end of the stream, where only zeros may stand.
func (s *Scanner) padding() {
	for {
		for i, c := range s.buf[s.pos:s.end] {
			if c != 0 {
				s.pos += i
				s.last = s.pos
				s.fail(&SyntaxError{Offset: s.place(), Err: faultf(ErrTrailing,
					"something that is not zero follows the end of the library (ENDLIB)")})
				return
			}
		}
		s.pos, s.last = s.end, s.end
		if !s.fill() {
			if s.fault != io.EOF {
				s.fail(s.fault)
			}
			return
		}
	}
}
