package main

import "fmt"

var versionCommand = command{
	name: "version", short: "version of the program", run: func(u *ui, _ *options, _ []string) int {
		fmt.Fprintf(u.out, "cycle %s\n", version)
		return exitOK
	},
	usage: `
Prints the version, which is part of every result.

  cycle version
`,
}
