package lab

import (
	"fmt"
	"math"

	"tailrace/gpe/fluid"
)

// Radial says what the radial profile of the cloud does as the line density
// changes.
type Radial string

const (
	// Frozen keeps the radial ground state at every density: f(n) = g₁n.
	Frozen Radial = "frozen"
	// Swollen lets the profile grow with the density: fluid.Swollen.
	Swollen Radial = "swollen"
)

// Tube is a gas of atoms held tightly in two directions: all that the
// reduction to one dimension needs. Make one with NewTube.
type Tube struct {
	Atom Atom
	// RadialFrequency is ω⊥/2π in Hz.
	RadialFrequency float64
	Radial          Radial

	coupling float64
}

// NewTube returns a tube for atoms in a radial trap of the given ordinary
// frequency ω⊥/2π in Hz. It returns a *RangeError where a number is not
// positive and finite, where the radial kind is neither Frozen nor Swollen, or
// where the radial trap is so tight that the coupling is beyond its resonance.
func NewTube(atom Atom, radialFrequency float64, radial Radial) (*Tube, error) {
	if err := positive("mass", atom.Mass, "kg"); err != nil {
		return nil, err
	}
	if !(atom.ScatteringLength > 0) || math.IsInf(atom.ScatteringLength, 0) {
		return nil, &RangeError{Quantity: "scattering length", Value: atom.ScatteringLength, Unit: "m",
			Allowed: "it must be positive and finite: without repulsion there is no sound"}
	}
	if err := positive("radial frequency", radialFrequency, "Hz"); err != nil {
		return nil, err
	}
	if radial != Frozen && radial != Swollen {
		return nil, &RadialError{Found: radial}
	}
	t := &Tube{Atom: atom, RadialFrequency: radialFrequency, Radial: radial}
	var err error
	t.coupling, err = Coupling(atom, radialFrequency)
	if err != nil {
		return nil, err
	}
	return t, nil
}

// RadialError is the error of a radial kind that does not exist.
type RadialError struct{ Found Radial }

func (e *RadialError) Error() string {
	return fmt.Sprintf("unknown radial profile %q: allowed are %q and %q", string(e.Found), string(Frozen), string(Swollen))
}

// Coupling returns the one-dimensional coupling constant in J m,
//
//	g₁ = 2ħω⊥a / (1 − C a/a⊥),  a⊥ = √(2ħ/(mω⊥)),  C = OlshaniiC,
//
// M. Olshanii, Phys. Rev. Lett. 81, 938 (1998), for a radial trap of ordinary
// frequency ω⊥/2π in Hz. It returns a *RangeError where C a ≥ a⊥: at and past
// the confinement-induced resonance the gas is not a weakly repulsive one.
func Coupling(atom Atom, radialFrequency float64) (float64, error) {
	omega := 2 * math.Pi * radialFrequency
	aPerp := math.Sqrt(2 * HBar / (atom.Mass * omega))
	denominator := 1 - OlshaniiC*atom.ScatteringLength/aPerp
	if !(denominator > 0) {
		return 0, &RangeError{Quantity: "scattering length", Value: atom.ScatteringLength, Unit: "m",
			Allowed: fmt.Sprintf("it must be below a⊥/1.46 = %.4g m, where the radial trap puts a resonance: lower the radial frequency", aPerp/OlshaniiC)}
	}
	g := 2 * HBar * omega * atom.ScatteringLength / denominator
	if err := positive("coupling", g, "J m"); err != nil {
		return 0, err
	}
	return g, nil
}

// Coupling returns g₁ in J m; see the function of the same name.
func (t *Tube) Coupling() float64 { return t.coupling }

// Omega returns the angular radial frequency ω⊥ in 1/s.
func (t *Tube) Omega() float64 { return 2 * math.Pi * t.RadialFrequency }

// RadialSize returns √(ħ/(mω⊥)) in m, the size of the radial ground state: its
// density falls to 1/e at this radius.
func (t *Tube) RadialSize() float64 { return math.Sqrt(HBar / (t.Atom.Mass * t.Omega())) }

// Law returns the law of the chemical potential in condensate units for the
// reference line density n0 in 1/m. It returns a *RangeError unless n0 is
// positive and finite.
func (t *Tube) Law(n0 float64) (fluid.Law, error) {
	if err := positive("line density", n0, "1/m"); err != nil {
		return fluid.Law{}, err
	}
	if t.Radial == Frozen {
		return fluid.Cubic(), nil
	}
	return fluid.Swollen(t.Atom.ScatteringLength * n0), nil
}

// Scale returns the scale and the law for the reference line density n0 in
// 1/m. For a frozen profile c₀² = g₁n₀/m; for a swollen one
//
//	c₀² = (n₀/m) dμ/dn = (ħω⊥/m) η(2+3η)/(1+2η)^{3/2},  η = a n₀,
//
// from the law of fluid.Swollen, which has no resonance correction: it is made
// for clouds wide compared with a.
func (t *Tube) Scale(n0 float64) (Scale, fluid.Law, error) {
	law, err := t.Law(n0)
	if err != nil {
		return Scale{}, fluid.Law{}, err
	}
	scale, err := NewScale(t.Atom.Mass, n0, math.Sqrt(t.soundSpeedSquared(n0)))
	if err != nil {
		return Scale{}, fluid.Law{}, err
	}
	return scale, law, nil
}

// soundSpeedSquared returns c² in m²/s² at line density n.
func (t *Tube) soundSpeedSquared(n float64) float64 {
	if t.Radial == Frozen {
		return t.coupling * n / t.Atom.Mass
	}
	return swollenSoundSpeedSquared(t.Atom, t.Omega(), n)
}

// swollenSoundSpeedSquared is η(2+3η)/(1+2η)^{3/2} ħω⊥/m; Law.Scale is
// ħω⊥/(m c²), but 0/0 at densities so low that η rounds to nothing.
func swollenSoundSpeedSquared(atom Atom, omega, n float64) float64 {
	eta := atom.ScatteringLength * n
	r := math.Sqrt(1 + 2*eta)
	return HBar * omega / atom.Mass * eta * (2 + 3*eta) / (r * r * r)
}

// ChemicalPotential returns μ in J at line density n in 1/m, less the radial
// zero point ħω⊥.
func (t *Tube) ChemicalPotential(n float64) float64 {
	if t.Radial == Frozen {
		return t.coupling * n
	}
	eta := t.Atom.ScatteringLength * n
	r := math.Sqrt(1 + 2*eta)
	// (1+3η)/√(1+2η) − 1 without cancellation, as in fluid.Law.
	return HBar * t.Omega() * eta * (4 + 9*eta) / (r * (1 + 3*eta + r))
}

// density returns the line density at which ChemicalPotential is mu, zero
// where mu ≤ 0. With r = √(1+2η), μ/ħω⊥ + 1 = M reads 3r² − 2Mr − 1 = 0.
func (t *Tube) density(mu float64) float64 {
	if mu <= 0 {
		return 0
	}
	if t.Radial == Frozen {
		return mu / t.coupling
	}
	// With e = M − 1: r = (M + √(M²+3))/3 and r − 1 = (e + e(2+e)/(√(M²+3)+2))/3,
	// which keeps its digits as e → 0; η = (r−1)(r+1)/2.
	e := mu / (HBar * t.Omega())
	root := math.Sqrt((1+e)*(1+e) + 3)
	excess := (e + e*(2+e)/(root+2)) / 3
	return excess * (excess + 2) / 2 / t.Atom.ScatteringLength
}
