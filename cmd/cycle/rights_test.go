//go:build unix

package main

import (
	"bytes"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

// TestWithoutRights runs the command as somebody who may neither read the
// scenario nor write the folder. Root, who may do both, steps down first.
func TestWithoutRights(t *testing.T) {
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	data, err := os.ReadFile(self)
	if err != nil {
		t.Fatal(err)
	}
	base, err := os.MkdirTemp("", "rights")
	if err != nil {
		t.Fatal(err)
	}
	defer os.RemoveAll(base)
	defer os.Chmod(filepath.Join(base, "closed"), 0o700)
	program := filepath.Join(base, "cycle")
	if err := errors.Join(
		os.Chmod(base, 0o755),
		os.WriteFile(program, data, 0o755),
		os.WriteFile(filepath.Join(base, "bad.toml"), []byte("title = \"x\"\n"), 0o000),
		os.Mkdir(filepath.Join(base, "closed"), 0o555),
	); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		args []string
		want []string
	}{
		{[]string{"run", "bad.toml", "--out", "closed/out"}, []string{"bad.toml: cannot be read: permission denied"}},
		{[]string{"run", "earth", "--out", "closed/out"}, []string{"closed/out: the results cannot be written: ", "permission denied"}},
	} {
		cmd := exec.Command(program, c.args...)
		cmd.Dir = base
		cmd.Env = append(os.Environ(), "CYCLE_AS_COMMAND=1")
		if os.Geteuid() == 0 {
			const nobody = 65534
			cmd.SysProcAttr = &syscall.SysProcAttr{Credential: &syscall.Credential{Uid: nobody, Gid: nobody}}
		}
		var stderr bytes.Buffer
		cmd.Stderr = &stderr
		err := cmd.Run()
		var exit *exec.ExitError
		if !errors.As(err, &exit) || exit.ExitCode() != exitFailed {
			t.Errorf("%v: %v, want exit status %d; %s", c.args, err, exitFailed, stderr.String())
		}
		for _, part := range c.want {
			if !strings.Contains(stderr.String(), part) {
				t.Errorf("%v: %q lacks %q", c.args, stderr.String(), part)
			}
		}
		if left, _ := filepath.Glob(filepath.Join(base, "closed", "*")); len(left) > 0 {
			t.Errorf("%v: left %v", c.args, left)
		}
	}
}
