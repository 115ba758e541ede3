package main

import (
	"errors"
	"io"
	"os"
	"strings"
	"testing"
)

func text(s string) func(io.Writer) error {
	return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
}

// A file that cannot be made leaves neither half a folder nor a new parent, and
// what was there before stays.
func TestWholeOrNothing(t *testing.T) {
	t.Chdir(t.TempDir())
	broken := errors.New("broken")
	files := []outFile{{"a", text("1")}, {"b", func(io.Writer) error { return broken }}}
	if err := writeFolder("x/y/out", files); !errors.Is(err, broken) {
		t.Errorf("error %v", err)
	}
	if left := tree(t); left != "" {
		t.Errorf("left behind:\n%s", left)
	}
	if err := writeFolder("out", []outFile{{"a", text("1")}, {"b", text("22")}}); err != nil {
		t.Fatal(err)
	}
	before := tree(t)
	if err := writeFolder("out", files); !errors.Is(err, broken) {
		t.Errorf("error %v", err)
	}
	if after := tree(t); after != before || read(t, "out/b") != "22" {
		t.Errorf("the older result has changed:\n%s", after)
	}
	// A file that another name of ours would leave behind does not stay.
	if err := writeFolder("out", []outFile{{"c", text("333")}}); err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat("out/a"); err == nil || read(t, "out/c") != "333" {
		t.Error("the folder was not replaced as a whole")
	}
	// What the user put there while we computed is found before the last step.
	late := []outFile{{"c", func(io.Writer) error { return os.WriteFile("out/late.txt", nil, 0o644) }}}
	var mine *folderError
	if err := writeFolder("out", late); !errors.As(err, &mine) || !strings.Contains(err.Error(), "late.txt") {
		t.Errorf("error %v", err)
	}
	if read(t, "out/c") != "333" {
		t.Error("the older result has changed")
	}
}
