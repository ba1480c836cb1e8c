// Command draw makes the pictures of the examples: it runs the demo in a temporary folder, reads the layout and the masks that
// come out, and draws the layout, both masks over each other, and each mask by itself. Run it from the top folder of the project
// after a change of the demo, of the choice of masks or of the pictures, and look at what changed:
//
//	go run ./examples/draw
package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"maskpair/cli"
	"maskpair/cli/picture"
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
	var said bytes.Buffer
	if status := cli.Run(context.Background(), []string{"demo", filepath.Join(dir, "demo")}, bytes.NewReader(nil), io.Discard, &said); status != 0 {
		return nil, fmt.Errorf("the demo ends with status %d: %s", status, said.Bytes())
	}
	a, b := picture.MaskA, picture.MaskB
	pictures := map[string][]byte{}
	for _, p := range []struct {
		name, stream, title string
		only                *picture.Role
	}{
		{"layout.svg", "layout.gds", "the demo layout as drawn; two wires of each amplifier are on mask A already", nil},
		{"masks.svg", "masks.gds", "the demo layout on two masks: A hatched, B dotted, unresolved gaps in a ring", nil},
		{"mask-a.svg", "masks.gds", "mask A of the demo layout; what is on B is outlined", &a},
		{"mask-b.svg", "masks.gds", "mask B of the demo layout; what is on A is outlined", &b},
	} {
		stream, err := os.ReadFile(filepath.Join(dir, "demo", p.stream))
		if err != nil {
			return nil, err
		}
		scene, err := picture.Read(bytes.NewReader(stream), picture.Layers{
			Figures: map[gds.LayerType]picture.Role{
				{Layer: 10, Type: 0}: picture.Drawn,
				{Layer: 10, Type: 1}: picture.MaskA,
				{Layer: 10, Type: 2}: picture.MaskB,
				{Layer: 90, Type: 0}: picture.Mark,
			},
			Label: gds.LayerType{Layer: 63},
		})
		if err != nil {
			return nil, err
		}
		var svg bytes.Buffer
		if err := scene.WriteSVG(&svg, picture.SVG{Title: p.title, Unit: 20, Scale: 0.6, Only: p.only}); err != nil {
			return nil, err
		}
		pictures[p.name] = svg.Bytes()
	}
	return pictures, nil
}
