// Package bogoliubov holds the small excitations of a condensate: their
// dispersion, their scattering at a sonic horizon and the density
// correlations they leave behind.
//
// Units are those of the condensate, ħ = m = 1, with lengths in healing
// lengths of the reference density and temperatures as energies (k_B = 1).
// Frequencies ω are in the frame of the step.
package bogoliubov

import "math"

// Dispersion relation, structure factor and amplitudes: L. Pitaevskii,
// S. Stringari, Bose–Einstein Condensation and Superfluidity, OUP 2016.
//
// With E = k²/2 and s = √(c² + k²/4), the energy is ε = |k|s and E/ε = |k|/2s;
// written so, nothing cancels at small k.

// phaseSpeed returns s = ε/|k|.
func phaseSpeed(k, c float64) float64 { return math.Hypot(c, k/2) }

// Energy returns ε(k) = √(E(E + 2c²)) with E = k²/2, the energy of an
// excitation of wave number k in the frame of the fluid of sound speed c.
func Energy(k, c float64) float64 { return math.Abs(k) * phaseSpeed(k, c) }

// groupSpeed returns dε/dk for k ≥ 0, c at k = 0.
func groupSpeed(k, c float64) float64 {
	s := phaseSpeed(k, c)
	if s == 0 {
		return 0
	}
	return (c*c + k*k/2) / s
}

// StructureFactor returns the static structure factor (E/ε) coth(ε/2T) of a
// uniform fluid at temperature T ≥ 0. At k = 0 it is T/c², and at T = 0 it is
// E/ε.
func StructureFactor(k, c, T float64) float64 {
	k = math.Abs(k)
	s := phaseSpeed(k, c)
	switch {
	case s == 0 && T == 0:
		return 1 // the ideal gas
	case k == 0:
		return T / (c * c)
	case T == 0:
		return k / (2 * s)
	}
	return k / (2 * s) / math.Tanh(k*s/(2*T))
}

// Amplitudes returns the Bogoliubov amplitudes with u² − v² = 1, u > 0 ≥ v,
// u + v = √(E/ε) and u − v = √(ε/E). Both diverge as k → 0.
func Amplitudes(k, c float64) (u, v float64) {
	k = math.Abs(k)
	s := phaseSpeed(k, c)
	sum := math.Sqrt(k / (2 * s))
	// 1 − E/ε = 2c²/(s(2s+k)), without cancellation at large k.
	return (sum + 1/sum) / 2, -c * c / (s * (2*s + k) * sum)
}

// topWave returns the wave number at which the negative-norm branch
// vk − ε(k) of a supersonic flow is highest, and the phase speed ε/k there.
func topWave(v, c float64) (k, s float64) {
	// dε/dk = (2s² − c²)/s = v.
	root := math.Sqrt(v*v + 8*c*c)
	s = (v + root) / 4
	above := s - c
	if v < 2*c { // the same, without cancellation
		above = 2 * c * (v - c) / (root + 4*c - v)
	}
	return 2 * math.Sqrt(above*(s+c)), s
}

// MaxFrequency returns ω_max, the top of the negative-norm branch of a flow
// with v > c: above it the horizon emits nothing. It is 0 for a flow that is
// not supersonic.
func MaxFrequency(v, c float64) float64 {
	if !(v > c) {
		return 0
	}
	k, _ := topWave(v, c)
	return k * fallBehind(v, c)
}

// fallBehind returns v − s at the top of the negative-norm branch.
func fallBehind(v, c float64) float64 {
	return 2 * (v - c) * (v + c) / (3*v + math.Sqrt(v*v+8*c*c))
}

// OutgoingUp returns the wave k_u(ω) < 0 that leaves the horizon upstream in a
// subsonic flow 0 ≤ v < c, on the branch ω = vk + ε(k), with its group speed
// |dω/dk|. It panics if the flow is not subsonic or ω is negative.
func OutgoingUp(omega, v, c float64) (k, speed float64) {
	if !(v >= 0 && v < c && omega >= 0) {
		panic("bogoliubov: outgoing wave upstream needs 0 ≤ v < c and ω ≥ 0")
	}
	// ε − vk is convex and rising in |k|; both bounds lie above the root, so
	// Newton comes down to it monotonically.
	q := math.Min(omega/(c-v), v+math.Sqrt(v*v+2*omega))
	for range 100 {
		step := (q*(phaseSpeed(q, c)-v) - omega) / (groupSpeed(q, c) - v)
		if !(step > 4e-16*q) {
			break
		}
		q -= step
	}
	return -q, groupSpeed(q, c) - v
}

// OutgoingDown returns the wave k_d(ω) > 0 of negative norm that leaves the
// horizon downstream in a supersonic flow v > c, on the branch
// ω = vk − ε(k), with its group speed |dω/dk|; it is the partner of the wave
// upstream. Above MaxFrequency there is none, and both are NaN. It panics if
// the flow is not supersonic or ω is negative.
func OutgoingDown(omega, v, c float64) (k, speed float64) {
	if !(v > c && c >= 0 && omega >= 0) {
		panic("bogoliubov: outgoing wave downstream needs v > c and ω ≥ 0")
	}
	top, _ := topWave(v, c)
	limit := top * fallBehind(v, c)
	switch {
	case omega > limit:
		return math.NaN(), math.NaN()
	case omega == limit:
		return top, 0
	}
	// vk − ε is concave and rising below its top, and ω/(v−c) lies below the
	// root, so Newton rises to it monotonically; slowly, but surely, near the
	// top.
	k = omega / (v - c)
	for range 100 {
		step := (omega - k*(v-phaseSpeed(k, c))) / (v - groupSpeed(k, c))
		if !(step > 4e-16*k) || k+step > top {
			break
		}
		k += step
	}
	return k, v - groupSpeed(k, c)
}
