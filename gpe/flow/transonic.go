package flow

import (
	"math"

	"tailrace/gpe/fluid"
)

// Transonic is the stationary flow over the step
//
//	V(x) = −V₀(1 + tanh(x/w))/2
//
// that is exactly uniform far downstream, where it is supersonic, and joins a
// subsonic plateau upstream along its separatrix. In a flow with the horizon
// of a black hole a standing wave downstream would be an ingoing wave, so
// there is none. Given the step and the upstream density, that is one
// condition, and it fixes the upstream velocity. P.-É. Larré, A. Recati,
// I. Carusotto, N. Pavloff, Phys. Rev. A 85, 013621 (2012), for the step of
// zero width.
type Transonic struct {
	Law          fluid.Law
	Depth, Width float64 // V₀ and w; w = 0 is a sharp edge

	Upstream, Downstream State
	Horizon              Horizon

	// The profile on a grid that is finest where the flow changes. Use At
	// between the points.
	X, Density, Velocity []float64

	Current float64 // j = n v

	profile spline
}

// OverStep returns the flow over a step of given depth > 0 and width ≥ 0 from
// a plateau of the given density. The error, if any, is a *NoFlow.
func OverStep(law fluid.Law, upstream, depth, width float64) (*Transonic, error) {
	if err := positive(quantity{"upstream density", upstream}); err != nil {
		return nil, err
	}
	c := law.SoundSpeed(upstream)
	return solve(law, depth, width, func(mach float64) State {
		return State{upstream, mach * c, c}
	})
}

// Sweep returns the flow that a step swept at the given speed makes in a cloud
// at rest with density 1, in the frame of the step, with the cloud ending
// where the step started. A simple wave runs ahead of the step; across it
// v + ∫c dn/n is constant, so that for the cubic law
// v_u + 2c_u = speed + 2. With the condition for a transonic flow that fixes
// the plateau ahead of the step.
//
// The wave must be a rarefaction: a plateau denser than the cloud would have
// to be joined to it by a train of dispersive shocks. The error, if any, is a
// *NoFlow.
func Sweep(law fluid.Law, speed, depth, width float64) (*Transonic, error) {
	if math.IsNaN(speed) || math.IsInf(speed, 0) {
		return nil, noFlow(BadNumber, "give a finite number above zero", "speed = %g", speed)
	}
	if speed <= 0 {
		return nil, noFlow(TooSlow, "raise the speed", "speed %.6g does not advance into the cloud", speed)
	}
	if speed >= 1 {
		return nil, noFlow(TooFast, "lower the speed",
			"speed %.6g is not below the sound speed 1 of the cloud at rest", speed)
	}
	invariant := speed + law.Riemann(1)
	t, err := solve(law, depth, width, func(mach float64) State {
		return behindWave(law, invariant, mach)
	})
	if err != nil {
		return nil, err
	}
	// The tolerance admits the step that leaves the cloud's density exactly.
	if n := t.Upstream.Density; n > 1+1e-9 {
		return nil, noFlow(DenserThanCloud, "lower the speed or the depth, or widen the step",
			"the plateau ahead of the step would have density %.6g, above the cloud's 1", n)
	}
	return t, nil
}

// behindWave returns the plateau of given Mach number with
// v + ∫c dn/n = invariant > 0.
func behindWave(law fluid.Law, invariant, mach float64) State {
	// For a pure power of n, ∫c dn/n ∝ c with a factor between 2 (cubic) and
	// 4 (fully swollen), so c lies between invariant/(mach+4) and
	// invariant/(mach+2). Newton in ln n, on a convex rising function,
	// converges from anywhere.
	n := invariant * invariant / ((mach + 2) * (mach + 2))
	if law.Swelling() != 0 {
		for range 60 {
			c := law.SoundSpeed(n)
			g := mach*c + law.Riemann(n) - invariant
			dn := g / (mach*law.SoundSlope(n) + c/n)
			n *= math.Exp(-dn / n)
			if math.Abs(dn) <= 1e-15*n {
				break
			}
		}
	}
	c := law.SoundSpeed(n)
	return State{n, mach * c, c}
}

// behindStep returns the supersonic state with the current and the chemical
// potential of u, in the potential −depth.
func behindStep(law fluid.Law, u State, depth float64) State {
	e := law.About(u.Density)
	j := u.Density * u.Velocity
	// g(n) = f(n) + j²/2n² is convex and falling below its minimum at v = c,
	// so Newton from a density below the root rises to it monotonically. The
	// start is where the kinetic energy alone makes up the whole of it.
	n := j / math.Sqrt(2*(depth+law.Mu(u.Density))+u.Velocity*u.Velocity)
	for range 100 {
		dn := n - u.Density
		g := e.Rise(dn) - u.Velocity*u.Velocity/2*dn*(n+u.Density)/(n*n) - depth
		step := g / (law.Slope(n) - j*j/(n*n*n))
		if !(step < 0) {
			break
		}
		n -= step
		if -step <= 1e-16*n {
			break
		}
	}
	return State{n, j / n, law.SoundSpeed(n)}
}

// Ends implements Profile.
func (t *Transonic) Ends() (upstream, downstream State, horizon Horizon) {
	return t.Upstream, t.Downstream, t.Horizon
}

// At implements Profile: density and velocity at x, to about 1e-12.
func (t *Transonic) At(x float64) (density, velocity float64) {
	A, _ := t.amplitude(x)
	density = A * A
	return density, t.Current / density
}

// Gradient implements Profile.
func (t *Transonic) Gradient(x float64) (density, velocity float64) {
	A, slope := t.amplitude(x)
	n := A * A
	density = 2 * A * slope
	return density, -t.Current / (n * n) * density
}

// SoundSpeed implements Profile.
func (t *Transonic) SoundSpeed(x float64) float64 {
	A, _ := t.amplitude(x)
	return t.Law.SoundSpeed(A * A)
}

// Local implements Localiser.
func (t *Transonic) Local(x float64) Local {
	A, slope := t.amplitude(x)
	n := A * A
	return Local{n, 2 * A * slope, t.Current / n, t.Law.SoundSpeed(n)}
}

// Span implements Profile.
func (t *Transonic) Span() (left, right float64) {
	return t.X[0], t.X[len(t.X)-1]
}
