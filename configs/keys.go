package configs

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"tailrace/gpe"
	"tailrace/gpe/lab"
)

// kind is what a value looks like in the file.
type kind int

const (
	text       kind = iota // any string
	choice                 // one of a few strings
	count                  // a whole number
	number                 // a number without dimension
	quantity               // a number with a dimension
	quantities             // an array of those
)

// key is one key of a file: the one place where its range, its default and its
// meaning are written down, for the decoder and for Reference.
type key struct {
	name string
	kind kind
	dim  dimension // quantity, quantities
	// choices of a choice.
	choices []string
	// lab and condensate are the ranges in either kind of units; the first
	// serves for both where the key has no dimension, and one that is empty
	// means that the key does not exist in those units.
	lab, condensate span
	// automatic says that zero is accepted too and what it means.
	automatic string
	// fallback is the default as the file would write it, empty for zero, an
	// empty string or a key that is required where it applies.
	fallback string
	// optional says that zero is the default.
	optional bool
	// examples in lab and condensate units, as the file would write them.
	example, plain string
	meaning        string
	// field returns a pointer to the field of the Config: *string, *int,
	// *uint64, *float64 or *[]float64.
	field func(*Config) any
}

// span is a range of numbers; its ends are written with their units.
type span struct {
	low, high         string
	openLow, openHigh bool
}

func between(low, high string) span { return span{low: low, high: high} }
func above(low, high string) span   { return span{low: low, high: high, openLow: true} }
func inside(low, high string) span {
	return span{low: low, high: high, openLow: true, openHigh: true}
}

// String says the range in words.
func (s span) String() string {
	low, high := "at least ", "at most "
	if s.openLow {
		low = "above "
	}
	if s.openHigh {
		high = "below "
	}
	return low + s.low + " and " + high + s.high
}

// holds reports whether v, in SI units where d is not empty, is in the range.
func (s span) holds(v float64, d dimension) bool {
	low, high := s.end(s.low, d), s.end(s.high, d)
	if !(v >= low && v <= high) || math.IsInf(v, 0) { // NaN fails too
		return false
	}
	return !(s.openLow && v == low) && !(s.openHigh && v == high)
}

func (s span) end(text string, d dimension) float64 {
	var v float64
	var err error
	if d == "" {
		v, err = strconv.ParseFloat(text, 64)
	} else {
		v, err = parseQuantity(text, d)
	}
	if err != nil {
		panic(fmt.Sprintf("configs: range ends at %q: %v", text, err))
	}
	return v
}

// span returns the range of the key in the given units and the dimension in
// which its ends are written.
func (k *key) span(u Units) (span, dimension) {
	if k.kind != quantity && k.kind != quantities {
		return k.lab, ""
	}
	if u == Lab {
		return k.lab, k.dim
	}
	return k.condensate, ""
}

// exists reports whether there is such a key in the given units.
func (k *key) exists(u Units) bool {
	switch k.kind {
	case text, choice:
		return true
	}
	s, _ := k.span(u)
	return s != span{}
}

// sample returns an example in the given units.
func (k *key) sample(u Units) string {
	if u == Condensate && k.plain != "" {
		return k.plain
	}
	return k.example
}

// leaf returns the name without its section.
func (k *key) leaf() string {
	_, leaf, ok := strings.Cut(k.name, ".")
	if !ok {
		return k.name
	}
	return leaf
}

// section is a section of a file.
type section struct{ name, meaning string }

var sections = []section{
	{"atom", "The atom; lab units only. A species, or a mass and a scattering length; either overrides the species."},
	{"trap", "The trap that holds the cloud before the sweep."},
	{"cloud", "The cloud at rest."},
	{"step", "The potential step −depth·(1+tanh(x/width))/2 that is swept from right to left through the cloud at rest."},
	{"flow", "A stationary flow given outright, for spectra, cavities and validation. A file without this section describes a sweep."},
	{"cavity", "The supersonic region between two horizons."},
	{"grid", "The grid; what is left out is chosen automatically."},
	{"ensemble", "The ensemble of trajectories."},
	{"record", "When the density is recorded."},
	{"imaging", "The camera and what it adds to a shot."},
}

func isSection(name string) bool {
	for _, s := range sections {
		if s.name == name {
			return true
		}
	}
	return false
}

// keys is every key of a file, in the order in which Reference lists them.
var keys = []*key{
	{name: "title", kind: text, example: `"a step swept through rubidium"`,
		meaning: "a title for the report",
		field:   func(c *Config) any { return &c.Title }},
	{name: "units", kind: choice, choices: []string{string(Lab), string(Condensate)}, example: `"lab"`,
		meaning: "the units of every number below: with `lab`, strings with a unit; with `condensate`, plain numbers in units of the healing length, the sound speed and the mass",
		field:   func(c *Config) any { return (*string)(&c.Units) }},

	{name: "atom.species", kind: choice, choices: lab.SpeciesNames(), example: `"Rb-87"`,
		meaning: "the atom; lab units only",
		field:   func(c *Config) any { return &c.Atom.Species }},
	{name: "atom.mass", kind: quantity, dim: mass, lab: between("0.5 u", "500 u"), example: `"86.9 u"`,
		meaning: "mass of an atom",
		field:   func(c *Config) any { return &c.Atom.Mass }},
	{name: "atom.scattering_length", kind: quantity, dim: length, lab: above("0 a0", "100000 a0"), example: `"100 a0"`,
		meaning: "s-wave scattering length at the field in use; a cloud that carries sound needs a repulsive, positive one",
		field:   func(c *Config) any { return &c.Atom.ScatteringLength }},

	{name: "trap.radial_frequency", kind: quantity, dim: frequency, lab: between("1 Hz", "1000 kHz"), example: `"260 Hz"`,
		meaning: "frequency ω/2π of the tight trap across the cloud; lab units only",
		field:   func(c *Config) any { return &c.Trap.RadialFrequency }},
	{name: "trap.shape", kind: choice, choices: []string{string(Box), string(Harmonic)}, example: `"box"`,
		meaning: "shape of the trap along the cloud",
		field:   func(c *Config) any { return (*string)(&c.Trap.Shape) }},
	{name: "trap.length", kind: quantity, dim: length, lab: between("1 um", "100 mm"), condensate: between("4", "1e6"), example: `"150 um"`, plain: "150",
		meaning: "box: distance between the midpoints of its walls",
		field:   func(c *Config) any { return &c.Trap.Length }},
	{name: "trap.wall_width", kind: quantity, dim: length, lab: above("0 um", "1 mm"), condensate: above("0", "1e4"), example: `"1 um"`, plain: "1",
		meaning: "box: width w of a wall (1+tanh(x/w))/2",
		field:   func(c *Config) any { return &c.Trap.WallWidth }},
	{name: "trap.wall_height", kind: number, lab: above("1", "1000"), fallback: "6", example: "6",
		meaning: "box: height of the walls in units of the chemical potential of the cloud",
		field:   func(c *Config) any { return &c.Trap.WallHeight }},
	{name: "trap.axial_frequency", kind: quantity, dim: frequency, lab: above("0 Hz", "10 kHz"), condensate: above("0", "10"), example: `"2 Hz"`, plain: "0.02",
		meaning: "harmonic: frequency ω/2π along the cloud; in condensate units the angular frequency ω",
		field:   func(c *Config) any { return &c.Trap.AxialFrequency }},

	{name: "cloud.atoms", kind: number, lab: between("1", "1e10"), example: "5500", plain: "5500",
		meaning: "number of atoms in the trap, or on the ring of a uniform flow",
		field:   func(c *Config) any { return &c.Cloud.Atoms }},
	{name: "cloud.temperature", optional: true, kind: quantity, dim: temperature, lab: between("0 nK", "1 mK"), condensate: between("0", "1000"), example: `"0.1 nK"`, plain: "0.02",
		meaning: "temperature of the cloud",
		field:   func(c *Config) any { return &c.Cloud.Temperature }},
	{name: "cloud.radial", kind: choice, choices: []string{string(lab.Frozen), string(lab.Swollen)}, fallback: `"frozen"`, example: `"frozen"`,
		meaning: "radial profile: `frozen` in its ground state, or `swollen`, growing with the density; the latter in lab units only",
		field:   func(c *Config) any { return (*string)(&c.Cloud.Radial) }},

	{name: "step.depth", kind: quantity, dim: energy, lab: above("0 nK", "1 mK"), condensate: above("0", "1000"), example: `"5 nK"`, plain: "1",
		meaning: "depth of the step",
		field:   func(c *Config) any { return &c.Step.Depth }},
	{name: "step.width", kind: quantity, dim: length, lab: above("0 um", "1 mm"), condensate: above("0", "1000"), example: `"0.5 um"`, plain: "0.5",
		meaning: "width w in (1+tanh(x/w))/2, set by the optical resolution",
		field:   func(c *Config) any { return &c.Step.Width }},
	{name: "step.speed", kind: quantity, dim: speed, lab: above("0 mm/s", "1 m/s"), condensate: above("0", "100"), example: `"0.3 mm/s"`, plain: "0.5",
		meaning: "speed at which the step is swept",
		field:   func(c *Config) any { return &c.Step.Speed }},
	{name: "step.start", optional: true, kind: quantity, dim: length, lab: between("-100 mm", "100 mm"), condensate: between("-1e6", "1e6"), example: `"0 um"`, plain: "0",
		meaning: "where the step is at t = 0, measured from the midpoint of the right-hand wall of a box or the right-hand edge of a harmonic cloud, positive outside; at the wall it leaves the cleanest plateau",
		field:   func(c *Config) any { return &c.Step.Start }},
	{name: "step.ramp", optional: true, kind: quantity, dim: duration, lab: between("0 ms", "100 s"), condensate: between("0", "1e6"), example: `"5 ms"`, plain: "3",
		meaning: "time in which the wall opens and the step rises, 0 for at once; with a uniform flow the horizon is switched on as (1+tanh((t−4·ramp)/ramp))/2",
		field:   func(c *Config) any { return &c.Step.Ramp }},

	{name: "flow.kind", kind: choice, choices: []string{string(FlowStep), string(FlowWaterfall), string(FlowUniform)}, example: `"uniform"`,
		meaning: "`step`: the flow that a swept step leaves behind; `waterfall`: the limit of a sharp step; `uniform`: uniform density and velocity with the sound speed changing across the horizon",
		field:   func(c *Config) any { return (*string)(&c.Flow.Kind) }},
	{name: "flow.mach_up", kind: number, lab: inside("0", "1"), example: "0.6",
		meaning: "waterfall, condensate units only: Mach number upstream",
		field:   func(c *Config) any { return &c.Flow.MachUp }},
	{name: "flow.velocity", kind: quantity, dim: speed, lab: above("0 mm/s", "1 m/s"), condensate: above("0", "100"), example: `"0.5 mm/s"`, plain: "0.75",
		meaning: "uniform: velocity of the fluid",
		field:   func(c *Config) any { return &c.Flow.Velocity }},
	{name: "flow.sound_speed_up", kind: quantity, dim: speed, lab: above("0 mm/s", "1 m/s"), condensate: above("0", "100"), example: `"0.7 mm/s"`, plain: "1",
		meaning: "uniform: sound speed upstream, above the velocity",
		field:   func(c *Config) any { return &c.Flow.SoundSpeedUp }},
	{name: "flow.sound_speed_down", kind: quantity, dim: speed, lab: above("0 mm/s", "1 m/s"), condensate: above("0", "100"), example: `"0.35 mm/s"`, plain: "0.5",
		meaning: "uniform: sound speed downstream, below the velocity",
		field:   func(c *Config) any { return &c.Flow.SoundSpeedDown }},
	{name: "flow.width", kind: quantity, dim: length, lab: between("0 um", "1 mm"), condensate: between("0", "1000"), example: `"1 um"`, plain: "1",
		meaning: "uniform: width of the tanh with which c² changes, 0 for a sharp edge; step: width of the step, above 0",
		field:   func(c *Config) any { return &c.Flow.Width }},
	{name: "flow.depth", kind: quantity, dim: energy, condensate: above("0", "1000"), plain: "1",
		meaning: "step, condensate units only: depth of the step",
		field:   func(c *Config) any { return &c.Flow.Depth }},
	{name: "flow.speed", kind: quantity, dim: speed, condensate: above("0", "100"), plain: "0.5",
		meaning: "step, condensate units only: speed at which the step is swept",
		field:   func(c *Config) any { return &c.Flow.Speed }},

	{name: "cavity.length", kind: quantity, dim: length, lab: above("0 um", "100 mm"), condensate: above("0", "1e6"), example: `"12 um"`, plain: "12",
		meaning: "distance between the two horizons",
		field:   func(c *Config) any { return &c.Cavity.Length }},

	{name: "grid.points", kind: count, lab: between("16", "1048576"), automatic: "an automatic choice", example: "1024",
		meaning: "number of grid points",
		field:   func(c *Config) any { return &c.Grid.Points }},
	{name: "grid.length", kind: quantity, dim: length, lab: above("0 um", "1 m"), condensate: above("0", "1e7"), automatic: "an automatic choice", example: `"300 um"`, plain: "512",
		meaning: "length of the periodic grid; of the ring of a uniform flow",
		field:   func(c *Config) any { return &c.Grid.Length }},
	{name: "grid.time_step", kind: quantity, dim: duration, lab: above("0 ms", "1 s"), condensate: above("0", "100"), automatic: "an automatic choice", example: `"15 us"`, plain: "0.01",
		meaning: "time step",
		field:   func(c *Config) any { return &c.Grid.TimeStep }},

	{name: "grid.accuracy", kind: number, lab: inside("0", "1"), fallback: "0.02", example: "0.02",
		meaning: "where time_step is left out: the error of the field, as a share of its norm, after 10 ħ/(m c²), by which time step and splitting are chosen",
		field:   func(c *Config) any { return &c.Grid.Accuracy }},

	{name: "ensemble.trajectories", kind: count, lab: between("1", "65536"), fallback: "1024", example: "1024",
		meaning: "number of trajectories",
		field:   func(c *Config) any { return &c.Ensemble.Trajectories }},
	{name: "ensemble.seed", kind: count, lab: between("0", "9223372036854775807"), fallback: "1", example: "1",
		meaning: "seed of the noise",
		field:   func(c *Config) any { return &c.Ensemble.Seed }},
	{name: "ensemble.noise_cutoff", kind: number, lab: above("0", "1000"), automatic: "every mode that the grid holds", example: "6",
		meaning: "largest |k| of the noise in 1/ξ, in either kind of units",
		field:   func(c *Config) any { return &c.Ensemble.NoiseCutoff }},
	{name: "ensemble.precision", kind: choice, choices: []string{string(gpe.Double), string(gpe.Single)}, fallback: `"double"`, example: `"double"`,
		meaning: "precision of the time steps: `double`, or `single`, about twice as fast with vector units; `run` first carries a few trajectories in both and refuses `single` where it would move the map by more than a fifth of its statistical error",
		field:   func(c *Config) any { return (*string)(&c.Ensemble.Precision) }},

	{name: "record.times", kind: quantities, dim: duration, lab: above("0 ms", "1000 s"), condensate: above("0", "1e7"), example: `["90 ms", "170 ms"]`, plain: "[60, 110]",
		meaning: "times since the sweep began, increasing, at most 64",
		field:   func(c *Config) any { return &c.Record.Times }},

	{name: "imaging.resolution", kind: quantity, dim: length, lab: between("0 um", "1 mm"), condensate: between("0", "1000"), example: `"0.8 um"`, plain: "0.8",
		meaning: "standard deviation of the Gaussian point-spread function",
		field:   func(c *Config) any { return &c.Imaging.Resolution }},
	{name: "imaging.pixel", kind: quantity, dim: length, lab: above("0 um", "1 mm"), condensate: above("0", "1000"), example: `"0.5 um"`, plain: "0.5",
		meaning: "side of a pixel, at the atoms",
		field:   func(c *Config) any { return &c.Imaging.Pixel }},
	{name: "imaging.photons_per_atom", kind: number, lab: above("0", "1e9"), example: "100",
		meaning: "photons detected for each atom",
		field:   func(c *Config) any { return &c.Imaging.PhotonsPerAtom }},
	{name: "imaging.atom_number_spread", optional: true, kind: number, lab: between("0", "0.5"), example: "0.05",
		meaning: "relative standard deviation of the atom number from shot to shot",
		field:   func(c *Config) any { return &c.Imaging.AtomNumberSpread }},
	{name: "imaging.step_jitter", optional: true, kind: quantity, dim: length, lab: between("0 um", "1 mm"), condensate: between("0", "1000"), example: `"0.2 um"`, plain: "0.2",
		meaning: "standard deviation of the position of the step from shot to shot",
		field:   func(c *Config) any { return &c.Imaging.StepJitter }},
	{name: "imaging.shots", kind: count, lab: between("1", "1000000"), example: "2000",
		meaning: "number of shots",
		field:   func(c *Config) any { return &c.Imaging.Shots }},
}

// byName finds a key.
var byName = func() map[string]*key {
	m := make(map[string]*key, len(keys))
	for _, k := range keys {
		m[k.name] = k
	}
	return m
}()

// keysOf lists the keys of a section by their short names, in order; of the
// head of the file for an empty name.
func keysOf(section string) []string {
	var names []string
	for _, k := range keys {
		s, leaf, ok := strings.Cut(k.name, ".")
		if !ok {
			s, leaf = "", k.name
		}
		if s == section {
			names = append(names, leaf)
		}
	}
	return names
}
