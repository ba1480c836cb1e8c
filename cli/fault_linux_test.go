package cli_test

import (
	"bytes"
	"compress/gzip"
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"maskpair/cli"
	"maskpair/gds"
	"maskpair/testdata/twin"
)

// These tests need what Linux has: file systems in memory that are as small as one likes, pipes with a name, limits of the
// address space, and processes that are killed.

// wholeVariable makes the test binary the program itself; its value is how many bytes of address space it may have, or 0.
const wholeVariable = "MASKPAIR_TEST_WHOLE"

func init() {
	space, err := strconv.ParseUint(os.Getenv(wholeVariable), 10, 64)
	if err != nil {
		return
	}
	if space > 0 {
		if err := syscall.Setrlimit(syscall.RLIMIT_AS, &syscall.Rlimit{Cur: space, Max: space}); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(99)
		}
	}
	os.Exit(cli.Run(cli.UntilSignal(), os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}

// process gives the program as a process of its own in the folder.
func (f folder) process(space uint64, args ...string) (*exec.Cmd, *bytes.Buffer) {
	cmd := exec.Command(os.Args[0], args...)
	cmd.Dir = f.dir
	cmd.Env = append(os.Environ(), fmt.Sprintf("%s=%d", wholeVariable, space), "TMPDIR="+f.dir)
	said := new(bytes.Buffer)
	cmd.Stderr = said
	return cmd, said
}

// mounted makes a folder that is a file system of its own, or skips the test where that is not allowed.
func mounted(t *testing.T, options string) string {
	t.Helper()
	dir := t.TempDir()
	if err := syscall.Mount("tmpfs", dir, "tmpfs", 0, options); err != nil {
		t.Skipf("a small file system cannot be mounted here (%v); run the tests as root", err)
	}
	t.Cleanup(func() {
		if err := syscall.Unmount(dir, 0); err != nil {
			t.Errorf("%s stays mounted: %v", dir, err)
		}
	})
	return dir
}

// TestDiskFull runs out of room at every size up to that of the output.
func TestDiskFull(t *testing.T) {
	o := openLayouts()[3]
	f := newFolder(t)
	stream := o.stream(t)
	f.write("in.gds", stream)
	f.write("deck.toml", []byte(o.deck().TOML(o.dbu*1e-9)))
	for _, room := range []int{4, 64, 256, 600} { // KiB; the layout has more
		if room<<10 >= len(stream) {
			t.Fatalf("the layout has only %d bytes", len(stream))
		}
		t.Run(fmt.Sprint(room, "KiB"), func(t *testing.T) {
			small := folder{t, mounted(t, fmt.Sprintf("size=%dk", room))}
			small.write("earlier.gds", []byte("earlier"))
			for _, out := range []string{"new.gds", "earlier.gds"} {
				status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", small.path(out), "--report", "@report.json", "--force")
				if status != 4 || strings.Count(said, "\n") != 1 || !strings.Contains(said, out+": cannot be written: ") {
					t.Errorf("status %d, it said %s", status, said)
				}
				if got := small.names(); got != "earlier.gds" || string(small.read("earlier.gds")) != "earlier" {
					t.Errorf("there is now %s", got)
				}
				if got := f.names(); got != "deck.toml in.gds" {
					t.Errorf("the folder of the report holds %s", got)
				}
			}
		})
	}
}

// TestNoRoomForInput has no room to keep an input that cannot be read twice.
func TestNoRoomForInput(t *testing.T) {
	o := openLayouts()[3]
	f := newFolder(t)
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	z.Write(o.stream(t))
	z.Close()
	f.write("in.gds.gz", packed.Bytes())
	f.write("deck.toml", []byte(o.deck().TOML(o.dbu*1e-9)))
	small := folder{t, mounted(t, "size=64k")}
	t.Setenv("TMPDIR", small.dir)
	status, said := f.run("decompose", "@in.gds.gz", "--deck", "@deck.toml", "--output", "@out.gds")
	if status != 4 || strings.Count(said, "\n") != 1 || !strings.Contains(said, "in.gds.gz: ") {
		t.Errorf("status %d, it said %s", status, said)
	}
	if got := f.names() + small.names(); got != "deck.toml in.gds.gz" {
		t.Errorf("it left %s", got)
	}
	// Without an output nothing needs to be kept.
	if status, said := f.run("decompose", "@in.gds.gz", "--deck", "@deck.toml"); status > 1 {
		t.Errorf("status %d, it said %s", status, said)
	}
}

func TestReadOnlyFolder(t *testing.T) {
	f := faultBench(t)
	f.write("in.gds", smallStreams()["array"])
	dir := t.TempDir()
	if err := os.Chmod(dir, 0o555); err != nil {
		t.Fatal(err)
	}
	if os.WriteFile(filepath.Join(dir, "probe"), nil, 0o644) == nil { // modes do not bind root
		os.Remove(filepath.Join(dir, "probe"))
		dir = mounted(t, "ro")
	}
	status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", filepath.Join(dir, "out.gds"), "--report", "@report.json")
	if status != 4 || strings.Count(said, "\n") != 1 || !strings.Contains(said, "out.gds: cannot be written: ") {
		t.Errorf("status %d, it said %s", status, said)
	}
	if got := f.names(); got != "deck.toml in.gds" {
		t.Errorf("it left %s", got)
	}
}

func TestNamedPipes(t *testing.T) {
	f := faultBench(t)
	t.Setenv("TMPDIR", f.dir)
	stream := smallStreams()["array"]
	f.write("in.gds", stream)
	if err := syscall.Mkfifo(f.path("pipe"), 0o644); err != nil {
		t.Skip(err)
	}
	if status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@pipe", "--force"); status != 2 || !strings.Contains(said, "no regular file") {
		t.Errorf("a named pipe as output: status %d, it said %s", status, said)
	}
	fed := make(chan error, 1)
	go func() { fed <- os.WriteFile(f.path("pipe"), stream, 0) }()
	status, said := f.run("decompose", "@pipe", "--deck", "@deck.toml", "--output", "@out.gds")
	if err := <-fed; err != nil || status != 0 {
		t.Fatalf("a named pipe as input: status %d, it said %s; %v", status, said, err)
	}
	if err := faultDeck.Restores(stream, f.read("out.gds")); err != nil {
		t.Error(err)
	}
	if got := f.names(); got != "deck.toml in.gds out.gds pipe" {
		t.Errorf("it left %s", got)
	}
}

// TestKilled kills the program at any time: what stood at the output's place must be there still, or the new output, whole.
func TestKilled(t *testing.T) {
	o := openLayouts()[1]
	stream := o.stream(t)
	prepare := func() folder {
		f := newFolder(t)
		f.write("in.gds", stream)
		f.write("deck.toml", []byte(o.deck().TOML(o.dbu*1e-9)))
		return f
	}
	args := []string{"decompose", "in.gds", "--deck", "deck.toml", "--output", "out.gds", "--force", "--quiet"}
	f := prepare()
	begun := time.Now()
	cmd, said := f.process(0, args...)
	if cmd.Run(); cmd.ProcessState.ExitCode() != 1 {
		t.Fatalf("%v, it said %s", cmd.ProcessState, said)
	}
	whole := time.Since(begun)
	want := f.read("out.gds")
	const parts = 12
	for i := range parts + 2 {
		f := prepare()
		f.write("out.gds", []byte("earlier"))
		cmd, said := f.process(0, args...)
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		time.Sleep(whole * time.Duration(i) / parts)
		cmd.Process.Kill()
		cmd.Wait()
		if got := f.read("out.gds"); string(got) != "earlier" && !bytes.Equal(got, want) {
			t.Errorf("killed after %d/%d of the time: the output has %d bytes, and is neither the earlier one nor the new one; it said %s", i, parts, len(got), said)
		}
	}
}

// TestRunsMeet has several runs that write to one place at once.
func TestRunsMeet(t *testing.T) {
	stream := openLayouts()[0].stream(t)
	deck := openLayouts()[0].deck().TOML(0.25e-9)
	for _, force := range []bool{false, true} {
		f := newFolder(t)
		f.write("in.gds", stream)
		f.write("deck.toml", []byte(deck))
		args := []string{"decompose", "in.gds", "--deck", "deck.toml", "--output", "out.gds", "--report", "report.json", "--quiet"}
		if force {
			args = append(args, "--force")
		}
		const runs = 6
		var wg sync.WaitGroup
		var done, late atomic.Int32
		for range runs {
			wg.Go(func() {
				cmd, said := f.process(0, args...)
				cmd.Run()
				switch status := cmd.ProcessState.ExitCode(); {
				case status == 1: // this layout has odd cycles
					done.Add(1)
				case status == 2 && strings.Contains(said.String(), "--force"):
					late.Add(1)
				default:
					t.Errorf("%v, it said %s", cmd.ProcessState, said)
				}
			})
		}
		wg.Wait()
		if want := map[bool]int32{false: 1, true: runs}[force]; done.Load() != want {
			t.Errorf("force %v: %d runs were done and %d came late, want %d done", force, done.Load(), late.Load(), want)
		}
		if got := f.names(); got != "deck.toml in.gds out.gds report.json" {
			t.Errorf("force %v: the folder holds %s", force, got)
		}
		if err := openLayouts()[0].deck().Restores(stream, f.read("out.gds")); err != nil {
			t.Errorf("force %v: %v", force, err)
		}
	}
}

// TestBombsWithoutLimit gives the bombs that TestBombs has to a program that was not told how much memory it may use. It must
// refuse them by itself; the limit of the address space only keeps the machine safe from a program that does not.
func TestBombsWithoutLimit(t *testing.T) {
	f := faultBench(t)
	f.write("in.gds", (&twin.Layout{Cells: []twin.Cell{
		{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}},
		{Name: "top", Elements: []twin.Element{{Kind: twin.Array, Text: "leaf", Columns: 32767, Rows: 32767,
			Points: []gds.Point{{}, {X: 32767 * 10}, {Y: 32767 * 10}}}}},
	}}).Bytes())
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	cmd, said := f.process(8<<30, "decompose", "in.gds", "--deck", "deck.toml", "--output", "out.gds")
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	context.AfterFunc(ctx, func() { cmd.Process.Kill() })
	cmd.Wait()
	if got := cmd.ProcessState.ExitCode(); got != 3 || strings.Count(said.String(), "\n") != 1 || !strings.Contains(said.String(), "1073676289") {
		t.Errorf("%v, it said %.300s; want status 3 and one line with the number of figures", cmd.ProcessState, said)
	}
	if got := f.names(); got != "deck.toml in.gds" {
		t.Errorf("it left %s", got)
	}
}
