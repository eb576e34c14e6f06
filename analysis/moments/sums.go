package moments

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

// ErrMismatch means that two sets of sums do not belong together: they are of
// different grids or times, or hold the same trajectories.
var ErrMismatch = errors.New("the moments cannot be added")

// Sums are the moments at one recorded time: the number of trajectories, the
// sum of |ψ|² at each point, and of |ψ|²|ψ′|² at each pair of points, all in
// units of n₀. They add: the sums of two sets of trajectories are those of the
// whole.
type Sums struct {
	Count    int
	Density  []float64     // [N]
	Products *mat.SymDense // [N×N]
}

// NewSums returns the sums of no trajectories.
func NewSums(points int) *Sums {
	return &Sums{Density: make([]float64, points), Products: mat.NewSymDense(points, nil)}
}

// block is how many shots go into one rank-k update: enough to
// stream, few enough for the double-precision copy to stay in cache.
const block = 128

// exactLimit is the largest sum of products of multiples of gpe.Quantum that
// is exact in float64.
const exactLimit = 0x1p53 * gpe.Quantum * gpe.Quantum

// ErrInexact means that sums would pass what float64 holds exactly.
var ErrInexact = errors.New("too many trajectories for exact sums")

// Add adds shots. Their values must be multiples of gpe.Quantum. It returns
// ErrInexact, and leaves the sums unusable, when they grow past the exact range.
func (s *Sums) Add(shots Shots) error {
	n := len(s.Density)
	if shots.Pixels != n {
		return fmt.Errorf("%w: %d points and %d", ErrMismatch, n, shots.Pixels)
	}
	wide := make([]float64, block*n)
	update, products := lanes.NewUpdater(n), s.Products.RawSymmetric()
	for first := 0; first < shots.Count(); first += block {
		rows := min(block, shots.Count()-first)
		for i, v := range shots.Data[first*n : (first+rows)*n] {
			wide[i] = float64(v)
			s.Density[i%n] += wide[i]
		}
		update.Add(products.Data, products.Stride, wide[:rows*n])
		s.Count += rows
	}
	return s.exact()
}

func (s *Sums) exact() error {
	for j := range s.Density {
		if s.Products.At(j, j) > exactLimit {
			return fmt.Errorf("%w: a sum of squares is %.3g n₀², at most %.3g are exact; cut the ensemble into parts", ErrInexact, s.Products.At(j, j), exactLimit)
		}
	}
	return nil
}

// Merge adds o to s.
func (s *Sums) Merge(o *Sums) error {
	if len(s.Density) != len(o.Density) {
		return fmt.Errorf("%w: %d points and %d", ErrMismatch, len(s.Density), len(o.Density))
	}
	s.Count += o.Count
	for j, v := range o.Density {
		s.Density[j] += v
	}
	s.Products.AddSym(s.Products, o.Products)
	return s.exact()
}

// Mean returns the mean of |ψ|² at each point, in n₀.
func (s *Sums) Mean() []float64 {
	mean := make([]float64, len(s.Density))
	for j, v := range s.Density {
		mean[j] = v / float64(s.Count)
	}
	return mean
}

// Covariance returns the unbiased covariance of |ψ|² between points j and k,
// in n₀². The subtraction is safe: both sums are exact.
func (s *Sums) Covariance(j, k int) float64 {
	m := float64(s.Count)
	if m < 2 {
		return math.NaN()
	}
	return (s.Products.At(j, k) - s.Density[j]*s.Density[k]/m) / (m - 1)
}
