package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"time"

	"tailrace/analysis/folder"
	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/analysis/report"
	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

// What --exact asks for.
const (
	exactNo     = "no"
	exactOnly   = "only"   // the map without sampling error instead of an ensemble
	exactBeside = "beside" // beside the ensemble's
)

// exact makes the map without sampling error in a folder of its own.
func (r *running) exact(ctx context.Context) error {
	tangent, err := r.tangent()
	if err != nil {
		return err
	}
	path := r.options.folder
	if path == "" {
		path = r.config.Name() + "-exact"
	}
	p := tangent.Problem
	r.manifest = folder.Manifest{Version: version, Source: r.config.Source, Config: string(r.config.Text), Exact: true,
		Points: p.Grid.N, Steps: tangent.Steps(), Times: p.Times, Workers: r.options.workers, Kernel: lanes.Kernel()}
	if r.options.resume {
		if r.folder, err = folder.Resume(path); err != nil {
			return err
		}
		if _, err := r.sameConfig(); err != nil {
			return err
		}
		if err := moments.LoadTangent(r.folder.File("partial.npz"), tangent); err != nil {
			return &folder.UseError{Path: path, Why: "what the stopped run left cannot be read: " + err.Error(), Hint: "start it anew in another --folder"}
		}
	} else {
		if r.folder, err = folder.Create(path); err != nil {
			return err
		}
		if err := r.folder.WriteJSON("run.json", r.manifest); err != nil {
			return err
		}
	}
	fmt.Fprintf(os.Stderr, "%s: %d points over %.4g ξ, %d directions of the noise\n", r.config.Name(), p.Grid.N, p.Grid.Length(), p.Noise.Directions())
	found, err := r.carryDirections(ctx, tangent)
	if errors.Is(err, context.Canceled) {
		if err := moments.SaveTangent(r.folder.File("partial.npz"), tangent); err != nil {
			return err
		}
		return fmt.Errorf("stopped after %d of %d time steps; --resume with the same config and folder goes on", tangent.Done(), tangent.Steps())
	} else if err != nil {
		return err
	}
	r.manifest.Seconds = r.engine.Wall.Seconds()
	input := horizonInput(r.scenario, r.predicted, nil, nil)
	input.Moments = found
	account, err := horizon.Draw(input)
	if err != nil {
		return errors.Join(fmt.Errorf("the horizon could not be read: %w", err), moments.SaveTangent(r.folder.File("partial.npz"), tangent))
	}
	return r.deliver(account, horizon.Checks(p, account)[:1], nil, nil) // the vacuum must be complete here too
}

// tangent prepares the directions of the noise, to the last recorded time.
func (r *running) tangent() (*gpe.Tangent, error) {
	p := *r.scenario.Problem
	p.Times = p.Times[len(p.Times)-1:]
	return gpe.NewTangent(&p)
}

// carryDirections carries them, and shows how far it is.
func (r *running) carryDirections(ctx context.Context, t *gpe.Tangent) (*gpe.Moments, error) {
	begun, start := t.Done(), time.Now()
	r.bar = newProgress("time steps", t.Steps(), begun)
	found, err := t.Run(ctx, r.options.workers, r.bar.update)
	r.bar.end()
	r.engine = report.Engine{Kernel: lanes.Kernel(), Workers: r.options.workers, Steps: t.Steps() - begun, Wall: time.Since(start),
		Directions: t.Problem.Noise.Directions(), NoiseModes: t.Problem.Noise.Describe(), ModesFromCache: r.cached}
	return found, err
}

// beside carries the directions as well, for an ensemble whose account is drawn
// up, and compares.
func (r *running) beside(ctx context.Context, ensemble *horizon.Account) (*horizon.Beside, error) {
	tangent, err := r.tangent()
	if err != nil {
		return nil, err
	}
	engine := r.engine // the ensemble's is what is reported
	found, err := r.carryDirections(ctx, tangent)
	r.engine = engine
	if err != nil {
		return nil, err
	}
	input := horizonInput(r.scenario, r.predicted, nil, nil)
	input.Moments = found
	exact, err := horizon.Draw(input)
	if err != nil {
		return nil, fmt.Errorf("the exact map's horizon could not be read: %w", err)
	}
	return horizon.NewBeside(ensemble, exact), nil
}
