package exact

// This file holds what goes into Solve and what comes out: plain data, and the cost of an assignment, computed straight from the problem.

// Edge asks that nodes U and V be on opposite masks (Same false) or on the same mask (Same true); breaking it costs Weight. An edge of weight 0 or less is ignored.
type Edge struct {
	U, V   int32
	Weight int64
	Same   bool
}

// Problem is a graph whose nodes are to be put on masks A (0) and B (1) at least cost. Parallel edges and loops are allowed; a loop of the opposite kind always costs.
//
// The caller guarantees that node numbers are in range, that costs are not negative, and that the sum of all weights and costs, as often as they count, is below 2^62, so that no sum formed here
// overflows. Solve only reads the problem.
type Problem struct {
	Nodes int
	Edges []Edge
	Fixed []int8     // nil, or per node: -1 free, 0 held on mask A, 1 held on mask B
	Cost  [][2]int64 // nil, or per node: what mask A costs, what mask B costs

	// A further aim behind all these. Weights and costs count Unit times (0 stands for 1), what is in Lesser once; so an assignment is least in the first aims whatever is in
	// Lesser, if the sum of that is below Unit.
	Unit   int64
	Lesser [][2]int64 // nil, or per node: what mask A costs, what mask B costs
}

func (p *Problem) unit() int64 { return max(p.Unit, 1) }

// costs tells whether masks have costs.
func (p *Problem) costs() bool { return p.Cost != nil || p.Lesser != nil }

// cost gives what each mask costs a node.
func (p *Problem) cost(i int32) (c [2]int64) {
	if p.Cost != nil {
		u := p.unit()
		c = [2]int64{p.Cost[i][0] * u, p.Cost[i][1] * u}
	}
	if p.Lesser != nil {
		c[0] += p.Lesser[i][0]
		c[1] += p.Lesser[i][1]
	}
	return c
}

// Solution is an assignment with what is known about it.
type Solution struct {
	Masks      []uint8 // per node: 0 mask A, 1 mask B
	Cost       int64   // of Masks
	LowerBound int64   // no assignment costs less
	Proved     bool    // Cost == LowerBound
	Work       int64   // counted against the budget; it may pass it by a number of steps linear in the graph
	Width      int     // largest number of neighbours that a node had when it was eliminated, or at which elimination was given up
}

// CostOf is the cost of an assignment that respects Fixed: the weights of the broken edges and the costs of the masks taken.
func (p *Problem) CostOf(masks []uint8) int64 {
	var sum int64
	for i := range p.Edges {
		if e := &p.Edges[i]; e.Weight > 0 && (masks[e.U] == masks[e.V]) != e.Same {
			sum += e.Weight
		}
	}
	for i, c := range p.Cost {
		sum += c[masks[i]]
	}
	sum *= p.unit()
	for i, c := range p.Lesser {
		sum += c[masks[i]]
	}
	return sum
}

// fixed tells the mask on which a node is held, or -1.
func (p *Problem) fixed(i int32) int8 {
	if p.Fixed == nil {
		return -1
	}
	return p.Fixed[i]
}
