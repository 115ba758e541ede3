package main

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"

	"golang.org/x/term"

	"cycle/scenarios"
)

// How the command talks: results on standard output, everything else on
// standard error. An error is one line, "cycle: error:" and what is wrong and
// where; "cycle: hint:" tells what to do. Lower case, no full stop, the user's
// text in quotes. Colour only on a terminal, and never when NO_COLOR is set.
type ui struct {
	out, err *bufio.Writer
	term     io.Writer // standard output itself, to ask for its width
}

func newUI(stdout, stderr io.Writer) *ui {
	return &ui{bufio.NewWriter(stdout), bufio.NewWriter(stderr), stdout}
}

// done writes out what is left and returns the status. Output that cannot be
// written is a failure: a full disk or a closed pipe must not look like success.
func (u *ui) done(status int) int {
	if err := u.out.Flush(); err != nil && status == exitOK {
		u.error("standard output: " + err.Error())
		status = exitFailed
	}
	u.err.Flush()
	return status
}

func (u *ui) error(msg string) {
	for _, line := range strings.Split(msg, "\n") {
		fmt.Fprintf(u.err, "cycle: error: %s\n", line)
	}
}

func (u *ui) hint(format string, args ...any) {
	fmt.Fprintf(u.err, "cycle: hint: %s\n", fmt.Sprintf(format, args...))
}

// fail tells an error with its hints and returns the exit status it stands for.
func (u *ui) fail(err error) int {
	var many *scenarios.Errors
	var one *scenarios.KeyError
	switch {
	case errors.As(err, &many):
		u.error(many.Error())
		// The same hint once, however many problems it helps with.
		said := map[string]bool{}
		for _, k := range many.List {
			for _, h := range k.Hints() {
				if !said[h] {
					said[h] = true
					u.hint("%s", h)
				}
			}
		}
		return exitUsage
	case errors.As(err, &one):
		u.error(one.Error())
		for _, h := range one.Hints() {
			u.hint("%s", h)
		}
		return exitUsage
	}
	u.error(err.Error())
	return exitFailed
}

func (u *ui) unknownCommand(name string) int {
	u.error(fmt.Sprintf("unknown command %q", name))
	names := []string{"help"}
	for _, c := range commands() {
		names = append(names, c.name)
	}
	if near := scenarios.Nearest(name, names); near != "" {
		u.hint("did you mean cycle %s?", near)
	}
	if strings.HasSuffix(name, ".toml") {
		u.hint("a scenario comes after a command: cycle run %s", name)
	}
	u.hint("list the commands with: cycle help")
	return exitUsage
}

// size returns the width of the terminal and whether it may be coloured; 0 and
// false when standard output is no terminal.
func (u *ui) size() (width int, color bool) {
	f, ok := u.term.(*os.File)
	if !ok || !term.IsTerminal(int(f.Fd())) {
		return 0, false
	}
	width, _, err := term.GetSize(int(f.Fd()))
	if err != nil {
		width = 0
	}
	return width, os.Getenv("NO_COLOR") == "" && os.Getenv("TERM") != "dumb"
}
