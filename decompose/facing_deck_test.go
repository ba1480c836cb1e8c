package decompose

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// Rules that contradict each other, each in a deck that is right but for them. Lines count from the [[layer]] at line 2.
func TestRemarks(t *testing.T) {
	for _, c := range []struct {
		name, rules, marks string
		want               []string // line, key and the beginning of the text
	}{
		{"nothing odd", "any_mask_spacing = 18\n[layer.spacing]\ntip_to_side = 40\ntip_to_tip = 44\ntip_width = 20\nwide = [{ width = 100, spacing = 60 }]\n" +
			"[layer.stitch]\nmin_overlap = 10\nmin_piece = 20\n", "[marks]\nstitch = \"9/1\"\nany_mask = \"9/2\"\n", nil},
		{"a tip rule below any_mask_spacing", "any_mask_spacing = 30\n[layer.spacing]\ntip_to_side = 40\ntip_to_tip = 29\ntip_width = 20\n", "",
			[]string{"11 spacing.tip_to_tip 29 nm is below any_mask_spacing (30 nm)", "11 spacing.tip_to_tip tip_to_tip (29 nm) is less than tip_to_side (40 nm)"}},
		{"corners below any_mask_spacing", "any_mask_spacing = 30\n[layer.spacing]\ncorner_to_corner = 20\n", "",
			[]string{"10 spacing.corner_to_corner 20 nm is below any_mask_spacing (30 nm)"}},
		{"corners just at any_mask_spacing", "any_mask_spacing = 30\n[layer.spacing]\ncorner_to_corner = 30\n", "", nil},
		{"opposite masks help nowhere", "any_mask_spacing = 36\n", "", []string{"8 any_mask_spacing equals same_mask_spacing"}},
		{"tips nearer than sides", "[layer.spacing]\ntip_to_side = 30\ntip_width = 20\n", "",
			[]string{"9 spacing.tip_to_side tip_to_side (30 nm) is less than side_to_side (36 nm)"}},
		{"tips without a rule", "[layer.spacing]\nside_to_side = 36\ntip_width = 20\n", "", []string{"10 spacing.tip_width tips and sides all keep 36 nm"}},
		{"tips wider than the spacing", "[layer.spacing]\ntip_to_tip = 44\ntip_width = 37\n", "", []string{"10 spacing.tip_width 37 nm is above same_mask_spacing (36 nm)"}},
		{"another unit", "[layer.spacing]\nside_to_side = 0.036\n", "", []string{"9 spacing.side_to_side 0.036 nm and same_mask_spacing (36 nm) are more than ten times apart"}},
		{"a wide rule without effect", "[layer.spacing]\nwide = [{ width = 100, spacing = 36 }]\n", "", []string{"9 spacing.wide.spacing 36 nm is no more than facing edges keep anyway"}},
		{"wide parts keep less than tips", "[layer.spacing]\ntip_to_tip = 44\ntip_width = 20\nwide = [{ width = 100, spacing = 40 }]\n", "",
			[]string{"11 spacing.wide.spacing 40 nm is less than some narrow parts keep (44 nm)"}},
		{"a wider rule that asks for less", "[layer.spacing]\nwide = [{ width = 100, spacing = 60 }, { width = 120, spacing = 50 }]\n", "",
			[]string{"9 spacing.wide.spacing parts from 100 nm on keep 60 nm already (line 9)"}},
		{"wide from the tip width on", "[layer.spacing]\ntip_to_tip = 44\ntip_width = 20\nwide = [{ width = 20, spacing = 60 }]\n", "",
			[]string{"11 spacing.wide.width 20 nm is no more than tip_width (20 nm)"}},
		{"pieces shorter than overlaps", "[layer.stitch]\nmin_overlap = 10\nmin_piece = 9\n", "", []string{"10 stitch.min_piece 9 nm is less than min_overlap (10 nm)"}},
		{"marks that nothing draws", "", "[marks]\nstitch = \"9/1\"\nany_mask = \"9/2\"\n", []string{"0 marks.stitch no layer has a [layer.stitch]", "0 marks.any_mask no layer has any_mask_spacing"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			d, err := ParseDeck("deck.toml", []byte(facingDeck(36, c.rules)+c.marks))
			if err != nil {
				t.Fatal(err)
			}
			var got []string
			for i, r := range d.Remarks() {
				line := fmt.Sprintf("%d %s %s", r.Line, strings.TrimPrefix(r.Key, "layer m: "), r.Text)
				if i < len(c.want) && len(line) > len(c.want[i]) {
					line = line[:len(c.want[i])]
				}
				got = append(got, line)
			}
			if diff := cmp.Diff(c.want, got); diff != "" {
				t.Errorf("remarks (want, got):\n%s", diff)
			}
		})
	}
}
