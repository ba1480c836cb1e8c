package twin

import (
	"encoding/json"
	"fmt"
	"math"
	"math/big"
	"slices"
	"unicode/utf8"
)

// This file holds a report against the solution and against what the output turned out to be.

// Report is what is read of report.json.
type Report struct {
	Input struct {
		Bytes int64    `json:"bytes"`
		DBU   float64  `json:"dbu_m"`
		Top   []string `json:"top"`
	} `json:"input"`
	Layers []ReportLayer `json:"layers"`
}

// ReportLayer is a deck layer in report.json. What the contract has always there is a pointer, so that it is missed.
type ReportLayer struct {
	Name                 string `json:"name"`
	Spacing              *int64 `json:"same_mask_spacing_dbu"`
	Figures              *int   `json:"figures"`
	AlreadyMasked        *int   `json:"already_masked_figures"`
	Shapes               *int   `json:"shapes"`
	NearPairs            *int   `json:"near_pairs"`
	Components           *int   `json:"components"`
	UnresolvedComponents *int   `json:"unresolved_components"`
	JointClashes         *int   `json:"joint_clashes"`
	UnresolvedPairs      *int   `json:"unresolved_pairs"`
	WaivedPairs          *int   `json:"waived_pairs"`
	AnyMaskPairs         *int   `json:"any_mask_pairs"`
	LowerBound           *int   `json:"lower_bound"`
	ProvedOptimal        *bool  `json:"proved_optimal"`
	Area                 *struct {
		A *float64 `json:"a"`
		B *float64 `json:"b"`
	} `json:"mask_area_dbu2"`
	Stitches       *int `json:"stitches"`
	AnchoredShapes *int `json:"anchored_shapes"`
	MovedShapes    *int `json:"moved_shapes"`
	BaselineShapes *int `json:"baseline_shapes"`
	Wishes         *int `json:"wishes"`
	WishesKept     *int `json:"wishes_kept"`
	Unresolved     []struct {
		Top       string `json:"top"`
		Component *int   `json:"component"`
		Cause     string `json:"cause"`
		Cycle     []struct {
			Box  [4]float64 `json:"box"`
			Mask string     `json:"mask"`
		} `json:"cycle"`
		Pairs []struct {
			A          [4]float64 `json:"a"`
			B          [4]float64 `json:"b"`
			DistanceSq float64    `json:"distance_sq_dbu2"`
			From       [2]float64 `json:"from"`
			To         [2]float64 `json:"to"`
			Widen      *int64     `json:"widen_dbu"`
		} `json:"pairs"`
		Candidates []struct {
			Box [4]float64 `json:"box"`
		} `json:"stitch_candidates"`
		LeastStitches []int `json:"least_stitches"`
		Group         *int  `json:"group"`
	} `json:"unresolved"`
}

// ParseReport reads report.json.
func ParseReport(text []byte) (*Report, error) {
	r := &Report{}
	return r, json.Unmarshal(text, r)
}

// CheckReport judges a report. Without a verdict (no output was asked for) masks, areas and the pairs that stay are not
// looked at, but for their number.
func (s *Solution) CheckReport(r *Report, v *Verdict) error {
	if len(r.Layers) != len(s.Layers) {
		return fmt.Errorf("the report has %d layers, want %d", len(r.Layers), len(s.Layers))
	}
	tops := s.tops()
	if slices.ContainsFunc(tops, func(name string) bool { return !utf8.ValidString(name) }) {
		tops = slices.Clone(r.Input.Top) // JSON cannot hold such a name as it is
	}
	got := slices.Clone(r.Input.Top)
	slices.Sort(tops)
	slices.Sort(got)
	if !slices.Equal(tops, got) {
		return fmt.Errorf("the report has the tops %q, want %q", got, tops)
	}
	for i := range s.Layers {
		var masks []Mask
		if v != nil {
			masks = v.Masks[i]
		}
		if err := s.checkReport(&s.Layers[i], &r.Layers[i], masks); err != nil {
			return fmt.Errorf("report, %s: %v", s.Layers[i].Name, err)
		}
	}
	return nil
}

func (s *Solution) checkReport(l *LayerSolution, r *ReportLayer, masks []Mask) error {
	if r.Name != l.Name || r.Spacing == nil || *r.Spacing != l.Spacing {
		return fmt.Errorf("name or spacing differ")
	}
	if r.ProvedOptimal == nil || r.Area == nil || r.Area.A == nil || r.Area.B == nil {
		return fmt.Errorf("proved_optimal or mask_area_dbu2 is missing")
	}
	type row struct {
		key  string
		got  *int
		want int
	}
	rows := []row{
		{"figures", r.Figures, l.Drawn},
		{"already_masked_figures", r.AlreadyMasked, l.Masked},
		{"joint_clashes", r.JointClashes, 0},
		{"waived_pairs", r.WaivedPairs, 0},
		{"anchored_shapes", r.AnchoredShapes, Unknown},
		{"moved_shapes", r.MovedShapes, 0},
		{"baseline_shapes", r.BaselineShapes, 0},
		{"wishes", r.Wishes, 0},
		{"wishes_kept", r.WishesKept, 0},
		{"shapes", r.Shapes, len(l.Shapes)},
		{"near_pairs", r.NearPairs, len(l.Pairs)},
		{"components", r.Components, len(l.Components)},
		{"any_mask_pairs", r.AnyMaskPairs, l.AnyMask},
		{"unresolved_components", r.UnresolvedComponents, l.Unresolved},
		{"unresolved_pairs", r.UnresolvedPairs, l.Least},
		{"lower_bound", r.LowerBound, l.Least},
		{"stitches", r.Stitches, 0},
	}
	if s.Open != "" {
		rows = rows[:9]
	}
	if l.Faded > 0 {
		rows[0].want, rows[1].want = Unknown, Unknown
	}
	for _, row := range rows {
		if row.got == nil {
			return fmt.Errorf("%s is missing", row.key)
		}
		if row.want != Unknown && *row.got != row.want {
			return fmt.Errorf("%s is %d, want %d", row.key, *row.got, row.want)
		}
	}
	if s.Open != "" {
		return nil
	}
	if !*r.ProvedOptimal && l.WidestComponent <= MostShapes {
		return fmt.Errorf("proved_optimal is false with components of at most %d shapes", l.WidestComponent)
	}
	if masks == nil {
		return nil
	}
	for m, got := range map[Mask]float64{A: *r.Area.A, B: *r.Area.B} {
		want := l.area(masks, m)
		// Sums of floats of slanted figures may be off in their last digits.
		if w, exact := want.Float64(); got != w && (exact && want.IsInt() && !l.slanted() || math.Abs(got-w) > 1e-9*w) {
			return fmt.Errorf("mask_area_dbu2 of %v is %v, want %s", m, got, want.RatString())
		}
	}
	if slices.ContainsFunc(s.tops(), func(name string) bool { return !utf8.ValidString(name) }) {
		return nil // the entries name their tops otherwise
	}
	return l.checkUnresolved(r, masks)
}

// slanted tells whether any figure of the layer is no plain rectangle.
func (l *LayerSolution) slanted() bool {
	return slices.ContainsFunc(l.Figures, func(f Figure) bool { return f.region != nil && !f.region.box })
}

// area gives the merged area on a mask. Shapes do not overlap each other.
func (l *LayerSolution) area(masks []Mask, m Mask) *big.Rat {
	sum := new(big.Rat)
	for k, sh := range l.Shapes {
		if masks[k] != m {
			continue
		}
		var regions []*region
		for _, i := range sh.Figures {
			regions = append(regions, l.Figures[i].region)
		}
		sum.Add(sum, unionArea(regions))
	}
	return sum
}

// boxOf gives the bounding box of a shape in database units, as a report has it.
func (l *LayerSolution) boxOf(shape int) [4]float64 {
	low, high := l.bounds(shape)
	return [4]float64{float64(low.x) / 2, float64(low.y) / 2, float64(high.x) / 2, float64(high.y) / 2}
}

// checkUnresolved judges the entries of unresolved components.
func (l *LayerSolution) checkUnresolved(r *ReportLayer, masks []Mask) error {
	type named struct {
		top  string
		a, b [4]float64
		d    string
	}
	order := func(a, b [4]float64) bool { return slices.Compare(a[:], b[:]) > 0 }
	key := func(top string, a, b [4]float64, d float64) named {
		if order(a, b) {
			a, b = b, a
		}
		return named{top, a, b, fmt.Sprintf("%.6g", d)}
	}
	want := map[named]int{}
	stuck := map[int]bool{}
	for _, p := range l.Pairs {
		if masks[p.A] == masks[p.B] {
			d, _ := p.Distance.Float64()
			want[key(l.Shapes[p.A].Top, l.boxOf(p.A), l.boxOf(p.B), d)]++
			stuck[l.Shapes[p.A].Component] = true
		}
	}
	if len(r.Unresolved) != len(stuck) {
		return fmt.Errorf("unresolved has %d entries for %d components", len(r.Unresolved), len(stuck))
	}
	for i, u := range r.Unresolved {
		where := fmt.Sprintf("unresolved[%d]", i)
		if len(u.Pairs) == 0 {
			return fmt.Errorf("%s has no pairs", where)
		}
		for _, p := range u.Pairs {
			k := key(u.Top, p.A, p.B, p.DistanceSq)
			if want[k] == 0 {
				return fmt.Errorf("%s: the pair %v is no near pair on one mask, or is named twice, or its distance differs; such pairs are %v", where, k, want)
			}
			want[k]--
			dx, dy := p.From[0]-p.To[0], p.From[1]-p.To[1]
			// from and to are rounded to half units
			if d := math.Hypot(dx, dy); math.Abs(d-math.Sqrt(p.DistanceSq)) > 1.5 {
				return fmt.Errorf("%s: from %v to %v is %g, the distance is %g", where, p.From, p.To, d, math.Sqrt(p.DistanceSq))
			}
		}
		for _, p := range u.Pairs {
			if w := l.widen(p.DistanceSq); p.Widen == nil || *p.Widen != w {
				return fmt.Errorf("%s: a pair at a square distance of %g must widen by %d, want %d", where, p.DistanceSq, *p.Widen, w)
			}
		}
		var cycle [][4]float64
		for _, c := range u.Cycle {
			k := l.shapeAt(u.Top, c.Box)
			if k < 0 {
				return fmt.Errorf("%s: no shape has the box %v of the cycle", where, c.Box)
			}
			cycle = append(cycle, c.Box)
			if !l.hasMask(masks, u.Top, c.Box, c.Mask) {
				return fmt.Errorf("%s: the shape at %v is not on mask %s", where, c.Box, c.Mask)
			}
		}
		if u.Cause != "odd_cycle" && u.Cause != "order_clash" {
			return fmt.Errorf("%s: the cause is %q", where, u.Cause)
		}
		if u.Cause == "odd_cycle" && (len(cycle) < 3 || len(cycle)%2 == 0) {
			return fmt.Errorf("%s: an odd cycle of %d shapes", where, len(cycle))
		}
		for j := range cycle {
			if j == 0 && u.Cause != "odd_cycle" {
				continue
			}
			before := cycle[(j+len(cycle)-1)%len(cycle)]
			if !l.near(u.Top, before, cycle[j]) {
				return fmt.Errorf("%s: %v and %v follow in the cycle and are no near pair", where, before, cycle[j])
			}
		}
	}
	for i, u := range r.Unresolved {
		if u.Cause != "odd_cycle" {
			continue
		}
		least := 0
		through := false
		for _, p := range u.Pairs {
			for _, pair := range l.Pairs {
				x, y := l.boxOf(pair.A), l.boxOf(pair.B)
				if l.Shapes[pair.A].Top == u.Top && masks[pair.A] == masks[pair.B] && (x == p.A && y == p.B || x == p.B && y == p.A) {
					if n := l.oddCycle(pair); n > 0 && (least == 0 || n < least) {
						least = n
					}
				}
			}
			for j := range u.Cycle {
				a, b := u.Cycle[j].Box, u.Cycle[(j+1)%len(u.Cycle)].Box
				through = through || a == p.A && b == p.B || a == p.B && b == p.A
			}
		}
		if len(u.Cycle) != least || !through {
			return fmt.Errorf("unresolved[%d]: a cycle of %d shapes, through one of its pairs: %v; the smallest odd cycle through one has %d", i, len(u.Cycle), through, least)
		}
	}
	for k, n := range want {
		if n != 0 {
			return fmt.Errorf("the pair %v stayed on one mask and is not in the report", k)
		}
	}
	return nil
}

func (l *LayerSolution) shapeAt(top string, box [4]float64) int {
	for k := range l.Shapes {
		if l.Shapes[k].Top == top && l.boxOf(k) == box {
			return k
		}
	}
	return -1
}

// hasMask tells whether a shape of that box is on that mask; shapes may share a box.
func (l *LayerSolution) hasMask(masks []Mask, top string, box [4]float64, mask string) bool {
	for k := range l.Shapes {
		if l.Shapes[k].Top == top && l.boxOf(k) == box && masks[k].String() == mask {
			return true
		}
	}
	return false
}

// near tells whether shapes of two boxes are a near pair.
func (l *LayerSolution) near(top string, a, b [4]float64) bool {
	for _, p := range l.Pairs {
		x, y := l.boxOf(p.A), l.boxOf(p.B)
		if l.Shapes[p.A].Top == top && (x == a && y == b || x == b && y == a) {
			return true
		}
	}
	return false
}

// widen gives by how many whole units a distance falls short of the spacing.
func (l *LayerSolution) widen(square float64) int64 {
	d := math.Sqrt(square)
	w := int64(math.Ceil(float64(l.Spacing) - d - 1e-9))
	return max(w, 1)
}

// oddCycle gives the length of the shortest odd cycle through a pair, 0 where there is none: longer and longer paths are
// tried.
func (l *LayerSolution) oddCycle(pair NearPair) int {
	c := &l.Components[l.Shapes[pair.A].Component]
	neighbours := map[int][]int{}
	for _, i := range c.Pairs {
		p := l.Pairs[i]
		neighbours[p.A] = append(neighbours[p.A], p.B)
		neighbours[p.B] = append(neighbours[p.B], p.A)
	}
	on := map[int]bool{}
	var reaches func(k, left int) bool
	reaches = func(k, left int) bool {
		if k == pair.B {
			return left == 0
		}
		if left == 0 || on[k] {
			return false
		}
		on[k] = true
		defer delete(on, k)
		return slices.ContainsFunc(neighbours[k], func(n int) bool { return reaches(n, left-1) })
	}
	for length := 2; length < len(c.Shapes); length += 2 {
		if reaches(pair.A, length) {
			return length + 1
		}
	}
	return 0
}
