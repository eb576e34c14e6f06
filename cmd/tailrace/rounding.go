package main

import (
	"context"
	"errors"
	"fmt"
	"os"

	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/gpe"
)

// tryPrecision carries a few trajectories in both precisions and refuses single
// where it would move the map too far. In double precision there is nothing to
// try.
func (r *running) tryPrecision(ctx context.Context) error {
	if r.scenario.Problem.Precision != gpe.Single {
		return nil
	}
	count := horizon.RoundingTrial(r.config.Ensemble.Trajectories)
	trial := func(precision gpe.Precision) (moments.Shots, error) {
		p := *r.scenario.Problem
		p.Precision = precision
		ensemble, err := gpe.NewEnsemble(&p)
		if err != nil {
			return moments.Shots{}, err
		}
		store := moments.NewStore(count, p.Grid.N, len(p.Times), nil)
		err = ensemble.Run(ctx, store.Pending(), count, r.options.workers, store)
		if errors.Is(err, context.Canceled) {
			err = errors.New("stopped while single precision was tried; nothing is written yet")
		}
		return store.Shots(len(p.Times) - 1), err
	}
	double, err := trial(gpe.Double)
	if err != nil {
		return err
	}
	single, err := trial(gpe.Single)
	if err != nil {
		return err
	}
	if r.rounding, err = r.foreseen.NewRounding(double, single, r.config.Ensemble.Trajectories); err != nil {
		return err
	}
	return r.judgePrecision()
}

// judgePrecision says what the trial has shown, as a fault where it is too much.
func (r *running) judgePrecision() error {
	c := r.rounding.Check()
	if !c.OK {
		return r.config.Fault("ensemble.precision", "", fmt.Sprintf("%s, and at most %.2g is allowed", c.Why, c.Limit),
			`use precision = "double", or fewer trajectories`)
	}
	fmt.Fprintf(os.Stderr, "%s: single precision: %s\n", r.config.Name(), c.Why)
	return nil
}
