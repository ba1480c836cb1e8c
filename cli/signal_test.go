//go:build unix

package cli

import (
	"bufio"
	"context"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"maskpair/cli/report"
)

// These tests run the program as a process of its own: the test binary, told by a variable to be the program.

const childVariable = "MASKPAIR_TEST_CHILD"

func TestMain(m *testing.M) {
	switch os.Getenv(childVariable) {
	case "":
		os.Exit(m.Run())
	case "hangs":
		os.Exit(child(func(context.Context, *Options, *work) (*report.Report, error) {
			os.Stdout.WriteString("begun\n")
			select {} // as work would that never looks at its context
		}))
	case "writes":
		os.Exit(child(func(_ context.Context, o *Options, w *work) (*report.Report, error) {
			_, err := w.out.Write(make([]byte, 1<<20)) // more than a pipe holds
			return result(o, 0), err
		}))
	}
}

func child(step decomposeStep) int {
	return run(UntilSignal(), os.Args[1:], &console{os.Stdin, os.Stdout, os.Stderr}, steps{decompose: step})
}

// start starts the program in a folder of its own and gives the folder.
func start(t *testing.T, kind string, output string) (*exec.Cmd, string, io.ReadCloser, *strings.Builder) {
	t.Helper()
	dir := t.TempDir()
	for name, text := range map[string]string{"in.gds": "drawn", "deck.toml": testDeck} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	cmd := exec.Command(os.Args[0], "decompose", "in.gds", "--deck", "deck.toml", "--output", output)
	cmd.Dir = dir
	cmd.Env = append(os.Environ(), childVariable+"="+kind, "TMPDIR="+dir)
	said := new(strings.Builder)
	cmd.Stderr = said
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	return cmd, dir, out, said
}

func list(t *testing.T, dir string) string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
	}
	return strings.Join(names, " ")
}

func TestSignalEndsTheProgram(t *testing.T) {
	for _, s := range []syscall.Signal{syscall.SIGINT, syscall.SIGTERM} {
		cmd, dir, out, said := start(t, "hangs", "out.gds")
		if line, err := bufio.NewReader(out).ReadString('\n'); line != "begun\n" {
			t.Fatalf("it printed %q, %v", line, err)
		}
		cmd.Process.Signal(s)
		cmd.Wait()
		if got := cmd.ProcessState.ExitCode(); got != 4 || !strings.Contains(said.String(), "interrupted") {
			t.Errorf("%v: status %d, it said %q; want 4 and that it was interrupted", s, got, said)
		}
		if got := list(t, dir); got != "deck.toml in.gds" {
			t.Errorf("%v: the folder holds %s", s, got)
		}
	}
}

func TestSecondSignalKills(t *testing.T) {
	cmd, _, out, said := start(t, "hangs", "out.gds")
	if line, err := bufio.NewReader(out).ReadString('\n'); line != "begun\n" {
		t.Fatalf("it printed %q, %v", line, err)
	}
	cmd.Process.Signal(syscall.SIGINT)
	for range 100 { // until the first was taken; the program ends by itself soon after
		time.Sleep(5 * time.Millisecond)
		cmd.Process.Signal(syscall.SIGTERM)
	}
	cmd.Wait()
	if status := cmd.ProcessState.Sys().(syscall.WaitStatus); !status.Signaled() || status.Signal() != syscall.SIGTERM {
		t.Errorf("it ended as %v (%s), want killed by the second signal", cmd.ProcessState, said)
	}
}

func TestClosedPipe(t *testing.T) {
	cmd, dir, out, said := start(t, "writes", "-")
	out.Close()
	cmd.Wait()
	if got := cmd.ProcessState.ExitCode(); got != 4 || !strings.Contains(said.String(), "standard output: cannot be written: broken pipe") {
		t.Errorf("%v, it said %q; want status 4 and a broken pipe", cmd.ProcessState, said)
	}
	if got := list(t, dir); got != "deck.toml in.gds" {
		t.Errorf("the folder holds %s", got)
	}
}
