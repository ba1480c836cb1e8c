package decompose

import (
	"fmt"
	"strconv"

	"maskpair/gds"
)

// This file turns variants into the plan by which package gds writes the output.

// outputPlan is what the output needs: the ways of all structures, their names, and the marks.
type outputPlan struct {
	rules   *Rules
	classes *classes
	v       *variants
	names   [][]string       // by structure and rank
	tails   map[int32][]byte // marks, by top
	actions []gds.Action
	top     bool // only what is under one structure is on masks
}

const (
	actionKeep = iota
	actionDrop
	actionReplace
	actionKeepAndReplace
	actionMasks // + 2*layer + mask
)

// newOutputPlan names all variants.
func newOutputPlan(rules *Rules, c *classes, v *variants, only string, tails map[int32][]byte) *outputPlan {
	p := &outputPlan{rules: rules, classes: c, v: v, tails: tails, top: only != ""}
	p.actions = make([]gds.Action, actionMasks+2*len(rules.Layers))
	p.actions[actionDrop].Op = gds.Drop
	p.actions[actionReplace].Op = gds.Replace
	p.actions[actionKeepAndReplace].Op = gds.KeepAndReplace
	for i := range rules.Layers {
		l := &rules.Layers[i]
		p.actions[actionMasks+2*i] = gds.Action{Op: gds.Relayer, Layer: l.MaskA}
		p.actions[actionMasks+2*i+1] = gds.Action{Op: gds.Relayer, Layer: l.MaskB}
	}
	for i := range rules.Layers {
		if l := &rules.Layers[i]; l.KeepDrawn {
			p.actions = append(p.actions, gds.Action{Op: gds.KeepAndCopy, Layer: l.MaskA}, gds.Action{Op: gds.KeepAndCopy, Layer: l.MaskB})
		}
	}
	v.number(drawnUses(v, only))
	taken := make(map[string]bool, len(v.h.lib.Structures))
	for i := range v.h.lib.Structures {
		taken[v.h.lib.Structures[i].Name] = true
	}
	for _, name := range v.h.lib.Missing {
		taken[name] = true // or a reference to what is not there would come to place the variant
	}
	p.names = make([][]string, len(v.h.lib.Structures))
	for s := range v.h.lib.Structures {
		t := &v.tables[s]
		name := v.h.lib.Structures[s].Name
		ranks := t.ways()
		if ranks > 0 && t.drawn >= 0 {
			ranks++
		}
		names := []string{name}
		for n := 2; len(names) < ranks; n++ {
			if variant := name + "$" + strconv.Itoa(n); !taken[variant] {
				names = append(names, variant)
			}
		}
		p.names[s] = names
	}
	return p
}

// drawnUses counts for each structure how often it is placed where it stays as drawn: with --top, in the other tops by ways that do
// not lead over the structure that is taken.
func drawnUses(v *variants, only string) []uint64 {
	uses := make([]uint64, len(v.h.lib.Structures))
	if only == "" {
		return uses
	}
	lib := v.h.lib
	placed := make([]bool, len(lib.Structures))
	for i := range lib.Refs {
		if t := lib.Refs[i].Target; t >= 0 {
			placed[t] = true
		}
	}
	taken := v.h.tops[0]
	for s := range uses {
		if !placed[s] && int32(s) != taken {
			uses[s] = 1
		}
	}
	for i := len(v.h.down) - 1; i >= 0; i-- {
		s := v.h.down[i]
		if s == taken {
			uses[s] = 0
			continue
		}
		st := &lib.Structures[s]
		for r := st.FirstRef; r < st.EndRef && uses[s] > 0; r++ {
			if ref := &lib.Refs[r]; ref.Target >= 0 && ref.Target != taken {
				uses[ref.Target] = saturatingAdd(uses[ref.Target], saturatingMul(uses[s], uint64(elements(lib, ref))))
			}
		}
	}
	return uses
}

// copies gives what is written for a structure.
func (p *outputPlan) copies(structure int) []gds.Copy {
	s := int32(structure)
	t := &p.v.tables[s]
	drops := p.drops(s)
	if t.ways() == 0 {
		refs := p.drawnRefs(s)
		if drops == nil && p.tails[s] == nil && refs == nil {
			return nil
		}
		return []gds.Copy{{Figures: drops, Refs: refs, Tail: p.tails[s]}}
	}
	out := make([]gds.Copy, len(p.names[s]))
	for i := range t.ways() {
		rank := t.rank[i]
		c := &out[rank]
		if rank > 0 {
			c.Name = p.names[s][rank]
		}
		c.Figures = p.figures(s, int32(i), drops)
		c.Pieces = p.pieces(s, int32(i), c.Figures)
		c.Refs = p.refs(s, int32(i))
		c.Tail = p.tails[s]
	}
	if t.drawn > 0 {
		out[t.drawn].Name = p.names[s][t.drawn]
	}
	if t.drawn >= 0 {
		out[t.drawn].Figures = drops
		out[t.drawn].Refs = p.drawnRefs(s)
	}
	return out
}

// drops gives the figures that are dropped as marks of an earlier run; nil where there are none.
func (p *outputPlan) drops(s int32) []uint8 {
	if !p.rules.Marks.Replace {
		return nil
	}
	st := &p.v.h.lib.Structures[s]
	var out []uint8
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		if p.classes.marks[p.v.h.lib.Figures[i].Class] {
			if out == nil {
				out = make([]uint8, st.EndFigure-st.FirstFigure)
			}
			out[i-st.FirstFigure] = actionDrop
		}
	}
	return out
}

// figures gives the actions of the own figures of one way.
func (p *outputPlan) figures(s, way int32, drops []uint8) []uint8 {
	st := &p.v.h.lib.Structures[s]
	out := make([]uint8, st.EndFigure-st.FirstFigure)
	copy(out, drops)
	words := p.v.tables[s].way(way)
	word := uint32(0)
	changed := drops != nil
	kept := len(p.rules.Layers)*2 + actionMasks
	for k, l := range p.v.layers {
		rules := l.rules
		l.flat.ownFigures(s, func(i, figure uint32) {
			m := words[word+i/32] >> (i % 32) & 1
			switch l.flat.sel.tag[p.v.h.lib.Figures[figure].Class] {
			case drawn:
				if rules.KeepDrawn {
					out[figure-st.FirstFigure] = uint8(kept) + uint8(m)
				} else {
					out[figure-st.FirstFigure] = uint8(actionMasks + 2*k + int(m))
				}
				changed = true
			default:
				if rules.Redo {
					out[figure-st.FirstFigure] = uint8(actionMasks + 2*k + int(m))
					changed = true
				}
			}
		})
		if rules.KeepDrawn {
			kept += 2
		}
		word += (l.flat.own[s] + 31) / 32
	}
	if !changed {
		return nil
	}
	return out
}

// pieces gives the own figures of one way that come out in pieces, and sets their actions.
func (p *outputPlan) pieces(s, way int32, actions []uint8) map[uint32][]gds.Piece {
	cut := p.v.tables[s].inPieces(way)
	if len(cut) == 0 {
		return nil
	}
	out := map[uint32][]gds.Piece{}
	own := make([][]uint32, len(p.v.layers)) // figures of the structure in the order in which they are numbered, by deck layer
	for ; len(cut) > 0; cut = cut[3:] {
		l := p.v.layers[cut[0]]
		if own[cut[0]] == nil {
			l.flat.ownFigures(s, func(_, figure uint32) { own[cut[0]] = append(own[cut[0]], figure) })
		}
		figure := own[cut[0]][cut[1]]
		k := figure - p.v.h.lib.Structures[s].FirstFigure
		out[k] = l.cuts.forms[cut[2]].pieces
		actions[k] = actionReplace
		if l.rules.KeepDrawn && l.flat.sel.tag[p.v.h.lib.Figures[figure].Class] == drawn {
			actions[k] = actionKeepAndReplace
		}
	}
	return out
}

// refs gives the references of one way that change.
func (p *outputPlan) refs(s, way int32) []gds.RefChange {
	lib := p.v.h.lib
	st := &lib.Structures[s]
	children := p.v.tables[s].children(way)
	var out []gds.RefChange
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &lib.Refs[r]
		if ref.Target < 0 || !p.v.active[ref.Target] {
			continue
		}
		n := elements(lib, ref)
		ways := children[:n]
		children = children[n:]
		rank := p.v.tables[ref.Target].rank
		same := true
		for _, w := range ways {
			same = same && w == ways[0]
		}
		index := int32(r - st.FirstRef)
		if same {
			if k := rank[ways[0]]; k > 0 {
				out = append(out, gds.RefChange{Index: index, Name: p.names[ref.Target][k]})
			}
			continue
		}
		out = append(out, gds.RefChange{Index: index, Split: p.split(ref, ways)})
	}
	return out
}

// split words an array whose elements come out in several ways.
func (p *outputPlan) split(ref *gds.Ref, ways []uint32) []gds.Part {
	l := latticeOf(p.v.h.lib, ref)
	rank := p.v.tables[ref.Target].rank
	var out []gds.Part
	for _, part := range splitArray(ways, int64(l.Columns), int64(l.Rows)) {
		name := p.names[ref.Target][rank[part.way]]
		if ref, ok := part.reference(&l, name); ok {
			out = append(out, ref)
			continue
		}
		for row := range part.rows {
			for column := range part.columns {
				at := l.element(part.column+column*part.columnStep, part.row+row*part.rowStep)
				out = append(out, gds.Part{Name: name, At: gds.Point{X: int32(at.x), Y: int32(at.y)}, Columns: 1, Rows: 1})
			}
		}
	}
	return out
}

// drawnRefs gives the references of a structure that stays as drawn: where the original name went to a way on masks, they get that of
// the structure as drawn.
func (p *outputPlan) drawnRefs(s int32) []gds.RefChange {
	lib := p.v.h.lib
	st := &lib.Structures[s]
	var out []gds.RefChange
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &lib.Refs[r]
		if ref.Target < 0 {
			continue
		}
		if t := &p.v.tables[ref.Target]; t.ways() > 0 && t.drawn > 0 {
			out = append(out, gds.RefChange{Index: int32(r - st.FirstRef), Name: p.names[ref.Target][t.drawn]})
		}
	}
	return out
}

func (p *outputPlan) plan() gds.Plan {
	return gds.Plan{Actions: p.actions, Copies: p.copies}
}

// checkMarks refuses a layout that has figures on a marks layer already, unless the deck says to replace them.
func checkMarks(lib *gds.Library, c *classes, rules *Rules) error {
	if rules.Marks.Replace {
		return nil
	}
	for s := range lib.Structures {
		st := &lib.Structures[s]
		for i := st.FirstFigure; i < st.EndFigure; i++ {
			if k := lib.Figures[i].Class; c.marks[k] {
				return &OrderError{Msg: fmt.Sprintf("structure %s has figures on %d/%d already, which the deck names in [marks]; set replace = true there to drop them, or name another layer",
					st.Name, c.layers[k].Layer, c.layers[k].Type)}
			}
		}
	}
	return nil
}
