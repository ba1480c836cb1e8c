package verify

import (
	"fmt"
	"math"
	"slices"

	"maskpair/decompose"
	"maskpair/decompose/geom"
)

// This file makes the checks of spacing: pieces on one mask, and any two shapes. The search finds the places where two pieces
// come close; whether that is too near is said here by one number, the Euclidean distance whatever faces what, and in
// facing.go by what faces what.

// pair is two shapes (or two pieces of one shape) that are too near.
type pair struct {
	a, b  item    // where they come near; the nearest such place where all are rectangles
	gapSq float64 // of the boxes of these
}

// pairs are the pairs of one check by the numbers of shapes, or of pieces where both are of one shape.
type pairs map[pairKey]pair

type pairKey struct {
	pieces bool
	a, b   uint32
}

func (p pairs) add(key pairKey, a, b *item) {
	dx, dy := geom.RectGap(a.box, b.box)
	gapSq := float64(dx)*float64(dx) + float64(dy)*float64(dy)
	if known, ok := p[key]; !ok || gapSq < known.gapSq {
		p[key] = pair{*a, *b, gapSq}
	}
}

// keys gives the keys in order.
func (p pairs) keys() []pairKey {
	out := make([]pairKey, 0, len(p))
	for k := range p {
		out = append(out, k)
	}
	slices.SortFunc(out, func(k, l pairKey) int {
		if k.pieces != l.pieces {
			if l.pieces {
				return -1
			}
			return 1
		}
		return compareUint32(k.a, l.a, k.b, l.b)
	})
	return out
}

// spacing makes the checks of spacing. Pieces of one shape that are too near on one mask are a fault of the stitch.
func (j *judge) spacing(same, any, stitches *Check) error {
	near, tooNear := pairs{}, pairs{}
	least := int64(0)
	if j.rules.ByFacing != nil {
		if err := j.facingPairs(newFacing(j.rules), near); err != nil {
			return err
		}
	} else {
		least = 2 * j.rules.Spacing
	}
	if err := j.plainPairs(least, 2*j.rules.AnyMask, near, tooNear); err != nil {
		return err
	}
	needed := j.v.rules.Length(float64(j.rules.Spacing)) + " is needed"
	if j.rules.ByFacing != nil {
		needed = "too near for what faces what"
	}
	for _, key := range near.keys() {
		pr := near[key]
		switch {
		case key.pieces:
			p := &j.pieces[key.a]
			j.pairFault(stitches, p.box, j.pieces[key.b].box, &pr, fmt.Sprintf("two pieces of one shape on mask %s are %%s apart; %s", p.mask.maskName(), needed))
		case j.waived[[2]uint32{key.a, key.b}]:
			j.counts.Waived++
			if len(j.counts.WaivedPlaces) < mostPlaces {
				told := Check{}
				j.pairFault(&told, j.shapes[key.a].box, j.shapes[key.b].box, &pr, "%s apart, accepted by a waiver")
				j.counts.WaivedPlaces = append(j.counts.WaivedPlaces, told.Places...)
			}
		default:
			j.pairFault(same, j.shapes[key.a].box, j.shapes[key.b].box, &pr, fmt.Sprintf("%%s apart on mask %s; %s",
				j.flat.figs[pr.a.fig].tag.maskName(), needed))
		}
	}
	if any == nil {
		return nil
	}
	limit := j.v.rules.Length(float64(j.rules.AnyMask))
	for _, key := range tooNear.keys() {
		pr := tooNear[key]
		var a, b geom.Rect
		if key.pieces {
			a, b = j.pieces[key.a].box, j.pieces[key.b].box
		} else {
			a, b = j.shapes[key.a].box, j.shapes[key.b].box
		}
		j.pairFault(any, a, b, &pr, fmt.Sprintf("%%s apart; whatever the masks, %s is needed", limit))
	}
	return nil
}

// plainPairs finds the pairs of pieces on one mask that are nearer than same, and of any pieces nearer than any; 0 asks for
// none.
func (j *judge) plainPairs(same, any int64, near, tooNear pairs) error {
	if same == 0 && any == 0 {
		return nil
	}
	meet := map[[2]uint32]bool{}
	for i := range j.meets {
		meet[[2]uint32{j.pieceOf[j.meets[i].a.fig], j.pieceOf[j.meets[i].b.fig]}] = true
	}
	f := j.flat
	from := uint32(0)
	for _, end := range j.keptEnd {
		items := j.kept[from:end]
		from = end
		err := search(j.v.ctx, items, max(same, any), func(a, b *item) {
			s, t := f.figs[a.fig].tag, f.figs[b.fig].tag
			if !s.mask() || !t.mask() {
				return
			}
			p, q := j.pieceOf[a.fig], j.pieceOf[b.fig]
			switch {
			case p == q:
				return
			case s == t:
				if f.relation(a, b, same) == geom.Near {
					near.add(j.pairKey(p, q), a, b)
				}
			case any == 0 || meet[[2]uint32{p, q}] || meet[[2]uint32{q, p}]:
				return
			}
			if any > 0 && f.relation(a, b, any) == geom.Near {
				tooNear.add(j.pairKey(p, q), a, b)
			}
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// pairKey names a pair of pieces: by shapes, or by pieces where they are of one shape.
func (j *judge) pairKey(p, q uint32) pairKey {
	s, t := j.pieces[p].shape, j.pieces[q].shape
	if s == t {
		return pairKey{true, min(p, q), max(p, q)}
	}
	return pairKey{false, min(s, t), max(s, t)}
}

// pairFault counts a pair; text has a place for the distance.
func (j *judge) pairFault(c *Check, a, b geom.Rect, pr *pair, text string) {
	if len(c.Places) >= mostPlaces {
		c.Faults++
		return
	}
	box, other := decompose.Box(a), decompose.Box(b)
	c.fault(Place{Top: j.topText(j.flat.topOf(pr.a.fig)), Box: &box, Other: &other,
		Text: fmt.Sprintf(text, j.v.rules.Length(math.Round(j.distance(pr)*1000)/1000))})
}

// distance measures, for a message, how far apart the two figures of a pair are where they come near, in database units.
func (j *judge) distance(pr *pair) float64 {
	if pr.a.band == wholeRect && pr.b.band == wholeRect {
		return math.Sqrt(pr.gapSq) / 2
	}
	f := j.flat
	p, _ := f.points(nil, &f.figs[pr.a.fig])
	q, _ := f.points(nil, &f.figs[pr.b.fig])
	best := math.Inf(1)
	for i := range p {
		for k := range q {
			a, b := p[i], p[(i+1)%len(p)]
			c, d := q[k], q[(k+1)%len(q)]
			best = min(best, pointToSegment(a, c, d), pointToSegment(b, c, d), pointToSegment(c, a, b), pointToSegment(d, a, b))
		}
	}
	return best / 2
}

// pointToSegment is the distance of p from the segment ab.
func pointToSegment(p, a, b geom.Point) float64 {
	ux, uy := float64(b.X-a.X), float64(b.Y-a.Y)
	vx, vy := float64(p.X-a.X), float64(p.Y-a.Y)
	n := ux*ux + uy*uy
	t := 0.0
	if n > 0 {
		t = min(max((ux*vx+uy*vy)/n, 0), 1)
	}
	return math.Hypot(vx-t*ux, vy-t*uy)
}
