package gds

import (
	"bytes"
	"io"
	"os"
	"path/filepath"
	"testing"
)

// flatStream is a library of one structure with n rectangles on two layers in turn, 19/0 every share-th.
func flatStream(tb testing.TB, n, share int) []byte {
	tb.Helper()
	var b bytes.Buffer
	b.Grow(64*n + 1000)
	w := NewWriter(&b, WriterOptions{})
	w.BeginStructure("TOP")
	for i := range int32(n) {
		layer := LayerType{18, 0}
		if int(i)%share == 0 {
			layer.Layer = 19
		}
		x, y := i%5000*40, i/5000*90
		w.Rectangle(layer, Rect{x, y, x + 20, y + 60})
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

// nineteen is the interest in layer 19/0.
func nineteen() Interest { return Interest{Figures: map[LayerType]uint8{{19, 0}: 1}} }

func BenchmarkScanner(b *testing.B) {
	data := flatStream(b, 1<<20, 1)
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		s := NewScanner(bytes.NewReader(data))
		for s.Scan() {
			_ = s.Record()
		}
		if s.Err() != nil {
			b.Fatal(s.Err())
		}
	}
}

func BenchmarkIndex(b *testing.B) {
	for _, c := range []struct {
		name  string
		share int
	}{{"all", 1}, {"one in a hundred", 100}} {
		b.Run(c.name, func(b *testing.B) {
			data := flatStream(b, 1<<20, c.share)
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Index(bytes.NewReader(data), int64(len(data)), nineteen(), nil); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkIndexPaths goes the way of all elements that are no plain boundary.
func BenchmarkIndexPaths(b *testing.B) {
	var stream bytes.Buffer
	w := NewWriter(&stream, WriterOptions{})
	w.BeginStructure("TOP")
	for i := range int32(1 << 19) {
		w.Path(LayerType{19, 0}, PathStyle{Type: 2, Width: 20}, []Point{{i, 0}, {i, 100}})
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		b.Fatal(err)
	}
	data := stream.Bytes()
	b.SetBytes(int64(len(data)))
	for b.Loop() {
		if _, err := Index(bytes.NewReader(data), int64(len(data)), nineteen(), nil); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkIndexReferences(b *testing.B) {
	var stream bytes.Buffer
	w := NewWriter(&stream, WriterOptions{})
	w.BeginStructure("TOP")
	for i := range int32(1 << 19) {
		w.SRef("CELL", Strans{Mirror: i&1 != 0, Angle: 90}, Point{i, i})
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		b.Fatal(err)
	}
	data := stream.Bytes()
	b.SetBytes(int64(len(data)))
	for b.Loop() {
		if _, err := Index(bytes.NewReader(data), int64(len(data)), nineteen(), nil); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkInput is pass 1 over a file, with its SHA-256 on another core.
func BenchmarkInput(b *testing.B) {
	data := flatStream(b, 1<<21, 1)
	path := filepath.Join(b.TempDir(), "flat.gds")
	if err := os.WriteFile(path, data, 0o600); err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(len(data)))
	for b.Loop() {
		in, err := Open(path, false, nil)
		if err != nil {
			b.Fatal(err)
		}
		if _, err := in.Index(nineteen(), nil); err != nil {
			b.Fatal(err)
		}
		in.Close()
	}
}

func BenchmarkCopy(b *testing.B) {
	for _, c := range []struct {
		name  string
		share int
		plan  bool
	}{{"raw", 1, false}, {"all relayered", 1, true}, {"one in a hundred relayered", 100, true}} {
		b.Run(c.name, func(b *testing.B) {
			data := flatStream(b, 1<<20, c.share)
			lib, err := Index(bytes.NewReader(data), int64(len(data)), nineteen(), nil)
			if err != nil {
				b.Fatal(err)
			}
			var plan Plan
			if c.plan {
				plan.Actions = []Action{{Op: Relayer, Layer: LayerType{19, 1}}, {Op: Relayer, Layer: LayerType{19, 2}}}
				figures := make([]uint8, len(lib.Figures))
				for i := range figures {
					figures[i] = uint8(i & 1)
				}
				plan.Copies = func(int) []Copy { return []Copy{{Figures: figures}} }
			}
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if err := CopyStream(io.Discard, bytes.NewReader(data), lib, nineteen(), plan, nil); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkWriter(b *testing.B) {
	const n = 1 << 20
	b.SetBytes(64 * n)
	b.ReportAllocs()
	for b.Loop() {
		w := NewWriter(io.Discard, WriterOptions{})
		w.BeginStructure("TOP")
		for i := range int32(n) {
			w.Rectangle(LayerType{19, 0}, Rect{i, 0, i + 20, 60})
		}
		w.EndStructure()
		if err := w.Close(); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkCompose(b *testing.B) {
	ref := Ref{At: Point{100, 200}, Turn: 5}
	t := Transform{X: 5, Y: 7, Orientation: 1}
	var sum int64
	for b.Loop() {
		u := Compose(t, &ref, nil, 0, 0)
		sum += u.X
	}
	_ = sum
}
