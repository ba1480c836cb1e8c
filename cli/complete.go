package cli

import (
	"fmt"
	"io"
	"regexp"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// This file is the command completion: it prints what a shell needs to complete commands, options and file names. The text is made
// from the commands themselves, so that it cannot fall behind them.

const completionHelp = `Prints a script that makes the shell complete commands, options and files behind them.

Example:
   source <(maskpair completion bash)                        # in ~/.bashrc
   maskpair completion zsh > ~/.zsh/completions/_maskpair    # in a folder of $fpath, before compinit

Exit status:
   0  done
   2  no such shell`

func completionCommand(con *console) *cli.Command {
	return &cli.Command{
		Name:            "completion",
		Usage:           "print what bash or zsh needs to complete this program's command lines",
		UsageText:       "maskpair completion bash|zsh",
		Description:     completionHelp,
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Action: func(c *cli.Context) error {
			write := map[string]func(io.Writer, []completed) error{"bash": writeBash, "zsh": writeZsh}[c.Args().First()]
			if write == nil || c.Args().Len() != 1 {
				return usagef("name one shell; write %s completion bash, or %s completion zsh", program, program)
			}
			if err := write(con.out, completions(c.App.Commands)); err != nil {
				return &writeError{"standard output", err}
			}
			return nil
		},
	}
}

// completed is a command as a shell sees it.
type completed struct {
	name, usage string
	options     []completedOption
	words       []string // that may stand behind it; nil: files
}

// completedOption is an option of a command.
type completedOption struct {
	name, usage string
	holder      string   // "DECK.toml", "N"; "" for a switch
	words       []string // that may follow, "A", "B"
	ending      string   // of files that may follow: "toml"
}

// holder finds the place-holder in the usage of an option: `DECK.toml`.
var holder = regexp.MustCompile("`([^`]*)`")

// completions gives what there is to complete.
func completions(commands []*cli.Command) []completed {
	var out []completed
	for _, c := range commands {
		if c.Hidden || c.Name == "help" { // the library's own; --help says the same
			continue
		}
		done := completed{name: c.Name, usage: c.Usage}
		if c.Name == "completion" {
			done.words = []string{"bash", "zsh"}
		}
		for _, f := range c.Flags {
			o := completedOption{name: f.Names()[0]}
			switch f := f.(type) {
			case *cli.StringFlag:
				o.usage = f.Usage
				if m := holder.FindStringSubmatch(f.Usage); m != nil {
					o.holder = m[1]
				}
			case *cli.BoolFlag:
				o.usage = f.Usage
			}
			o.usage = strings.ReplaceAll(o.usage, "`", "")
			if strings.Contains(o.holder, "|") {
				o.words = strings.Split(o.holder, "|")
			} else if at := strings.LastIndexByte(o.holder, '.'); at >= 0 {
				o.ending = o.holder[at+1:]
			}
			if !slices.Contains(f.Names(), "help") {
				done.options = append(done.options, o)
			}
		}
		done.options = append(done.options, completedOption{name: "help", usage: "say what the command does"})
		out = append(out, done)
	}
	return out
}

// names lists the options of a command as they are typed.
func (c *completed) names() string {
	var names []string
	for _, o := range c.options {
		names = append(names, "--"+o.name)
	}
	return strings.Join(names, " ")
}

// writeBash writes a script for bash, from version 3.2 on.
func writeBash(w io.Writer, commands []completed) error {
	var b strings.Builder
	var names []string
	for _, c := range commands {
		names = append(names, c.name)
	}
	b.WriteString(`# Completion of maskpair for bash:  source <(maskpair completion bash)
_maskpair_files() { # WORD ENDING...: files with such an ending, and folders; names may have blanks
	local word=$1 ending IFS=$'\n'
	shift
	COMPREPLY=($(
		compgen -d -- "$word"
		for ending; do compgen -f -X "!*.$ending" -- "$word"; done
	))
}
_maskpair() {
	local word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} command=${COMP_WORDS[1]}
	COMPREPLY=()
	if ((COMP_CWORD == 1)); then
`)
	fmt.Fprintf(&b, "\t\tCOMPREPLY=($(compgen -W %s -- \"$word\"))\n\t\treturn\n\tfi\n\tcase $command:$before in\n", quoted(strings.Join(names, " ")+" --help --version"))
	for _, c := range commands {
		for _, o := range c.options {
			switch {
			case o.words != nil:
				fmt.Fprintf(&b, "\t%s:--%s) COMPREPLY=($(compgen -W %s -- \"$word\")); return ;;\n", c.name, o.name, quoted(strings.Join(o.words, " ")))
			case o.ending != "":
				fmt.Fprintf(&b, "\t%s:--%s) _maskpair_files \"$word\" %s; return ;;\n", c.name, o.name, o.ending)
			case o.holder != "":
				fmt.Fprintf(&b, "\t%s:--%s) return ;;\n", c.name, o.name)
			}
		}
	}
	b.WriteString("\tesac\n\tif [[ $word == -* ]]; then\n\t\tcase $command in\n")
	for _, c := range commands {
		fmt.Fprintf(&b, "\t\t%s) COMPREPLY=($(compgen -W %s -- \"$word\")) ;;\n", c.name, quoted(c.names()))
	}
	b.WriteString("\t\tesac\n\t\treturn\n\tfi\n\tcase $command in\n")
	for _, c := range commands {
		if c.words != nil {
			fmt.Fprintf(&b, "\t%s) COMPREPLY=($(compgen -W %s -- \"$word\")) ;;\n", c.name, quoted(strings.Join(c.words, " ")))
		}
	}
	b.WriteString("\t*) _maskpair_files \"$word\" gds GDS gds.gz ;;\n\tesac\n}\ncomplete -o filenames -F _maskpair maskpair\n")
	_, err := io.WriteString(w, b.String())
	return err
}

// writeZsh writes a script for zsh, to be loaded by name or to be sourced.
func writeZsh(w io.Writer, commands []completed) error {
	var b strings.Builder
	b.WriteString("#compdef maskpair\n# Completion of maskpair for zsh: a file _maskpair in a folder of $fpath\n_maskpair() {\n\tlocal -a commands=(\n")
	for _, c := range commands {
		fmt.Fprintf(&b, "\t\t%s\n", quoted(c.name+":"+c.usage))
	}
	b.WriteString("\t)\n\tif ((CURRENT == 2)); then\n\t\t_describe command commands\n\t\treturn\n\tfi\n\tlocal command=$words[2]\n\tshift words\n\t((CURRENT--))\n\tcase $command in\n")
	for _, c := range commands {
		fmt.Fprintf(&b, "\t%s)\n\t\t_arguments", c.name)
		for _, o := range c.options {
			spec := "--" + o.name + "[" + zshText(o.usage) + "]"
			switch {
			case o.words != nil:
				spec += ":" + zshText(o.name) + ":(" + strings.Join(o.words, " ") + ")"
			case o.ending != "":
				spec += ":" + zshText(o.holder) + `:_files -g "*.` + o.ending + `(-.)"`
			case o.holder != "":
				spec += ":" + zshText(o.holder) + ": "
			}
			b.WriteString(" \\\n\t\t\t" + quoted(spec))
		}
		if c.words != nil {
			b.WriteString(" \\\n\t\t\t" + quoted("1:shell:("+strings.Join(c.words, " ")+")"))
		} else {
			b.WriteString(" \\\n\t\t\t" + quoted(`*:layout:_files -g "*.(gds|GDS|gz)(-.)"`))
		}
		b.WriteString(" ;;\n")
	}
	b.WriteString("\tesac\n}\nif [[ $funcstack[1] == _maskpair ]]; then\n\t_maskpair \"$@\"\nelse\n\tcompdef _maskpair maskpair\nfi\n")
	_, err := io.WriteString(w, b.String())
	return err
}

// quoted gives text as one word of a shell.
func quoted(s string) string { return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'" }

// zshText gives text as it may stand in a specification of _arguments, where colons and brackets have a meaning.
func zshText(s string) string {
	return strings.NewReplacer(`\`, `\\`, ":", `\:`, "[", `\[`, "]", `\]`).Replace(s)
}
