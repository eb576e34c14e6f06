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
}

// NewStream returns the stream of a trajectory.
func NewStream(seed uint64, trajectory int) *Stream {
	var key [32]byte
	copy(key[:], "tailrace trajectory")
	binary.LittleEndian.PutUint64(key[16:], seed)
	binary.LittleEndian.PutUint64(key[24:], uint64(trajectory))
	return &Stream{source: rand.NewChaCha8(key)}
}

// signed turns 64 bits into a number in (−1, 1), an odd multiple of 2⁻⁵³, by
// all bits but the lowest eleven.
func signed(bits uint64) float64 {
	return float64(int64(bits)>>11)*0x1p-52 + 0x1p-53
}

// The Gaussian is cut into layers of equal area, stacked like a ziggurat: the
// lowest is a rectangle and the tail beyond layerEdge. G. Marsaglia, W. W.
// Tsang, J. Stat. Softw. 5, 8 (2000), with independent bits for the layer and
// the place in it (J. A. Doornik, An improved ziggurat method to generate
// normal random samples, University of Oxford 2005). Edge and area for 128
// layers are typed from memory; that they close the stack is tested.
const (
	layers    = 128
	layerEdge = 3.442619855899
	layerArea = 9.91256303526217e-3
)

// layerX[i] is the right edge of layer i, layerX[layers] = 0; layer 0 is as
// wide as its area demands. layerInside[i] is how much of a layer lies within
// the one above.
var layerX, layerInside = stack()

func stack() (x [layers + 1]float64, inside [layers]float64) {
	f := math.Exp(-layerEdge * layerEdge / 2)
	x[0], x[1] = layerArea/f, layerEdge
	for i := 2; i < layers; i++ {
		x[i] = math.Sqrt(-2 * math.Log(layerArea/x[i-1]+f))
		f = math.Exp(-x[i] * x[i] / 2)
	}
	for i := range inside {
		inside[i] = x[i+1] / x[i]
	}
	return x, inside
}

// Normal returns a Gaussian number of mean zero and variance one.
func (s *Stream) Normal() float64 {
	bits := s.source.Uint64()
	u, i := signed(bits), bits&(layers-1)
	if math.Abs(u) < layerInside[i] {
		return u * layerX[i]
	}
	return s.rim(u, i)
}

// rim decides about a number in the part of layer i that the curve crosses.
func (s *Stream) rim(u float64, i uint64) float64 {
	for {
		switch {
		case math.Abs(u) < layerInside[i]:
			return u * layerX[i]
		case i == 0:
			return s.tail(u < 0)
		}
		x := u * layerX[i]
		f0 := math.Exp(-(layerX[i]*layerX[i] - x*x) / 2)
		f1 := math.Exp(-(layerX[i+1]*layerX[i+1] - x*x) / 2)
		if f1+math.Abs(signed(s.source.Uint64()))*(f0-f1) < 1 {
			return x
		}
		bits := s.source.Uint64()
		u, i = signed(bits), bits&(layers-1)
	}
}

// tail draws from beyond layerEdge: G. Marsaglia, Technometrics 6, 101 (1964).
func (s *Stream) tail(negative bool) float64 {
	for {
		x := math.Log(math.Abs(signed(s.source.Uint64()))) / layerEdge
		y := math.Log(math.Abs(signed(s.source.Uint64())))
		if -2*y >= x*x {
			if negative {
				return x - layerEdge
			}
			return layerEdge - x
		}
	}
}
