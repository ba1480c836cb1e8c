package anchor

import (
	"maskpair/decompose"
)

// This file turns the anchor file and the labels into places that look for shapes.

// Probes gives the places that look for shapes of a deck layer.
func (s *Sources) Probes(layer int, v *decompose.View) ([]decompose.Probe, error) {
	s.layer = layerState{}
	f := s.file()
	most := len(f.Anchors) + 2*len(f.Ties) + 2*len(f.Waivers)
	s.layer.probes, s.layer.looks = make([]decompose.Probe, 0, most), make([]look, 0, most)
	for i := range f.Anchors {
		e := &f.Anchors[i]
		if e.Layer != layer {
			continue
		}
		k := kindAnchor
		if e.Wish {
			k = kindWish
		}
		if err := s.place(v, e.Cell, look{kind: k, entry: int32(i)}, e.Box); err != nil {
			return nil, err
		}
	}
	for i := range f.Ties {
		if e := &f.Ties[i]; e.Layer == layer {
			if err := s.place(v, e.Cell, look{kind: kindTie, entry: int32(i)}, point(e.At[0]), point(e.At[1])); err != nil {
				return nil, err
			}
		}
	}
	for i := range f.Waivers {
		if e := &f.Waivers[i]; e.Layer == layer {
			if err := s.place(v, e.Cell, look{kind: kindWaiver, entry: int32(i)}, point(e.At[0]), point(e.At[1])); err != nil {
				return nil, err
			}
		}
	}
	err := v.Labels(func(top int, at decompose.Spot, text string) {
		l := look{kind: kindLabel}
		switch text {
		case "A":
		case "B":
			l.mask = decompose.B
		default:
			if s.layer.other++; s.layer.other == 1 {
				s.layer.firstOther.top, s.layer.firstOther.at, s.layer.firstOther.text = top, at, text
			}
			return
		}
		s.layer.probes = append(s.layer.probes, decompose.Probe{Top: top, Box: point(at)})
		s.layer.looks = append(s.layer.looks, l)
	})
	return s.layer.probes, err
}

// place puts boxes of an entry where its coordinates are in force: in each top, or at each placement of the cell.
func (s *Sources) place(v *decompose.View, cell string, l look, boxes ...decompose.Box) error {
	if cell == "" {
		for i, b := range boxes {
			l.second = i == 1
			s.layer.probes = append(s.layer.probes, decompose.Probe{Top: decompose.AnyTop, Box: b})
			s.layer.looks = append(s.layer.looks, l)
		}
		return nil
	}
	p, err := s.cell(v, cell)
	if err != nil {
		return err
	}
	for _, at := range p.at {
		for i, b := range boxes {
			l.second = i == 1
			s.layer.probes = append(s.layer.probes, at.ProbeAt(b))
			s.layer.looks = append(s.layer.looks, l)
		}
	}
	return nil
}

func point(s decompose.Spot) decompose.Box { return decompose.Box{X1: s.X, Y1: s.Y, X2: s.X, Y2: s.Y} }
