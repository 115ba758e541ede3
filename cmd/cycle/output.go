package main

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"strings"

	"cycle/scenarios"
)

// marker is the file by which cycle knows a folder it has written: the list of
// its files with their SHA-256. A folder with anything else in it, or with a
// file that was changed since, belongs to the user and is never replaced.
const marker = ".cycle"

type manifest struct {
	Format int               `json:"format"`
	Files  map[string]string `json:"files"`
}

// outFile is one file of a result.
type outFile struct {
	name  string
	write func(io.Writer) error
}

// checkFolder tells whether a folder may be written: it is not there, it is
// empty, or cycle wrote it and nobody has touched it since.
func checkFolder(dir string) error {
	refuse := func(what, found string) error {
		return &folderError{&scenarios.KeyError{File: dir, What: what, Found: found}}
	}
	if dir == "" {
		return refuse("the output folder has no name", "")
	}
	here, err := os.Getwd()
	if err == nil {
		abs, err := filepath.Abs(dir)
		if err == nil && (here == abs || strings.HasPrefix(here, strings.TrimSuffix(abs, string(filepath.Separator))+string(filepath.Separator))) {
			return refuse("the output folder would replace the folder you are in", "")
		}
	}
	info, err := os.Stat(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return err
	case !info.IsDir():
		return refuse("the output folder is a file", "")
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		return err
	}
	if len(entries) == 0 {
		return nil
	}
	var m manifest
	data, err := readSmall(filepath.Join(dir, marker))
	if err != nil || json.Unmarshal(data, &m) != nil || m.Format != 1 {
		return refuse("the folder was not written by cycle and is left alone", fmt.Sprintf("%q in it", entries[0].Name()))
	}
	for _, e := range entries {
		if e.Name() == marker {
			continue
		}
		want, ours := m.Files[e.Name()]
		if !ours || !e.Type().IsRegular() {
			return refuse("the folder holds what cycle did not write and is left alone", fmt.Sprintf("%q in it", e.Name()))
		}
		got, err := hashFile(filepath.Join(dir, e.Name()))
		if err != nil {
			return err
		}
		if got != want {
			return refuse("a file in the folder was changed since cycle wrote it and is left alone", fmt.Sprintf("%q", e.Name()))
		}
	}
	return nil
}

// folderError is a folder that is not ours to replace.
type folderError struct{ *scenarios.KeyError }

func (e *folderError) Unwrap() error { return e.KeyError }

func readSmall(path string) ([]byte, error) {
	info, err := os.Lstat(path)
	if err != nil {
		return nil, err
	}
	if !info.Mode().IsRegular() || info.Size() > 1<<16 {
		return nil, errors.New("no list of files")
	}
	return os.ReadFile(path)
}

func hashFile(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// writeFolder writes a folder whole or not at all: into a folder beside it, which
// takes its name when every byte is on the disk.
func writeFolder(dir string, files []outFile) (err error) {
	if err := checkFolder(dir); err != nil {
		return err
	}
	// Follow a link, so that its target is replaced and not the link.
	if real, err := filepath.EvalSymlinks(dir); err == nil {
		dir = real
	}
	dir, err = filepath.Abs(dir)
	if err != nil {
		return err
	}
	parent, base := filepath.Split(dir)
	undo, err := makeParents(parent)
	defer func() {
		if err != nil {
			undo()
		}
	}()
	if err != nil {
		return err
	}
	tmp, err := os.MkdirTemp(parent, "."+base+".part-*")
	if err != nil {
		return err
	}
	defer os.RemoveAll(tmp) // nothing is there any more after success
	if err := os.Chmod(tmp, 0o755); err != nil {
		return err
	}
	m := manifest{Format: 1, Files: map[string]string{}}
	for _, f := range files {
		sum, err := writeFile(filepath.Join(tmp, f.name), f.write)
		if err != nil {
			return fmt.Errorf("%s: %w", f.name, err)
		}
		m.Files[f.name] = sum
	}
	list, err := json.MarshalIndent(m, "", "  ") // keys of a map come sorted
	if err != nil {
		return err
	}
	if _, err := writeFile(filepath.Join(tmp, marker), func(w io.Writer) error { _, err := w.Write(append(list, '\n')); return err }); err != nil {
		return err
	}
	syncDir(tmp)
	if err := checkFolder(dir); err != nil { // it may have changed while we computed
		return err
	}
	if err := swap(tmp, dir); err != nil {
		return err
	}
	syncDir(parent)
	return nil
}

// swap gives tmp the name dir. What had the name is put aside first and brought
// back if the second step fails.
func swap(tmp, dir string) error {
	if _, err := os.Lstat(dir); errors.Is(err, fs.ErrNotExist) {
		return os.Rename(tmp, dir)
	}
	old := tmp + ".old"
	if err := os.Rename(dir, old); err != nil {
		return err
	}
	if err := os.Rename(tmp, dir); err != nil {
		return errors.Join(err, os.Rename(old, dir))
	}
	return os.RemoveAll(old)
}

// makeParents makes the folders above and returns what takes the new ones away.
func makeParents(dir string) (undo func(), err error) {
	var made []string
	for d := filepath.Clean(dir); ; d = filepath.Dir(d) {
		if _, err := os.Stat(d); err == nil || d == filepath.Dir(d) {
			break
		}
		made = append(made, d)
	}
	undo = func() {
		for _, d := range made {
			os.Remove(d) // fails on what others use
		}
	}
	return undo, os.MkdirAll(dir, 0o755)
}

func writeFile(path string, write func(io.Writer) error) (sum string, err error) {
	// Everything goes through memory, so that a writer's many small pieces cost nothing.
	var buf bytes.Buffer
	if err := write(&buf); err != nil {
		return "", err
	}
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	if err != nil {
		return "", err
	}
	_, err = f.Write(buf.Bytes())
	if err == nil {
		err = f.Sync()
	}
	if cerr := f.Close(); err == nil {
		err = cerr
	}
	h := sha256.Sum256(buf.Bytes())
	return hex.EncodeToString(h[:]), err
}

// syncDir brings the names in a folder to the disk, where the system can.
func syncDir(dir string) {
	if d, err := os.Open(dir); err == nil {
		d.Sync()
		d.Close()
	}
}

// names lists the files of a result in alphabetical order.
func names(files []outFile) []string {
	var out []string
	for _, f := range files {
		out = append(out, f.name)
	}
	sort.Strings(out)
	return out
}
