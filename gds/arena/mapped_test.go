package arena

import "testing"

func TestArraysAreZeroAndOfTheSizeAskedFor(t *testing.T) {
	for _, n := range []int{0, 1, 1 << 10, 1 << 17, 3<<20 + 1} {
		a := New[uint32](n)
		if len(a.Data) != n {
			t.Fatalf("%d elements, want %d", len(a.Data), n)
		}
		for i := range a.Data {
			if a.Data[i] != 0 {
				t.Fatalf("element %d of %d is %d", i, n, a.Data[i])
			}
			a.Data[i] = uint32(i)
		}
		a.Free()
		a.Free()
		if a.Data != nil {
			t.Error("there is data after Free")
		}
	}
	var none *Array[int64]
	none.Free()
}
