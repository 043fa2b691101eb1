package resample

import (
	"crypto/sha256"
	"encoding/binary"
)

// Seed names a family of random streams: a number and a path of names. It is a
// value; At returns a new one. The zero Seed equals NewSeed(0).
type Seed struct {
	n    uint64
	path string
}

// NewSeed returns the seed with number n and no names.
func NewSeed(n uint64) Seed { return Seed{n: n} }

// At appends names (crystal, contrast, purpose) to the path. At("a", "b") equals
// At("a").At("b") and differs from At("ab").
func (s Seed) At(names ...string) Seed {
	path := []byte(s.path)
	for _, name := range names {
		path = binary.LittleEndian.AppendUint64(path, uint64(len(name)))
		path = append(path, name...)
	}
	return Seed{n: s.n, path: string(path)}
}

// Number returns the number the seed was made with.
func (s Seed) Number() uint64 { return s.n }

// Stream returns the stream of replicate i. Its ChaCha8 key is the SHA-256 of
// the seed number (8 bytes, little endian), of each name's length (8 bytes,
// little endian) and bytes, and of i (8 bytes, little endian). i may be any
// integer. Streams of different i or path are unrelated.
func (s Seed) Stream(i int) *Stream {
	msg := make([]byte, 0, 16+len(s.path))
	msg = binary.LittleEndian.AppendUint64(msg, s.n)
	msg = append(msg, s.path...)
	msg = binary.LittleEndian.AppendUint64(msg, uint64(int64(i)))
	return newStream(sha256.Sum256(msg))
}
