package arena

import (
	"syscall"
	"unsafe"
)

// largePage is the size in bytes of a large page.
const largePage = 2 << 20

// take maps memory, on large pages where that pays; none where it cannot. It begins where a large page begins, and where little is lost
// its size is made whole large pages.
func take(size int) mapping {
	if size < largePage/2 {
		return mapped(size, 0)
	}
	if whole := (size + largePage - 1) &^ (largePage - 1); whole-size <= size/4 {
		size = whole
	}
	m := mapped(size+largePage, size)
	if m.usable != nil {
		advise(m.usable)
	}
	return m
}

// mapped maps so many bytes; where aligned is not 0, so many of them are usable from where a large page begins. What is not touched
// takes no memory.
func mapped(size, aligned int) mapping {
	whole, err := syscall.Mmap(-1, 0, size, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_ANON|syscall.MAP_PRIVATE)
	if err != nil {
		return mapping{}
	}
	if aligned == 0 {
		return mapping{whole, whole}
	}
	skip := int(-uintptr(unsafe.Pointer(unsafe.SliceData(whole))) & (largePage - 1))
	return mapping{whole, whole[skip : skip+aligned : skip+aligned]}
}

// give unmaps a whole mapping of our own, which cannot fail.
func give(m mapping) {
	if m.whole != nil {
		_ = syscall.Munmap(m.whole)
	}
}
