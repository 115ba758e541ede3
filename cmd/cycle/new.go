package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"strings"

	"github.com/spf13/pflag"

	"cycle/scenarios"
)

var newCommand = command{
	name: "new", args: "NAME", short: "write a commented scenario to start from",
	minArgs: 1, maxArgs: 1, run: newScenario,
	flags: func(f *pflag.FlagSet, o *options) { quietFlag(f, o) },
	usage: `
Writes NAME.toml, an Earth whose keys are explained, to be edited; at its end stands
an example of distributions for cycle ensemble, behind "#". A file that is there
already is left alone.

  --quiet            print nothing unless something is wrong

  cycle new myplanet
`,
}

func newScenario(u *ui, o *options, args []string) int {
	name := strings.TrimSuffix(args[0], ".toml")
	if err := scenarios.CheckName(name); err != nil {
		return u.fail(err)
	}
	file := name + ".toml"
	// The file must not exist, not even as a link to nowhere.
	f, err := os.OpenFile(file, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	if errors.Is(err, fs.ErrExist) {
		u.error(fmt.Sprintf("%s is there already and is left alone", file))
		u.hint("choose another name")
		return exitUsage
	}
	if err == nil {
		_, err = f.WriteString(scenarios.Template(name))
		if cerr := f.Close(); err == nil {
			err = cerr
		}
		if err != nil {
			os.Remove(file)
		}
	}
	if err != nil {
		u.error(err.Error())
		return exitFailed
	}
	if !o.quiet {
		fmt.Fprintf(u.out, "%s written; edit it, then: cycle run %s\n", file, file)
	}
	return exitOK
}
