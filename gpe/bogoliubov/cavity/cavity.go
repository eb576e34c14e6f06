// Package cavity finds the modes of a supersonic stretch between two horizons:
// the complex frequencies at which the region between a black-hole and a
// white-hole horizon amplifies sound by itself.
//
// Density 1 and velocity v > 0 are uniform, and only the speed of sound changes:
// c_u far away on both sides, c_d between the edges at x = 0 and x = D, with
// c_d < v < c_u. A small disturbance of the condensate e^{ivx} is
// e^{ivx}(U e^{−iωt} + V* e^{iω*t}) with
//
//	 ωU = (−½∂² − iv∂)U + c²(U + V)
//	−ωV = (−½∂² + iv∂)V + c²(U + V)
//
// and so, where c is constant, the dispersion (ω − vk)² = c²k² + k⁴/4. A mode
// that grows, Im ω > 0, must die away on both sides: of the four waves outside
// two do so on either side. That leaves one condition on ω, an analytic
// function in the upper half-plane, whose zeros are counted by the argument
// principle and then found.
//
// Units are those of the condensate, ħ = m = 1. The modes of two sharp
// horizons: S. Finazzi, R. Parentani, New J. Phys. 12, 095015 (2010);
// F. Michel, R. Parentani, Phys. Rev. D 88, 125012 (2013). The black-hole
// laser itself: S. Corley, T. Jacobson, Phys. Rev. D 59, 124011 (1999).
package cavity

import (
	"errors"
	"fmt"
	"math"
)

// Cavity is a supersonic stretch in a uniform flow. Make it with New.
type Cavity struct {
	Velocity float64 // v
	Outside  float64 // c_u, the sound speed far away on both sides
	Inside   float64 // c_d, the sound speed between the edges
	Length   float64 // D, the distance between the midpoints of the edges
	// Width is w of the tanh edges,
	// c²(x) = c_u² − (c_u² − c_d²)(tanh(x/w) − tanh((x−D)/w))/2, or 0 for
	// sharp ones.
	Width float64
}

// Errors of New.
var (
	// ErrSubsonicInside means that the flow is not faster than sound inside,
	// so that there is no horizon.
	ErrSubsonicInside = errors.New("the flow is subsonic between the edges, so there are no horizons")
	// ErrSupersonicOutside means that the flow outside is not slower than
	// sound, so that there is no horizon.
	ErrSupersonicOutside = errors.New("the flow is supersonic outside too, so there are no horizons")
	// ErrTooLong means that a cavity has more modes than are looked for, or
	// edges so wide that following waves through them would take minutes.
	ErrTooLong = errors.New("the cavity is too long")
)

// MostThresholds is the largest number of thresholds below the length of a
// cavity whose modes are looked for; beyond it the growth rates of neighbours
// differ by less than anybody could tell and the search would take minutes.
const MostThresholds = 400

// Longest returns the length of the longest cavity with these edges that New
// takes: that with MostThresholds thresholds, less the room that smooth edges
// need to become flat. It is negative where edges are too wide for any length.
func (c Cavity) Longest() float64 { return c.SharpThreshold(MostThresholds) - 2*reach*c.Width }

// New returns the cavity. It returns an error that wraps ErrSubsonicInside or
// ErrSupersonicOutside where there are no horizons, ErrTooLong, or an error
// about a number that is not positive and finite; width may be 0.
func New(velocity, outside, inside, length, width float64) (Cavity, error) {
	for _, q := range []struct {
		name  string
		value float64
		zero  bool
	}{{"velocity", velocity, false}, {"sound speed outside", outside, false}, {"sound speed inside", inside, false},
		{"length", length, false}, {"width", width, true}} {
		if !(q.value > 0 || q.zero && q.value == 0) || math.IsInf(q.value, 0) {
			return Cavity{}, fmt.Errorf("the %s of a cavity is %g, it must be positive and finite", q.name, q.value)
		}
	}
	c := Cavity{velocity, outside, inside, length, width}
	switch {
	case velocity >= outside:
		return Cavity{}, fmt.Errorf("%w: velocity %.4g, sound speed outside %.4g", ErrSupersonicOutside, velocity, outside)
	case velocity <= inside:
		return Cavity{}, fmt.Errorf("%w: velocity %.4g, sound speed inside %.4g", ErrSubsonicInside, velocity, inside)
	case length > c.Longest():
		return Cavity{}, fmt.Errorf("%w: length %.4g with edges of width %.4g, at most %.4g is allowed", ErrTooLong, length, width, c.Longest())
	}
	return c, nil
}

// With returns the same cavity with another length. It panics if the length is
// not positive and finite.
func (c Cavity) With(length float64) Cavity {
	if !(length > 0) || math.IsInf(length, 0) {
		panic("cavity: a length must be positive and finite")
	}
	c.Length = length
	return c
}

// drop is c_u² − c_d².
func (c Cavity) drop() float64 { return (c.Outside - c.Inside) * (c.Outside + c.Inside) }

// SoundSpeed returns c(x), with the edges at x = 0 and x = Length.
func (c Cavity) SoundSpeed(x float64) float64 {
	if c.Width == 0 {
		if x > 0 && x < c.Length {
			return c.Inside
		}
		return c.Outside
	}
	share := (math.Tanh(x/c.Width) - math.Tanh((x-c.Length)/c.Width)) / 2
	return math.Sqrt(c.Outside*c.Outside - c.drop()*share)
}

// ZeroWave returns k₀ = 2√(v² − c_d²), the wave number of the waves inside that
// stand still in the frame of the edges, ω = 0.
func (c Cavity) ZeroWave() float64 {
	return 2 * math.Sqrt((c.Velocity-c.Inside)*(c.Velocity+c.Inside))
}

// SharpThreshold returns the length at which the n-th growing mode appears
// between sharp edges, n = 0, 1, …:
//
//	D_n = (2 arctan(κ₁/k₀) + nπ)/k₀,  κ₁ = 2√(c_u² − v²),  k₀ = 2√(v² − c_d²).
//
// F. Michel, R. Parentani, Phys. Rev. D 88, 125012 (2013).
func (c Cavity) SharpThreshold(n int) float64 {
	k := c.ZeroWave()
	kappa := 2 * math.Sqrt((c.Outside-c.Velocity)*(c.Outside+c.Velocity))
	return (2*math.Atan2(kappa, k) + float64(n)*math.Pi) / k
}

// GrowthBound returns a rate that no mode of the cavity exceeds,
//
//	Im ω ≤ v(c_u − c_d)/(1 + (c_u + c_d)w).
//
// For S = U + V and D = U − V the equations make the fluid-frame energy of a
// mode grow at
//
//	Im ω · ∫(¼|D′|² + ¼|S′|² + c²|S|²) = ½v ∫(c²)′|S|².
//
// On the right only the edge where c rises counts, and ¼∫|S′|² + ∫c²|S|² there
// is at least what it is for a single edge whose c² is c_d² all the way back.
// So Im ω ≤ v/λ, with λ the strength at which the potential c² − ½λ(c²)′ has a
// ground state of energy zero; for a tanh this is the solvable potential of
// N. Rosen, P. M. Morse, Phys. Rev. 42, 210 (1932), and
// λ = (1 + (c_u + c_d)w)/(c_u − c_d).
func (c Cavity) GrowthBound() float64 {
	return c.Velocity * (c.Outside - c.Inside) / (1 + (c.Outside+c.Inside)*c.Width)
}
