package verify

import (
	"slices"
	"strings"
)

// This file keeps what orders say about shapes: on A, on B, alike, opposite. Sets with parity find a contradiction as soon as
// it is said; the chain of orders behind it is the shortest way between its two ends.

// claims are the orders of one deck layer. Each unit (a shape, or a piece of one that arrived stitched) has a number; one
// more stands for mask A itself.
type claims struct {
	parent []uint32
	apart  []bool // from the parent: on the other mask
	links  map[uint32][]link
	ground uint32
	ties   []tieClaim
	masks  []maskClaim // in the order in which they were made
	on     []uint8     // by unit: 1 claimed for A, 2 for B
}

type link struct {
	to     uint32
	source source
}

type tieClaim struct {
	a, b     uint32
	opposite bool
	source   source
}

type maskClaim struct {
	unit   uint32
	mask   tag
	source source
}

// source says where an order comes from.
type source struct {
	kind  entryKind
	entry int32  // index into the list of the anchor file
	fig   uint32 // the figure, marker or probe by which it holds
}

func newClaims(units int) *claims {
	c := &claims{parent: newSets(units + 1), apart: make([]bool, units+1), links: map[uint32][]link{}, ground: uint32(units),
		on: make([]uint8, units)}
	return c
}

// root gives the root of a unit and whether the unit is on the other mask than it.
func (c *claims) root(u uint32) (uint32, bool) {
	apart := false
	for c.parent[u] != u {
		p := c.parent[u]
		if g := c.parent[p]; g != p {
			c.apart[u] = c.apart[u] != c.apart[p]
			c.parent[u] = g
		}
		apart = apart != c.apart[u]
		u = c.parent[u]
	}
	return u, apart
}

// relate says that two units are on one mask, or on opposite ones; false where that contradicts what was said before.
func (c *claims) relate(a, b uint32, opposite bool, s source) bool {
	ra, pa := c.root(a)
	rb, pb := c.root(b)
	if ra == rb {
		return (pa != pb) == opposite
	}
	c.parent[rb] = ra
	c.apart[rb] = (pa != pb) != opposite
	c.links[a] = append(c.links[a], link{b, s})
	c.links[b] = append(c.links[b], link{a, s})
	return true
}

// hold says that a unit is on a mask. The chain is not nil where that contradicts what was said before.
func (c *claims) hold(u uint32, mask tag, s source) (chain []source) {
	bit := uint8(1)
	if mask == tagB {
		bit = 2
	}
	if c.on[u]&bit != 0 {
		return nil
	}
	if !c.relate(u, c.ground, mask == tagB, s) {
		return append(c.chain(u, c.ground), s)
	}
	c.on[u] |= bit
	c.masks = append(c.masks, maskClaim{u, mask, s})
	return nil
}

// tie says that two units are alike or opposite.
func (c *claims) tie(a, b uint32, opposite bool, s source) (chain []source) {
	if !c.relate(a, b, opposite, s) {
		return append(c.chain(a, b), s)
	}
	if a != b {
		c.ties = append(c.ties, tieClaim{a, b, opposite, s})
	}
	return nil
}

// chain gives the sources along the shortest way from one unit to another.
func (c *claims) chain(from, to uint32) []source {
	type step struct {
		back uint32
		by   source
	}
	seen := map[uint32]step{from: {}}
	queue := []uint32{from}
	for len(queue) > 0 && from != to {
		u := queue[0]
		queue = queue[1:]
		for _, l := range c.links[u] {
			if _, ok := seen[l.to]; !ok {
				seen[l.to] = step{u, l.source}
				queue = append(queue, l.to)
			}
		}
		if _, ok := seen[to]; ok {
			break
		}
	}
	var out []source
	for u := to; u != from; u = seen[u].back {
		out = append(out, seen[u].by)
	}
	slices.Reverse(out)
	return out
}

// words joins a chain for a message; a long one is cut in the middle.
func words(chain []string) string {
	if len(chain) > 8 {
		chain = append(append(chain[:4:4], "..."), chain[len(chain)-3:]...)
	}
	return strings.Join(chain, "; ")
}
