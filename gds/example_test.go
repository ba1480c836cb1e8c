package gds_test

import (
	"bytes"
	"fmt"

	"maskpair/gds"
)

// layout writes a library with a cell of two wires, and a structure that places it twice.
func layout() []byte {
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{LibName: "DEMO"})
	wire := gds.LayerType{Layer: 19}
	w.BeginStructure("pair")
	w.Rectangle(wire, gds.Rect{X1: 0, Y1: 0, X2: 20, Y2: 200})
	w.Path(wire, gds.PathStyle{Width: 20}, []gds.Point{{X: 60, Y: 0}, {X: 60, Y: 200}})
	w.EndStructure()
	w.BeginStructure("chip")
	w.SRef("pair", gds.Strans{}, gds.Point{X: 100, Y: 0})
	w.SRef("pair", gds.Strans{Mirror: true, Angle: 90}, gds.Point{X: 0, Y: 500})
	w.EndStructure()
	if err := w.Close(); err != nil {
		fmt.Println(err)
	}
	return b.Bytes()
}

func ExampleScanner() {
	s := gds.NewScanner(bytes.NewReader(layout()))
	for s.Scan() {
		if r := s.Record(); r.Kind == gds.STRNAME || r.Kind == gds.SREF {
			fmt.Println(r.Offset, r.Kind, len(r.Data))
		}
	}
	fmt.Println(s.Err())
	// Output:
	// 90 STRNAME 4
	// 242 STRNAME 4
	// 250 SREF 0
	// 278 SREF 0
	// <nil>
}

func ExampleIndex() {
	stream := layout()
	want := gds.Interest{Figures: map[gds.LayerType]uint8{{Layer: 19}: 1}}
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), want, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, cell := range lib.Structures {
		fmt.Println(cell.Name, "has", cell.EndFigure-cell.FirstFigure, "figures and", cell.EndRef-cell.FirstRef, "references")
		for i := cell.FirstRef; i < cell.EndRef; i++ {
			ref := &lib.Refs[i]
			t := gds.Compose(gds.Identity(), ref, lib.PlacementOf(ref), 0, 0)
			box, _ := t.ApplyRect(lib.Figures[0].Box)
			fmt.Println(lib.Structures[ref.Target].Name, t, box)
		}
	}
	// Output:
	// pair has 2 figures and 0 references
	// chip has 0 figures and 2 references
	// pair at (100, 0) {100 0 120 200}
	// pair mirrored, turned 90 degrees, at (0, 500) {0 500 200 520}
}

func ExampleCopyStream() {
	stream := layout()
	want := gds.Interest{Figures: map[gds.LayerType]uint8{{Layer: 19}: 1}}
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), want, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	// The cell is written twice, with its wires on other layers, and the second placement takes the second.
	plan := gds.Plan{
		Actions: []gds.Action{
			{Op: gds.Relayer, Layer: gds.LayerType{Layer: 19, Type: 1}},
			{Op: gds.Relayer, Layer: gds.LayerType{Layer: 19, Type: 2}},
		},
		Copies: func(structure int) []gds.Copy {
			if lib.Structures[structure].Name == "pair" {
				return []gds.Copy{{Figures: []uint8{0, 1}}, {Name: "pair$2", Figures: []uint8{1, 0}}}
			}
			return []gds.Copy{{Refs: []gds.RefChange{{Index: 1, Name: "pair$2"}}}}
		},
	}
	var out bytes.Buffer
	if err := gds.CopyStream(&out, bytes.NewReader(stream), lib, want, plan, nil); err != nil {
		fmt.Println(err)
		return
	}
	s := gds.NewScanner(&out)
	for s.Scan() {
		switch r := s.Record(); r.Kind {
		case gds.STRNAME, gds.SNAME:
			fmt.Printf("%v %s\n", r.Kind, bytes.TrimRight(r.Data, "\x00"))
		case gds.DATATYPE:
			fmt.Println(r.Kind, r.Data[1])
		}
	}
	// Output:
	// STRNAME pair
	// DATATYPE 1
	// DATATYPE 2
	// STRNAME pair$2
	// DATATYPE 2
	// DATATYPE 1
	// STRNAME chip
	// SNAME pair
	// SNAME pair$2
}
