package cli

import (
	"bufio"
	"encoding/json"

	"maskpair/cli/report"
	"maskpair/decompose/survey"
)

// This file words a survey for programs. Lengths are in database units; flat counts stop at 2^64 - 1.

type surveyJSON struct {
	Input      surveyInput   `json:"input"`
	Structures int           `json:"structures"`
	Tops       []string      `json:"tops"`
	Depth      int           `json:"depth"`
	References int64         `json:"references"`
	Arrays     int64         `json:"arrays"`
	Odd        int64         `json:"odd_references"`
	Placements uint64        `json:"placements"`
	Missing    []string      `json:"missing"`
	Layers     []surveyLayer `json:"layers"`
	Gaps       *surveyGaps   `json:"gaps"` // null without --layer
}

type surveyInput struct {
	Name     string  `json:"name"`
	Bytes    int64   `json:"bytes"`
	DBU      float64 `json:"dbu_m"`
	UserUnit float64 `json:"user_unit_dbu"`
}

type surveyLayer struct {
	Layer      string        `json:"layer"`
	Boundaries int64         `json:"boundaries"`
	Paths      int64         `json:"paths"`
	Flat       uint64        `json:"flat"`
	Manhattan  uint64        `json:"manhattan"`
	Rectangles uint64        `json:"rectangles"`
	Least      int64         `json:"least_width_dbu"`
	Widths     []surveyWidth `json:"widths"`
	Texts      int64         `json:"texts"`
	Boxes      int64         `json:"boxes"`
	Nodes      int64         `json:"nodes"`
}

type surveyWidth struct {
	Width int64  `json:"width_dbu"`
	Flat  uint64 `json:"flat"`
}

type surveyGaps struct {
	Layer   string       `json:"layer"`
	Figures int64        `json:"figures"`
	Shapes  int64        `json:"shapes"`
	Largest int64        `json:"largest_spacing_dbu"`
	Limited string       `json:"limited"`
	Kinds   []surveyGap  `json:"kinds"`
	Steps   []surveyStep `json:"spacings"`
}

type surveyGap struct {
	From  int64 `json:"from_dbu"`
	Below int64 `json:"below_dbu"`
	Pairs int64 `json:"pairs"`
}

type surveyStep struct {
	From       int64 `json:"from_dbu"`
	To         int64 `json:"to_dbu"`
	NearPairs  int64 `json:"near_pairs"`
	Components int64 `json:"components"`
	Odd        int64 `json:"odd_components"`
	Largest    int64 `json:"largest_component"`
}

// writeSurveyJSON prints the survey as JSON.
func writeSurveyJSON(w *bufio.Writer, found *surveyed) error {
	s := found.survey
	out := surveyJSON{
		Input:      surveyInput{report.Text(found.name), s.Bytes, s.DBU, s.UserUnit},
		Structures: s.Structures, Tops: texts(s.Tops), Depth: s.Depth, References: s.References, Arrays: s.Arrays,
		Odd: s.OddReferences, Placements: s.Placements, Missing: texts(s.Missing),
		Layers: make([]surveyLayer, 0, len(s.Layers)),
	}
	for i := range s.Layers {
		l := &s.Layers[i]
		j := surveyLayer{Layer: layerName(l.Layer), Boundaries: l.Boundaries, Paths: l.Paths, Flat: l.Flat, Manhattan: l.Manhattan,
			Rectangles: l.Rectangles, Least: l.Smallest, Widths: make([]surveyWidth, 0, len(l.Widths)), Texts: l.Texts, Boxes: l.Boxes, Nodes: l.Nodes}
		for _, width := range l.Widths {
			j.Widths = append(j.Widths, surveyWidth(width))
		}
		out.Layers = append(out.Layers, j)
	}
	if found.gaps != nil {
		out.Gaps = gapsJSON(found.gaps)
	}
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(out)
}

func gapsJSON(g *survey.Gaps) *surveyGaps {
	out := &surveyGaps{Layer: layerName(g.Layer), Figures: g.Figures, Shapes: g.Shapes, Largest: g.Looked, Limited: g.Limited,
		Kinds: []surveyGap{}, Steps: []surveyStep{}}
	for _, k := range g.Gaps() {
		out.Kinds = append(out.Kinds, surveyGap(k))
	}
	for _, s := range g.Steps {
		out.Steps = append(out.Steps, surveyStep(s))
	}
	return out
}

// texts gives names as UTF-8; never nil.
func texts(names []string) []string {
	out := make([]string, 0, len(names))
	for _, n := range names {
		out = append(out, report.Text(n))
	}
	return out
}
