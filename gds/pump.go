package gds

import (
	"io"
	"sync"
	"sync/atomic"
)

// This file reads ahead: a goroutine reads blocks from a source, and each block goes to one reader and to any number of
// others (the hash, the spool file) that work beside it. A small pool of blocks goes round; the slowest holds up the rest.

const (
	blockSize = 1 << 18 // all of them stay in the cache
	poolSize  = 8
)

// block is one piece of the source.
type block struct {
	data  []byte // blockSize bytes
	n     int    // of data
	err   error  // of the source, behind data[:n]
	users atomic.Int32
}

// side is what else is done with each block, in order, on a goroutine of its own.
type side func(data []byte) error

// pump is an io.Reader over a source.
type pump struct {
	blocks chan *block // to the reader
	free   chan *block
	stop   chan struct{}
	once   sync.Once
	sides  sync.WaitGroup

	current *block // of the reader
	at      int
	err     error
	read    atomic.Int64 // bytes that came from the source

	mu      sync.Mutex
	sideErr error
}

// newPump starts reading src.
func newPump(src io.Reader, sides ...side) *pump {
	p := &pump{blocks: make(chan *block, poolSize), free: make(chan *block, poolSize), stop: make(chan struct{})}
	for range poolSize {
		p.free <- &block{}
	}
	queues := make([]chan *block, len(sides))
	for i, f := range sides {
		queues[i] = make(chan *block, poolSize)
		p.sides.Go(func() { p.work(f, queues[i]) })
	}
	go p.fetch(src, queues)
	return p
}

// fetch reads the source to its end.
func (p *pump) fetch(src io.Reader, queues []chan *block) {
	defer func() {
		for _, q := range queues {
			close(q)
		}
		close(p.blocks)
	}()
	for {
		var b *block
		select {
		case b = <-p.free:
		case <-p.stop:
			return
		}
		if b.data == nil {
			b.data = make([]byte, blockSize)
		}
		b.n, b.err = readBlock(src, b.data)
		p.read.Add(int64(b.n))
		b.users.Store(int32(1 + len(queues)))
		last := b.err != nil
		// Each channel holds the whole pool: sending never waits.
		for _, q := range queues {
			q <- b
		}
		p.blocks <- b
		if last {
			return
		}
	}
}

// readBlock fills a block; an error belongs behind what was read.
func readBlock(src io.Reader, data []byte) (n int, err error) {
	for idle := 0; n < len(data) && err == nil; {
		var more int
		more, err = src.Read(data[n:])
		n += more
		if more > 0 {
			idle = 0
		} else if idle++; idle > 100 && err == nil {
			err = io.ErrNoProgress
		}
	}
	return n, err
}

// work runs one side.
func (p *pump) work(f side, queue chan *block) {
	for {
		var b *block
		var ok bool
		select {
		case b, ok = <-queue:
		case <-p.stop:
			return
		}
		if !ok {
			return
		}
		if p.sideError() == nil {
			if err := f(b.data[:b.n]); err != nil {
				p.mu.Lock()
				if p.sideErr == nil {
					p.sideErr = err
				}
				p.mu.Unlock()
			}
		}
		p.release(b)
	}
}

// release gives a block back once all are through with it.
func (p *pump) release(b *block) {
	if b.users.Add(-1) == 0 {
		p.free <- b
	}
}

func (p *pump) sideError() error {
	p.mu.Lock()
	defer p.mu.Unlock()
	return p.sideErr
}

// Read reads from the source. An error of a side is an error here.
func (p *pump) Read(buf []byte) (int, error) {
	for p.err == nil {
		if p.current == nil {
			b, ok := <-p.blocks
			if !ok {
				p.err = io.ErrClosedPipe
				break
			}
			p.current, p.at = b, 0
			if err := p.sideError(); err != nil {
				p.err = err
				break
			}
		}
		b := p.current
		if n := copy(buf, b.data[p.at:b.n]); n > 0 || len(buf) == 0 {
			p.at += n
			return n, nil
		}
		p.err = b.err
		p.current = nil
		p.release(b)
	}
	return 0, p.err
}

// wait waits until the sides have done all blocks, once the source is at its end, and gives their error.
func (p *pump) wait() error {
	p.sides.Wait()
	return p.sideError()
}

// close ends the pump, wherever it is. A source that hangs in Read is left behind.
func (p *pump) close() {
	p.once.Do(func() { close(p.stop) })
	p.sides.Wait()
}
