package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"runtime"
	"time"

	"github.com/spf13/cobra"

	"tailrace/analysis/folder"
	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

type runOptions struct {
	folder  string
	workers int
	resume  bool
	asJSON  bool
	noCache bool
}

func runCommand() *cobra.Command {
	o := runOptions{workers: runtime.NumCPU()}
	c := &cobra.Command{
		Use:   "run CONFIG",
		Short: "the ensemble, the correlation map, the band, the temperature, the report",
		Long: `run carries an ensemble of trajectories through the scenario of CONFIG, the name
of an example or the path of a file, and draws up what it says of the horizon:
the flow, the correlation map, the band across it and its temperature.

Everything is written into a folder of its own. Ctrl-C stops a run after the
trajectories in hand; --resume goes on with it, to the same numbers bit by bit.`,
		Args: oneConfig,
		RunE: func(cmd *cobra.Command, args []string) error { return o.run(cmd.Context(), args[0]) },
	}
	c.Flags().StringVar(&o.folder, "folder", "", "the run's folder (default: the config's name with -run)")
	c.Flags().IntVar(&o.workers, "workers", o.workers, "goroutines that carry trajectories")
	c.Flags().BoolVar(&o.resume, "resume", false, "go on with the run that was stopped in the folder")
	c.Flags().BoolVar(&o.asJSON, "json", false, "print result.json on stdout and nothing else there")
	c.Flags().BoolVar(&o.noCache, "no-cache", false, "find the modes of the initial state anew")
	return c
}

func (o *runOptions) run(ctx context.Context, name string) error {
	if o.workers < 1 {
		return &usageError{fmt.Errorf("--workers = %d: at least one is needed", o.workers)}
	}
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	scenario, err := config.Scenario()
	if err != nil {
		return err
	}
	predicted, err := scenario.Predicted()
	if err != nil && !errors.Is(err, configs.ErrNoPrediction) {
		return err
	}
	if o.folder == "" {
		o.folder = config.Name() + "-run"
	}
	open := folder.Create
	if o.resume {
		open = folder.Resume
	}
	f, err := open(o.folder)
	if err != nil {
		return err
	}

	p := scenario.Problem
	fmt.Fprintf(os.Stderr, "%s: %d points over %.4g ξ, %d trajectories\n", config.Name(), p.Grid.N, p.Grid.Length(), config.Ensemble.Trajectories)
	cache := gpe.DefaultModeCache()
	if o.noCache {
		cache = gpe.ModeCache{}
	}
	cached, err := scenario.AddNoise(cache)
	if err != nil {
		return err
	}
	ensemble, err := gpe.NewEnsemble(p)
	if err != nil {
		return err
	}
	var bar *progress
	store := moments.NewStore(config.Ensemble.Trajectories, p.Grid.N, len(p.Times), func(n int) { bar.update(n) })
	manifest := folder.Manifest{Version: version, Source: config.Source, Config: string(config.Text), Seed: p.Seed,
		Trajectories: store.Count, Points: p.Grid.N, Steps: ensemble.Steps(), Times: p.Times, Workers: o.workers, Kernel: lanes.Kernel()}
	if o.resume {
		if err := takeUp(f, config, store); err != nil {
			return err
		}
	} else if err := f.WriteJSON("run.json", manifest); err != nil {
		return err
	}
	begun := store.Finished()
	earlier := store.StepTime()
	bar = newProgress(store.Count, begun)
	start := time.Now()
	err = ensemble.Run(ctx, store.Pending(), store.Count, o.workers, store)
	bar.end()
	if errors.Is(err, context.Canceled) {
		if err := store.Save(f.File("partial.npz")); err != nil {
			return err
		}
		return fmt.Errorf("stopped after %s; --resume with the same config and folder goes on", store)
	}
	if err != nil {
		return err
	}
	engine := report.Engine{Kernel: lanes.Kernel(), Workers: o.workers, Steps: ensemble.Steps(), StepTime: store.StepTime() - earlier,
		Wall: time.Since(start), Trajectories: store.Count - begun, NoiseModes: p.Noise.Describe(), ModesFromCache: cached}
	manifest.Finished, manifest.Seconds = store.Finished(), time.Since(start).Seconds()
	manifest.NormDrift, manifest.EnergyDrift = store.Conserved().NormDrift, store.Conserved().EnergyDrift

	sums, err := writeMoments(f, p, store)
	if err != nil {
		return err
	}
	input := horizonInput(scenario, predicted, store, sums)
	account, err := horizon.Draw(input)
	if err != nil {
		return fmt.Errorf("the ensemble is in %s, but its horizon could not be read: %w", f.Path, err)
	}
	checks := append(scenario.Checks, horizon.Checks(p, account)...)
	if probe, err := probeCutoff(ctx, scenario, cache, account, input, o.workers); err != nil {
		return err
	} else if probe != nil {
		checks = append(checks, probe.Check())
	}
	r := &report.Run{Title: config.Title, Config: config.Source, Version: version,
		Units:   report.Units{Lab: scenario.InLab, Scale: scenario.Scale, PerXi: p.AtomsPerLength},
		Account: account, Problem: p, Conserved: store.Conserved(), Engine: engine,
		Checks: checks, Warnings: account.Warnings}
	if r.SpaceTime, err = spaceTime(scenario); err != nil {
		return err
	}
	if err := r.WriteArrays(f.Path, store.Shots(len(p.Times)-1)); err != nil {
		return err
	}
	if _, err := r.Figures(f.File("figures")); err != nil {
		return err
	}
	result, err := r.JSON()
	if err != nil {
		return err
	}
	if err := f.WriteJSON("run.json", manifest); err != nil {
		return err
	}
	if err := f.Write("result.json", result); err != nil {
		return err
	}
	if err := f.Remove("partial.npz"); err != nil {
		return err
	}
	if o.asJSON {
		_, err = os.Stdout.Write(result)
		return err
	}
	if err := r.Summary(os.Stdout); err != nil {
		return err
	}
	fmt.Printf("\nfigures, arrays and result.json are in %s\n", f.Path)
	return nil
}

// takeUp fills store with what a stopped run left, if it is of the same config.
func takeUp(f *folder.Folder, config *configs.Config, store *moments.Store) error {
	before, err := f.ReadManifest()
	if err != nil {
		return err
	}
	if before.Config != string(config.Text) {
		return &folder.UseError{Path: f.Path, Why: "the run in it is of another config", Hint: "give the config it began with, which its run.json holds, or choose another --folder"}
	}
	if err := store.Load(f.File("partial.npz")); err != nil {
		return &folder.UseError{Path: f.Path, Why: "what the stopped run left cannot be read: " + err.Error(), Hint: "start it anew in another --folder"}
	}
	return nil
}

// writeMoments sums up every recorded time and returns the last sums.
func writeMoments(f *folder.Folder, p *gpe.Problem, store *moments.Store) (*moments.Sums, error) {
	archive := &moments.Archive{Times: p.Times, First: []int64{0}, Count: []int64{int64(store.Count)}}
	for i := range p.Times {
		s := moments.NewSums(p.Grid.N)
		if err := s.Add(store.Shots(i)); err != nil {
			return nil, err
		}
		archive.Sums = append(archive.Sums, s)
		archive.Current = append(archive.Current, store.CurrentSum(i))
	}
	return archive.Sums[len(archive.Sums)-1], archive.Write(f.File("moments.npz"))
}
