package lab

import (
	"fmt"
	"slices"
	"strings"
)

// Atom is what the reduction to one dimension needs of an atom.
type Atom struct {
	// Name is for messages only.
	Name string
	// Mass in kg.
	Mass float64
	// ScatteringLength is the s-wave scattering length a in m, positive.
	ScatteringLength float64
}

// Species is an entry of the species table.
type Species struct {
	Name string
	// RelativeMass is the relative atomic mass, in units of AtomicMass.
	RelativeMass float64
	// ScatteringLength in Bohr radii, zero where NeedsField.
	ScatteringLength float64
	// NeedsField says that the atom is usefully repulsive only near a Feshbach
	// resonance, where the scattering length is whatever the field makes it:
	// it has to be given.
	NeedsField bool
	// State is the internal state the scattering length belongs to, or, where
	// NeedsField, what is known without a field.
	State string
	// Source of the scattering length.
	Source string
}

// The relative masses are those of the atomic mass evaluation AME2020, M. Wang
// et al., Chinese Physics C 45, 030003 (2021), typed from memory to eight or
// nine digits. The scattering lengths say each where they come from.
var species = []Species{
	{
		Name: "Rb-87", RelativeMass: 86.9091805, ScatteringLength: 100.4,
		State:  "F = 1, m = −1 in a weak field",
		Source: "E. van Kempen et al., Phys. Rev. Lett. 88, 093201 (2002), from memory",
	},
	{
		Name: "Na-23", RelativeMass: 22.9897693, ScatteringLength: 54.5,
		State:  "F = 1, m = −1 in a weak field",
		Source: "S. Knoop et al., Phys. Rev. A 83, 042704 (2011), from memory; earlier work has 53",
	},
	{
		Name: "K-39", RelativeMass: 38.9637065, NeedsField: true,
		State: "attractive in a weak field; repulsive near a Feshbach resonance only",
	},
	{
		Name: "K-41", RelativeMass: 40.9618253, ScatteringLength: 60.5,
		State:  "F = 2, m = 2 (the triplet value)",
		Source: "C. D'Errico et al., New J. Phys. 9, 223 (2007), from memory",
	},
	{
		Name: "Cs-133", RelativeMass: 132.905452, NeedsField: true,
		State: "varies strongly with the field, through zero near 17 G",
	},
	{
		Name: "Li-7", RelativeMass: 7.01600343, NeedsField: true,
		State: "attractive in a weak field; repulsive near a Feshbach resonance only",
	},
	{
		Name: "Yb-174", RelativeMass: 173.938868, ScatteringLength: 104.9,
		State:  "ground state, no hyperfine structure",
		Source: "M. Kitagawa et al., Phys. Rev. A 77, 012719 (2008), from memory",
	},
}

// AllSpecies returns a copy of the species table.
func AllSpecies() []Species { return slices.Clone(species) }

// SpeciesNames returns the names in the species table, in its order.
func SpeciesNames() []string {
	names := make([]string, len(species))
	for i, s := range species {
		names[i] = s.Name
	}
	return names
}

// SpeciesByName looks a species up by its exact name, such as "Rb-87". The
// error is a *SpeciesError.
func SpeciesByName(name string) (Species, error) {
	for _, s := range species {
		if s.Name == name {
			return s, nil
		}
	}
	return Species{}, &SpeciesError{Name: name, Known: SpeciesNames()}
}

// Atom returns the atom of the species table with its mass and scattering
// length in SI units. The error is a *FieldError where the species has a
// scattering length only at a Feshbach field.
func (s Species) Atom() (Atom, error) {
	if s.NeedsField {
		return Atom{}, &FieldError{Species: s.Name, State: s.State}
	}
	return s.AtomAt(s.ScatteringLength * BohrRadius), nil
}

// AtomAt returns the atom with a scattering length, in m, of the caller's
// choosing: one measured at the field in use.
func (s Species) AtomAt(scatteringLength float64) Atom {
	return Atom{Name: s.Name, Mass: s.RelativeMass * AtomicMass, ScatteringLength: scatteringLength}
}

// SpeciesError is the error of a name that the species table does not hold.
type SpeciesError struct {
	Name  string
	Known []string
}

func (e *SpeciesError) Error() string {
	return fmt.Sprintf("unknown species %q: allowed are %s; any other atom can be given by its mass and scattering length",
		e.Name, strings.Join(e.Known, ", "))
}

// FieldError is the error of a species without a scattering length of its own.
type FieldError struct {
	Species string
	State   string
}

func (e *FieldError) Error() string {
	return fmt.Sprintf("%s has no scattering length of its own (%s): give the one at the field in use", e.Species, e.State)
}

// RangeError is the error of a number outside the range where it means
// something.
type RangeError struct {
	// Quantity is what the number is, in words.
	Quantity string
	// Value as found, in Unit.
	Value float64
	// Unit is empty for a pure number.
	Unit string
	// Allowed says what would be accepted and, where it helps, why.
	Allowed string
}

func (e *RangeError) Error() string {
	unit := e.Unit
	if unit != "" {
		unit = " " + unit
	}
	return fmt.Sprintf("%s is %.6g%s: %s", e.Quantity, e.Value, unit, e.Allowed)
}
