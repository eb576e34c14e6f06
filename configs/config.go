// Package configs decodes scenario files, strictly: an unknown key, a missing
// unit or a number out of range is an error that names the file, the line, the
// key, what was found and what is allowed. It also holds the examples that run
// as they are.
package configs

import (
	"strings"

	"tailrace/gpe"
	"tailrace/gpe/lab"
)

// Units says in which units a file gives its numbers.
type Units string

const (
	// Lab is SI: every number with a dimension is a string with its unit.
	Lab Units = "lab"
	// Condensate is ħ = m = 1, reference density and sound speed 1: lengths
	// are healing lengths and all numbers are plain.
	Condensate Units = "condensate"
)

// Config is a scenario file as decoded. With Units = Lab every number with a
// dimension is in SI units (m, s, m/s, J, K, kg; trap frequencies are ordinary
// frequencies ω/2π in Hz); with Units = Condensate it is in condensate units
// (trap frequencies are angular, in m c₀²/ħ). A key that the file leaves out
// has the default that Reference lists; Given tells the two apart.
type Config struct {
	Title string
	Units Units

	Atom     Atom
	Trap     Trap
	Cloud    Cloud
	Step     Step
	Flow     Flow
	Cavity   Cavity
	Grid     Grid
	Ensemble Ensemble
	Record   Record
	Imaging  Imaging

	// Source is the name of the embedded example or the path of the file.
	Source string
	// Text is the file as read.
	Text []byte

	places places
}

// Atom is the atom; in lab units Mass and ScatteringLength are filled in from
// the species table where the file does not give them.
type Atom struct {
	Species          string
	Mass             float64 // kg
	ScatteringLength float64 // m
}

// Shape is the shape of the trap along the cloud.
type Shape string

// The shapes of a trap.
const (
	Box      Shape = "box"
	Harmonic Shape = "harmonic"
)

// Trap is the trap that holds the cloud before the sweep.
type Trap struct {
	RadialFrequency float64 // ω⊥/2π, Hz; lab units only
	Shape           Shape
	Length          float64 // box: between the midpoints of the walls
	WallWidth       float64 // box: w in (1+tanh(x/w))/2
	WallHeight      float64 // box: in units of the chemical potential
	AxialFrequency  float64 // harmonic: ω/2π in Hz, or ω in m c₀²/ħ in condensate units
}

// Cloud is the cloud at rest.
type Cloud struct {
	Atoms       float64 // in the trap or on the ring
	Temperature float64 // K, or m c₀²/k_B
	Radial      lab.Radial
}

// Step is the swept potential step −depth·(1+tanh(x/width))/2.
type Step struct {
	Depth float64 // J, or m c₀²
	Width float64
	Speed float64
	// Start is where the step is at t = 0, measured outwards from the midpoint
	// of the right-hand wall of a box or from the right-hand edge of a harmonic
	// cloud.
	Start float64
	// Ramp is the time in which the wall opens and the step rises, zero for at
	// once; with a uniform flow, how slowly the horizon is switched on.
	Ramp float64
}

// FlowKind is the kind of a stationary flow.
type FlowKind string

// The kinds of a stationary flow. An empty kind is a sweep described by
// [trap], [cloud] and [step].
const (
	FlowStep      FlowKind = "step"
	FlowWaterfall FlowKind = "waterfall"
	FlowUniform   FlowKind = "uniform"
)

// Flow is a stationary flow given outright instead of by a sweep. Depth, Width
// and Speed of a step are the same here and in Step, whichever section of the
// file gives them.
type Flow struct {
	Kind           FlowKind
	MachUp         float64 // waterfall
	Velocity       float64 // uniform
	SoundSpeedUp   float64 // uniform
	SoundSpeedDown float64 // uniform
	Width          float64 // uniform, step
	Depth          float64 // step
	Speed          float64 // step
}

// Cavity is the supersonic region between two horizons.
type Cavity struct {
	Length float64
}

// Grid is the grid; zero means that it is chosen automatically.
type Grid struct {
	Points   int
	Length   float64
	TimeStep float64
	Accuracy float64 // by which a time step is chosen
}

// Ensemble is the ensemble of trajectories.
type Ensemble struct {
	Trajectories int
	Seed         uint64
	NoiseCutoff  float64 // largest |k| of the noise in 1/ξ; zero for every mode of the grid
	Precision    gpe.Precision
}

// Record says when the density is recorded.
type Record struct {
	Times []float64 // since the sweep began, increasing
}

// Imaging is the camera and what it adds.
type Imaging struct {
	Resolution       float64 // standard deviation of the point-spread function
	Pixel            float64 // side of a pixel, at the atoms
	PhotonsPerAtom   float64 // detected
	AtomNumberSpread float64 // relative standard deviation from shot to shot
	StepJitter       float64 // standard deviation of the step's position from shot to shot
	Shots            int
}

// Sweep reports whether the file describes a step swept into a trapped cloud,
// rather than a stationary flow alone.
func (c *Config) Sweep() bool {
	return c.Trap.Shape != "" && (c.Flow.Kind == "" || c.Flow.Kind == FlowStep)
}

// Given reports whether the file sets a key such as "step.width" or has a
// section such as "step".
func (c *Config) Given(key string) bool {
	_, ok := c.places[key]
	return ok
}

// Line returns the line on which the file sets a key, or on which a section
// begins; 0 where it does not.
func (c *Config) Line(key string) int { return c.places[key].line }

// Fault returns an *Error about a key for a fault that shows only later, such
// as a step too fast for the grid. An empty found stands for the value as the
// file writes it; the line is that of the key or, where the file leaves the key
// out, of its section.
func (c *Config) Fault(key, found, allowed, hint string) error {
	return c.places.fault(c.Source, key, found, allowed, hint)
}

// place is where a key stands in the file.
type place struct {
	line    int
	written string // the value as the file writes it, or the section's header
}

// places holds a place for each key and section of a file.
type places map[string]place

func (p places) fault(file, key, found, allowed, hint string) *Error {
	at, ok := p[key]
	if !ok {
		section, _, _ := strings.Cut(key, ".")
		at = place{line: p[section].line}
	}
	if found == "" {
		found = at.written
	}
	return &Error{File: file, Line: at.line, Key: key, Found: found, Allowed: allowed, Hint: hint}
}
