package gds

import (
	"io"
	"sync"
)

// This file writes behind: full buffers go to a goroutine that writes them, so that the copy works on while the system
// takes what is written.

// behind hands full buffers to a writer and gives empty ones for them.
type behind struct {
	full, free chan []byte
	done       chan struct{}

	mu  sync.Mutex
	err error // of the writer; what comes later is dropped
}

// newBehind starts writing to w. The caller has one buffer more than those that it gives here, empty.
func newBehind(w io.Writer, buffers ...[]byte) *behind {
	n := len(buffers) + 1
	b := &behind{full: make(chan []byte, n), free: make(chan []byte, n), done: make(chan struct{})}
	for _, buf := range buffers {
		b.free <- buf
	}
	go b.write(w)
	return b
}

func (b *behind) write(w io.Writer) {
	defer close(b.done)
	for buf := range b.full {
		if b.failed() == nil {
			if _, err := w.Write(buf); err != nil {
				b.mu.Lock()
				b.err = err
				b.mu.Unlock()
			}
		}
		b.free <- buf[:0]
	}
}

func (b *behind) failed() error {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.err
}

// put hands buf over, and gives an empty buffer for it, or the error of what was written so far.
func (b *behind) put(buf []byte) ([]byte, error) {
	if err := b.failed(); err != nil {
		return buf[:0], err
	}
	b.full <- buf
	return <-b.free, nil
}

// close waits until all is written. It is called once.
func (b *behind) close() error {
	close(b.full)
	<-b.done
	return b.failed()
}
