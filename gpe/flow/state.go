// Package flow holds stationary flows that cross the speed of sound: what a
// potential step makes of a condensate, and where and how sharp its sonic
// horizon is.
//
// Units are those of the condensate: ħ = m = 1, density 1 at the reference,
// where the sound speed is 1, so lengths are healing lengths. The fluid runs
// in the +x direction, from a subsonic upstream plateau to a supersonic
// downstream one, and everything is in the frame of the step.
package flow

import "math"

// State is a uniform piece of flow.
type State struct {
	Density    float64
	Velocity   float64
	SoundSpeed float64
}

// Mach returns v/c.
func (s State) Mach() float64 { return s.Velocity / s.SoundSpeed }

// Horizon is the place where the flow reaches the speed of sound.
type Horizon struct {
	Position       float64 // relative to the middle of the step
	SurfaceGravity float64 // κ = d(v−c)/dx there
	Temperature    float64 // κ/2π, the temperature in the limit of a smooth horizon
}

func horizonAt(position, surfaceGravity float64) Horizon {
	return Horizon{position, surfaceGravity, surfaceGravity / (2 * math.Pi)}
}

// Profile is a stationary flow with uniform ends, as the wave equations on top
// of it need it.
type Profile interface {
	// At returns density and velocity at x.
	At(x float64) (density, velocity float64)
	// Gradient returns their derivatives with respect to x, computed from the
	// flow's own equations rather than by differencing.
	Gradient(x float64) (density, velocity float64)
	// SoundSpeed returns the local speed of sound.
	SoundSpeed(x float64) float64
	// Ends returns the uniform states and the horizon between them.
	Ends() (upstream, downstream State, horizon Horizon)
	// Span returns the interval outside which the flow is uniform to about
	// double precision.
	Span() (left, right float64)
}

// Local is a flow at one place, with the gradient of the density.
type Local struct{ Density, Gradient, Velocity, SoundSpeed float64 }

// Localiser is a Profile that gives all of a place at once: wave equations are
// integrated in half the time.
type Localiser interface{ Local(x float64) Local }

var (
	_ Profile = (*Transonic)(nil)
	_ Profile = (*Uniform)(nil)
)
