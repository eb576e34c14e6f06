package lab

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// Walls is a box trap along the cloud: in units of the chemical potential,
//
//	V(x) = Height (1 + tanh((|x| − Length/2)/Width))/2.
type Walls struct {
	Length float64 // m, between the midpoints of the walls
	Width  float64 // m
	Height float64 // in units of the chemical potential, above 1
}

// gauss is the order of the Gauss–Legendre rules. All integrands are smooth
// where they are integrated; on an interval of a few wall widths, whose tanh
// has its nearest pole π/2 widths off the axis, 64 points reach 1e-14.
const gauss = 64

// BoxDensity returns the line density, in 1/m, of the plateau of a cloud of N
// atoms in a box, in the Thomas–Fermi approximation: the local density follows
// the law of the tube and the healing at the wall is neglected. It returns a
// *RangeError for numbers without meaning.
func (t *Tube) BoxDensity(atoms float64, walls Walls) (float64, error) {
	if err := atomNumber(atoms); err != nil {
		return 0, err
	}
	if err := walls.check(); err != nil {
		return 0, err
	}
	n0, err := increasingRoot(func(n float64) float64 { return t.boxAtoms(n, walls) }, atoms, atoms/walls.Length)
	if err != nil {
		return 0, &RangeError{Quantity: "atom number", Value: atoms, Allowed: err.Error()}
	}
	return n0, nil
}

// BoxAtoms returns the Thomas–Fermi atom number of a box whose plateau has
// line density n0 in 1/m.
func (t *Tube) BoxAtoms(n0 float64, walls Walls) (float64, error) {
	if err := positive("line density", n0, "1/m"); err != nil {
		return 0, err
	}
	if err := walls.check(); err != nil {
		return 0, err
	}
	return t.boxAtoms(n0, walls), nil
}

func (w Walls) check() error {
	if err := positive("box length", w.Length, "m"); err != nil {
		return err
	}
	if err := positive("wall width", w.Width, "m"); err != nil {
		return err
	}
	if !(w.Height > 1) || math.IsInf(w.Height, 0) {
		return &RangeError{Quantity: "wall height", Value: w.Height, Unit: "chemical potentials",
			Allowed: "it must be above 1 and finite, or the wall does not hold the cloud"}
	}
	if w.edge() <= -w.Length/2 {
		return &RangeError{Quantity: "wall width", Value: w.Width, Unit: "m",
			Allowed: fmt.Sprintf("walls this soft leave no cloud in a box of length %.4g m: make them narrower", w.Length)}
	}
	return nil
}

// edge is where the Thomas–Fermi cloud ends, in m outwards from the midpoint
// of the wall: (1+tanh(y/w))/2 = 1/h at y = −(w/2) ln(h−1).
func (w Walls) edge() float64 { return -w.Width / 2 * math.Log(w.Height-1) }

// boxAtoms integrates the density from the middle of the box to its edge. More
// than 20 wall widths from the wall it is n0 to 1e-17.
func (t *Tube) boxAtoms(n0 float64, walls Walls) float64 {
	mu := t.ChemicalPotential(n0)
	density := func(y float64) float64 {
		return t.density(mu * (1 - walls.Height/2*(1+math.Tanh(y/walls.Width))))
	}
	const panel = 4 // wall widths
	half := 0.0
	hi := walls.edge()
	for i := 0; i < 5; i++ {
		lo := math.Max(hi-panel*walls.Width, -walls.Length/2)
		half += quad.Fixed(density, lo, hi, gauss, quad.Legendre{}, 0)
		hi = lo
		if hi == -walls.Length/2 {
			return 2 * half
		}
	}
	return 2 * (half + n0*(hi+walls.Length/2))
}

// HarmonicDensity returns the peak line density, in 1/m, of a cloud of N atoms
// in a harmonic trap of ordinary axial frequency ω/2π in Hz, in the
// Thomas–Fermi approximation. For a frozen profile
//
//	n₀ = (3N/4)^{2/3} (mω²/(2g₁))^{1/3};
//
// for a swollen one the atom number is integrated and inverted numerically. It
// returns a *RangeError unless all numbers are positive and finite.
func (t *Tube) HarmonicDensity(atoms, axialFrequency float64) (float64, error) {
	if err := atomNumber(atoms); err != nil {
		return 0, err
	}
	if err := positive("axial frequency", axialFrequency, "Hz"); err != nil {
		return 0, err
	}
	omega := 2 * math.Pi * axialFrequency
	n0 := math.Cbrt(9.0 / 16 * atoms * atoms * (t.Atom.Mass * omega * omega / (2 * t.coupling)))
	if t.Radial == Frozen {
		return n0, positive("peak line density", n0, "1/m")
	}
	n0, err := increasingRoot(func(n float64) float64 { return t.harmonicAtoms(n, omega) }, atoms, n0)
	if err != nil {
		return 0, &RangeError{Quantity: "atom number", Value: atoms, Allowed: err.Error()}
	}
	return n0, nil
}

// HarmonicRadius returns the Thomas–Fermi half length √(2μ/(mω²)) in m of a
// cloud of peak line density n0 in 1/m in a harmonic trap of ordinary axial
// frequency ω/2π in Hz.
func (t *Tube) HarmonicRadius(n0, axialFrequency float64) float64 {
	return math.Sqrt(2*t.ChemicalPotential(n0)/t.Atom.Mass) / (2 * math.Pi * axialFrequency)
}

// harmonicAtoms is 2R∫₀¹ n(μ(1−u²)) du; the integrand is analytic up to the
// edge.
func (t *Tube) harmonicAtoms(n0, omega float64) float64 {
	mu := t.ChemicalPotential(n0)
	radius := math.Sqrt(2*mu/t.Atom.Mass) / omega
	profile := func(u float64) float64 { return t.density(mu * (1 - u*u)) }
	return 2 * radius * quad.Fixed(profile, 0, 1, gauss, quad.Legendre{}, 0)
}

func atomNumber(n float64) error {
	if !(n > 0) || math.IsInf(n, 0) {
		return &RangeError{Quantity: "atom number", Value: n, Allowed: "it must be positive and finite"}
	}
	return nil
}
