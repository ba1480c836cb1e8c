package decompose

import "math/bits"

// occupancy is a set of bucket numbers that finds the next one at once, however far it is: a bitmap with two summaries above it. A
// wire as long as the chip thus passes over empty buckets without looking at each.
type occupancy struct {
	words  []uint64
	above  []uint64
	summit []uint64
}

func (o *occupancy) resize(n int) {
	w := (n + 63) / 64
	a := (w + 63) / 64
	o.words, o.above, o.summit = make([]uint64, w), make([]uint64, a), make([]uint64, (a+63)/64)
}

func (o *occupancy) clear() {
	clear(o.words)
	clear(o.above)
	clear(o.summit)
}

func (o *occupancy) set(i uint32) {
	o.words[i>>6] |= 1 << (i & 63)
	o.above[i>>12] |= 1 << (i >> 6 & 63)
	o.summit[i>>18] |= 1 << (i >> 12 & 63)
}

func (o *occupancy) unset(i uint32) {
	o.words[i>>6] &^= 1 << (i & 63)
	if o.words[i>>6] != 0 {
		return
	}
	o.above[i>>12] &^= 1 << (i >> 6 & 63)
	if o.above[i>>12] == 0 {
		o.summit[i>>18] &^= 1 << (i >> 12 & 63)
	}
}

// next gives the least member that is at least i, or false.
func (o *occupancy) next(i uint32) (uint32, bool) {
	if int(i>>6) >= len(o.words) {
		return 0, false
	}
	if w := o.words[i>>6] >> (i & 63); w != 0 {
		return i + uint32(bits.TrailingZeros64(w)), true
	}
	i = i>>6 + 1
	if int(i>>6) >= len(o.above) {
		return 0, false
	}
	if w := o.above[i>>6] >> (i & 63); w != 0 {
		return o.lowest(i + uint32(bits.TrailingZeros64(w))), true
	}
	i = i>>6 + 1
	if int(i>>6) >= len(o.summit) {
		return 0, false
	}
	w := o.summit[i>>6] >> (i & 63)
	for i = i>>6<<6 | i&63; w == 0; w = o.summit[i>>6] {
		i = (i>>6 + 1) << 6
		if int(i>>6) >= len(o.summit) {
			return 0, false
		}
	}
	a := i + uint32(bits.TrailingZeros64(w))
	return o.lowest(a<<6 + uint32(bits.TrailingZeros64(o.above[a]))), true
}

// lowest gives the least member in a word that has one.
func (o *occupancy) lowest(word uint32) uint32 {
	return word<<6 + uint32(bits.TrailingZeros64(o.words[word]))
}
