package report

import (
	"bytes"
	"encoding/json"
	"flag"
	"fmt"
	"maps"
	"os"
	"slices"
	"strings"
	"testing"

	"maskpair/decompose"
)

// This file holds REPORT.md, the schemas and what is written against each other. The schemas say what each key means; the tables of the
// page are printed from them. Whether a schema and a report agree in every detail is judged in testdata/crosscheck, by a validator that
// nobody here wrote; here only the keys are compared.

var update = flag.Bool("update", false, "print the tables of REPORT.md anew")

// schema is the part of a JSON Schema that the tables are made of.
type schema struct {
	Title       string             `json:"title"`
	Description string             `json:"description"`
	Ref         string             `json:"$ref"`
	Type        string             `json:"type"`
	Enum        []string           `json:"enum"`
	Properties  map[string]*schema `json:"properties"`
	Required    []string           `json:"required"` // in the order of the page
	Items       *schema            `json:"items"`
	AnyOf       []*schema          `json:"anyOf"`
	Defs        map[string]*schema `json:"$defs"`
}

func readSchema(t *testing.T, name string) *schema {
	t.Helper()
	text, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	s := new(schema)
	if err := json.Unmarshal(text, s); err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return s
}

// local gives the name of a definition of the same file that s refers to.
func (s *schema) local() string { return strings.TrimPrefix(s.Ref, "#/$defs/") }

// keys lists the properties of s: those that are required in their order, then the others by name.
func (s *schema) keys() []string {
	keys := slices.Clone(s.Required)
	for _, k := range slices.Sorted(maps.Keys(s.Properties)) {
		if !slices.Contains(keys, k) {
			keys = append(keys, k)
		}
	}
	return keys
}

// tablePage prints tables.
type tablePage struct {
	bytes.Buffer
	root *schema
}

// kind words what a value is.
func (p *tablePage) kind(s *schema) string {
	if len(s.AnyOf) == 2 && s.AnyOf[0].Type == "null" {
		return p.kind(s.AnyOf[1]) + " or null"
	}
	if def := p.root.Defs[s.local()]; def != nil {
		if def.Title != "" {
			return fmt.Sprintf("[%s](#%s)", strings.ToLower(def.Title[:1])+def.Title[1:], strings.ReplaceAll(strings.ToLower(def.Title), " ", "-"))
		}
		if def.Description != "" {
			return s.local() + ": " + def.Description
		}
		return p.kind(def)
	}
	switch {
	case s.Ref != "":
		return "object"
	case len(s.Enum) > 0:
		return "`\"" + strings.Join(s.Enum, "\"` or `\"") + "\"`"
	case s.Type == "array":
		return "list of " + p.kind(s.Items)
	case s.Type == "integer":
		return "whole number"
	case s.Type == "boolean":
		return "true or false"
	}
	return s.Type
}

// rows prints a row for each key of an object, and for those of objects in it.
func (p *tablePage) rows(path string, s *schema) {
	for _, k := range s.keys() {
		v := s.Properties[k]
		fmt.Fprintf(p, "| `%s%s` | %s | %s |\n", path, k, p.kind(v), v.Description)
		if v.Properties != nil {
			p.rows(path+k+".", v)
		}
		if v.Items != nil && v.Items.Properties != nil {
			p.rows(path+k+"[].", v.Items)
		}
	}
}

// named lists the definitions that s refers to, and those that they refer to, in the order of the page; seen are those before.
func (root *schema) named(s *schema, seen []string) []string {
	if s == nil {
		return seen
	}
	if name := s.local(); root.Defs[name] != nil && !slices.Contains(seen, name) {
		seen = root.named(root.Defs[name], append(seen, name))
	}
	for _, k := range s.keys() {
		seen = root.named(s.Properties[k], seen)
	}
	for _, a := range s.AnyOf {
		seen = root.named(a, seen)
	}
	return root.named(s.Items, seen)
}

// tables prints the tables of a schema.
func tables(root *schema) string {
	p := &tablePage{root: root}
	table := func(s *schema) {
		fmt.Fprint(p, "| key | what it is | meaning |\n|---|---|---|\n")
		p.rows("", s)
	}
	fmt.Fprintf(p, "\n%s\n\n", root.Description)
	table(root)
	for _, name := range root.named(root, nil) {
		if d := root.Defs[name]; d.Title != "" {
			fmt.Fprintf(p, "\n### %s\n\n", d.Title)
			if d.Description != "" {
				fmt.Fprintf(p, "%s\n\n", d.Description)
			}
			table(d)
		}
	}
	return p.String() + "\n"
}

func TestPageOfTheReport(t *testing.T) {
	kept, err := os.ReadFile("REPORT.md")
	if err != nil {
		t.Fatal(err)
	}
	text := string(kept)
	for _, name := range []string{"report.schema.json", "verify.schema.json", "compare.schema.json"} {
		open, end := "<!-- tables of "+name+" -->\n", "<!-- end of "+name+" -->\n"
		before, rest, ok := strings.Cut(text, open)
		_, after, closed := strings.Cut(rest, end)
		if !ok || !closed {
			t.Fatalf("REPORT.md lacks %q or %q", open, end)
		}
		text = before + open + tables(readSchema(t, name)) + end + after
	}
	if *update {
		if err := os.WriteFile("REPORT.md", []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	} else if text != string(kept) {
		t.Error("the tables of REPORT.md are not those of the schemas; run  go test ./cli/report -update  and look at the change")
	}
}

// sameKeys holds a value against a schema: objects have the keys that are required and no others, and those that they may have.
func sameKeys(t *testing.T, root, s *schema, where string, value any) {
	t.Helper()
	properties, required := map[string]*schema{}, []string{}
	for ; s != nil; s = root.Defs[s.local()] {
		maps.Copy(properties, s.Properties)
		required = append(required, s.Required...)
		if s.Items != nil {
			for _, v := range value.([]any) {
				sameKeys(t, root, s.Items, where+"[]", v)
			}
		}
		if s.Ref == "" {
			break
		}
	}
	object, ok := value.(map[string]any)
	if len(properties) == 0 || !ok {
		return
	}
	for _, k := range required {
		if _, ok := object[k]; !ok {
			t.Errorf("%s has no %s", where, k)
		}
	}
	for k, v := range object {
		if properties[k] == nil {
			t.Errorf("%s has %s, which the schema does not know", where, k)
		} else {
			sameKeys(t, root, properties[k], where+"."+k, v)
		}
	}
}

func TestKeysAreThoseOfTheSchema(t *testing.T) {
	root := readSchema(t, "report.schema.json")
	r := sample()
	l := &r.Result.Layers[0]
	l.SameShape = []decompose.SameShapePlace{{Top: "chip"}}
	l.Frozen = []decompose.FrozenFault{{Top: "chip"}}
	l.Unresolved[0].Repair = l.Unresolved[0].Pairs
	sameKeys(t, root, root, "report", map[string]any(parse(t, r)))
}
