package ensemble

import (
	"crypto/sha256"
	"encoding/binary"
	"math/rand/v2"
)

// stream is the random stream named by a seed, a member and a key. Order,
// machine and number of workers do not enter, and a new key leaves the draws of
// the others alone.
func stream(seed uint64, member uint64, key string) *rand.ChaCha8 {
	return rand.NewChaCha8(named(seed, member, key))
}

// named hashes the name of a stream.
func named(seed, member uint64, key string) [32]byte {
	b := make([]byte, 16, 16+len(key))
	binary.LittleEndian.PutUint64(b, seed)
	binary.LittleEndian.PutUint64(b[8:], member)
	return sha256.Sum256(append(b, key...))
}

// unit is a uniform number in the open interval (0, 1).
func unit(s rand.Source) float64 { return open(s.Uint64()) }

// open maps 64 random bits to the open interval (0, 1).
func open(x uint64) float64 { return (float64(x>>11) + 0.5) / (1 << 53) }

// permutation is a random order of n things.
func permutation(s rand.Source, n int) []int { return rand.New(s).Perm(n) }
