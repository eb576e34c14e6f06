// Package camera is the imaging of a cloud: what a camera makes of a density,
// for virtual shots, and the response of pictures to density waves, for comparing
// measured shots with theory. Lengths are in ξ and densities in n₀, positions
// from the step.
package camera

import (
	"math"

	"tailrace/gpe/bogoliubov"
)

// Camera is how shots are taken.
type Camera struct {
	Resolution     float64 // standard deviation of the Gaussian point-spread function
	Pixel          float64 // side of a pixel, at the atoms
	PhotonsPerAtom float64 // detected; 0 for no photon noise
	ReadNoise      float64 // standard deviation of a pixel's density from the electronics, in n₀
	NumberSpread   float64 // relative standard deviation of the atom number from shot to shot
	Jitter         float64 // standard deviation of the step's position from shot to shot
}

// Alignment is how well shots are laid on top of each other.
type Alignment int

// The alignments.
const (
	Exact   Alignment = iota // by the step's position, to a fraction of a pixel
	ByPixel                  // by whole pixels: a rest of up to half a pixel is left
	None                     // not at all: the step's jitter is left
)

// Response returns the response of pictures: the point-spread function and the
// pixels for each wave, and for the two together what alignment leaves unknown,
// which shifts both alike.
func (c Camera) Response(a Alignment) bogoliubov.Response {
	return func(ku, kd float64) float64 {
		r := c.wave(ku) * c.wave(kd)
		// exp(i(k_u x − k_d x′)) under a common shift turns by (k_u − k_d).
		q := ku - kd
		switch a {
		case ByPixel:
			r *= sinc(q * c.Pixel / 2)
		case None:
			r *= math.Exp(-q * q * c.Jitter * c.Jitter / 2)
		}
		return r
	}
}

// wave returns the factor with which a density wave appears.
func (c Camera) wave(k float64) float64 {
	return math.Exp(-k*k*c.Resolution*c.Resolution/2) * sinc(k*c.Pixel/2)
}

// sinc returns sin(x)/x.
func sinc(x float64) float64 {
	if math.Abs(x) < 1e-6 {
		return 1
	}
	return math.Sin(x) / x
}

// share returns how much of a grid cell of width dx, at a distance d from the
// middle of a pixel, the pixel sees, per unit of its length: the point-spread
// function averaged over pixel and cell, by the pixel's edges.
func (c Camera) share(d, dx float64) float64 {
	if c.Resolution == 0 {
		lo, hi := math.Max(d-dx/2, -c.Pixel/2), math.Min(d+dx/2, c.Pixel/2)
		return math.Max(0, hi-lo) / c.Pixel
	}
	edge := func(x float64) float64 { return math.Erf(x / (math.Sqrt2 * c.Resolution)) }
	return dx / c.Pixel * (edge(d+c.Pixel/2) - edge(d-c.Pixel/2)) / 2
}
