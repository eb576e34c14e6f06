package main

import (
	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe"
	"tailrace/gpe/flow"
)

// horizonInput puts together what the account of the last recorded time needs;
// without a store, what can be foreseen.
func horizonInput(s *configs.Scenario, predicted flow.Profile, store *moments.Store, sums *moments.Sums) horizon.Input {
	p := s.Problem
	last := len(p.Times) - 1
	t := p.Times[last]
	in := horizon.Input{Problem: p, Sums: sums, Time: t, Predicted: predicted, Settings: horizon.DefaultSettings}
	if store != nil {
		in.Shots, in.Current = store.Shots(last), store.MeanCurrent(last)
	}
	if s.Sweep != nil {
		in.Frame = horizon.Frame{Position: s.Sweep.Position(t), Speed: s.Sweep.Speed, Age: t - s.Sweep.Ramp}
		in.Step = horizon.Step{Depth: s.Sweep.Depth, Width: s.Sweep.Width}
		in.Cure = "let the step start at the edge of the cloud (step.start = 0), at once (step.ramp = 0) and at full speed"
		if s.Config.Trap.Shape == configs.Harmonic {
			in.Cure += "; in a harmonic trap the outflow turns round after a quarter of the period, so record earlier"
		}
	} else {
		in.Frame = horizon.Frame{Age: t - 4*s.Switch.Ramp}
		in.Cure = "switch the horizon on more slowly (a longer step.ramp)"
	}
	return in
}

// frames is the number of moments in the space–time figure.
const frames = 160

// spaceTime carries the noise-free cloud through the sweep.
func spaceTime(s *configs.Scenario) (report.SpaceTime, error) {
	p := s.Problem
	end := p.Times[len(p.Times)-1]
	st := report.SpaceTime{X: p.Grid.Positions()}
	for i := range frames {
		st.Time = append(st.Time, end*float64(i+1)/frames)
	}
	density, _, err := gpe.MeanField(p, st.Time)
	if err != nil {
		return st, err
	}
	st.Density = density
	if s.Sweep != nil {
		for _, t := range st.Time {
			st.Step = append(st.Step, s.Sweep.Position(t))
			st.Wave = append(st.Wave, s.Sweep.Start-t)
		}
	}
	return st, nil
}
