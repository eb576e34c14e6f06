package gpe

import (
	"fmt"
	"math"
)

// Grid is a periodic grid of N points dx apart: x_j = Origin + j dx.
type Grid struct {
	N      int
	Dx     float64
	Origin float64 // x of point 0, in ξ
}

// NewGrid returns a grid of n points over a length in ξ, placed so that x = 0
// is a point and the first point is at or just right of left. A point at zero
// makes a symmetric cloud symmetric on the grid too, which halves the work of
// finding its modes.
func NewGrid(n int, length, left float64) Grid {
	dx := length / float64(n)
	return Grid{N: n, Dx: dx, Origin: math.Ceil(left/dx-1e-9) * dx}
}

// Length returns the period N dx.
func (g Grid) Length() float64 { return float64(g.N) * g.Dx }

// X returns the position of point j.
func (g Grid) X(j int) float64 { return g.Origin + float64(j)*g.Dx }

// Positions returns all N positions.
func (g Grid) Positions() []float64 {
	x := make([]float64, g.N)
	for j := range x {
		x[j] = g.X(j)
	}
	return x
}

// Wavenumber returns the wavenumber of Fourier index q in 0..N−1: 2πq/L below
// N/2, 2π(q−N)/L from N/2 on.
func (g Grid) Wavenumber(q int) float64 {
	if 2*q >= g.N {
		q -= g.N
	}
	return 2 * math.Pi * float64(q) / g.Length()
}

// Wavenumbers returns all N wavenumbers in Fourier order.
func (g Grid) Wavenumbers() []float64 {
	k := make([]float64, g.N)
	for q := range k {
		k[q] = g.Wavenumber(q)
	}
	return k
}

// MaxWavenumber returns k_max = π/dx.
func (g Grid) MaxWavenumber() float64 { return math.Pi / g.Dx }

// MaxTimeStep returns the longest stable time step, at which the kinetic
// phase of the shortest wave, dt k_max²/2, reaches π. Beyond it the splitting
// resonates: a pair of waves ±k whose kinetic phase is π in a step grows out
// of the noise. J. A. C. Weideman, B. M. Herbst, SIAM J. Numer. Anal. 23, 485
// (1986).
func (g Grid) MaxTimeStep() float64 {
	k := g.MaxWavenumber()
	return 2 * math.Pi / (k * k)
}

// Index returns the point nearest to x, which must lie on the grid.
func (g Grid) Index(x float64) int {
	j := int(math.Round((x - g.Origin) / g.Dx))
	if j < 0 || j >= g.N {
		panic(fmt.Sprintf("gpe: x = %g is off the grid [%g, %g]", x, g.X(0), g.X(g.N-1)))
	}
	return j
}
