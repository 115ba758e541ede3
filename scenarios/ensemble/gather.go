package ensemble

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"cycle/scenarios"
)

// Open reads the plan of a folder that Prepare made, with the scenario beside it.
func Open(dir, version string) (p *Plan, shards int, err error) {
	id, err := readPlan(dir)
	if err != nil {
		return nil, 0, err
	}
	if id.Version != version {
		return nil, 0, folderError(dir, "the ensemble was begun by another version of the program", id.Version, version+", or a run from the start in another folder")
	}
	r, err := scenarios.Load(filepath.Join(dir, scenarioFile), nil)
	if err != nil {
		return nil, 0, err
	}
	if p, err = NewPlan(r, version, id.Seed, id.Design, id.Members); err != nil {
		return nil, 0, err
	}
	if d := p.identity(0, id.Shards).differs(id); d != "" {
		return nil, 0, folderError(dir, "plan.json and scenario.toml in the folder do not belong together: "+d, "", "")
	}
	return p, id.Shards, nil
}

// Gather joins the shards of a folder into members.parquet, and members.csv when
// asked. All shards must be there, whole, and of this plan; the shard files are
// removed when the table is on the disk. It does nothing when the table is there
// already and no shard is left.
func (p *Plan) Gather(dir string, shards int, csv bool) error {
	if shards > p.Members {
		return &scenarios.KeyError{Key: "--shards", Found: fmt.Sprint(shards), Allowed: fmt.Sprintf("at most %d", p.Members)}
	}
	out := filepath.Join(dir, MembersFile)
	if p.gathered(dir) == nil {
		if !csv {
			return p.tidy(dir, shards)
		}
		if err := p.csvFrom(dir); err != nil {
			return err
		}
		return p.tidy(dir, shards)
	}
	var missing []string
	for s := 1; s <= shards; s++ {
		if _, err := os.Stat(filepath.Join(dir, partFile(s, shards))); errors.Is(err, fs.ErrNotExist) {
			missing = append(missing, fmt.Sprintf("%d/%d", s, shards))
		} else if err != nil {
			return err
		}
	}
	if len(missing) > 0 {
		some := missing
		if len(some) > 8 {
			some = append(some[:8:8], fmt.Sprintf("and %d more", len(missing)-8))
		}
		return folderError(dir, fmt.Sprintf("%d of %d shards are not finished", len(missing), shards), "no shard "+strings.Join(some, ", "), "")
	}
	err := replace(out, func(w io.Writer) error {
		t := p.newParquet(w)
		for s := 1; s <= shards; s++ {
			if err := p.part(dir, s, shards, t.write); err != nil {
				return err
			}
		}
		return t.close()
	})
	if err != nil {
		return err
	}
	syncDir(dir)
	if csv {
		if err := p.csvFrom(dir); err != nil {
			return err
		}
	}
	return p.tidy(dir, shards)
}

// part reads one whole shard.
func (p *Plan) part(dir string, s, shards int, each func([]float64) error) error {
	path := filepath.Join(dir, partFile(s, shards))
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	id := p.identity(s, shards)
	lo, hi := span(p.Members, s, shards)
	n, _, err := newLayout(id).scan(f, id, lo, each)
	if err != nil {
		return wrongPart(path, err)
	}
	if n != hi-lo {
		return folderError(path, "the file of this shard is damaged", fmt.Sprintf("%d good members of %d", n, hi-lo), "a whole file: delete it and compute the shard again")
	}
	return nil
}

// csvFrom writes members.csv from members.parquet.
func (p *Plan) csvFrom(dir string) error {
	return replace(filepath.Join(dir, MembersCSV), func(w io.Writer) error {
		t := p.newCSV(w)
		if err := p.Each(dir, t.write); err != nil {
			return err
		}
		return t.out.Flush()
	})
}

// Each calls f with every member of a gathered ensemble, in order. The record is
// used again for the next one.
func (p *Plan) Each(dir string, f func(rec []float64) error) error {
	path := filepath.Join(dir, MembersFile)
	file, err := os.Open(path)
	if err != nil {
		return err
	}
	defer file.Close()
	info, err := file.Stat()
	if err != nil {
		return err
	}
	n := 0
	err = readMembers(file, info.Size(), p, func(rec []float64) error {
		if rec[0] != float64(n) {
			return fmt.Errorf("member %d in the place of %d", int(rec[0]), n)
		}
		n++
		return f(rec)
	})
	if err == nil && n != p.Members {
		err = fmt.Errorf("%d members instead of %d", n, p.Members)
	}
	if err != nil {
		return folderError(path, "the table of members is damaged or of another ensemble: "+err.Error(), "", "delete it and run again")
	}
	return nil
}

var errNone = errors.New("not gathered")

// gathered tells whether the table is there and whole.
func (p *Plan) gathered(dir string) error {
	if _, err := os.Stat(filepath.Join(dir, MembersFile)); err != nil {
		return errNone
	}
	return p.Each(dir, func([]float64) error { return nil })
}

// Finished tells whether the table of all members is in the folder.
func (p *Plan) Finished(dir string) bool { return p.gathered(dir) == nil }

// tidy removes what is not needed once the table is there.
func (p *Plan) tidy(dir string, shards int) error {
	for s := 1; s <= shards; s++ {
		if err := os.Remove(filepath.Join(dir, partFile(s, shards))); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return err
		}
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		return err
	}
	for _, e := range entries {
		if journalName.MatchString(e.Name()) || temporary.MatchString(e.Name()) {
			os.Remove(filepath.Join(dir, e.Name()))
		}
	}
	return nil
}

// WriteFile puts a result into the folder, whole or not at all.
func WriteFile(dir, name string, write func(io.Writer) error) error {
	return replace(filepath.Join(dir, name), write)
}

// Sum returns the SHA-256 of a file of the folder, in hexadecimal.
func Sum(dir, name string) (string, error) {
	f, err := os.Open(filepath.Join(dir, name))
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
