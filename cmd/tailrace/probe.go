package main

import (
	"context"
	"math"

	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/configs"
	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

// The probe of the noise's cut-off takes a sixteenth of the trajectories, no
// fewer than are needed for a per cent and no more than that.
const (
	probeShare = 16
	probeLeast = 64
	probeMost  = 256
)

// probeCutoff runs some of the trajectories again with a lower cut-off of the
// noise. It returns nil for an ensemble too small to tell anything.
func probeCutoff(ctx context.Context, s *configs.Scenario, cache gpe.ModeCache, a *horizon.Account, in horizon.Input, workers int) (*horizon.Probe, error) {
	count := min(max(in.Shots.Count()/probeShare, probeLeast), probeMost) / lanes.Width * lanes.Width
	if in.Shots.Count() < count {
		return nil, nil
	}
	p := *s.Problem
	held := p.Grid.MaxWavenumber()
	if p.Cutoff > 0 {
		held = math.Min(held, p.Cutoff)
	}
	p.Cutoff = horizon.ProbeShare * held
	p.Times = p.Times[len(p.Times)-1:]
	var err error
	if p.Noise, _, err = configs.NoiseOf(&p, cache, p.Cutoff); err != nil {
		return nil, err
	}
	ensemble, err := gpe.NewEnsemble(&p)
	if err != nil {
		return nil, err
	}
	store := moments.NewStore(count, p.Grid.N, 1, nil)
	if err := ensemble.Run(ctx, store.Pending(), count, workers, store); err != nil {
		return nil, err
	}
	return a.NewProbe(in, store.Shots(0), p.Commutator())
}
