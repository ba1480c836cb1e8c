package decompose

import (
	"errors"
	"sync"
	"sync/atomic"

	"maskpair/gds/arena"
)

// pairs collects near pairs of flat figures in blocks of a fixed size, so that nothing is copied as they grow.
type pairs struct {
	blocks [][]uint64
	open   []uint64
	room   *pairRoom // where full blocks are; nil: on the heap
}

// pairRoom is memory for blocks, taken from the system in large pieces and given back at once. Several workers use it.
type pairRoom struct {
	mu    sync.Mutex
	all   []*arena.Array[uint64]
	spare []uint64 // of the last one
}

const (
	blockPairs = 1 << 13
	leastPairs = 1 << 4
	roomPairs  = 1 << 19 // 4 MiB: large pages
	// The two ordinals of a pair are below 2^31. The lower bit says that the pair is nearer than any_mask_spacing.
	pairShift = 32
)

var errTooManyPairs = errors.New("too many near pairs")

// add keeps a pair. limit counts down what may still be kept, block by block.
func (p *pairs) add(a, b, tooNear uint32, limit *atomic.Int64) {
	if len(p.open) == cap(p.open) {
		// The first blocks are small, since most tops of a library are.
		size := min(blockPairs, max(2*cap(p.open), leastPairs))
		p.flush(limit)
		p.open = p.room.block(size)
	}
	p.open = append(p.open, packPair(a, b, tooNear))
}

// block gives an empty block.
func (r *pairRoom) block(size int) []uint64 {
	if r == nil || size < blockPairs {
		return make([]uint64, 0, size)
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	if len(r.spare) < size {
		a := arena.New[uint64](roomPairs)
		r.all, r.spare = append(r.all, a), a.Data
	}
	block := r.spare[:0:size]
	r.spare = r.spare[size:]
	return block
}

// free gives all blocks back.
func (r *pairRoom) free() {
	for _, a := range r.all {
		a.Free()
	}
	r.all, r.spare = nil, nil
}

// flush closes the open block.
func (p *pairs) flush(limit *atomic.Int64) {
	if len(p.open) > 0 {
		p.blocks = append(p.blocks, p.open)
		limit.Add(-int64(len(p.open)))
	}
	p.open = nil
}

// packPair packs two numbers below 2^31, the lower first, and the bit.
func packPair(a, b, tooNear uint32) uint64 {
	if a > b {
		a, b = b, a
	}
	return uint64(a)<<pairShift | uint64(b)<<1 | uint64(tooNear)
}

// unpackPair is the inverse of packPair.
func unpackPair(p uint64) (a, b, tooNear uint32) {
	return uint32(p >> pairShift), uint32(p) >> 1, uint32(p) & 1
}
