// Command cycle simulates how long a rocky planet stays habitable under the
// carbonate-silicate cycle. "cycle help" tells what it can do.
//
// The command only parses its arguments, opens files and talks; package
// scenarios reads, carbon computes, reports writes. Each command has a file of its
// own. testdata holds dialogues of the commands, which a test repeats.
package main

import (
	"errors"
	"fmt"
	"io"
	"os"
	"strings"

	"github.com/spf13/pflag"

	"cycle/scenarios"
)

// version of the program; part of every result.
const version = "0.1.0"

// Exit status.
const (
	exitOK          = 0   // finished, whatever became of the planet
	exitFailed      = 1   // the file system or the program failed
	exitUsage       = 2   // bad input or usage
	exitUndecided   = 3   // finished, but the fate is not known
	exitInterrupted = 130 // stopped by the user
)

func main() { os.Exit(cycle(os.Stdin, os.Stdout, os.Stderr, os.Args[1:])) }

// command is one row of the table of commands.
type command struct {
	name    string
	args    string // as in the usage
	short   string // one line
	usage   string // below the first line; ends in an example
	flags   func(*pflag.FlagSet, *options)
	minArgs int
	maxArgs int
	run     func(*ui, *options, []string) int
}

// options holds the flags of all commands.
type options struct {
	out   string
	sets  []string
	quiet bool

	postpone string // explain
	x, y     string // map
	cells    int    // likewise
	depth    int    // likewise

	ensemble ensembleFlags
}

func commands() []command {
	return []command{runCommand, explainCommand, mapCommand, ensembleCommand, compareCommand, gatherCommand, checkCommand, keysCommand, newCommand, versionCommand, licencesCommand}
}

func setFlag(f *pflag.FlagSet, o *options) {
	f.StringArrayVar(&o.sets, "set", nil, "give a `KEY=VALUE` over that of the scenario; repeatable")
}

func quietFlag(f *pflag.FlagSet, o *options) {
	f.BoolVarP(&o.quiet, "quiet", "q", false, "print nothing unless something is wrong")
}

// cycle runs one command line and returns the exit status.
func cycle(_ io.Reader, stdout, stderr io.Writer, args []string) int {
	u := newUI(stdout, stderr)
	name := ""
	if len(args) > 0 {
		name, args = args[0], args[1:]
	}
	switch name {
	case "":
		u.err.WriteString(usage())
		return u.done(exitUsage)
	case "help", "-h", "--help":
		if len(args) > 0 && !strings.HasPrefix(args[0], "-") {
			if c := find(args[0]); c != nil {
				u.out.WriteString(c.help())
				return u.done(exitOK)
			}
			return u.done(u.unknownCommand(args[0]))
		}
		u.out.WriteString(usage())
		return u.done(exitOK)
	case "--version":
		name = "version"
	}
	c := find(name)
	if c == nil {
		return u.done(u.unknownCommand(name))
	}
	return u.done(c.call(u, args))
}

func find(name string) *command {
	for _, c := range commands() {
		if c.name == name {
			return &c
		}
	}
	return nil
}

// call parses the arguments of a command and runs it.
func (c *command) call(u *ui, args []string) int {
	var o options
	f := pflag.NewFlagSet(c.name, pflag.ContinueOnError)
	f.SortFlags = false
	f.SetOutput(io.Discard)
	f.Usage = func() {}
	if c.flags != nil {
		c.flags(f, &o)
	}
	err := f.Parse(args)
	switch {
	case errors.Is(err, pflag.ErrHelp):
		u.out.WriteString(c.help())
		return exitOK
	case err != nil:
		u.error(err.Error())
		var unknown *pflag.NotExistError
		if errors.As(err, &unknown) {
			var names []string
			f.VisitAll(func(fl *pflag.Flag) { names = append(names, fl.Name) })
			if near := scenarios.Nearest(unknown.GetSpecifiedName(), append(names, "help")); near != "" {
				u.hint("did you mean --%s?", near)
			}
		}
		u.hint("see cycle %s --help", c.name)
		return exitUsage
	}
	switch n := f.NArg(); {
	case n < c.minArgs:
		u.error(fmt.Sprintf("%s is missing", c.args))
		u.hint("see cycle %s --help", c.name)
		return exitUsage
	case n > c.maxArgs:
		u.error(fmt.Sprintf("unexpected argument %q", f.Arg(c.maxArgs)))
		if strings.Contains(f.Arg(c.maxArgs), "=") || f.Arg(c.maxArgs) == "=" {
			u.hint("a value with spaces needs quotes: --set KEY=\"20 K\"")
		}
		u.hint("see cycle %s --help", c.name)
		return exitUsage
	}
	return c.run(u, &o, f.Args())
}

// help is the usage of one command.
func (c *command) help() string {
	var b strings.Builder
	fmt.Fprintf(&b, "cycle %s", c.name)
	if c.args != "" {
		fmt.Fprintf(&b, " %s", c.args)
	}
	fmt.Fprintf(&b, "\n\n%s\n", strings.Trim(c.usage, "\n"))
	return b.String()
}

// usage is the text of "cycle help".
func usage() string {
	var b strings.Builder
	b.WriteString("cycle: how long does a rocky planet stay habitable, and what ends it?\n\n")
	width := 0
	for _, c := range commands() {
		width = max(width, len(c.name)+1+len(c.args))
	}
	for _, c := range commands() {
		fmt.Fprintf(&b, "  cycle %-*s   %s\n", width, strings.TrimSpace(c.name+" "+c.args), c.short)
	}
	b.WriteString("\nSCENARIO is a TOML file or one of the planets that come along:\n\n")
	width = 0
	for _, s := range scenarios.Builtins() {
		width = max(width, len(s.Name))
	}
	for _, s := range scenarios.Builtins() {
		fmt.Fprintf(&b, "  %-*s   %s\n", width, s.Name, firstSentence(s.Doc))
	}
	b.WriteString(`
Exit status: 0 finished, whatever became of the planet; 1 failed; 2 bad input or
usage; 3 finished but undecided; 130 interrupted.

"cycle COMMAND --help" tells more about a command. To begin:

  cycle run earth
`)
	return b.String()
}

// firstSentence cuts a text after its first sentence and to one line.
func firstSentence(s string) string {
	if i := strings.IndexAny(s, ".:"); i >= 0 {
		s = s[:i]
	}
	if r := []rune(s); len(r) > 70 {
		s = strings.TrimRight(string(r[:69]), " ,") + "…"
	}
	return s
}
