package page

import (
	"bytes"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"maskpair/testdata/crosscheck/outside"
)

// reports is where the schemas and the page about the reports are.
const reports = "../../../cli/report/"

// lists notes which lists of a report have something in them.
func lists(path string, value any, filled map[string]bool) {
	switch v := value.(type) {
	case map[string]any:
		for k, item := range v {
			lists(path+"."+k, item, filled)
		}
	case []any:
		filled[path] = filled[path] || len(v) > 0
		for _, item := range v {
			lists(path+"[]", item, filled)
		}
	}
}

// What the program writes keeps to the schemas, in the words of a validator that nobody here wrote. Each list of each report has
// something in it at least once, so no part of a schema goes unasked.
func TestReportsKeepToTheirSchemas(t *testing.T) {
	w := write(t)
	program := outside.Maskpair(t)
	path := func(name string) string { return filepath.Join(w.dir, name) }
	put := func(name, text string) {
		if err := os.WriteFile(path(name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	put("rules.toml", strings.NewReplacer("[layer.stitch]", "same_shape = \"report\"\n[layer.spacing]\ntip_width = 20\ntip_to_tip = 44\n[layer.stitch]",
		"min_piece = 40", "min_piece = 40\napply = true").Replace(sceneDeck))
	filled := map[string]map[string]bool{}
	number := 0
	// run runs a command with a report and holds it against the schema.
	run := func(schema string, args ...string) {
		t.Helper()
		number++
		out := path(fmt.Sprintf("schema%d.json", number))
		cmd := exec.Command(program, append(args, "--report", out)...)
		cmd.Dir = w.dir
		if said, err := cmd.CombinedOutput(); err != nil && cmd.ProcessState.ExitCode() != 1 {
			t.Fatalf("%v: %v\n%s", args, err, said)
		}
		text, err := os.ReadFile(out)
		if err != nil {
			t.Fatal(err)
		}
		compiled, err := jsonschema.NewCompiler().Compile(reports + schema)
		if err != nil {
			t.Fatal(err)
		}
		value, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
		if err != nil {
			t.Fatal(err)
		}
		if err := compiled.Validate(value); err != nil {
			t.Errorf("%v: %v", args, err)
		}
		if filled[schema] == nil {
			filled[schema] = map[string]bool{}
		}
		lists("", value, filled[schema])
	}
	const decompose, verify, compare = "report.schema.json", "verify.schema.json", "compare.schema.json"
	run(decompose, "decompose", "layout.gds", "--deck", "deck.toml", "--anchors", "anchors.toml", "--baseline", "masks.gds")
	run(decompose, "decompose", "layout.gds", "--deck", "rules.toml", "--anchors", "anchors.toml", "--output", "ruled.gds")
	run(decompose, "decompose", "before.gds", "--deck", "deck.toml", "--baseline", "masks.gds", "--freeze", "both")
	run(decompose, "decompose", "layout.gds", "--deck", "deck.toml", "--baseline", "masks.gds", "--freeze", "A")
	run(verify, "verify", "masks.gds", "--deck", "deck.toml", "--anchors", "anchors.toml")
	run(verify, "verify", "masks.gds", "--deck", "deck.toml", "--drawn", "layout.gds")
	run(compare, "compare", "masks.gds", "masks.gds", "--deck", "deck.toml")
	run(compare, "compare", "masks.gds", "ruled.gds", "--deck", "deck.toml")

	// Left empty by this layout: it gives no cause for warnings and is solved in full, compare counts no work, and edges are told by rules of
	// [layer.spacing] alone and not of pairs that are too near on any masks.
	empty := regexp.MustCompile(`\.(warnings|not_computed|stages\[\]\.work|edge_[ab])$`)
	for schema, found := range filled {
		for list, some := range found {
			if !some && !empty.MatchString(list) {
				t.Errorf("%s: no report has anything in %s", schema, list)
			}
		}
	}

	// A report with a key too many, too few, or of another kind is none.
	compiled, err := jsonschema.NewCompiler().Compile(reports + decompose)
	if err != nil {
		t.Fatal(err)
	}
	for _, change := range []func(layer map[string]any){
		func(layer map[string]any) { layer["more"] = 1.0 },
		func(layer map[string]any) { delete(layer, "stitches") },
		func(layer map[string]any) { layer["shapes"] = 1.5 },
		func(layer map[string]any) { layer["waived"] = []any{map[string]any{}} },
	} {
		var value map[string]any
		text, err := json.Marshal(w.report)
		if err == nil {
			err = json.Unmarshal(text, &value)
		}
		if err != nil {
			t.Fatal(err)
		}
		change(value["layers"].([]any)[0].(map[string]any))
		if compiled.Validate(value) == nil {
			t.Error("the schema lets a spoiled report pass")
		}
	}
}

// The script on the page about the reports prints what the page says.
func TestScriptOfThePage(t *testing.T) {
	outside.Packages(t, "python3")
	text, err := os.ReadFile(reports + "REPORT.md")
	if err != nil {
		t.Fatal(err)
	}
	blocks := regexp.MustCompile("(?s)```(python)?\n(.*?)```").FindAllStringSubmatch(string(text), -1)
	i := slices.IndexFunc(blocks, func(b []string) bool { return b[1] == "python" })
	if i < 0 || i+1 >= len(blocks) {
		t.Fatal("REPORT.md has no script with what it prints behind it")
	}
	dir := t.TempDir()
	demo := exec.Command(outside.Maskpair(t), "demo")
	demo.Dir = dir
	if said, err := demo.CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, said)
	}
	script := exec.Command("python3", "-")
	script.Dir, script.Stdin = dir, strings.NewReader(blocks[i][2])
	said, err := script.CombinedOutput()
	if err != nil || string(said) != blocks[i+1][2] {
		t.Errorf("%v: the script prints\n%s", err, said)
	}
}
