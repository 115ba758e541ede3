package ensemble

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"math"
	"os"
)

// A journal holds the members of one shard in order of their index:
//
//	one line of JSON, the identity of the ensemble and the shard
//	records of the same length: CRC-32C (4 bytes), then the numbers (8 bytes each)
//
// all little-endian. It is only ever appended to. The checksum covers the
// identity too, so that a record of another ensemble is as wrong as a torn one;
// what follows the last good record is cut off.

// identity is what must agree for two files to belong together.
type identity struct {
	Format  int      `json:"format"`
	Kind    string   `json:"kind"`
	Hash    string   `json:"scenario_hash"`
	Version string   `json:"version"`
	Seed    uint64   `json:"seed"`
	Design  string   `json:"design"`
	Members int      `json:"members"`
	Shard   int      `json:"shard"`
	Shards  int      `json:"shards"`
	Columns []string `json:"columns"`
}

func (p *Plan) identity(shard, shards int) identity {
	id := identity{Format: 1, Kind: "ensemble shard", Hash: p.Scenario.EnsembleHash(), Version: p.Version, Seed: p.Seed, Design: p.Design, Members: p.Members, Shard: shard, Shards: shards}
	for i := range p.columns {
		id.Columns = append(id.Columns, p.columns[i].name)
	}
	return id
}

// differs words the first difference between two identities; "" when there is none.
func (id identity) differs(other identity) string {
	for _, c := range []struct {
		what string
		a, b any
	}{
		{"format", id.Format, other.Format}, {"kind", id.Kind, other.Kind}, {"version of the program", id.Version, other.Version}, {"scenario", id.Hash, other.Hash}, {"seed", id.Seed, other.Seed},
		{"design", id.Design, other.Design}, {"number of members", id.Members, other.Members}, {"number of shards", id.Shards, other.Shards}, {"shard", id.Shard, other.Shard}, {"columns", fmt.Sprint(id.Columns), fmt.Sprint(other.Columns)},
	} {
		if c.a != c.b {
			return fmt.Sprintf("%s %v instead of %v", c.what, c.b, c.a)
		}
	}
	return ""
}

// span returns the members of a shard, from lo to before hi.
func span(members, shard, shards int) (lo, hi int) {
	return int(int64(members) * int64(shard-1) / int64(shards)), int(int64(members) * int64(shard) / int64(shards))
}

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

// layout is how records of a journal are written.
type layout struct {
	head []byte
	crc  uint32 // of the head
	n    int    // numbers of a record
}

func newLayout(id identity) layout {
	head, err := json.Marshal(id)
	if err != nil {
		panic(err) // plain data
	}
	head = append(head, '\n')
	return layout{head, crc32.Checksum(head, castagnoli), len(id.Columns)}
}

func (l layout) size() int { return 4 + 8*l.n }

func (l layout) append(b []byte, rec []float64) []byte {
	at := len(b)
	b = append(b, 0, 0, 0, 0)
	for _, v := range rec {
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(v))
	}
	binary.LittleEndian.PutUint32(b[at:], crc32.Update(l.crc, castagnoli, b[at+4:]))
	return b
}

// decode reads one record; false when it is damaged.
func (l layout) decode(b []byte, rec []float64) bool {
	if binary.LittleEndian.Uint32(b) != crc32.Update(l.crc, castagnoli, b[4:]) {
		return false
	}
	for i := range rec {
		rec[i] = math.Float64frombits(binary.LittleEndian.Uint64(b[4+8*i:]))
	}
	return true
}

// errForeign is a journal of something else.
type errForeign struct{ why string }

func (e errForeign) Error() string { return e.why }

// scan reads the good records of a journal that begins with member lo and calls
// each, which may be nil, with them. It returns how many there are and where
// they end.
func (l layout) scan(r io.Reader, id identity, lo int, each func(rec []float64) error) (n int, end int64, err error) {
	b := bufio.NewReaderSize(r, 1<<16)
	head, err := b.ReadBytes('\n')
	if !bytes.Equal(head, l.head) {
		var other identity
		if err == nil && json.Unmarshal(head, &other) == nil && other.Kind != "" {
			return 0, 0, errForeign{id.differs(other)}
		}
		if bytes.HasPrefix(l.head, head) {
			return 0, 0, nil // torn in the first line
		}
		return 0, 0, errForeign{"no journal of an ensemble"}
	}
	end = int64(len(head))
	buf, rec := make([]byte, l.size()), make([]float64, l.n)
	for {
		if _, err := io.ReadFull(b, buf); err != nil {
			if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
				return n, end, nil
			}
			return n, end, err
		}
		if !l.decode(buf, rec) || rec[0] != float64(lo+n) {
			return n, end, nil
		}
		if each != nil {
			if err := each(rec); err != nil {
				return n, end, err
			}
		}
		n++
		end += int64(l.size())
	}
}

// journal is one that is being written.
type journal struct {
	layout
	file *os.File
	buf  []byte
}

func (j *journal) add(rec []float64) error {
	j.buf = j.append(j.buf, rec)
	if len(j.buf) > 1<<16 {
		return j.flush()
	}
	return nil
}

func (j *journal) flush() error {
	if len(j.buf) == 0 {
		return nil
	}
	_, err := j.file.Write(j.buf)
	j.buf = j.buf[:0]
	return err
}
