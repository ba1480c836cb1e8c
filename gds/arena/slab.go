package arena

import (
	"sync"
	"unsafe"
)

// Slab is memory for slices that are given up together. It deals them out of a few large blocks one behind the other, and when they are
// given up the blocks serve again: their pages are there already. Memory that another array no longer needs can be handed to it. Several
// goroutines may cut from one slab. The zero value is ready.
type Slab struct {
	mu     sync.Mutex
	from   *Slab // takes its blocks there; nil: from the system
	blocks []block
	mapped []mapping // of blocks: what the system gave
}

// The blocks of a slab are each at least twice as large as the one before, from firstBlock to usualBlock bytes, if nothing larger is asked
// for.
const (
	firstBlock = 1 << 16
	usualBlock = 4 << 20
)

// Within gives a slab that takes its blocks from s, smaller ones than s takes.
func (s *Slab) Within() *Slab { return &Slab{from: s} }

// Hand gives the memory of an array to a slab. The array is gone then.
func Hand[T any](s *Slab, a *Array[T]) {
	if a == nil {
		return
	}
	if a.memory.usable != nil {
		s.mu.Lock()
		s.blocks, s.mapped = append(s.blocks, block{memory: a.memory.usable}), append(s.mapped, a.memory)
		s.mu.Unlock()
	}
	a.Data, a.memory = nil, mapping{}
}

// Cut gives a zeroed slice of n elements of T, which must hold no pointers.
func Cut[T any](s *Slab, n int) []T {
	out := CutDirty[T](s, n)
	clear(out)
	return out
}

// CutDirty is Cut, but for what the slice holds: anything.
func CutDirty[T any](s *Slab, n int) []T {
	var one T
	memory := s.cut(n * int(unsafe.Sizeof(one)))
	return unsafe.Slice((*T)(unsafe.Pointer(unsafe.SliceData(memory))), n)
}

// cut gives the next bytes of the first block that has so many left, at an address that every type may have.
func (s *Slab) cut(size int) []byte {
	const align = 64
	size = (size + align - 1) &^ (align - 1)
	s.mu.Lock()
	defer s.mu.Unlock()
	for i := range s.blocks {
		if b := &s.blocks[i]; len(b.memory)-b.used >= size {
			return b.cut(size)
		}
	}
	if size > usualBlock {
		s.leave()
	}
	s.blocks = append(s.blocks, block{memory: s.more(size)})
	return s.blocks[len(s.blocks)-1].cut(size)
}

// block is memory of which the first bytes are dealt out.
type block struct {
	memory []byte
	used   int
}

func (b *block) cut(size int) []byte {
	b.used += size
	return b.memory[b.used-size : b.used : b.used]
}

// leave gives back the pages that are not dealt out, as what comes does not fit there. They come back when they are touched.
func (s *Slab) leave() {
	for i := range s.blocks {
		if b := &s.blocks[i]; s.from == nil && len(b.memory)-b.used > usualBlock {
			forget(b.memory[b.used:])
		}
	}
}

// more gives memory for a further block, of at least a size.
func (s *Slab) more(size int) []byte {
	usual := firstBlock
	if n := len(s.blocks); n > 0 {
		usual = min(max(usual, 2*len(s.blocks[n-1].memory)), usualBlock)
	}
	size = (max(size, usual) + firstBlock - 1) &^ (firstBlock - 1)
	if s.from != nil {
		return s.from.cut(size)
	}
	if size < smallest {
		return make([]byte, size)
	}
	m := take(size)
	if m.usable == nil {
		return make([]byte, size)
	}
	s.mapped = append(s.mapped, m)
	return m.usable
}

// Size is the number of bytes of a slab, Left that of those that are not dealt out.
func (s *Slab) Size() int {
	n := 0
	for i := range s.blocks {
		n += len(s.blocks[i].memory)
	}
	return n
}

func (s *Slab) Left() int {
	n := 0
	for i := range s.blocks {
		n += len(s.blocks[i].memory) - s.blocks[i].used
	}
	return n
}

// Reset gives up all slices, and with them the slabs within this one. The memory stays for what comes.
func (s *Slab) Reset() {
	for i := range s.blocks {
		s.blocks[i].used = 0
	}
}

// Free gives up all slices and the memory, of slabs within this one too.
func (s *Slab) Free() {
	for _, m := range s.mapped {
		give(m)
	}
	s.blocks, s.mapped = nil, nil
}
