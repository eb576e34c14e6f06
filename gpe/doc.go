// Package gpe is what happens in the cloud: the one-dimensional
// Gross–Pitaevskii equation of a thin condensate through which a potential
// step is swept, started from the ground state and from quantum and thermal
// noise, for an ensemble of trajectories.
//
// # Units
//
// ħ = m = 1, and the reference density n₀ and the sound speed there are 1.
// Lengths are healing lengths ξ = ħ/(m c₀), times ħ/(m c₀²), energies and
// temperatures m c₀². The field is scaled to the reference density, so that
// |ψ|² = 1 there; how many atoms that is stands in one number,
// Problem.AtomsPerLength = n₀ξ, and the noise of a mode is 1/√(n₀ξ) of the
// field. Positions are measured in the laboratory from the middle of the
// cloud; the step comes in from the right and moves to the left.
//
// # Equation
//
//	i ∂ψ/∂t = [ −½∂² + V(x,t) + g(x,t) f(|ψ|² − s) ] ψ
//
// with f the equation of state (package fluid), g = 1 except in flows whose
// sound speed is switched, and s the density of the commutator
// [ψ(x),ψ†(x)] = 1/(n₀ξ dx) on a grid that carries all of its modes. With
// that s the symmetrically ordered noise does not act as a fog that repels
// the cloud: the vacuum's Hartree and exchange terms, twice ½s, cancel it.
//
// # Ordering
//
// Averages over trajectories are symmetrically ordered. On a grid all of
// whose modes carry noise the commutator is s at equal points and nothing at
// different ones, and stays so, because a step of the propagator is unitary.
// Hence, exactly, ⟨n⟩ = ⟨|ψ|²⟩ − s/2, and covariances of the density at
// different points need no correction (package correlation does the diagonal).
//
// Source of the method: P. B. Blakie, A. S. Bradley, M. J. Davis,
// R. J. Ballagh, C. W. Gardiner, Adv. Phys. 57, 363 (2008); A. Sinatra,
// C. Lobo, Y. Castin, J. Phys. B 35, 3599 (2002).
package gpe
