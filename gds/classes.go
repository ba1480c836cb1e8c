package gds

// This file looks up the class of a layer: the one look-up that every element of a stream costs.

// classes is a two-step table from layer and type to class. Only the parts of it that a stream's layers touch take memory.
type classes struct {
	row  [1 << 16]uint32   // by layer: row in cell
	cell []*[1 << 16]uint8 // by row, then type; row 0 is all zero
}

func newClasses(want map[LayerType]uint8) *classes {
	c := &classes{cell: []*[1 << 16]uint8{{}}}
	for layer, class := range want {
		if c.row[layer.Layer] == 0 {
			c.cell = append(c.cell, &[1 << 16]uint8{})
			c.row[layer.Layer] = uint32(len(c.cell) - 1)
		}
		c.cell[c.row[layer.Layer]][layer.Type] = class
	}
	return c
}

// class gives the class of a layer and type, 0 where it is of no interest.
func (c *classes) class(layer, typ uint16) uint8 { return c.cell[c.row[layer]][typ] }
