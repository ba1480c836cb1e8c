// Package arena gives large arrays without pointers straight from the system and gives them back at once.
//
// A decomposition needs few arrays, but each as large as the flattened layer. On the garbage-collected heap a dead one would stay
// until the next collection, and each page would be touched twice; here an array is mapped when its size is known, advised to use
// huge pages where the system offers them, and unmapped by Free. Where mapping is not available the heap serves.
package arena

import "unsafe"

// Array is a zeroed array of n elements of T, which must hold no pointers. It is not moved and not collected: call Free.
type Array[T any] struct {
	Data   []T
	memory []byte
}

// New maps an array. The pages are zero and cost nothing until they are written.
func New[T any](n int) *Array[T] {
	var one T
	size := n * int(unsafe.Sizeof(one))
	if size < smallest {
		return &Array[T]{Data: make([]T, n)}
	}
	memory := take(size)
	if memory == nil {
		return &Array[T]{Data: make([]T, n)}
	}
	return &Array[T]{Data: unsafe.Slice((*T)(unsafe.Pointer(unsafe.SliceData(memory))), n), memory: memory}
}

// Free gives the memory back. The array and all slices of it must not be used after that. A nil array is free already.
func (a *Array[T]) Free() {
	if a == nil {
		return
	}
	if a.memory != nil {
		give(a.memory)
	}
	a.Data, a.memory = nil, nil
}

// smallest is the size in bytes from which an array is mapped; below it the heap is cheaper.
const smallest = 1 << 18
