package gpe

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
)

// Stream is the random numbers of one trajectory. They depend on the seed and
// the trajectory's index alone: ChaCha8 keyed by both, and a Gaussian
// transform of our own, so that no release of a library changes a run.
type Stream struct {
	source *rand.ChaCha8
	spare  float64
	full   bool
}

// NewStream returns the stream of a trajectory.
func NewStream(seed uint64, trajectory int) *Stream {
	var key [32]byte
	copy(key[:], "tailrace trajectory")
	binary.LittleEndian.PutUint64(key[16:], seed)
	binary.LittleEndian.PutUint64(key[24:], uint64(trajectory))
	return &Stream{source: rand.NewChaCha8(key)}
}

// uniform returns a number in (−1, 1), an odd multiple of 2⁻⁵³.
func (s *Stream) uniform() float64 {
	return float64(int64(s.source.Uint64())>>11)*0x1p-52 + 0x1p-53
}

// Normal returns a Gaussian number of mean zero and variance one, by the
// polar method. G. Marsaglia, T. A. Bray, SIAM Rev. 6, 260 (1964).
func (s *Stream) Normal() float64 {
	if s.full {
		s.full = false
		return s.spare
	}
	for {
		x, y := s.uniform(), s.uniform()
		r := x*x + y*y
		if r >= 1 {
			continue
		}
		f := math.Sqrt(-2 * math.Log(r) / r)
		s.spare, s.full = y*f, true
		return x * f
	}
}
