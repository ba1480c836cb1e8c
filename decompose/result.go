package decompose

// Mask is one of the two exposure masks.
type Mask uint8

const (
	A Mask = 0
	B Mask = 1
)

// String gives "A" or "B".
func (m Mask) String() string { return string(rune('A' + m)) }

// Other is the opposite mask.
func (m Mask) Other() Mask { return m ^ 1 }

// Box is an axis-parallel box in half database units of a top: whole units are even, sides of a path of odd width may be odd.
type Box struct{ X1, Y1, X2, Y2 int64 }

// Spot is a point in half database units of a top.
type Spot struct{ X, Y int64 }

// Result says what a decomposition came to, layer by layer in deck order. It does not depend on the number of workers or the run.
type Result struct {
	Tops   []string // names of the tops, in file order
	Layers []LayerResult
}

// LayerResult is what one deck layer came to. Its counts are sums over the tops; areas are square database units.
type LayerResult struct {
	Name                 string
	Spacing              int64 // same-mask spacing, database units
	Figures              int64 // drawn figures, flat
	AlreadyMaskedFigures int64
	RoundedFigures       int64 // flat figures whose coordinates were rounded to whole units
	Shapes               int64
	NearPairs            int64
	Components           int64
	UnresolvedComponents int64
	JointClashes         int64
	UnresolvedPairs      int64
	WaivedPairs          int64
	AnyMaskPairs         int64
	LowerBound           int64
	ProvedOptimal        bool // UnresolvedPairs == LowerBound
	AreaA, AreaB         float64
	Stitches             int64
	StitchesBound        int64 // no assignment with as few unresolved pairs has fewer stitches
	AimsProved           bool  // stitches, moved shapes and wishes are proved best as well
	AnchoredShapes       int64
	MovedShapes          int64
	BaselineShapes       int64
	Wishes, WishesKept   int64
	Unresolved           []Unresolved // one per unresolved component, by place
	Waived               []WaivedPair
	AnyMask              []Pair           // nearer than any_mask_spacing
	SameShape            []SameShapePlace // where the deck asks for it: what no mask can help
	Moved                []MovedShape
	Frozen               []FrozenFault // where a mask that is already made does not allow what is drawn
	Drawing              *Drawing      // nil: not asked for
}

// Cause tells why a component is unresolved.
type Cause uint8

const (
	OddCycle Cause = iota
	OrderClash
)

// String gives the name that the report uses.
func (c Cause) String() string {
	if c == OrderClash {
		return "order_clash"
	}
	return "odd_cycle"
}

// Unresolved is a component that two masks cannot do.
type Unresolved struct {
	Top           string
	Component     int64 // number of the component in its layer, in order of its least flat figure
	Shapes        int64 // in the component
	Cause         Cause
	Cycle         []CycleShape // smallest odd cycle through the pairs, or shortest path between the orders, in order
	node          uint32       // one of its nodes
	Repair        []Pair       // the gaps that lack least in total: widened by Widen, they leave what two masks can do; one component of a group has it
	Pairs         []Pair       // near pairs left on one mask
	Candidates    []StitchCandidate
	LeastStitches []int    // indices into Candidates; nil where no set resolves
	NotComputed   []string // what would have taken more counted work than there is: "cycle" (there is one, perhaps not the smallest), "repair", "resolves", "least_stitches"
	NoCandidate   string   // which rule forbids a stitch, where there is no candidate
	LowerBound    int64
	Proved        bool
	Group         int64  // components that are equal up to translation and the eight orientations share a number
	Cell          string // lowest cell that holds the component
	CellTransform string // how that cell is placed in the top, in words
	CellPlace     Spot   // place of the component in the coordinates of that cell, half units
}

// CycleShape is one shape of a cycle.
type CycleShape struct {
	Box  Box
	Mask Mask
}

// Edge is an edge of an outline by its ends.
type Edge [2]Spot

// Pair is a near pair as the report names it.
type Pair struct {
	A, B       Box
	DistanceSq float64 // square database units; exact where a whole or half number of units
	From, To   Spot    // where A and B come nearest
	Gap        Box     // between them
	Widen      int64   // database units by which the gap must widen; 0: unknown
	Rule       string  // the rule of the deck that made the pair
	Spacing    int64   // what that rule asks for, database units
	EdgeA      Edge    // the edge of A that the rule looks at, where it is one by what faces what; both ends are one point at a corner
	EdgeB      Edge    // of B
	Top        string
	Mask       Mask // of A; an unresolved pair is on one mask
	MaskB      Mask // of B
}

// WaivedPair is an unresolved pair that the user accepts.
type WaivedPair struct {
	Pair
	Name, Reason string
}

// MovedShape is a shape that was on the other mask in the baseline.
type MovedShape struct {
	Top      string
	Box      Box
	Was, Now Mask
	Why      string
}

// StitchCandidate is a place where a shape could be cut.
type StitchCandidate struct {
	Box      Box
	Overlap  int64 // database units
	Resolves bool  // alone
	Made     bool  // it is cut in the output
}

// FigureClass numbers the roles that layers of the stream have for one deck layer.
type FigureClass = uint8
