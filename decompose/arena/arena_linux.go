package arena

import "syscall"

const adviseHugePages = 14 // MADV_HUGEPAGE, Linux madvise(2)

func take(size int) []byte {
	memory, err := syscall.Mmap(-1, 0, size, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_ANON|syscall.MAP_PRIVATE)
	if err != nil {
		return nil
	}
	// The advice may be refused; the memory is good all the same.
	_ = syscall.Madvise(memory, adviseHugePages)
	return memory
}

func give(memory []byte) {
	// Unmapping a whole mapping of our own cannot fail.
	_ = syscall.Munmap(memory)
}
