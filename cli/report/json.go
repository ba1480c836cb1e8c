package report

import (
	"io"

	"maskpair/decompose"
)

// This file says which keys report.json has, in which order. Boxes and points of a Result are in half database units; they
// are printed in database units, with .5 where a half occurs.

// WriteJSON writes the report as JSON. The keys are always there, in the same order; without "run", the text depends on
// input, deck, anchors and baseline alone.
func WriteJSON(w io.Writer, r *Report) error {
	j := newJSONWriter(w)
	j.object(func() {
		j.key("input").inline(func() {
			j.key("sha256").str(r.Input.SHA256)
			j.key("bytes").integer(r.Input.Bytes)
			j.key("dbu_m").number(r.Input.DBU)
			j.key("top").strs(r.Input.Tops)
		})
		j.key("run").object(func() { j.run(&r.Run) })
		j.key("warnings").list(func() {
			for _, line := range r.Warnings {
				j.str(line)
			}
		})
		j.key("layers").list(func() {
			for i := range r.Result.Layers {
				j.object(func() { j.layer(&r.Result.Layers[i]) })
			}
		})
	})
	return j.close()
}

func (j *jsonWriter) run(r *Run) {
	j.key("version").str(r.Version)
	j.key("jobs").integer(int64(r.Jobs))
	j.key("seconds").number(r.Seconds)
	j.key("stages").list(func() {
		for _, s := range r.Stages {
			j.inline(func() {
				j.key("name").str(s.Name)
				j.key("seconds").number(s.Seconds)
				j.key("peak_bytes").integer(s.Peak)
				j.key("work").row(func() {
					for _, w := range s.Work {
						j.inline(func() {
							j.key("things").str(w.Things)
							j.key("count").integer(w.Count)
						})
					}
				})
			})
		}
	})
	j.key("peak_bytes").integer(r.Peak)
	j.key("estimated_bytes").integer(r.Estimate)
}

func (j *jsonWriter) layer(l *decompose.LayerResult) {
	j.key("name").str(l.Name)
	for _, c := range []struct {
		key string
		n   int64
	}{
		{"same_mask_spacing_dbu", l.Spacing},
		{"figures", l.Figures},
		{"already_masked_figures", l.AlreadyMaskedFigures},
		{"rounded_figures", l.RoundedFigures},
		{"shapes", l.Shapes},
		{"near_pairs", l.NearPairs},
		{"components", l.Components},
		{"unresolved_components", l.UnresolvedComponents},
		{"joint_clashes", l.JointClashes},
		{"unresolved_pairs", l.UnresolvedPairs},
		{"waived_pairs", l.WaivedPairs},
		{"any_mask_pairs", l.AnyMaskPairs},
		{"lower_bound", l.LowerBound},
	} {
		j.key(c.key).integer(c.n)
	}
	j.key("proved_optimal").boolean(l.ProvedOptimal)
	j.key("aims_proved").boolean(l.AimsProved)
	j.key("mask_area_dbu2").inline(func() {
		j.key("a").number(l.AreaA)
		j.key("b").number(l.AreaB)
	})
	for _, c := range []struct {
		key string
		n   int64
	}{
		{"stitches", l.Stitches},
		{"stitches_lower_bound", l.StitchesBound},
		{"anchored_shapes", l.AnchoredShapes},
		{"moved_shapes", l.MovedShapes},
		{"baseline_shapes", l.BaselineShapes},
		{"wishes", l.Wishes},
		{"wishes_kept", l.WishesKept},
	} {
		j.key(c.key).integer(c.n)
	}
	j.key("unresolved").list(func() {
		for i := range l.Unresolved {
			j.inline(func() { j.unresolved(&l.Unresolved[i]) })
		}
	})
	j.key("waived").list(func() {
		for i := range l.Waived {
			j.inline(func() {
				j.pair(&l.Waived[i].Pair)
				j.key("top").str(l.Waived[i].Top)
				j.key("name").str(l.Waived[i].Name)
				j.key("reason").str(l.Waived[i].Reason)
			})
		}
	})
	j.key("any_mask").list(func() {
		for i := range l.AnyMask {
			j.inline(func() {
				j.pair(&l.AnyMask[i])
				j.key("mask_b").str(l.AnyMask[i].MaskB.String())
				j.key("top").str(l.AnyMask[i].Top)
			})
		}
	})
	j.key("same_shape").list(func() {
		for i := range l.SameShape {
			j.inline(func() { j.sameShape(&l.SameShape[i]) })
		}
	})
	j.key("moved").list(func() {
		for i := range l.Moved {
			m := &l.Moved[i]
			j.inline(func() {
				j.key("top").str(m.Top)
				j.key("box").box(m.Box)
				j.key("was").str(m.Was.String())
				j.key("now").str(m.Now.String())
				j.key("why").str(m.Why)
			})
		}
	})
	j.key("frozen").list(func() {
		for i := range l.Frozen {
			f := &l.Frozen[i]
			j.inline(func() {
				j.key("kind").str(f.Kind.String())
				j.key("top").str(f.Top)
				j.key("mask").str(f.Mask.String())
				j.key("box").box(f.Box)
				j.key("area_dbu2").number(f.Area)
				j.key("edit").str(f.Edit)
			})
		}
	})
}

func (j *jsonWriter) unresolved(u *decompose.Unresolved) {
	j.key("top").str(u.Top)
	j.key("component").integer(u.Component)
	j.key("shapes").integer(u.Shapes)
	j.key("cause").str(u.Cause.String())
	j.key("cycle").row(func() {
		for _, c := range u.Cycle {
			j.inline(func() {
				j.key("box").box(c.Box)
				j.key("mask").str(c.Mask.String())
			})
		}
	})
	j.key("pairs").row(func() {
		for i := range u.Pairs {
			j.inline(func() { j.pair(&u.Pairs[i]) })
		}
	})
	j.key("repair").row(func() {
		for i := range u.Repair {
			j.inline(func() { j.pair(&u.Repair[i]) })
		}
	})
	j.key("stitch_candidates").row(func() {
		for _, c := range u.Candidates {
			j.inline(func() {
				j.key("box").box(c.Box)
				j.key("overlap_dbu").integer(c.Overlap)
				j.key("resolves").boolean(c.Resolves)
				j.key("made").boolean(c.Made)
			})
		}
	})
	j.key("least_stitches").row(func() {
		for _, i := range u.LeastStitches {
			j.integer(int64(i))
		}
	})
	j.key("no_candidate").str(u.NoCandidate)
	j.key("not_computed").row(func() {
		for _, key := range u.NotComputed {
			j.str(key)
		}
	})
	j.key("lower_bound").integer(u.LowerBound)
	j.key("proved_optimal").boolean(u.Proved)
	j.key("group").integer(u.Group)
	j.key("cell").str(u.Cell)
	j.key("cell_transform").str(u.CellTransform)
	j.key("cell_place").spot(u.CellPlace)
}

// pair writes the entries of a pair.
func (j *jsonWriter) pair(p *decompose.Pair) {
	j.key("a").box(p.A)
	j.key("b").box(p.B)
	j.key("distance_sq_dbu2").number(p.DistanceSq)
	j.key("from").spot(p.From)
	j.key("to").spot(p.To)
	j.key("widen_dbu").integer(p.Widen)
	j.key("rule").str(p.Rule)
	j.key("spacing_dbu").integer(p.Spacing)
	j.key("edge_a").edge(p.EdgeA)
	j.key("edge_b").edge(p.EdgeB)
	j.key("mask").str(p.Mask.String())
}

// sameShape writes the entries of a place where a shape is too near to itself.
func (j *jsonWriter) sameShape(p *decompose.SameShapePlace) {
	kind := "gap"
	if p.Notch {
		kind = "notch"
	}
	j.key("kind").str(kind)
	j.key("top").str(p.Top)
	j.key("box").box(p.Box)
	j.key("edge_a").edge(p.EdgeA)
	j.key("edge_b").edge(p.EdgeB)
	j.key("distance_sq_dbu2").number(p.DistanceSq)
	j.key("from").spot(p.From)
	j.key("to").spot(p.To)
	j.key("widen_dbu").integer(p.Widen)
}

// edge writes the ends of an edge, or an empty list where no edge is told.
func (j *jsonWriter) edge(e decompose.Edge) {
	j.row(func() {
		if e == (decompose.Edge{}) {
			return
		}
		for _, s := range e {
			j.half(s.X)
			j.half(s.Y)
		}
	})
}

func (j *jsonWriter) box(b decompose.Box) {
	j.row(func() {
		j.half(b.X1)
		j.half(b.Y1)
		j.half(b.X2)
		j.half(b.Y2)
	})
}

func (j *jsonWriter) spot(s decompose.Spot) {
	j.row(func() {
		j.half(s.X)
		j.half(s.Y)
	})
}

func (j *jsonWriter) strs(list []string) {
	j.row(func() {
		for _, s := range list {
			j.str(s)
		}
	})
}
