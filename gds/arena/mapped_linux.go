package arena

import "syscall"

// take maps memory, on large pages where there are some; nil where it cannot.
func take(size int) []byte {
	memory, err := syscall.Mmap(-1, 0, size, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_ANON|syscall.MAP_PRIVATE)
	if err != nil {
		return nil
	}
	if size >= least {
		advise(memory)
	}
	return memory
}

// give unmaps a whole mapping of our own, which cannot fail.
func give(memory []byte) { _ = syscall.Munmap(memory) }
