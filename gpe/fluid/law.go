// Package fluid holds the equation of state of a thin condensate: how the
// local chemical potential f depends on the line density n.
//
// Everything here is in condensate units: ħ = m = 1, the reference density is
// n = 1 and the sound speed there is c = 1, so that lengths are healing
// lengths and times ħ/(m c²).
package fluid

import "math"

// Law is the local chemical potential f(n) of the line density, measured from
// its value in empty space. The zero value is the cubic law f = n.
//
// The swollen law lets the cloud grow radially as it gets denser:
//
//	μ(n)/ħω⊥ = (1 + 3an)/√(1 + 2an),
//
// L. Salasnich, A. Parola, L. Reatto, Phys. Rev. A 65, 043614 (2002), here
// less its zero point and scaled so that c(1) = 1. It has one parameter, the
// swelling η = a·n₀, with a the s-wave scattering length and n₀ the reference
// line density. η → 0 is the cubic law; for η → ∞, c² ∝ √n.
type Law struct {
	swelling float64
}

// Cubic returns f(n) = n.
func Cubic() Law { return Law{} }

// Swollen returns the law with swelling eta = a·n₀ ≥ 0; eta = 0 is cubic.
// It panics on a negative or NaN eta.
func Swollen(eta float64) Law {
	if !(eta >= 0) || math.IsInf(eta, 0) {
		panic("fluid: swelling must be finite and not negative")
	}
	return Law{swelling: eta}
}

// Swelling returns η = a·n₀, zero for the cubic law.
func (l Law) Swelling() float64 { return l.swelling }

// Scale returns the factor that turns units of ħω⊥ into condensate units,
// ħω⊥/(m c₀²) = (1+2η)^{3/2} / (η(2+3η)). It is +Inf for the cubic law, which
// is the limit η → 0.
func (l Law) Scale() float64 {
	eta := l.swelling
	r := math.Sqrt(1 + 2*eta)
	return r * r * r / (eta * (2 + 3*eta))
}

// Mu returns f(n). Densities slightly below zero, which truncated-Wigner
// fields have in empty space, are continued analytically.
func (l Law) Mu(n float64) float64 {
	if l.swelling == 0 {
		return n
	}
	// (1+3y)/√(1+2y) − 1, with y = ηn, written without cancellation:
	// (1+3y)² − (1+2y) = y(4+9y).
	y := l.swelling * n
	r := math.Sqrt(1 + 2*y)
	return l.Scale() * y * (4 + 9*y) / (r * (1 + 3*y + r))
}

// Slope returns f′(n).
func (l Law) Slope(n float64) float64 {
	if l.swelling == 0 {
		return 1
	}
	y := l.swelling * n
	r := math.Sqrt(1 + 2*y)
	return l.Scale() * l.swelling * (2 + 3*y) / (r * r * r)
}

// SoundSpeed returns c(n) = √(n f′(n)).
func (l Law) SoundSpeed(n float64) float64 { return math.Sqrt(n * l.Slope(n)) }

// Energy returns the energy per length e(n) = ∫₀ⁿ f.
//
// For the swollen law ∫(1+3y)/√(1+2y) dy = y√(1+2y).
func (l Law) Energy(n float64) float64 {
	if l.swelling == 0 {
		return n * n / 2
	}
	// y√(1+2y) − y = 2y²/(1+√(1+2y)).
	y := l.swelling * n
	return l.Scale() / l.swelling * 2 * y * y / (1 + math.Sqrt(1+2*y))
}
