package configs

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"tailrace/gpe/lab"
)

// require checks what keys demand of each other: what must be there for the
// kind of scenario that the file describes, and what contradicts it.
func (d *decoder) require() {
	if d.bad["flow.kind"] || d.bad["flow"] {
		return // nothing can be said about the rest
	}
	if d.c.Given("flow") && !d.has("flow.kind") {
		d.missing("flow.kind", "a flow is one of "+quoted(byName["flow.kind"].choices))
		return
	}
	switch d.c.Flow.Kind {
	case FlowUniform:
		d.uniform()
	case FlowWaterfall:
		d.waterfall()
	default:
		d.sweep()
	}
	if d.c.Units == Condensate {
		d.condensate()
	}
	d.sections()
	d.times()
}

// has reports whether a key is in the file, sound or not.
func (d *decoder) has(key string) bool { _, ok := d.values[key]; return ok }

// sound reports whether all keys are in the file and without fault.
func (d *decoder) sound(keys ...string) bool {
	for _, k := range keys {
		if !d.has(k) || d.bad[k] {
			return false
		}
	}
	return true
}

func (d *decoder) need(why string, keys ...string) {
	for _, k := range keys {
		if !d.has(k) {
			d.missing(k, why)
		}
	}
}

// refuse faults the keys that are there; a section stands for all its keys.
func (d *decoder) refuse(why, hint string, names ...string) {
	for _, k := range keys {
		section, _, _ := strings.Cut(k.name, ".")
		if d.has(k.name) && !d.bad[k.name] && (slices.Contains(names, k.name) || slices.Contains(names, section)) {
			d.fault(k.name, "it has no meaning here: "+why, hint)
		}
	}
}

const leaveOut = "leave it out"

// uniform is a flow of uniform density and velocity, on a ring if it is run.
func (d *decoder) uniform() {
	d.need("a uniform flow needs it", "flow.velocity", "flow.sound_speed_up", "flow.sound_speed_down", "flow.width")
	d.refuse("the flow is uniform", leaveOut, "flow.mach_up", "flow.depth", "flow.speed",
		"trap.shape", "trap.length", "trap.wall_width", "trap.wall_height", "trap.axial_frequency",
		"step.depth", "step.width", "step.speed", "step.start")
	f := d.c.Flow
	if d.sound("flow.velocity", "flow.sound_speed_up", "flow.sound_speed_down") &&
		!(f.SoundSpeedDown < f.Velocity && f.Velocity < f.SoundSpeedUp) {
		why := "a horizon needs sound_speed_down < velocity < sound_speed_up"
		switch {
		case !d.has("cavity.length"):
		case f.Velocity <= f.SoundSpeedDown:
			why = "the flow is subsonic inside the cavity, so there are no horizons: " + why
		default:
			why = "the flow is supersonic outside the cavity, so there are no horizons: " + why
		}
		d.fault("flow.velocity", why, "change one of the three")
	}
	if d.sound("flow.width") && f.Width == 0 && !d.has("cavity.length") {
		d.fault("flow.width", "a sharp edge is allowed with a [cavity] only: alone it has no temperature", "for example "+byName["flow.width"].sample(d.c.Units))
	}
	if d.has("record.times") {
		d.need("it sets the size of the quantum noise", "cloud.atoms")
	}
	if d.has("cloud.atoms") {
		d.need("with the atom number it gives the density on the ring", "grid.length")
		if d.sound("grid.length") && d.c.Grid.Length == 0 {
			d.fault("grid.length", "the ring of a uniform flow has no automatic length: with the atom number it gives the density", "for example "+byName["grid.length"].sample(d.c.Units))
		}
	}
	if d.c.Units == Lab {
		d.atom()
	}
}

// waterfall is the flow over a sharp step, which one number describes.
func (d *decoder) waterfall() {
	if d.c.Units == Lab {
		d.fault("flow.kind", `a waterfall has no scale of its own, so it needs units = "condensate"`, "in lab units give a [step] instead")
		return
	}
	d.need("a waterfall needs it", "flow.mach_up")
	d.refuse("the flow is a waterfall", leaveOut, "flow.velocity", "flow.sound_speed_up", "flow.sound_speed_down",
		"flow.width", "flow.depth", "flow.speed", "trap", "step")
}

// sweep is a step swept through a trapped cloud or, with flow.kind = "step" and
// no trap, the flow that it leaves.
func (d *decoder) sweep() {
	c := d.c
	d.refuse("the flow is that of a step", leaveOut, "flow.velocity", "flow.sound_speed_up", "flow.sound_speed_down", "flow.mach_up")
	if c.Units == Lab {
		d.refuse("in lab units the step is described in [step]", leaveOut, "flow.width")
	}
	for _, leaf := range []string{"depth", "width", "speed"} {
		inStep, inFlow := d.has("step."+leaf), d.has("flow."+leaf) && c.Units == Condensate
		switch {
		case inStep && inFlow:
			d.fault("flow."+leaf, "step."+leaf+" says it already", "leave one of them out")
		case !inStep && !inFlow && c.Flow.Kind == FlowStep && c.Units == Condensate:
			d.missing("flow."+leaf, "the flow of a step needs it")
		case !inStep && !inFlow:
			d.missing("step."+leaf, "a sweep needs it")
		}
	}
	if d.sound("flow.width") && c.Flow.Width == 0 {
		d.fault("flow.width", "it must be above 0 for a step", `for a sharp one give kind = "waterfall"`)
	}
	c.Step.Depth, c.Flow.Depth = either(c.Step.Depth, c.Flow.Depth)
	c.Step.Width, c.Flow.Width = either(c.Step.Width, c.Flow.Width)
	c.Step.Speed, c.Flow.Speed = either(c.Step.Speed, c.Flow.Speed)

	if c.Flow.Kind == FlowStep && c.Units == Condensate && !c.Given("trap") {
		return // the flow alone
	}
	if c.Units == Lab {
		d.need("it sets the strength of the interaction in one dimension", "trap.radial_frequency")
		d.atom()
		if d.sound("trap.radial_frequency", "trap.axial_frequency") && c.Trap.AxialFrequency > c.Trap.RadialFrequency/5 {
			d.fault("trap.axial_frequency", "at most a fifth of trap.radial_frequency is allowed", "the cloud must be long and thin")
		}
	}
	d.need("it sets the density and so the size of the quantum noise", "cloud.atoms")
	d.need("a sweep needs a trapped cloud", "trap.shape")
	switch c.Trap.Shape {
	case Box:
		d.need("a box needs it", "trap.length", "trap.wall_width")
		d.refuse("the trap is a box", leaveOut, "trap.axial_frequency")
		if d.sound("trap.length", "trap.wall_width") && c.Trap.WallWidth > c.Trap.Length/8 {
			d.fault("trap.wall_width", "at most an eighth of trap.length is allowed", "or the walls leave no plateau")
		}
	case Harmonic:
		d.need("a harmonic trap needs it", "trap.axial_frequency")
		d.refuse("the trap is harmonic", leaveOut, "trap.length", "trap.wall_width", "trap.wall_height")
	}
}

// either returns the one of two numbers that is given, twice.
func either(a, b float64) (float64, float64) {
	if a == 0 {
		a = b
	}
	return a, a
}

// atom fills in mass and scattering length from the species.
func (d *decoder) atom() {
	a := &d.c.Atom
	if d.bad["atom.species"] {
		return
	}
	if a.Species == "" {
		if !d.has("atom.mass") || !d.has("atom.scattering_length") {
			d.missing("atom.species", "an atom is given by its species, or by mass and scattering_length")
		}
		return
	}
	species, err := lab.SpeciesByName(a.Species)
	if err != nil {
		panic("configs: " + err.Error()) // the choices are the table's names
	}
	if !d.has("atom.mass") {
		a.Mass = species.AtomAt(0).Mass
	}
	if d.has("atom.scattering_length") {
		return
	}
	atom, err := species.Atom()
	var field *lab.FieldError
	if errors.As(err, &field) {
		d.missing("atom.scattering_length", field.Error())
		return
	}
	a.ScatteringLength = atom.ScatteringLength
}

// condensate refuses what condensate units leave no meaning.
func (d *decoder) condensate() {
	d.refuse("condensate units know neither atom nor radial trap", `leave it out or give everything with units = "lab"`,
		"atom", "trap.radial_frequency")
	if d.sound("cloud.radial") && d.c.Cloud.Radial == lab.Swollen {
		d.fault("cloud.radial", `a swollen profile depends on atom and radial trap, so it needs units = "lab"`, `write "frozen" or give the scenario in lab units`)
	}
}

// sections asks for what a section is useless without.
func (d *decoder) sections() {
	if d.c.Given("cavity") {
		d.need("a cavity needs it", "cavity.length")
	}
	if d.c.Given("imaging") {
		d.need("a camera needs it", "imaging.resolution", "imaging.pixel", "imaging.photons_per_atom", "imaging.shots")
	}
}

func (d *decoder) times() {
	t := d.c.Record.Times
	for i := 1; i < len(t); i++ {
		if t[i] <= t[i-1] {
			d.fault("record.times", fmt.Sprintf("the times must increase, and number %d is not later than the one before", i+1),
				"for example "+byName["record.times"].sample(d.c.Units))
			return
		}
	}
}
