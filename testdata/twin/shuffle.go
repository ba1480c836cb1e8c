package twin

import (
	"bytes"
	"math/rand/v2"
)

// This file puts the structures of a stream, and the elements of each, in another order.

// Shuffle gives the stream with its structures and their elements in another order. Nothing else changes.
func Shuffle(stream []byte, r *rand.Rand) ([]byte, error) {
	head, list, tail, err := blocks(stream)
	if err != nil {
		return nil, err
	}
	r.Shuffle(len(list), func(i, j int) { list[i], list[j] = list[j], list[i] })
	var out bytes.Buffer
	out.Write(head)
	for _, b := range list {
		out.Write(b.head)
		out.Write(b.named)
		out.Write(b.class)
		r.Shuffle(len(b.elements), func(i, j int) { b.elements[i], b.elements[j] = b.elements[j], b.elements[i] })
		for _, e := range b.elements {
			for _, record := range e {
				out.Write(record.Raw)
			}
		}
		out.Write(b.foot)
	}
	out.Write(tail)
	return out.Bytes(), nil
}
