package configs

import (
	"errors"
	"fmt"

	"tailrace/gpe/bogoliubov/cavity"
	"tailrace/gpe/lab"
)

// TwoHorizons is the cavity of a config, in condensate units, and the
// dictionary back to the laboratory.
type TwoHorizons struct {
	cavity.Cavity
	InLab bool
	// Scale has the sound speed outside for unit. Its densities mean nothing
	// unless the file gives atoms and a length of the grid; modes need none.
	Scale lab.Scale
}

// TwoHorizons returns the cavity that the file describes: a uniform flow,
// supersonic over the [cavity] length. It returns an *Error where there is
// none.
func (c *Config) TwoHorizons() (*TwoHorizons, error) {
	if c.Flow.Kind != FlowUniform {
		found := ""
		if !c.Given("flow.kind") {
			found = "nothing"
		}
		return nil, c.Fault("flow.kind", found, `the modes of a cavity are those of a uniform flow, kind = "uniform"`,
			"with velocity, sound_speed_up, sound_speed_down and width; the example lock shows how")
	}
	if !c.Given("cavity.length") {
		return nil, c.Fault("cavity.length", "nothing", "the distance between the two horizons", "for example length = "+byName["cavity.length"].sample(c.Units)+" in a section [cavity]")
	}
	h := &TwoHorizons{InLab: c.Units == Lab}
	v, outside, inside, distance, width := c.Flow.Velocity, c.Flow.SoundSpeedUp, c.Flow.SoundSpeedDown, c.Cavity.Length, c.Flow.Width
	if h.InLab {
		density := 1.0 // any
		if c.Cloud.Atoms > 0 && c.Grid.Length > 0 {
			density = c.Cloud.Atoms / c.Grid.Length
		}
		scale, err := lab.NewScale(c.Atom.Mass, density, outside)
		if err != nil {
			return nil, c.blame("flow.sound_speed_up", err)
		}
		h.Scale = scale
		v, outside, inside = scale.FromMetresPerSecond(v), 1, scale.FromMetresPerSecond(inside)
		distance, width = scale.FromMetres(distance), scale.FromMetres(width)
	}
	var err error
	h.Cavity, err = cavity.New(v, outside, inside, distance, width)
	switch {
	case errors.Is(err, cavity.ErrTooLong):
		say := func(x float64) string {
			if h.InLab {
				return formatQuantity(h.Scale.Metres(x), length)
			}
			return fmt.Sprintf("%.4g", x)
		}
		flow := cavity.Cavity{Velocity: v, Outside: outside, Inside: inside}
		sharp := flow.Longest()
		flow.Width = width
		longest := flow.Longest()
		if longest <= 0 {
			return nil, c.Fault("flow.width", "", "at most "+say(width*sharp/(sharp-longest))+" is allowed in this flow", "waves take minutes to follow through wider edges, and hardly grow")
		}
		return nil, c.Fault("cavity.length", "", "at most "+say(longest)+" is allowed in this flow, with edges of this width",
			fmt.Sprintf("sharp ones may be as far apart as %d modes need, whose rates nobody could tell apart", cavity.MostThresholds))
	case err != nil:
		return nil, c.Fault("flow.velocity", "", "a velocity between the two sound speeds", err.Error())
	}
	return h, nil
}
