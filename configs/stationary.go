package configs

import (
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
	"tailrace/gpe/lab"
)

// Stationary is the stationary flow that a config describes, and the dictionary
// back to the laboratory.
type Stationary struct {
	Config      *Config
	Profile     flow.Profile
	InLab       bool
	Scale       lab.Scale // zero unless InLab
	Temperature float64   // of the cloud, in m c₀²/k_B
	PerXi       float64   // n₀ξ; 0 where the config gives no atoms
	Law         fluid.Law
}

// Stationary returns the flow of a config: that of a swept step, of a waterfall
// or the uniform one. It needs neither times nor an ensemble. The unit density
// is that of the cloud at rest, of the plateau upstream or the uniform one. Its
// errors are *Error.
func (c *Config) Stationary() (*Stationary, error) {
	s := &Stationary{Config: c, InLab: c.Units == Lab}
	var err error
	switch c.Flow.Kind {
	case FlowUniform:
		err = s.uniform()
	case FlowWaterfall:
		s.Temperature = c.Cloud.Temperature
		if s.Profile, err = flow.HalfSoliton(c.Flow.MachUp); err != nil {
			err = c.Fault("flow.mach_up", "", "a flow with a horizon", err.Error())
		}
	default:
		err = s.swept()
	}
	if err != nil {
		return nil, err
	}
	return s, nil
}

// Length and Density return ξ and n₀ in the units of shots: m and atoms per m,
// or ξ and atoms per ξ.
func (s *Stationary) Length() float64 {
	if s.InLab {
		return s.Scale.Metres(1)
	}
	return 1
}

// Density returns n₀; see Length.
func (s *Stationary) Density() float64 {
	if s.InLab {
		return s.Scale.AtomsPerMetre(1)
	}
	return s.PerXi
}

// Age returns how long the horizon has emitted at a time since the start, given
// in s or in ħ/(m c₀²), in the latter; NaN stays.
func (s *Stationary) Age(time float64) float64 {
	ramp := s.Config.Step.Ramp
	if s.InLab {
		time, ramp = s.Scale.FromSeconds(time), s.Scale.FromSeconds(ramp)
	}
	if s.Config.Flow.Kind == FlowUniform {
		ramp *= 4
	}
	return time - ramp
}

func (s *Stationary) uniform() error {
	c := s.Config
	f := c.Flow
	v, up, down, width := f.Velocity, f.SoundSpeedUp, f.SoundSpeedDown, f.Width
	s.Temperature = c.Cloud.Temperature
	if s.InLab {
		if !c.Given("cloud.atoms") || !c.Given("grid.length") {
			return c.Fault("cloud.atoms", "nothing", "the atoms on a ring of grid.length", "in lab units they give the density; or give the flow in condensate units")
		}
		scale, err := lab.NewScale(c.Atom.Mass, c.Cloud.Atoms/c.Grid.Length, up)
		if err != nil {
			return c.blame("flow.sound_speed_up", err)
		}
		s.Scale, s.PerXi = scale, scale.AtomsPerHealingLength
		v, up, down, width = scale.FromMetresPerSecond(v), 1, scale.FromMetresPerSecond(down), scale.FromMetres(width)
		s.Temperature = scale.FromKelvin(c.Cloud.Temperature)
	} else if c.Given("cloud.atoms") && c.Given("grid.length") {
		s.PerXi = c.Cloud.Atoms / c.Grid.Length
	}
	if width == 0 {
		return c.Fault("flow.width", "", "a width above 0", "a sharp edge in a uniform flow has no surface gravity; cavity takes one")
	}
	p, err := flow.UniformSwitch(v, up, down, width)
	if err != nil {
		return c.Fault("flow.velocity", "", "a velocity between the two sound speeds", err.Error())
	}
	s.Profile = p
	return nil
}

func (s *Stationary) swept() error {
	c := s.Config
	if c.Trap.Shape == Harmonic {
		return c.Fault("trap.shape", "", "a box, or a flow given outright", "along a harmonic cloud the flow changes with the density, and there is no single spectrum; give a [flow] of the density you care about")
	}
	if s.InLab && len(c.Record.Times) > 0 {
		// The density is that of the true ground state, as for an ensemble.
		if sc, err := c.Scenario(); err == nil {
			s.Scale, s.Temperature, s.PerXi, s.Law = sc.Scale, sc.Problem.Temperature, sc.Problem.AtomsPerLength, sc.Problem.Law
			s.Profile, err = sc.Predicted()
			return err
		}
	}
	law := fluid.Cubic()
	depth, width, speed := c.stepDepth(), c.stepWidth(), c.stepSpeed()
	s.Temperature = c.Cloud.Temperature
	if s.InLab {
		tube, err := lab.NewTube(lab.Atom{Mass: c.Atom.Mass, ScatteringLength: c.Atom.ScatteringLength}, c.Trap.RadialFrequency, c.Cloud.Radial)
		if err != nil {
			return c.blame("trap.radial_frequency", err)
		}
		n0, err := c.densityGuess(tube)
		if err != nil {
			return c.blame("cloud.atoms", err)
		}
		if s.Scale, law, err = tube.Scale(n0); err != nil {
			return c.blame("cloud.atoms", err)
		}
		z := c.in(&s.Scale)
		depth, width, speed, s.Temperature, s.PerXi = z.depth, z.width, z.speed, z.temperature, s.Scale.AtomsPerHealingLength
	}
	s.Law = law
	t, err := flow.Sweep(law, speed, depth, width)
	if err != nil {
		key := "step.speed"
		if !c.Given(key) {
			key = "flow.speed"
		}
		return c.Fault(key, "", "there is no horizon at this speed, depth and width", err.Error())
	}
	s.Profile = t
	return nil
}
