package lab

import (
	"fmt"
	"math"
)

// Regime holds the numbers that say whether a cloud is what the program takes
// it for: one-dimensional, weakly interacting, cold and coherent. Lengths are
// in m, the rest are pure numbers.
type Regime struct {
	// ChemicalPotential is μ/ħω⊥, less the radial zero point.
	ChemicalPotential float64
	// Gamma is γ = m g₁/(ħ²n), the interaction parameter in one dimension.
	Gamma float64
	// AtomsPerHealingLength is nξ.
	AtomsPerHealingLength float64
	// Swelling is a·n: how much the radial profile grows.
	Swelling float64
	// RadialSize is √(ħ/(mω⊥)).
	RadialSize float64
	// SoundDeficit is how much slower, as a fraction, sound would be if the
	// radial profile were free to swell; zero where it is.
	SoundDeficit float64
	// RadialTemperature is k_B T/ħω⊥.
	RadialTemperature float64
	// CoherenceLength is l_φ; see the function CoherenceLength. It is +Inf at
	// T = 0.
	CoherenceLength float64

	radial Radial
}

// Check is one condition and whether it holds: Value ought to be at most Limit.
type Check struct {
	Name  string  `json:"name"`
	Value float64 `json:"value"`
	Limit float64 `json:"limit"`
	OK    bool    `json:"ok"`
	Why   string  `json:"why"`
}

// CoherenceLength returns l_φ = 2ħ²n/(m k_B T) in m, the length over which the
// first-order coherence of a uniform quasi-condensate in one dimension falls,
//
//	⟨ψ†(r)ψ(0)⟩ = n exp(−|r|/l_φ),
//
// for atoms of mass m (kg) at line density n (1/m) and temperature T (K). It is
// +Inf at T = 0. D. Petrov, G. Shlyapnikov, J. Walraven, Phys. Rev. Lett. 85,
// 3745 (2000), who quote half of it: the length over which the mean square
// phase difference reaches 1.
func CoherenceLength(m, n, temperature float64) float64 {
	if temperature == 0 {
		return math.Inf(1)
	}
	// ħ² alone is near 1e-68; divided piecewise nothing comes near underflow.
	return 2 * (HBar / m) * n * (HBar / (Boltzmann * temperature))
}

// Regime returns the regime numbers at line density n (1/m) and temperature T
// (K). It returns a *RangeError unless n is positive and T is not negative,
// both finite.
func (t *Tube) Regime(n, temperature float64) (Regime, error) {
	scale, _, err := t.Scale(n)
	if err != nil {
		return Regime{}, err
	}
	if !(temperature >= 0) || math.IsInf(temperature, 0) {
		return Regime{}, &RangeError{Quantity: "temperature", Value: temperature, Unit: "K", Allowed: "it must be finite and not negative"}
	}
	m, quantum := t.Atom.Mass, HBar*t.Omega()
	r := Regime{
		ChemicalPotential:     t.ChemicalPotential(n) / quantum,
		Gamma:                 (m / HBar) * (t.coupling / HBar) / n,
		AtomsPerHealingLength: scale.AtomsPerHealingLength,
		Swelling:              t.Atom.ScatteringLength * n,
		RadialSize:            t.RadialSize(),
		RadialTemperature:     Boltzmann * temperature / quantum,
		CoherenceLength:       CoherenceLength(m, n, temperature),
		radial:                t.Radial,
	}
	if t.Radial == Frozen {
		free := math.Sqrt(swollenSoundSpeedSquared(t.Atom, t.Omega(), n))
		r.SoundDeficit = 1 - free/scale.SoundSpeed
	}
	return r, nil
}

// Limits of the checks. All are common practice, no source: where "much less
// than" begins to be true.
const (
	// At μ = ħω⊥/2 a profile free to swell has sound 13 % slower.
	frozenLimit = 0.5
	// A step is about as deep as μ; the radial breathing mode costs 2ħω⊥.
	swollenLimit = 2
	// γ ≈ 1/(nξ)²: ten atoms in a healing length.
	weakLimit = 0.01
	// At k_B T = ħω⊥/2 a radial quantum has a Boltzmann factor of e⁻² = 0.14.
	radialTemperatureLimit = 0.5
	// Noise added to the field takes phase differences across the cloud as
	// small; at L = l_φ their mean square is 2.
	coherenceLimit = 1
)

// Checks returns the conditions under which the one-dimensional equation and
// its noise hold, for a cloud of the given length in m. All values are finite.
func (r Regime) Checks(cloudLength float64) []Check {
	quasi1D := Check{Name: "quasi-1D", Value: r.ChemicalPotential}
	if r.radial == Swollen {
		quasi1D.Limit = swollenLimit
		quasi1D.Why = "chemical potential over ħω⊥, zero point taken off: the swollen profile follows the line density, but a step about as deep as the chemical potential must not excite the radial breathing mode at 2ω⊥"
	} else {
		quasi1D.Limit = frozenLimit
		quasi1D.Why = fmt.Sprintf("chemical potential over ħω⊥: the frozen profile must not swell; one free to swell would have sound %.1f %% slower here, which radial = \"swollen\" takes into account", 100*r.SoundDeficit)
	}
	checks := []Check{
		quasi1D,
		{
			Name: "weak interaction", Value: r.Gamma, Limit: weakLimit,
			Why: fmt.Sprintf("interaction parameter γ = m g/(ħ²n): small means a condensate with weak fluctuations; here a healing length holds %.3g atoms", r.AtomsPerHealingLength),
		},
		{
			Name: "radial temperature", Value: r.RadialTemperature, Limit: radialTemperatureLimit,
			Why: "k_B T over ħω⊥: small means that heat does not excite the radial motion",
		},
		{
			Name: "phase coherence", Value: cloudLength / r.CoherenceLength, Limit: coherenceLimit,
			Why: "length of the cloud over its phase-coherence length 2ħ²n/(m k_B T): the noise is added on the assumption that phase differences across the cloud are small",
		},
	}
	for i := range checks {
		checks[i].OK = checks[i].Value <= checks[i].Limit
	}
	return checks
}
