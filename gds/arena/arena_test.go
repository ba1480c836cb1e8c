package arena

import "testing"

func TestMake(t *testing.T) {
	for _, capacity := range []int{0, 1, 1000, least - 1, least, least + 4097, 5 << 20} {
		s := Make[byte](capacity/2, capacity)
		if len(s) != capacity/2 || cap(s) != capacity {
			t.Fatalf("Make(%d, %d) has length %d and capacity %d", capacity/2, capacity, len(s), cap(s))
		}
		s = s[:capacity]
		for i := range s {
			if s[i] != 0 {
				t.Fatalf("byte %d of %d is not zero", i, capacity)
			}
			s[i] = byte(i)
		}
		for i := range s {
			if s[i] != byte(i) {
				t.Fatalf("byte %d of %d was lost", i, capacity)
			}
		}
	}
	type item struct {
		a int64
		b string
	}
	if s := Make[item](3, 1<<20); len(s) != 3 || cap(s) != 1<<20 || s[2] != (item{}) {
		t.Fatal("a slice of structs is not as make would give it")
	}
}

func BenchmarkFill(b *testing.B) {
	const n = 8 << 20
	b.SetBytes(8 * n)
	for b.Loop() {
		s := Make[uint64](0, n)
		for i := range uint64(n) {
			s = append(s, i)
		}
	}
}
