package cli

import (
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// This file lets options stand before and behind the positional arguments. The library stops at the first positional; so the
// arguments of a command are put in order for it: options, "--", positionals.

// orderArguments gives the arguments in the order that the library wants. An option that the command does not have, one that
// lacks its value, and one that is given twice are usage errors.
func orderArguments(app *cli.App, args []string) ([]string, error) {
	if len(args) == 0 {
		return args, nil
	}
	if (args[0] == "help" || args[0] == "h") && len(args) > 1 && !slices.ContainsFunc(app.Commands, func(c *cli.Command) bool { return c.HasName(args[1]) }) {
		return nil, unknownCommand(app, args[1])
	}
	at := slices.IndexFunc(app.Commands, func(c *cli.Command) bool { return c.HasName(args[0]) })
	if at < 0 {
		if name := args[0]; strings.HasPrefix(name, "-") && !slices.Contains([]string{"--help", "-h", "--version", "-v"}, name) {
			return nil, usagef("%s stands before the command; write %s COMMAND [options] ...", name, program)
		}
		return args, nil
	}
	command := app.Commands[at]
	options, rest, seen := []string{}, []string{}, map[string]bool{}
	for i := 1; i < len(args); i++ {
		arg := args[i]
		switch {
		case arg == "--":
			rest = append(rest, args[i+1:]...)
			i = len(args)
			continue
		case arg == "-" || !strings.HasPrefix(arg, "-"):
			rest = append(rest, arg)
			continue
		case arg == "--help" || arg == "-h":
			return []string{command.Name, "--help"}, nil
		}
		name, _, assigned := strings.Cut(strings.TrimLeft(arg, "-"), "=")
		f := flagOf(command, name)
		if f == nil {
			return nil, usagef("%s has no option --%s; see %s %s --help", command.Name, name, program, command.Name)
		}
		if seen[name] {
			return nil, usagef("--%s is given twice; give it once", name)
		}
		seen[name] = true
		options = append(options, arg)
		if _, isSwitch := f.(*cli.BoolFlag); isSwitch || assigned {
			continue
		}
		if i+1 == len(args) || strings.HasPrefix(args[i+1], "--") {
			return nil, usagef("--%s needs a value; see %s %s --help", name, program, command.Name)
		}
		i++
		options = append(options, args[i])
	}
	out := append([]string{command.Name}, options...)
	return append(append(out, "--"), rest...), nil
}

// flagOf finds an option of a command.
func flagOf(c *cli.Command, name string) cli.Flag {
	for _, f := range c.Flags {
		if slices.Contains(f.Names(), name) {
			return f
		}
	}
	return nil
}
