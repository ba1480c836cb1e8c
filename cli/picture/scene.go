package picture

import (
	"fmt"
	"io"

	"maskpair/gds"
)

// This file reads a stream into what a picture shows.

// Role tells what a figure is in the picture.
type Role uint8

// The roles, in the order in which they are drawn.
const (
	Drawn Role = iota // on no mask yet
	MaskA
	MaskB
	Mark // something to look at
	roles
)

// Layers say which layers play which role; the others are not shown. Texts on Label stand in the picture.
type Layers struct {
	Figures map[gds.LayerType]Role
	Label   gds.LayerType
}

// Scene is what a picture shows, in database units of the tops.
type Scene struct {
	Figures [roles][]Figure
	Labels  []Label
	Box     Box // of all figures and labels

	some bool // the box holds something
}

// Figure is a polygon; its last point is joined to its first.
type Figure []Point

// Point is a place in database units.
type Point struct{ X, Y int64 }

// Label is a text at a place.
type Label struct {
	At   Point
	Text string
}

// Box is an axis-parallel box.
type Box struct{ X1, Y1, X2, Y2 int64 }

// Read reads a stream. Figures of all tops lie over each other.
func Read(stream io.Reader, layers Layers) (*Scene, error) {
	want := gds.Interest{Figures: map[gds.LayerType]uint8{}, Labels: map[gds.LayerType]uint8{layers.Label: 1}}
	for l, role := range layers.Figures {
		want.Figures[l] = 1 + uint8(role)
	}
	lib, err := gds.Index(stream, -1, want, nil)
	if err != nil {
		return nil, err
	}
	placed := make([]bool, len(lib.Structures))
	for i := range lib.Refs {
		if t := lib.Refs[i].Target; t >= 0 {
			placed[t] = true
		}
	}
	s := &Scene{}
	for i := range lib.Structures {
		if !placed[i] {
			if err := s.add(lib, int32(i), gds.Identity()); err != nil {
				return nil, err
			}
		}
	}
	return s, nil
}

// add adds a placement of a structure.
func (s *Scene) add(lib *gds.Library, structure int32, at gds.Transform) error {
	st := &lib.Structures[structure]
	if !at.Rigid() {
		return fmt.Errorf("structure %s is magnified or turned by a part of a right angle; a picture cannot show that", gds.Printable(st.Name))
	}
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		f := &lib.Figures[i]
		corners := []gds.Point{{X: f.Box.X1, Y: f.Box.Y1}, {X: f.Box.X2, Y: f.Box.Y1}, {X: f.Box.X2, Y: f.Box.Y2}, {X: f.Box.X1, Y: f.Box.Y2}}
		if f.Outline != 0 {
			o := &lib.Outlines[f.Outline-1]
			if o.Path {
				return fmt.Errorf("structure %s has a PATH; a picture shows BOUNDARY elements alone", gds.Printable(st.Name))
			}
			corners = lib.Points[o.First : o.First+uint64(o.Count)]
		}
		s.figure(Role(f.Class-1), corners, at)
	}
	for i := st.FirstLabel; i < st.EndLabel; i++ {
		x, y := at.Apply(int64(lib.Labels[i].At.X), int64(lib.Labels[i].At.Y))
		s.include(Point{x, y})
		s.Labels = append(s.Labels, Label{Point{x, y}, lib.Labels[i].Text})
	}
	for i := st.FirstRef; i < st.EndRef; i++ {
		ref := &lib.Refs[i]
		if ref.Target < 0 {
			continue // not in the stream
		}
		grid := lib.Lattice(ref)
		for r := range grid.Rows {
			for c := range grid.Columns {
				if err := s.add(lib, ref.Target, gds.Compose(at, ref, lib.PlacementOf(ref), c, r)); err != nil {
					return err
				}
			}
		}
	}
	return nil
}

func (s *Scene) figure(role Role, corners []gds.Point, at gds.Transform) {
	var f Figure
	for _, c := range corners {
		x, y := at.Apply(int64(c.X), int64(c.Y))
		f = append(f, Point{x, y})
		s.include(Point{x, y})
	}
	s.Figures[role] = append(s.Figures[role], f)
}

// include widens the box.
func (s *Scene) include(p Point) {
	if !s.some {
		s.Box, s.some = Box{p.X, p.Y, p.X, p.Y}, true
	}
	s.Box = Box{min(s.Box.X1, p.X), min(s.Box.Y1, p.Y), max(s.Box.X2, p.X), max(s.Box.Y2, p.Y)}
}
