package resample

import (
	"math/bits"
	"math/rand/v2"
)

// Stream is one stream of random numbers (ChaCha8). The samplers are this
// package's own and frozen by test, so a stream means the same under every Go
// version. A Stream is a math/rand/v2 Source. It is not safe for use by several
// goroutines.
type Stream struct {
	src      rand.ChaCha8
	spare    float64
	hasSpare bool
}

func newStream(key [32]byte) *Stream {
	s := new(Stream)
	s.src.Seed(key)
	return s
}

// Uint64 returns the next 64 bits.
func (s *Stream) Uint64() uint64 { return s.src.Uint64() }

// Float64 returns a uniform number in [0, 1), a multiple of 2^-53.
func (s *Stream) Float64() float64 { return float64(s.src.Uint64()>>11) * 0x1p-53 }

// Open returns a uniform number in (0, 1), an odd multiple of 2^-53: safe under
// a logarithm.
func (s *Stream) Open() float64 { return (float64(s.src.Uint64()>>12) + 0.5) * 0x1p-52 }

// Sign returns -1 or 1.
func (s *Stream) Sign() float64 {
	if s.src.Uint64()>>63 == 0 {
		return 1
	}
	return -1
}

// Intn returns a uniform integer in [0, n), without bias (Lemire 2019, ACM
// Trans. Model. Comput. Simul. 29:3). It panics when n <= 0.
func (s *Stream) Intn(n int) int {
	if n <= 0 {
		panic("resample: Stream.Intn: n must be positive")
	}
	m := uint64(n)
	hi, lo := bits.Mul64(s.src.Uint64(), m)
	if lo < m {
		for least := -m % m; lo < least; {
			hi, lo = bits.Mul64(s.src.Uint64(), m)
		}
	}
	return int(hi)
}

// Perm returns a random permutation of 0..n-1 (Fisher-Yates). It panics when n
// is negative.
func (s *Stream) Perm(n int) []int {
	if n < 0 {
		panic("resample: Stream.Perm: n must not be negative")
	}
	p := make([]int, n)
	for i := range p {
		p[i] = i
	}
	for i := n - 1; i > 0; i-- {
		j := s.Intn(i + 1)
		p[i], p[j] = p[j], p[i]
	}
	return p
}
