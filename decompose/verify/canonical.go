package verify

import (
	"cmp"
	"encoding/binary"
	"slices"

	"maskpair/decompose/geom"
)

// This file gives outlines a form of their own, so that one figure drawn in two ways (begun at another corner, run the other
// way round, with points repeated or in the middle of an edge) compares as the same.

// canonical gives the outline without points that bend nothing, from its least point on, in the direction that compares less.
// The points are changed in place.
func canonical(points []geom.Point) []geom.Point {
	points = withoutIdle(points)
	if len(points) < 3 { // encloses nothing
		slices.SortFunc(points, comparePoints)
		return points
	}
	points = rotate(points, least(points))
	back := slices.Clone(points)
	slices.Reverse(back)
	back = rotate(back, least(back))
	if slices.CompareFunc(back, points, comparePoints) < 0 {
		return back
	}
	return points
}

func comparePoints(p, q geom.Point) int { return cmp.Or(cmp.Compare(p.X, q.X), cmp.Compare(p.Y, q.Y)) }

// withoutIdle drops points that repeat the one before or lie within an edge, in place.
func withoutIdle(points []geom.Point) []geom.Point {
	for changed := true; changed && len(points) > 2; {
		changed = false
		out := points[:0]
		n := len(points)
		last := points[n-1]
		for i := range n {
			before := last
			if len(out) > 0 {
				before = out[len(out)-1]
			}
			p := points[i]
			after := p
			if i+1 < n {
				after = points[i+1]
			} else if len(out) > 0 {
				after = out[0] // the first that is still there
			}
			if p == before || geom.Orient(before, p, after) == 0 && between(before, p, after) {
				changed = true
				continue
			}
			out = append(out, p)
		}
		points = out
	}
	return points
}

// between says of three points on one line whether the second lies between the others or on one of them, so that the line
// does not turn back at it.
func between(p, q, r geom.Point) bool {
	return min(p.X, r.X) <= q.X && q.X <= max(p.X, r.X) && min(p.Y, r.Y) <= q.Y && q.Y <= max(p.Y, r.Y)
}

// least gives the start from which a closed sequence reads least (Booth, "Lexicographically least circular substrings",
// 1980, in the two-pointer form).
func least(points []geom.Point) int {
	n := len(points)
	i, k, same := 0, 1, 0
	for i < n && k < n && same < n {
		c := comparePoints(points[(i+same)%n], points[(k+same)%n])
		switch {
		case c == 0:
			same++
			continue
		case c > 0:
			i += same + 1
		default:
			k += same + 1
		}
		if i == k {
			k++
		}
		same = 0
	}
	return min(i, k)
}

func rotate(points []geom.Point, k int) []geom.Point {
	slices.Reverse(points[:k])
	slices.Reverse(points[k:])
	slices.Reverse(points)
	return points
}

// textKey gives the canonical outline as a string, for maps.
func textKey(points []geom.Point) string {
	b := make([]byte, 0, 16*len(points))
	for _, p := range points {
		b = binary.BigEndian.AppendUint64(b, uint64(p.X))
		b = binary.BigEndian.AppendUint64(b, uint64(p.Y))
	}
	return string(b)
}

// hashPoints gives a number that equal outlines share; others may.
func hashPoints(points []geom.Point) uint64 {
	h := uint64(len(points))
	for _, p := range points {
		for _, v := range [2]int64{p.X, p.Y} {
			h = (h ^ uint64(v)) * 0x9E3779B97F4A7C15
			h ^= h >> 29
		}
	}
	return h
}
