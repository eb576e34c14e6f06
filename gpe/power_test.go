package gpe

import (
	"math"
	"testing"
)

// ∂V/∂t as the landscape gives it is the rate of change of its potential, by
// central differences: error h²V‴/6, here below 1e-6.
func TestPowerIsTheRateOfThePotential(t *testing.T) {
	g := NewGrid(128, 40, -20)
	box := Box{Length: 24, WallWidth: 1, WallHeight: 6}
	for _, c := range []struct {
		name string
		land Landscape
		at   float64
	}{
		{"moving step", NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: 3}), 2},
		{"step at the edge of the grid", NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: 19}), 0.5},
		{"opening wall", NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: 3, Ramp: 4}), 1.5},
		{"switched sound", NewSwitch(g, Switch{Velocity: 0.7, SoundUp: 1, SoundDown: 0.5, Width: 1, Ramp: 2}), 8},
	} {
		t.Run(c.name, func(t *testing.T) {
			const h = 1e-4
			before, after := make([]float64, g.N), make([]float64, g.N)
			dv, dg := make([]float64, g.N), make([]float64, g.N)
			lo, hi := c.land.Power(dv, dg, c.at)
			for _, table := range []struct {
				name string
				fill func(dst []float64, t, scale float64)
				rate []float64
			}{{"V", c.land.Potential, dv}, {"g", c.land.Coupling, dg}} {
				table.fill(before, c.at-h, 1)
				table.fill(after, c.at+h, 1)
				for j := range g.N {
					want, got := (after[j]-before[j])/(2*h), 0.0
					if lo <= j && j < hi {
						got = table.rate[j]
					}
					if math.Abs(got-want) > 1e-6 {
						t.Fatalf("∂%s/∂t at x = %.3g is %.8g, differences give %.8g", table.name, g.X(j), got, want)
					}
				}
			}
		})
	}
}
