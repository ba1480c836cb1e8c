package decompose

import "sync/atomic"

// union is a union-find over ordinals that workers may use at once. The root of a set is its least ordinal, whatever the order of
// the calls, because a root is only ever hung under a smaller one (compare-and-swap, path halving).
type union []uint32

func newUnion(u union) union { return newUnionBy(1, u) }

// newUnionBy is newUnion with several workers.
func newUnionBy(jobs int, u union) union {
	each(jobs, func(w int) {
		for i := len(u) * w / jobs; i < len(u)*(w+1)/jobs; i++ {
			u[i] = uint32(i)
		}
	})
	return u
}

// find gives the root of a set as it is at some moment of the call.
func (u union) find(a uint32) uint32 {
	root, _ := u.follow(a)
	return root
}

// follow is find; it also says how many links it followed.
func (u union) follow(a uint32) (root uint32, links int64) {
	for {
		p := atomic.LoadUint32(&u[a])
		if p == a {
			return a, links
		}
		links++
		g := atomic.LoadUint32(&u[p])
		if g != p {
			// Losing the race to another worker loses only a short cut.
			atomic.CompareAndSwapUint32(&u[a], p, g)
		}
		a = g
	}
}

// join makes one set of two, and says how many links it followed.
func (u union) join(a, b uint32) (links int64) {
	for {
		var more, still int64
		a, more = u.follow(a)
		b, still = u.follow(b)
		links += more + still
		if a == b {
			return links
		}
		if a > b {
			a, b = b, a
		}
		if atomic.CompareAndSwapUint32(&u[b], b, a) {
			return links
		}
	}
}

// number replaces each entry by the number of its set, dealt by least ordinal, and returns how many there are. The union-find is
// gone then.
func (u union) number() uint32 {
	sets := uint32(0)
	for i := range u {
		if p := u[i]; p == uint32(i) {
			u[i] = sets
			sets++
		} else {
			u[i] = u[p] // p < i, so it holds its number already
		}
	}
	return sets
}
