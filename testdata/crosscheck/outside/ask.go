package outside

import (
	"bytes"
	"encoding/json"
	"os/exec"
	"path/filepath"
	"testing"

	// Maskpair builds the program; importing it here too tells the test cache that its packages count.
	_ "maskpair/cli"
)

// Python is the interpreter that Debian's Python packages belong to.
const Python = "/usr/bin/python3"

// Ask gives a question to a Python script, and its answer back.
func Ask[Q, A any](t testing.TB, script string, question Q) A {
	t.Helper()
	return ask[Q, A](t, exec.Command(Python, "-B", script), question)
}

// AskProgram gives a question to a program, and its answer back.
func AskProgram[Q, A any](t testing.TB, program string, question Q) A {
	t.Helper()
	return ask[Q, A](t, exec.Command(program), question)
}

func ask[Q, A any](t testing.TB, cmd *exec.Cmd, question Q) A {
	t.Helper()
	in, err := json.Marshal(question)
	if err != nil {
		t.Fatal(err)
	}
	var out, complaint bytes.Buffer
	cmd.Stdin, cmd.Stdout, cmd.Stderr = bytes.NewReader(in), &out, &complaint
	if err := cmd.Run(); err != nil {
		t.Fatalf("%v: %v\n%s", cmd.Args, err, complaint.Bytes())
	}
	var answer A
	if err := json.Unmarshal(out.Bytes(), &answer); err != nil {
		t.Fatalf("%v answers what is no JSON of the form expected: %v\n%.2000s", cmd.Args, err, out.Bytes())
	}
	return answer
}

// Maskpair builds the program, and gives its path.
func Maskpair(t testing.TB) string {
	t.Helper()
	root, err := exec.Command("go", "list", "-m", "-f", "{{.Dir}}", "maskpair").Output()
	if err != nil {
		t.Fatal(err)
	}
	program := filepath.Join(t.TempDir(), "maskpair")
	cmd := exec.Command("go", "build", "-o", program, "./cli/maskpair")
	cmd.Dir = string(bytes.TrimSpace(root))
	if out, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("go build: %v\n%s", err, out)
	}
	return program
}

// Compile builds a C++ program from one source file and a library.
func Compile(t testing.TB, source, library string) string {
	t.Helper()
	program := filepath.Join(t.TempDir(), "program")
	if out, err := exec.Command("g++", "-O1", "-w", "-o", program, source, "-l"+library).CombinedOutput(); err != nil {
		t.Fatalf("g++ %s: %v\n%s", source, err, out)
	}
	return program
}
