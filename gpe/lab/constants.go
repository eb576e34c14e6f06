// Package lab stands between the laboratory and the dimensionless equation:
// atoms, the radial trap, the reduction to one dimension, and the scale that
// turns SI numbers into condensate units and back.
//
// Everything here is in SI units unless a comment says otherwise. Trap
// frequencies are ordinary frequencies ω/2π in Hz, as a laboratory quotes them;
// the formulae use ω.
package lab

import (
	"math"

	"gonum.org/v1/gonum/unit/constant"
)

const (
	// HBar is the reduced Planck constant ħ in J s, exact since 2019.
	HBar = float64(constant.Planck) / (2 * math.Pi)

	// Boltzmann is k_B in J/K, exact since 2019.
	Boltzmann = float64(constant.Boltzmann)

	// Planck is h in J s, exact since 2019.
	Planck = float64(constant.Planck)

	// AtomicMass is the atomic mass constant m_u in kg.
	AtomicMass = float64(constant.AtomicMass)

	// BohrRadius is a₀ in m: CODATA 2018, the adjustment AtomicMass is taken
	// from, typed from memory. gonum does not hold the electron mass from
	// which it would follow.
	BohrRadius = 5.29177210903e-11

	// OlshaniiC is C = −ζ(1/2), the constant of the confinement-induced
	// resonance: M. Olshanii, Phys. Rev. Lett. 81, 938 (1998) gives 1.4603.
	OlshaniiC = 1.4603545088095868
)
