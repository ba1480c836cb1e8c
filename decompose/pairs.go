package decompose

import (
	"errors"
	"sync/atomic"
)

// pairs collects near pairs of flat figures in blocks of a fixed size, so that nothing is copied as they grow.
type pairs struct {
	blocks [][]uint64
	open   []uint64
}

const (
	blockPairs = 1 << 13
	leastPairs = 1 << 4
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
		p.open = make([]uint64, 0, size)
	}
	p.open = append(p.open, packPair(a, b, tooNear))
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
