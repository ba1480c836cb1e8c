// Command draw makes the pictures of the examples: it runs the demo in a temporary folder, and once more with stitches, reads what
// came out, and draws the layout, both masks over each other, each mask by itself, and a mended knot. Run it from the top folder of the project
// after a change of the demo, of the choice of masks or of the pictures, and look at what changed:
//
//	go run ./examples/draw
package main

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"

	"maskpair/cli/picture"
	"maskpair/examples/scenario"
	"maskpair/gds"
)

func main() {
	pictures, err := draw()
	for name, text := range pictures {
		if err == nil {
			err = os.WriteFile(filepath.Join("examples", "demo", name), text, 0o666)
		}
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "draw:", err)
		os.Exit(1)
	}
}

// draw gives the pictures of the demo by file name.
func draw() (map[string][]byte, error) {
	dir, err := os.MkdirTemp("", "maskpair-draw-")
	if err != nil {
		return nil, err
	}
	defer os.RemoveAll(dir)
	file := func(name string) string { return filepath.Join(dir, "demo", name) }
	if err := run("demo", filepath.Join(dir, "demo")); err != nil {
		return nil, err
	}
	deck, err := os.ReadFile(file("deck.toml"))
	if err != nil {
		return nil, err
	}
	if err := os.WriteFile(file("mend.toml"), bytes.Replace(deck, []byte("apply = false"), []byte("apply = true"), 1), 0o666); err != nil {
		return nil, err
	}
	if err := run("decompose", file("layout.gds"), "--deck", file("mend.toml"), "--anchors", file("anchors.toml"), "--output", file("mended.gds")); err != nil {
		return nil, err
	}
	a, b, knot := picture.MaskA, picture.MaskB, picture.Box{X1: 0, Y1: 1030, X2: 600, Y2: 1170}
	pictures := map[string][]byte{}
	for _, p := range []struct {
		name, stream string
		svg          picture.SVG
	}{
		{"layout.svg", "layout.gds", picture.SVG{Title: "the demo layout as drawn"}},
		{"masks.svg", "masks.gds", picture.SVG{Title: "the demo layout on two masks: A with slanted lines, B with level ones, unresolved gaps in a ring"}},
		{"mask-a.svg", "masks.gds", picture.SVG{Title: "mask A of the demo layout; what is on B is outlined", Only: &a}},
		{"mask-b.svg", "masks.gds", picture.SVG{Title: "mask B of the demo layout; what is on A is outlined", Only: &b}},
		{"mended.svg", "mended.gds", picture.SVG{Title: "the knot with one wire cut in two pieces, which overlap where they meet", Part: &knot}},
	} {
		if pictures[p.name], err = one(file(p.stream), p.svg); err != nil {
			return nil, err
		}
	}
	return pictures, nil
}

// run runs the program.
func run(args ...string) error {
	if status, said := scenario.Program(args...); status != 0 {
		return fmt.Errorf("%s ends with status %d: %s", args[0], status, said)
	}
	return nil
}

// one draws one picture of a stream.
func one(path string, svg picture.SVG) ([]byte, error) {
	stream, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	scene, err := picture.Read(bytes.NewReader(stream), picture.Layers{
		Figures: map[gds.LayerType]picture.Role{
			{Layer: 10, Type: 0}: picture.Drawn,
			{Layer: 10, Type: 1}: picture.MaskA,
			{Layer: 10, Type: 2}: picture.MaskB,
			{Layer: 90, Type: 0}: picture.Mark, // unresolved gaps
		},
		Label: gds.LayerType{Layer: 63},
	})
	if err != nil {
		return nil, err
	}
	svg.Unit, svg.Scale = 20, 0.6
	var out bytes.Buffer
	err = scene.WriteSVG(&out, svg)
	return out.Bytes(), err
}
