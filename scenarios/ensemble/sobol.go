package ensemble

import (
	_ "embed"
	"encoding/binary"
	"fmt"
	"math/bits"
	"strings"
	"sync"
)

//go:embed direction.txt
var directionText string

// MaxDimensions is the number of dimensions of the Sobol sequence.
const MaxDimensions = 256

// directions holds the direction numbers v of every dimension, scaled by 2³².
//
//	v_i = 2^(32−i) m_i,  m_i = 2a₁m_{i−1} ⊕ 4a₂m_{i−2} ⊕ … ⊕ 2^s m_{i−s} ⊕ m_{i−s}
//
// (Joe & Kuo 2008; the initial m are theirs.)
var directions = sync.OnceValue(func() [][32]uint32 {
	out := make([][32]uint32, 1, MaxDimensions)
	for i := range out[0] {
		out[0][i] = 1 << (31 - i)
	}
	for _, line := range strings.Split(directionText, "\n") {
		if line == "" || line[0] == '#' {
			continue
		}
		var d, s int
		var a uint32
		r := strings.NewReader(line)
		if _, err := fmt.Fscan(r, &d, &s, &a); err != nil || d != len(out)+1 {
			panic(fmt.Sprintf("ensemble: broken line of direction numbers: %q", line)) // broken build
		}
		var m, v [32]uint32
		for i := range m {
			if i < s {
				if _, err := fmt.Fscan(r, &m[i]); err != nil {
					panic(fmt.Sprintf("ensemble: broken line of direction numbers: %q", line))
				}
			} else {
				m[i] = m[i-s] ^ m[i-s]<<s
				for k := 1; k < s; k++ {
					if a>>(s-1-k)&1 == 1 {
						m[i] ^= m[i-k] << k
					}
				}
			}
			v[i] = m[i] << (31 - i)
		}
		out = append(out, v)
	}
	return out
})

// sobol returns coordinate d of point i of the sequence, times 2³², in the order
// of Antonov & Saleev (1979): bit j of the Gray code of i selects v_j.
func sobol(i uint32, d int) uint32 {
	v := &directions()[d]
	var x uint32
	for g := i ^ i>>1; g != 0; g &= g - 1 {
		x ^= v[bits.TrailingZeros32(g)]
	}
	return x
}

// scrambler is a nested uniform scrambling (Owen 1995) of one coordinate: every
// digit is flipped or not by a random bit that depends on all digits before it.
// The random bits are hashes of the node in the tree of digits, so that nothing
// is stored and any point can be scrambled alone.
type scrambler uint64

func newScrambler(seed uint64, key string) scrambler {
	h := named(seed, 0, "owen scrambling of "+key)
	return scrambler(binary.LittleEndian.Uint64(h[:]))
}

// unit returns the scrambled coordinate in (0, 1). Digits beyond the 32 of the
// sequence are random, as in an infinite scrambling.
func (s scrambler) unit(x uint32) float64 {
	var y uint32
	for b := range 32 {
		node := uint64(1)<<b | uint64(x)>>(32-b)
		flip := uint32(mix(uint64(s)^node*0x9e3779b97f4a7c15)>>40) & 1
		y = y<<1 | (x>>(31-b)&1 ^ flip)
	}
	tail := mix(uint64(s) ^ (1<<32|uint64(x))*0x9e3779b97f4a7c15)
	return open(uint64(y)<<32 | tail>>32)
}

// mix is the finaliser of SplitMix64 (Steele, Lea & Flood 2014).
func mix(z uint64) uint64 {
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}
