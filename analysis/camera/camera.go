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
	// Points says that the pixels are points, not averages over their side: those
	// of a simulation.
	Points bool
}

// Response returns the response of pictures: the point-spread function and the
// pixels for each wave, and for the two together a common shift that is not
// known, of standard deviation rest: what alignment leaves of the step's position.
func (c Camera) Response(rest float64) bogoliubov.Response {
	return func(ku, kd float64) float64 {
		// exp(i(k_u x − k_d x′)) under a common shift turns by (k_u − k_d).
		q := (ku - kd) * rest
		return c.wave(ku) * c.wave(kd) * math.Exp(-q*q/2)
	}
}

// wave returns the factor with which a density wave appears.
func (c Camera) wave(k float64) float64 {
	if c.Points {
		return 1
	}
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

// Granularity returns the variance that a pixel has over its mean density from
// atoms and photons alone, in n₀, for atomsPerLength atoms per healing length at
// density 1, and how much of the atoms' part pixels i apart share, relative to
// it: the point-spread function correlates neighbours.
func (c Camera) Granularity(atomsPerLength float64) (variance float64, overlap []float64) {
	if c.Points {
		return 1 / (atomsPerLength * c.Pixel), []float64{1}
	}
	// ∫dk/2π |wave(k)|² exp(ikd): the overlap of two pixels' responses.
	pixels := 1 + int(math.Ceil(6*c.Resolution/c.Pixel))
	overlap = make([]float64, pixels+1)
	top := 40 / c.Pixel
	if c.Resolution > 0 {
		top = math.Min(top, 7/c.Resolution)
	}
	const steps = 4000
	for i := range overlap {
		d := float64(i) * c.Pixel
		for q := range steps {
			k := top * (float64(q) + 0.5) / steps
			w := c.wave(k)
			overlap[i] += w * w * math.Cos(k*d) * top / steps / math.Pi
		}
	}
	atoms := overlap[0] / atomsPerLength
	variance = atoms
	if c.PhotonsPerAtom > 0 {
		variance += 1 / (c.PhotonsPerAtom * atomsPerLength * c.Pixel)
	}
	for i := range overlap {
		overlap[i] /= atomsPerLength * variance
	}
	overlap[0] = 1
	return variance, overlap
}
