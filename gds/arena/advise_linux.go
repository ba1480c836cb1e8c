package arena

import (
	"os"
	"syscall"
	"unsafe"
)

// hugePage is MADV_HUGEPAGE (madvise(2), Linux), which package syscall does not name.
const hugePage = 14

// advise asks for large pages for the whole pages of b. It is advice: an error means that there are none.
func advise(b []byte) { _ = syscall.Madvise(wholePages(b), hugePage) }

// forget gives the whole pages of b back to the system until they are touched again; they are zero then. An error means that they stay.
func forget(b []byte) { _ = syscall.Madvise(wholePages(b), syscall.MADV_DONTNEED) }

// wholePages gives the part of b that is made of whole pages.
func wholePages(b []byte) []byte {
	page := uintptr(os.Getpagesize())
	skip := -uintptr(unsafe.Pointer(unsafe.SliceData(b))) & (page - 1)
	if uintptr(len(b)) < skip+page {
		return nil
	}
	b = b[skip:]
	return b[:uintptr(len(b))&^(page-1)]
}
