package arena

import "unsafe"

// Array is a zeroed array of T, which must hold no pointers, mapped straight from the system: it is given back at once by Free, where a
// dead slice on the heap would stay until the next collection. Where mapping is not available the heap serves.
type Array[T any] struct {
	Data   []T
	memory mapping
}

// mapping is memory from the system; the zero value is none.
type mapping struct {
	whole  []byte // to be given back
	usable []byte // of it
}

// smallest is the size in bytes from which an array is mapped; below it the heap is cheaper.
const smallest = 1 << 18

// New maps an array of n elements. Its pages are zero and cost nothing until they are written.
func New[T any](n int) *Array[T] {
	var one T
	size := n * int(unsafe.Sizeof(one))
	if size < smallest {
		return &Array[T]{Data: make([]T, n)}
	}
	m := take(size)
	if m.usable == nil {
		return &Array[T]{Data: make([]T, n)}
	}
	return &Array[T]{Data: unsafe.Slice((*T)(unsafe.Pointer(unsafe.SliceData(m.usable))), n), memory: m}
}

// Free gives the memory back. The array and all slices of it must not be used after that. A nil array is free already.
func (a *Array[T]) Free() {
	if a == nil {
		return
	}
	give(a.memory)
	a.Data, a.memory = nil, mapping{}
}
