package main

import (
	"bytes"
	"os"
	"testing"
)

func TestUpToDate(t *testing.T) {
	want, err := source()
	if err != nil {
		t.Fatal(err)
	}
	got, err := os.ReadFile("../stages.go")
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Error("ode/stages.go is not what ode/unroll writes: go generate ./ode")
	}
}
