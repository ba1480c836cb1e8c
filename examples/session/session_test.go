package session

import (
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// command is a command of a session with the lines that README prints below it.
type command struct {
	text  string
	lines []string
}

// sessions reads the blocks of README that are terminal sessions.
func sessions(t *testing.T) [][]command {
	t.Helper()
	text, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	var out [][]command
	inside := false
	for line := range strings.Lines(string(text)) {
		line = strings.TrimSuffix(line, "\n")
		switch shown, isCommand := strings.CutPrefix(line, "$ "); {
		case line == "```console":
			inside = true
			out = append(out, nil)
		case line == "```":
			inside = false
		case inside && isCommand:
			out[len(out)-1] = append(out[len(out)-1], command{text: shown})
		case inside:
			s := out[len(out)-1]
			if len(s) == 0 {
				t.Fatalf("README: a session begins with %q, which is no command", line)
			}
			last := &s[len(s)-1]
			last.lines = append(last.lines, line)
		}
	}
	return out
}

// elided tells whether lines are what was printed, where "..." stands for any number of lines.
func elided(lines, printed []string) bool {
	if len(lines) == 0 {
		return len(printed) == 0
	}
	if lines[0] != "..." {
		return len(printed) > 0 && printed[0] == lines[0] && elided(lines[1:], printed[1:])
	}
	for skip := range len(printed) + 1 {
		if elided(lines[1:], printed[skip:]) {
			return true
		}
	}
	return false
}

func TestElided(t *testing.T) {
	printed := []string{"a", "b", "c", "b", "d"}
	for _, c := range []struct {
		lines []string
		want  bool
	}{
		{[]string{"a", "b", "c", "b", "d"}, true},
		{[]string{"a", "...", "b", "d"}, true},
		{[]string{"...", "d", "..."}, true},
		{[]string{"a", "..."}, true},
		{[]string{"a", "b"}, false},
		{[]string{"...", "d", "b", "..."}, false},
		{[]string{"...", "x", "..."}, false},
		{nil, false},
	} {
		if elided(c.lines, printed) != c.want {
			t.Errorf("%q for %q: %v", c.lines, printed, !c.want)
		}
	}
}

// Commands that fetch and install are not run; a program that is built here stands in for the one that they install.
func TestReadme(t *testing.T) {
	shell, err := exec.LookPath("sh")
	if err != nil {
		t.Skip("there is no shell")
	}
	bin := t.TempDir()
	if out, err := exec.Command("go", "build", "-o", bin, "maskpair/cli/maskpair").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	t.Setenv("PATH", bin+string(os.PathListSeparator)+os.Getenv("PATH"))
	ran := 0
	for _, session := range sessions(t) {
		dir := t.TempDir()
		for _, c := range session {
			if slices.Contains([]string{"git", "cd", "go", "export"}, strings.Fields(c.text)[0]) {
				continue
			}
			ran++
			run := exec.Command(shell, "-c", c.text)
			run.Dir = dir
			out, _ := run.CombinedOutput() // an exit status of 1 says that something is unresolved, and the lines say so
			printed := strings.Split(strings.TrimSuffix(string(out), "\n"), "\n")
			if len(out) == 0 {
				printed = nil
			}
			if !elided(c.lines, printed) {
				t.Errorf("README shows\n$ %s\n%s\nbut it prints\n%s", c.text, strings.Join(c.lines, "\n"), out)
			}
		}
	}
	if ran < 4 {
		t.Errorf("%d commands were run, want at least 4: demo, an edit, decompose, verify", ran)
	}
}

// Links of the pages within the project lead to files, and to headings that are there.
func TestLinks(t *testing.T) {
	top := filepath.Join("..", "..")
	link := regexp.MustCompile(`\]\(([^)\s]+)\)`)
	heading := regexp.MustCompile(`(?m)^#+ (.+)$`)
	dropped := regexp.MustCompile(`[^\w\- ]`)
	found := 0
	err := filepath.WalkDir(top, func(path string, d os.DirEntry, err error) error {
		if err != nil || filepath.Ext(path) != ".md" {
			return err
		}
		text, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		for _, m := range link.FindAllStringSubmatch(string(text), -1) {
			file, section, _ := strings.Cut(m[1], "#")
			if strings.Contains(file, "://") {
				continue
			}
			found++
			target := path
			if file != "" {
				target = filepath.Join(filepath.Dir(path), filepath.FromSlash(file))
			}
			there, err := os.ReadFile(target)
			if err != nil {
				t.Errorf("%s: %s: %v", path, m[1], err)
				continue
			}
			known := slices.ContainsFunc(heading.FindAllStringSubmatch(string(there), -1), func(h []string) bool {
				return strings.ReplaceAll(dropped.ReplaceAllString(strings.ToLower(h[1]), ""), " ", "-") == section
			})
			if section != "" && !known {
				t.Errorf("%s: %s: no such heading", path, m[1])
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if found < 20 {
		t.Errorf("%d links, want some dozens", found)
	}
}
