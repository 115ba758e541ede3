//go:build unix

package scenarios

import (
	"strings"
	"syscall"
	"testing"
	"time"
)

// A pipe nobody writes to must not be waited for.
func TestPipe(t *testing.T) {
	t.Chdir(t.TempDir())
	if err := syscall.Mkfifo("pipe.toml", 0o644); err != nil {
		t.Skip(err)
	}
	done := make(chan error, 1)
	go func() { _, err := Load("pipe.toml", nil); done <- err }()
	select {
	case err := <-done:
		if err == nil || !strings.HasPrefix(err.Error(), "pipe.toml: found a pipe or a device") {
			t.Errorf("%v", err)
		}
	case <-time.After(time.Minute):
		t.Error("waits for a pipe")
	}
}
