package temperature

import (
	"math"
	"math/rand/v2"

	"tailrace/analysis/band"
)

// Sampling is how the interval of a thermometer is found: by resampling shots,
// and by drawing the height of the theory anew each time from what is known of
// it, where the height carries the temperature.
type Sampling struct {
	Resamples int
	Seed      uint64
	// HeightError is the relative standard error of the predicted height of the
	// band: that of the density and of the response of the imaging.
	HeightError float64
	// Block is how many neighbouring shots are drawn together; 0 is 1. (A cut
	// has its own.)
	Block int
}

// source returns the random numbers of one thermometer, and height the factor
// by which one resample's theory is multiplied.
func (s Sampling) source(stream uint64) *rand.Rand { return rand.New(rand.NewPCG(s.Seed, stream)) }

func (s Sampling) height(r *rand.Rand) float64 {
	if s.HeightError == 0 {
		return 1
	}
	return math.Exp(s.HeightError * r.NormFloat64())
}

// groups returns, for the points (i, j) of the window of s, the bin of the cut
// c that they fall into, or a negative number.
func groups(c *band.Cut, s *band.Sides, g band.Geometry) func(i, j int) int {
	index := make([]int, c.Bins.Count)
	for b := range index {
		index[b] = -1
	}
	for k, centre := range c.S {
		index[int(math.Round((centre-c.Bins.Centre(0))/c.Bins.Width))] = k
	}
	return func(i, j int) int {
		b := int(math.Floor((g.Delay(s.Xu[i], s.Xd[j]) - c.Bins.Low) / c.Bins.Width))
		if b < 0 || b >= len(index) {
			return -1
		}
		return index[b]
	}
}

// largest returns the largest size in v.
func largest(v []float64) (size float64) {
	for _, x := range v {
		size = math.Max(size, math.Abs(x))
	}
	return size
}
