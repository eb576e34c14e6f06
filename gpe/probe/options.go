package probe

import (
	"math"

	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

// Options say how a flow is probed. The zero value takes the defaults.
type Options struct {
	// Omega are the frequencies at which the answer is read, rising, between
	// none and all of the packet's band; nil for 40 across the middle of it.
	Omega []float64
	// Top is where the packet's band ends, as a share of ω_max; 0 is 8 times
	// the horizon's κ/2π, where hardly anything is emitted, but at most 0.95:
	// the closer to 1, the longer the slowest waves take to get away.
	Top float64
	// Concentration is how well the packet is confined in time: outside its
	// duration it is about exp(−Concentration) of its peak, as is its spectrum
	// at the ends of its band; 0 is 13. The more, the narrower the middle of
	// the band.
	Concentration float64
	// Amplitude is the packet's largest |δψ/ψ₀|; 0 is 10⁻⁴.
	Amplitude float64
	// Resolution divides the grid's spacing; 0 is 1.
	Resolution float64
	// TimeStep is the time step of Strang's splitting; 0 is one that shifts
	// frequencies too little to matter.
	TimeStep float64
	// Law is the fluid's; small waves do not depend on it, as the coupling is
	// adjusted to the flow's own speed of sound.
	Law fluid.Law
	// Progress, unless nil, is called now and then with the share done.
	Progress func(done float64)
}

// filled returns the options with their defaults for a flow.
func (o Options) filled(horizon flow.Horizon, omegaMax float64) Options {
	set := func(v *float64, value float64) {
		if *v == 0 {
			*v = value
		}
	}
	set(&o.Top, math.Min(0.95, 8*horizon.Temperature/omegaMax))
	set(&o.Concentration, 13)
	set(&o.Amplitude, 1e-4)
	set(&o.Resolution, 1)
	if !(o.Top > 0 && o.Top < 1 && o.Concentration > 0 && o.Amplitude > 0 && o.Resolution > 0 && o.TimeStep >= 0) {
		panic("probe: an option is out of range")
	}
	return o
}
