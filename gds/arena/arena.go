// Package arena makes large slices that are cheap to fill.
//
// The first touch of a page of memory is a trip into the operating system, and for the tables of a layout these trips cost
// more than the work. On pages of 2 MiB there are 512 times fewer of them. So the slices made here are ordinary Go memory,
// collected as any other, about which the system is asked for large pages. Where it offers none nothing is lost. Room that
// is never touched takes no memory.
//
// An Array is memory straight from the system, given back at once; a Slab deals its memory out to many slices that are given up
// together, and again.
package arena

import "unsafe"

// least is the size in bytes from which large pages are asked for: two of them.
const least = 4 << 20

// Make gives a slice as make does.
func Make[T any](length, capacity int) []T {
	s := make([]T, length, capacity)
	var item T
	if size := uintptr(capacity) * unsafe.Sizeof(item); size >= least {
		advise(unsafe.Slice((*byte)(unsafe.Pointer(unsafe.SliceData(s))), size))
	}
	return s
}
