package horizon

import (
	"fmt"
	"math"

	"tailrace/gpe"
	"tailrace/gpe/lab"
)

// Checks are the conditions on the noise that show only with the flow: that
// the vacuum is complete for the waves that meet the horizon, that the noise is
// small where the cloud is thin, and that nothing comes round the ring.
func Checks(p *gpe.Problem, a *Account) []lab.Check {
	down := a.Predicted.Downstream
	v, c := down.Velocity, down.SoundSpeed
	held := p.Grid.MaxWavenumber()
	if p.Cutoff > 0 {
		held = math.Min(held, p.Cutoff)
	}
	// Ingoing waves downstream have k = −2√(v²−c²) in the fluid, which runs
	// through the grid at the speed frame: on the grid they are that much
	// longer. Waves up to a few T above that are needed too: on an exact map of
	// a flow that needs k = 2.26 the band has 4 % of its height with noise up
	// to 2, 79 % up to 2.5 and all of it up to 3.
	frame := v - p.Landscape.Drift()
	if s, ok := p.Landscape.(*gpe.Sweep); ok {
		frame = v - s.Speed
	}
	needed := math.Abs(2*math.Sqrt(v*v-c*c) - frame)
	outside := lab.Check{Name: "vacuum", Value: needed / held, Limit: 0.8,
		Why: fmt.Sprintf("ingoing waves downstream have k = %.3g on the grid, noise reaches %.3g: without their vacuum the band is too weak; a finer grid or a higher cut-off", needed, held)}
	thin := lab.Check{Name: "noise density", Value: p.Commutator() / 2 / a.Measured.Downstream.Density, Limit: 0.25,
		Why: "half a quantum a mode over the density downstream, where it is lowest: the truncated Wigner method wants it small; more atoms or a coarser grid"}
	return append([]lab.Check{}, finish(outside), finish(thin), finish(returning(p, a)))
}

// returning asks whether what the step let out can be back in the window. Its
// head moves at most at v_d + 2c_d; past the ring's join it meets the outer
// side of the left wall and turns round. In a harmonic trap the trap holds it,
// and its density at the join is looked at.
func returning(p *gpe.Problem, a *Account) lab.Check {
	check := lab.Check{Name: "outflow returns", Limit: 1}
	s, ok := p.Landscape.(*gpe.Sweep)
	switch {
	case !ok:
		check.Why = "the flow goes round the ring by design"
		return check
	case a.harmonic(s):
		check.Limit, check.Why = 0.01, "density at the ring's join over the reference: a longer grid"
		for j := p.Grid.N - p.Grid.N/64; j < p.Grid.N; j++ {
			check.Value = math.Max(check.Value, a.MeanField.Density[j])
		}
		return check
	}
	d := a.Predicted.Downstream
	join := p.Grid.X(p.Grid.N - 1)
	head := s.Start + (d.Velocity+2*d.SoundSpeed-s.Speed)*a.Time
	window := s.Position(a.Time) + a.MeanField.Horizon.Position + a.Window.DownFar
	check.Value = math.Max(0, (head-join)/(join-window))
	check.Why = "how far the head of the outflow is past the grid's end, over the way back to the window: at 1 it may be in it; a longer grid"
	return check
}

func (a *Account) harmonic(s *gpe.Sweep) bool {
	_, ok := s.Trap.(gpe.Harmonic)
	return ok
}

func finish(c lab.Check) lab.Check {
	c.OK = c.Value <= c.Limit
	return c
}
