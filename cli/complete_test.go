package cli

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// script gives what the command prints for a shell.
func script(t *testing.T, shell string) string {
	t.Helper()
	var out, errw bytes.Buffer
	if status := Run(context.Background(), []string{"completion", shell}, nil, &out, &errw); status != 0 {
		t.Fatalf("status %d: %s", status, errw.String())
	}
	return out.String()
}

// What bash offers for a command line, asked of bash itself.
func TestBashCompletes(t *testing.T) {
	bash, err := exec.LookPath("bash")
	if err != nil {
		t.Skip("there is no bash here")
	}
	dir := t.TempDir()
	for _, name := range []string{"deck one.toml", "chip.gds", "other.gds.gz", "notes.txt", "report.json"} {
		if err := os.WriteFile(filepath.Join(dir, name), nil, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Mkdir(filepath.Join(dir, "cells"), 0o755); err != nil {
		t.Fatal(err)
	}
	text := script(t, "bash")
	for _, c := range []struct {
		line []string // the last word is the one to be completed
		want []string
	}{
		{[]string{"maskpair", "de"}, []string{"decompose", "demo"}},
		{[]string{"maskpair", "--v"}, []string{"--version"}},
		{[]string{"maskpair", "decompose", "--deck", ""}, []string{"cells", "deck one.toml"}},
		{[]string{"maskpair", "decompose", "--freeze", ""}, []string{"A", "B", "both"}},
		{[]string{"maskpair", "decompose", "--jobs", ""}, nil},
		{[]string{"maskpair", "decompose", "--ba"}, []string{"--baseline"}},
		{[]string{"maskpair", "decompose", "chip.gds", "--fo"}, []string{"--force"}},
		{[]string{"maskpair", "survey", ""}, []string{"cells", "chip.gds", "other.gds.gz"}},
		{[]string{"maskpair", "survey", "--de"}, []string{"--deck-starter"}},
		{[]string{"maskpair", "survey", "--fr"}, nil},
		{[]string{"maskpair", "completion", ""}, []string{"bash", "zsh"}},
	} {
		var words []string
		for _, w := range c.line {
			words = append(words, quoted(w))
		}
		cmd := exec.Command(bash, "--norc", "-c", fmt.Sprintf("%s\nCOMP_WORDS=(%s)\nCOMP_CWORD=%d\n_maskpair\nprintf '%%s\\n' \"${COMPREPLY[@]}\"", text, strings.Join(words, " "), len(words)-1))
		cmd.Dir = dir
		out, err := cmd.CombinedOutput()
		if err != nil {
			t.Fatalf("%v: %v\n%s", c.line, err, out)
		}
		var got []string
		for _, line := range strings.Split(string(out), "\n") {
			if line != "" {
				got = append(got, line)
			}
		}
		slices.Sort(got)
		if !slices.Equal(got, c.want) {
			t.Errorf("%q: %q, want %q", c.line, got, c.want)
		}
	}
}

// zsh can read its script, and every command and option is in it.
func TestZshScript(t *testing.T) {
	text := script(t, "zsh")
	for _, want := range []string{"#compdef maskpair", "'survey:", "'--freeze[", ":(A B both)", `*.toml(-.)`, "1:shell:(bash zsh)"} {
		if !strings.Contains(text, want) {
			t.Errorf("the script does not have %q", want)
		}
	}
	zsh, err := exec.LookPath("zsh")
	if err != nil {
		t.Skip("there is no zsh here to read it")
	}
	cmd := exec.Command(zsh, "-n", "/dev/stdin")
	cmd.Stdin = strings.NewReader(text)
	if out, err := cmd.CombinedOutput(); err != nil {
		t.Errorf("%v\n%s", err, out)
	}
}

func TestCompletionOfNoShell(t *testing.T) {
	for _, args := range [][]string{{"completion"}, {"completion", "fish"}, {"completion", "bash", "zsh"}} {
		var out, errw bytes.Buffer
		if status := Run(context.Background(), args, nil, &out, &errw); status != 2 || out.Len() > 0 {
			t.Errorf("%q: status %d, %q", args, status, out.String())
		}
	}
}
