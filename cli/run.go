package cli

import (
	"context"
	"fmt"
	"io"
	"runtime/debug"
	"strings"

	"github.com/urfave/cli/v2"

	"maskpair/cli/report"
)

// This file holds the program as a function: commands, help, version, and the one place where an error is printed.

const program = "maskpair"

// Run runs the program with the arguments behind its name and gives the exit status. When ctx ends, work stops within a
// second, nothing new is left behind, and the status is 4.
func Run(ctx context.Context, args []string, in io.Reader, out, errw io.Writer) int {
	return run(ctx, args, &console{in: in, out: out, err: errw}, steps{decompose: runDecompose})
}

// console is what the program reads from and prints to.
type console struct {
	in       io.Reader
	out, err io.Writer
}

// steps are what the commands need of the packages below.
type steps struct {
	decompose decomposeStep
}

func run(ctx context.Context, args []string, con *console, s steps) int {
	status := statusDone
	app := newApp(con, []*cli.Command{
		decomposeCommand(con, s, &status),
		verifyCommand(con, &status),
		surveyCommand(con),
		compareCommand(con, &status),
		demoCommand(con, s),
		completionCommand(con),
	})
	args, err := orderArguments(app, args)
	if err == nil {
		err = app.RunContext(ctx, append([]string{program}, args...))
	}
	if err != nil {
		fmt.Fprintf(con.err, "%s %s\n", painterFor(con.err).paint(inkBad, program+":"), oneLine(err.Error()))
		return statusOf(err)
	}
	return status
}

// newApp gives the program with its commands, and keeps the library from printing errors or ending the process itself.
func newApp(con *console, commands []*cli.Command) *cli.App {
	return &cli.App{
		Name:      program,
		Usage:     "put every drawn figure of a GDSII layout on one of two exposure masks",
		UsageText: "maskpair COMMAND [options] ...\nmaskpair COMMAND --help",
		Version:   version(),
		Description: "Two shapes on one mask must not be nearer than the same-mask spacing. maskpair answers whether a layout\n" +
			"can be done on two masks, writes the masks where it can, and names what cannot be done and why.\n\n" + report.Caution,
		HideHelpCommand: false,
		Commands:        commands,
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return unknownCommand(c.App, c.Args().First())
			}
			return usagef("no command given; see %s --help", program)
		},
		Reader:         con.in,
		Writer:         con.out,
		ErrWriter:      con.err,
		ExitErrHandler: func(*cli.Context, error) {},
		OnUsageError:   asUsageError,
	}
}

// asUsageError takes what the library found wrong with the options.
func asUsageError(_ *cli.Context, err error, _ bool) error {
	return usagef("%v; see %s --help", err, program)
}

// unknownCommand names the command that was probably meant.
func unknownCommand(app *cli.App, name string) error {
	var names []string
	for _, c := range app.Commands {
		names = append(names, c.Name)
	}
	return usagef("%q is no command; the commands are %s", name, strings.Join(names, ", "))
}

// version tells what was built: the module's version and, where known, the revision.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	v := info.Main.Version
	if v == "" {
		v = "unknown"
	}
	for _, s := range info.Settings {
		switch {
		case s.Key == "vcs.revision" && !strings.Contains(v, s.Value[:min(12, len(s.Value))]):
			v += " (" + s.Value[:min(12, len(s.Value))] + ")"
		case s.Key == "vcs.modified" && s.Value == "true" && !strings.HasSuffix(v, "+dirty"):
			v += " modified"
		}
	}
	return v
}

// oneLine joins what may be several lines, since a message is one.
func oneLine(s string) string { return strings.Join(strings.Fields(s), " ") }
