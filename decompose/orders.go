package decompose

import (
	"fmt"
	"strings"
)

// Orders are what the user, the layout itself and an earlier result say about the nodes of one deck layer. The zero value says
// nothing. Package anchor makes them; see its documentation for where they come from.
type Orders struct {
	Anchors []Anchor
	Ties    []Tie
	Wishes  []Anchor
	Waivers []Waiver
	// Describe words where an order comes from ("anchors.toml:12, anchor bias, at (120, 340) nm"); it is called for messages only.
	Describe func(source int32) string
	// Memory is the mask of each node in the baseline: NoMemory, or 1 + mask. Nil: no baseline.
	Memory []uint8
}

// NoMemory is the entry of a node that the baseline does not know.
const NoMemory = 0

// Anchor holds a node on a mask, or wishes it there.
type Anchor struct {
	Node   uint32
	Mask   Mask
	Source int32
}

// Tie holds two nodes on the same mask, or on opposite ones.
type Tie struct {
	A, B     uint32
	Opposite bool
	Source   int32
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
	// Orders as a graph: nodes and the two masks (numbered behind them), links with their sources. A link that contradicts what is
	// known closes a chain: the way between its ends through earlier links, and itself.
	p := newParity(make([]uint32, nodes+1))
	ground := uint32(nodes)
	type link struct {
		to, apart uint32
		source    int32
	}
	links := map[uint32][]link{}
	add := func(a, b, apart uint32, source int32) error {
		if p.relate(a, b, apart) {
			if a != b {
				links[a] = append(links[a], link{b, apart, source})
				links[b] = append(links[b], link{a, apart, source})
			}
			return nil
		}
		// Breadth first from a to b.
		type step struct {
			from   uint32
			source int32
		}
		back := map[uint32]step{a: {a, -1}}
		queue := []uint32{a}
		for len(queue) > 0 && a != b {
			at := queue[0]
			queue = queue[1:]
			if at == b {
				break
			}
			for _, l := range links[at] {
				if _, seen := back[l.to]; !seen {
					back[l.to] = step{at, l.source}
					queue = append(queue, l.to)
				}
			}
		}
		var chain []string
		for at := b; at != a; at = back[at].from {
			chain = append(chain, o.Describe(back[at].source))
		}
		chain = append(chain, o.Describe(source))
		return &OrderError{Msg: fmt.Sprintf("these orders contradict each other: %s; drop or change one of them", strings.Join(chain, " - "))}
	}
	for _, t := range o.Ties {
		apart := uint32(0)
		if t.Opposite {
			apart = 1
		}
		if err := add(t.A, t.B, apart, t.Source); err != nil {
			return err
		}
	}
	for _, a := range o.Anchors {
		if err := add(a.Node, ground, uint32(a.Mask), a.Source); err != nil {
			return err
		}
	}
	return nil
}
