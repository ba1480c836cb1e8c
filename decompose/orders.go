package decompose

import (
	"fmt"
	"slices"
	"strings"
)

// Orders are what the user, the layout itself and an earlier result say about the nodes of one deck layer. The zero value says
// nothing. Package anchor makes them; see its documentation for where they come from.
type Orders struct {
	Anchors []Anchor
	// Holds is how many of the anchors, the last ones, hold what a frozen mask has, or keep off it what it has not.
	Holds   int
	Ties    []Tie    // a node may be tied to itself: it is under an order then
	Wishes  []Anchor // each node and mask once
	Waivers []Waiver
	// DescribeAnchor words where an anchor comes from ("anchors.toml:12: anchor "bias" puts (120, 340) nm in chip on A"), and so does
	// DescribeTie. They are called for messages only.
	DescribeAnchor func(Anchor) string
	DescribeTie    func(Tie) string
	// Memory is the mask of each node in the baseline: NoMemory, or 1 + mask. Nil: no baseline. Nodes that are stitched or were so
	// have none, since they do not count as moved.
	Memory []uint8
	// Remembered counts the shapes that the baseline knows, those that were stitched included.
	Remembered int64
}

// NoMemory is the entry of a node that the baseline does not know.
const NoMemory = 0

// Anchor holds a node on a mask, or wishes it there. Source is for whoever made it.
type Anchor struct {
	Node   uint32
	Mask   Mask
	Source uint32
}

// Tie holds two nodes on the same mask, or on opposite ones.
type Tie struct {
	A, B     uint32
	Opposite bool
	Source   uint32
}

// Waiver accepts the near pair of two nodes.
type Waiver struct {
	A, B         uint32
	Name, Reason string
}

// contradiction looks for orders that contradict each other without any near pair, and names the chain.
func (o *Orders) contradiction(nodes int) error {
	if len(o.Anchors)+len(o.Ties) == 0 {
		return nil
	}
	// What ties relate is one set; the set's mask is that of its root. Only where an order contradicts what came before it is the chain
	// looked for.
	held := make([]uint8, nodes) // by root: 0, or 1 + mask
	if len(o.Ties) == 0 {
		for i, a := range o.Anchors {
			if h := &held[a.Node]; *h == 0 {
				*h = 1 + uint8(a.Mask)
			} else if *h != 1+uint8(a.Mask) {
				return o.chain(nodes, o.Anchors[:i], nil, a.Node, uint32(nodes), o.DescribeAnchor(a))
			}
		}
		return nil
	}
	p := newParity(make([]uint32, nodes))
	for i, t := range o.Ties {
		if !p.relate(t.A, t.B, uint32(boolInt(t.Opposite))) {
			return o.chain(nodes, nil, o.Ties[:i], t.A, t.B, o.DescribeTie(t))
		}
	}
	for i, a := range o.Anchors {
		root, other := p.find(a.Node)
		want := 1 + (uint8(a.Mask) ^ uint8(other))
		if h := &held[root]; *h == 0 {
			*h = want
		} else if *h != want {
			return o.chain(nodes, o.Anchors[:i], o.Ties, a.Node, uint32(nodes), o.DescribeAnchor(a))
		}
	}
	return nil
}

// chain words the shortest chain of orders from a node to another, with the order that contradicts it. Node number `nodes` stands for
// the masks themselves: an anchor leads from its node there.
func (o *Orders) chain(nodes int, anchors []Anchor, ties []Tie, from, to uint32, last string) error {
	type link struct {
		to    uint32
		order int // place in ties, or behind them in anchors
	}
	links := map[uint32][]link{}
	join := func(a, b uint32, order int) {
		links[a] = append(links[a], link{b, order})
		links[b] = append(links[b], link{a, order})
	}
	for i, t := range ties {
		join(t.A, t.B, i)
	}
	for i, a := range anchors {
		join(a.Node, uint32(nodes), len(ties)+i)
	}
	back := map[uint32]link{from: {from, -1}}
	queue := []uint32{from}
	for len(queue) > 0 {
		at := queue[0]
		queue = queue[1:]
		for _, l := range links[at] {
			if _, seen := back[l.to]; !seen {
				back[l.to] = link{at, l.order}
				queue = append(queue, l.to)
			}
		}
	}
	var chain []string
	for at := to; at != from; at = back[at].to {
		if i := back[at].order; i < len(ties) {
			chain = append(chain, o.DescribeTie(ties[i]))
		} else {
			chain = append(chain, o.DescribeAnchor(anchors[i-len(ties)]))
		}
	}
	slices.Reverse(chain)
	return &OrderError{Msg: fmt.Sprintf("these orders contradict each other: %s; drop or change one of them", strings.Join(append(chain, last), " - "))}
}
