package arena

import (
	"os"
	"syscall"
	"unsafe"
)

// hugePage is MADV_HUGEPAGE (madvise(2), Linux), which package syscall does not name.
const hugePage = 14

// advise asks for large pages for the whole pages of b. It is advice: an error means that there are none.
func advise(b []byte) {
	page := uintptr(os.Getpagesize())
	skip := -uintptr(unsafe.Pointer(unsafe.SliceData(b))) & (page - 1)
	if uintptr(len(b)) < skip+page {
		return
	}
	b = b[skip:]
	b = b[:uintptr(len(b))&^(page-1)]
	_ = syscall.Madvise(b, hugePage)
}
